"""Prices and what belongs to them: read from files or frames, checked at the door, frozen."""

from __future__ import annotations

from hedgerow.market.load import load_market
from hedgerow.market.table import Finding, Market

__all__ = ["Finding", "Market", "load_market"]
