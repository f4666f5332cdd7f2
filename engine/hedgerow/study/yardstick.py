"""The yardstick: the same cash put into the same universe on the first day and left alone."""

from __future__ import annotations

import numpy as np

from hedgerow.kernels.layout import Bytes, Floats
from hedgerow.market.table import Market
from hedgerow.walk.run import Window

__all__ = ["buy_and_hold"]


def total_return_index(market: Market) -> Floats:
    """Value of one share bought at each symbol's first bar with dividends put back, shape (T, N).

    NaN before the first bar; a history that ended keeps its last value.
    """
    paid = market.dividend + market.special
    filled = _carried(market.close)
    growth = np.ones_like(filled)
    before = filled[:-1]
    growth[1:] = np.where(np.isnan(before), 1.0, (filled[1:] + paid[1:]) * market.split[1:] / before)
    index = np.asarray(np.cumprod(np.where(np.isnan(growth), 1.0, growth), axis=0), np.float64)
    index[np.isnan(filled)] = np.nan
    return index


def _carried(values: Floats) -> Floats:
    """Each column's last known value, NaN before the first."""
    rows = np.where(np.isnan(values), -1, np.arange(values.shape[0])[:, np.newaxis])
    last = np.maximum.accumulate(rows, axis=0)
    return np.where(last < 0, np.nan, np.take_along_axis(values, np.maximum(last, 0), axis=0))


def buy_and_hold(market: Market, traded: Bytes, window: Window, cash: float) -> Floats:
    """Value of `cash` split evenly over the traded symbols at the window's first close, shape (sessions,).

    Dividends are put back into the share that paid them, nothing is rebalanced, no costs are taken. A symbol
    that is listed later waits as cash; one whose history ended is kept at its last price, as cash.
    """
    index = total_return_index(market)[window.start : window.stop][:, traded.astype(bool)]
    first = np.argmax(~np.isnan(index), axis=0)
    base = np.take_along_axis(index, first[np.newaxis, :], axis=0)
    held = np.where(np.isnan(index), 1.0, index / np.where(np.isnan(base), 1.0, base))
    return np.asarray(cash * held.mean(axis=1))
