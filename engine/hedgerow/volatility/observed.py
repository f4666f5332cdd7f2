"""A level that was observed instead of estimated."""

from __future__ import annotations

import numpy as np

from hedgerow.errors import StudyError, nearest_word
from hedgerow.kernels.layout import Floats
from hedgerow.kernels.rolling import carried
from hedgerow.market.table import Market

__all__ = ["CARRY_SESSIONS", "COLUMN", "NONE", "observed_level"]

NONE, COLUMN = "none", "column"
CARRY_SESSIONS = 5
_WHERE = "pricing.volatility.observed"


def observed_level(market: Market, source: str, scale: float) -> Floats:
    """Observed volatility (annual fraction), (T, N), known at each close.

    `source` is "column" for the market's own implied column, or a symbol whose close, times `scale`, serves
    every symbol. A value stands until the next one, for at most five sessions. Raises StudyError when there
    is no such symbol, or no value at all.
    """
    if source == COLUMN:
        level = market.implied * scale
    elif source in market.symbols:
        column = market.close[:, [market.symbols.index(source)]] * scale
        level = np.repeat(column, len(market.symbols), axis=1)
    else:
        allowed = "`none`, `column` (the implied volatility beside the prices) or a symbol"
        near = nearest_word(source, market.symbols)
        raise StudyError.one(_WHERE, "unknown", f"`{source}` is no symbol of the market", allowed, near)
    level = np.where(level > 0.0, level, np.nan)
    if np.isnan(level).all():
        found = f"`{source}` holds no implied volatility above zero"
        raise StudyError.one(_WHERE, "empty", found, remedy="give one beside the prices, or write `none`")
    return carried(np.ascontiguousarray(level), CARRY_SESSIONS)
