"""Markets made of arrays, for tests that need prices and nothing of a file."""

from __future__ import annotations

import datetime
from dataclasses import replace
from typing import Any

import numpy as np

from hedgerow.kernels.layout import Floats
from hedgerow.market.table import Market, Report

START = datetime.date(2015, 1, 5)


def weekdays(count: int) -> np.ndarray:
    """Return `count` Mondays to Fridays from a Monday on, as dates."""
    return np.busday_offset(np.datetime64(START, "D"), np.arange(count), roll="forward")


def array_market(close: Floats, **given: Any) -> Market:
    """Make a market of closes (T, N) as traded, other arrays by name; the default range is a percent."""
    close = np.array(close, dtype=np.float64, order="C")
    sessions, symbols = close.shape
    dates = weekdays(sessions)
    names = tuple(given.pop("symbols", [f"S{n:02d}" for n in range(symbols)]))
    fields: dict[str, Any] = {
        "symbols": names,
        "kinds": ("stock",) * symbols,
        "sectors": ("",) * symbols,
        "dates": dates,
        "ordinals": dates.astype(np.int64) + datetime.date(1970, 1, 1).toordinal(),
        "open": close,
        "high": close * 1.01,
        "low": close * 0.99,
        "close": close,
        "volume": np.full_like(close, 1e6),
        "dividend": np.zeros_like(close),
        "special": np.zeros_like(close),
        "split": np.ones_like(close),
        "rate": np.zeros(sessions),
        "reports": (),
        "implied": np.full_like(close, np.nan),
        "first_bar": np.zeros(symbols, dtype=np.int64),
        "last_bar": np.full(symbols, sessions - 1, dtype=np.int64),
        "currency": "USD",
        "adjustment": "none",
        "source": "arrays",
        "findings": (),
    }
    return Market(**(fields | given))


def report(market: Market, session: int, eps: float = 1.0, symbol: int = 0, announced: int = 21) -> Report:
    """A report the market reacts to at `session`, announced that many days before."""
    ordinal = int(market.ordinals[session]) - 1
    return Report(symbol, ordinal, ordinal - announced, ordinal + 1, eps)


def random_market(seed: int, sessions: int = 120, symbols: int = 2, holes: float = 0.0) -> Market:
    """Draw a market of random walks with opening gaps, ranges, and whole sessions missing."""
    rng = np.random.default_rng(seed)
    steps = rng.normal(0.0, 0.02, (sessions, symbols))
    close = 50.0 * np.exp(np.cumsum(steps, axis=0))
    open_ = close * np.exp(rng.normal(0.0, 0.01, close.shape))
    high = np.maximum(open_, close) * np.exp(np.abs(rng.normal(0.0, 0.01, close.shape)))
    low = np.minimum(open_, close) * np.exp(-np.abs(rng.normal(0.0, 0.01, close.shape)))
    missing = rng.random(close.shape) < holes
    for array in (open_, high, low, close):
        array[missing] = np.nan
    return array_market(close, open=open_, high=high, low=low)


def cut(market: Market, sessions: int) -> Market:
    """The same market as it was known at the close of its first `sessions` sessions."""
    return market.until(str(market.dates[sessions - 1]))


def with_split(market: Market, session: int, ratio: float) -> Market:
    """The same worth of one share of old, with a split of every symbol before the open of `session`."""
    split = market.split.copy()
    split[session] = ratio
    names = ("open", "high", "low", "close", "dividend", "special")
    arrays = {name: getattr(market, name).copy() for name in names}
    for array in arrays.values():
        array[session:] /= ratio
    return replace(market, split=split, **arrays)
