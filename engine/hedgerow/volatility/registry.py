"""The estimators of volatility: one decorator, and the bars they may look at.

An estimator is a function of bars and one parameter (a horizon in sessions, or a decay) that gives, for every
session, how many values it rests on and the variance of one session. Registering it is one decorator:

    @estimator("parkinson")
    def parkinson(bars: Bars, horizon: float) -> Estimate: ...

and the conformance suite then holds it to the rules of the house: it looks only backward, is blind to scale
and to splits, lives through holes, and is positive or unknown.
"""

from __future__ import annotations

import math
from collections.abc import Callable
from dataclasses import dataclass
from typing import NamedTuple

import numpy as np
from numpy.typing import NDArray

from hedgerow.errors import StudyError, nearest_word
from hedgerow.kernels.layout import SESSIONS_A_YEAR, Floats
from hedgerow.kernels.logs import log_ratio
from hedgerow.market.table import Market

__all__ = ["ESTIMATORS", "Bars", "Estimate", "Estimator", "estimator", "named_estimator", "total_return_logs"]

LEAST_KNOWN_SHARE = 2.0 / 3.0


@dataclass(frozen=True, eq=False)
class Bars:
    """What an estimator may look at: logarithms of price ratios, (T, N), NaN where unknown.

    Ratios within a session need no adjustment; those across a session boundary use that session's split and
    add its cash dividends back. None depends on the unit of price.
    """

    returns: Floats  # ln close over previous close
    overnight: Floats  # ln open over previous close
    up: Floats  # ln high over open
    down: Floats  # ln low over open
    within: Floats  # ln close over open

    @classmethod
    def of(cls, market: Market, leave_out: NDArray[np.bool_] | None = None) -> Bars:
        """Bars of a market; sessions marked in `leave_out` (T, N) are unknown."""
        opens = np.array(market.open)
        arrays = (
            total_return_logs(market, market.close),
            total_return_logs(market, opens),
            log_ratio(np.array(market.high), opens),
            log_ratio(np.array(market.low), opens),
            log_ratio(np.array(market.close), opens),
        )
        if leave_out is not None:
            for array in arrays:
                array[leave_out] = np.nan
        return cls(*arrays)


def total_return_logs(market: Market, prices: Floats) -> Floats:
    """Log of `prices` over the previous session's close, (T, N): split undone, cash dividends added back.

    A dividend is per share as traded on its ex-date, so it stands beside the price before the split ratio.
    NaN on the first session and where either session has no bar. Kernels are handed fresh arrays: for
    read-only ones they would be compiled a second time.
    """
    worth = (prices + market.dividend + market.special) * market.split
    before = np.full_like(prices, np.nan)
    before[1:] = market.close[:-1]
    return log_ratio(worth, before)


class Estimate(NamedTuple):
    """What an estimator gives: both (T, N)."""

    counts: Floats  # known values it rests on
    variance: Floats  # of one session


@dataclass(frozen=True)
class Estimator:
    """A registered estimator; its parameter lies between `least` and `most`."""

    name: str
    function: Callable[[Bars, float], Estimate]
    parameter: str  # "sessions" or "decay"
    least: float
    most: float

    def horizon_sessions(self, parameter: float) -> float:
        """Sessions a plain average would need for the same noise; of a decay (1 + d) / (1 - d)."""
        return (1.0 + parameter) / (1.0 - parameter) if self.parameter == "decay" else parameter

    def least_known(self, parameter: float) -> int:
        """How many values must be known before the estimate is: two thirds of the horizon, at least two.

        One would do for a mean square, but the size of a single move says next to nothing of the next ones.
        """
        return max(2, math.ceil(LEAST_KNOWN_SHARE * self.horizon_sessions(parameter) - 1e-9))

    def volatility(self, bars: Bars, parameter: float) -> Floats:
        """Annualised trailing volatility (fraction), (T, N), known at each close.

        NaN while too little is known. A variance of zero is no knowledge either: prices stood still.
        """
        counts, variance = self.function(bars, parameter)
        known = (counts >= self.least_known(parameter)) & (variance > 0.0)
        return np.sqrt(np.where(known, variance, np.nan) * SESSIONS_A_YEAR)


ESTIMATORS: dict[str, Estimator] = {}


def estimator(
    name: str, *, parameter: str = "sessions", least: float = 2.0, most: float = 1260.0
) -> Callable[[Callable[[Bars, float], Estimate]], Callable[[Bars, float], Estimate]]:
    """Register an estimator under `name`; raises ValueError when the name is taken."""

    def register(function: Callable[[Bars, float], Estimate]) -> Callable[[Bars, float], Estimate]:
        if name in ESTIMATORS:
            raise ValueError(f"an estimator of volatility is already registered under the name `{name}`")
        ESTIMATORS[name] = Estimator(name, function, parameter, least, most)
        return function

    return register


def named_estimator(name: str, where: str = "pricing.volatility.blend") -> Estimator:
    """Return the estimator of that name; raises StudyError with the nearest right word when there is none."""
    if name not in ESTIMATORS:
        allowed = "known estimators: " + ", ".join(f"`{word}`" for word in sorted(ESTIMATORS))
        found = f"`{name}` is no estimator of volatility"
        raise StudyError.one(where, "unknown", found, allowed, nearest_word(name, ESTIMATORS))
    return ESTIMATORS[name]
