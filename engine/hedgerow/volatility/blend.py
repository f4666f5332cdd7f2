"""Several estimates of volatility joined into one level.

The mean is taken of logarithms. Estimation errors of volatility are about symmetric in the logarithm, and a
single wild session in the shortest window then lifts the level by a factor, not by its square.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from hedgerow.kernels.layout import Floats
from hedgerow.kernels.logs import log_blend
from hedgerow.market.table import Market
from hedgerow.volatility.registry import Bars, named_estimator

__all__ = ["Term", "blended", "reaction_sessions"]


@dataclass(frozen=True)
class Term:
    """One estimate in a blend: which estimator, over what (sessions, or a decay), with what weight."""

    estimator: str
    parameter: float
    weight: float = 1.0

    @property
    def horizon_sessions(self) -> float:
        """Sessions a plain average would need for the same noise."""
        return named_estimator(self.estimator).horizon_sessions(self.parameter)


def blended(bars: Bars, terms: Sequence[Term], history_sessions: int) -> Floats:
    """Weighted mean of the logarithms of the known terms, annualised volatility (T, N), known at each close.

    Weights are renormalised over the terms that are known. NaN until `history_sessions` returns are known.
    """
    estimates = np.stack([named_estimator(term.estimator).volatility(bars, term.parameter) for term in terms])
    level = log_blend(estimates, np.array([term.weight for term in terms]))
    known_so_far = np.cumsum(~np.isnan(bars.returns), axis=0)
    level[known_so_far < history_sessions] = np.nan
    return level


def reaction_sessions(market: Market) -> NDArray[np.bool_]:
    """Sessions (T, N) that reacted to an earnings report."""
    marks = np.zeros(market.close.shape, dtype=np.bool_)
    for report in market.reports:
        session = int(np.searchsorted(market.ordinals, report.reaction_ordinal))
        if session < len(market.ordinals):
            marks[session, report.symbol_index] = True
    return marks
