"""The dividends a trader would expect at each close, from what had been paid by then and nothing later.

The last ordinary dividend is expected again, at the gap that was usual so far: the median of the last up to
four gaps, taken to the nearest of a month, a quarter, half a year and a year. A dividend that is late is
expected the next day for half a gap, then no more.
"""

from __future__ import annotations

from functools import cache
from itertools import pairwise
from statistics import median
from typing import NamedTuple

import numpy as np
from numpy.typing import NDArray

from hedgerow.kernels.layout import Floats, Ints
from hedgerow.market.table import Market

__all__ = ["Expected", "expected_dividends"]

GAPS_DAYS = np.array([30, 91, 182, 365])
GAPS_REMEMBERED = 4


class Expected(NamedTuple):
    """The next dividend expected at each close, arrays of shape (T, N)."""

    cash: Floats  # a share as traded that day; 0 none
    ordinal: Ints  # day on which it is expected to go ex; 0 none
    gap_days: Ints  # calendar days between it and those after it; 0 only once


def usual_gap(paid: NDArray[np.int64]) -> int:
    """Usual calendar days between ex-dates, from the days so far in rising order; 0 when fewer than two."""
    days = paid[-(GAPS_REMEMBERED + 1) :].tolist()
    gaps = [later - day for day, later in pairwise(days)]
    return nearest_gap(median(gaps)) if gaps else 0


@cache
def nearest_gap(days: float) -> int:
    """The one of GAPS_DAYS that is nearest to a number of days, by ratio."""
    return int(GAPS_DAYS[np.argmin(np.abs(np.log(days / GAPS_DAYS)))])


def _expect(days: Ints, paid: Floats, splits: Floats) -> tuple[Floats, Ints, Ints]:
    """The expectation at each close of one symbol; `paid` and `splits` are its columns, shape (T,)."""
    size = days.size
    cash, due, gap = np.zeros(size), np.zeros(size, np.int64), np.zeros(size, np.int64)
    sessions = np.flatnonzero(paid > 0.0)
    grown = np.cumprod(splits)
    for number, start in enumerate(sessions):
        stop = sessions[number + 1] if number + 1 < sessions.size else size
        usual = usual_gap(days[sessions[: number + 1]])
        if usual == 0:
            continue
        here = slice(start, stop)
        expected = days[start] + usual
        late = days[here] >= expected
        alive = days[here] <= expected + usual // 2
        cash[here] = np.where(alive, paid[start] * (grown[start] / grown[here]), 0.0)
        due[here] = np.where(alive, np.where(late, days[here] + 1, expected), 0)
        gap[here] = np.where(alive, usual, 0)
    return cash, due, gap


def expected_dividends(market: Market) -> Expected:
    """The next dividend expected at each close of every symbol, known at that close."""
    shape = market.close.shape
    out = Expected(np.zeros(shape), np.zeros(shape, np.int64), np.zeros(shape, np.int64))
    for column in np.flatnonzero((market.dividend > 0.0).any(axis=0)):
        found = _expect(market.ordinals, market.dividend[:, column], market.split[:, column])
        for array, values in zip(out, found, strict=True):
            array[:, column] = values
    return out
