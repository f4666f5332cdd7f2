"""Adjusted prices undone: what traded, from prices divided by later splits and reduced by later dividends."""

from __future__ import annotations

import numpy as np

from hedgerow.kernels.layout import Floats
from hedgerow.market.recover import REINVESTED


def later_splits(split: Floats) -> Floats:
    """Return the product of the splits after each session, (T, N): what adjusted prices were divided by."""
    through = np.cumprod(split[::-1], axis=0)[::-1]
    return np.concatenate([through[1:], np.ones((1, split.shape[1]))])


def undo_splits(price: Floats, split: Floats) -> Floats:
    """Return prices as traded from prices that were divided by all later splits, (T, N)."""
    return price * later_splits(split)


def undo_dividends(close: Floats, paid: Floats, split: Floats, reinvested: str) -> Floats:
    """Return what each session's adjusted prices were multiplied by, (T, N).

    `close` is adjusted for splits and dividends, `paid` is cash per new share on its ex-date. Solved backward
    over the sessions with an action: with f the factor, f[t-1] C[t-1] = f[t] (C[t-1] / r - D) where the
    dividend is reinvested at the close before, f[t-1] = f[t] C[t] / (r (C[t] + D)) where at the ex-date's.
    """
    factor = np.ones(close.shape)
    for index in range(close.shape[1]):
        bars = np.flatnonzero(~np.isnan(close[:, index]))
        adjusted, cash, ratio = (grid[bars, index] for grid in (close, paid, split))
        level, last = 1.0, len(bars)
        for bar in np.flatnonzero((cash != 0.0) | (ratio != 1.0))[::-1]:
            if bar == 0:
                continue
            start = bars[bar]
            stop = bars[last] if last < len(bars) else close.shape[0]
            factor[start:stop, index] = level
            level = _level_before(
                level, adjusted[bar - 1], adjusted[bar], (cash[bar], ratio[bar]), reinvested
            )
            last = bar
        factor[: bars[last] if last < len(bars) else close.shape[0], index] = level
    return factor


def _level_before(
    level: float, before: float, at: float, action: tuple[float, float], reinvested: str
) -> float:
    cash, ratio = action
    if reinvested == REINVESTED[0]:
        raw = ratio * (before / level + cash)
        return float(before / raw)
    raw = at / level
    return float(level * raw / (ratio * (raw + cash)))
