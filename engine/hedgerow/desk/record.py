"""What a rule earned on the entries it made before: means with intervals, by entry week."""

from __future__ import annotations

import math
from dataclasses import dataclass

import numpy as np
import pandas as pd

from hedgerow.evidence.clusters import LEAST_WEEKS, Positions, clustered_error, clustered_share, overlap_of

__all__ = ["Record", "record_of"]


@dataclass(frozen=True, slots=True)
class Record:
    """Positions that were over by the close, and what they earned on what they tied up, fractions.

    `low` and `high` are the interval of the mean at `level`, positions of one entry week taken together; NaN
    below three weeks. `won` is the share with a result above nothing, with its interval.
    """

    positions: int
    mean: float
    low: float
    high: float
    won: float
    won_low: float
    won_high: float
    level: float
    first: str
    last: str


def record_of(trades: pd.DataFrame, level: float, symbol: str = "") -> Record | None:
    """The record of a ledger's trades, of one symbol when one is named; None where none is over."""
    rows = trades[trades["symbol"] == symbol] if symbol else trades
    over = Positions.of(rows, symbol)
    if not over.results.size:
        return None
    low, high = _mean_interval(over, level)
    hits = over.results > 0.0
    rate = clustered_share(hits, over.weeks, level, overlap_of(over.sessions))
    return Record(
        positions=int(over.results.size),
        mean=float(np.mean(over.results)),
        low=low,
        high=high,
        won=float(np.mean(hits)),
        won_low=rate[0],
        won_high=rate[1],
        level=level,
        first=str(over.opened.min()),
        last=str(over.opened.max()),
    )


def _mean_interval(over: Positions, level: float) -> tuple[float, float]:
    """Student's interval of the mean, with one degree of freedom fewer than entry weeks."""
    from scipy import stats

    mean = float(np.mean(over.results))
    parts = (over.results - mean) / over.results.size
    error, weeks = clustered_error(parts, over.weeks, overlap_of(over.sessions))
    if weeks < LEAST_WEEKS:
        return math.nan, math.nan
    half = float(stats.t.ppf(0.5 + level / 2.0, weeks - 1)) * error
    return mean - half, mean + half
