"""Sectors of a market's symbols as numbers, for limits on positions of one sector."""

from __future__ import annotations

import numpy as np

from hedgerow.kernels.layout import NO_SECTOR, Ints
from hedgerow.market.table import Market

__all__ = ["sector_codes"]


def sector_codes(market: Market) -> Ints:
    """One number a symbol, shape (N,): the same for those of one sector, NO_SECTOR where it is not known."""
    names = sorted({name for name in market.sectors if name})
    codes = {"": NO_SECTOR} | {name: code for code, name in enumerate(names)}
    return np.array([codes[name] for name in market.sectors], np.int64)
