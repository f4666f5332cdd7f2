"""Invented markets on which extensions are tried: arrays of prices, with holes, splits and reports."""

from __future__ import annotations

import datetime
from dataclasses import replace
from typing import Any

import numpy as np
from numpy.typing import NDArray

from hedgerow.kernels.layout import Floats
from hedgerow.market.table import Market, Report

__all__ = [
    "array_market",
    "changed_after",
    "cut",
    "random_market",
    "report",
    "reporting_market",
    "weekdays",
    "with_split",
]

START = datetime.date(2015, 1, 5)
_PRICES = ("open", "high", "low", "close")


def weekdays(count: int) -> NDArray[np.datetime64]:
    """Return `count` Mondays to Fridays from a Monday on, as dates."""
    return np.asarray(np.busday_offset(np.datetime64(START, "D"), np.arange(count), roll="forward"))


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
    volume = market.volume.copy()
    volume[session:] *= ratio
    return replace(market, split=split, volume=volume, **arrays)


def reporting_market(seed: int, sessions: int = 340, holes: float = 0.03) -> Market:
    """Draw a market whose symbols report every 63 sessions, announced 15 days ahead, and pay as often."""
    market = random_market(seed, sessions, 2, holes)
    rng = np.random.default_rng(seed)
    dividend = np.zeros_like(market.close)
    dividend[20::63, 0], dividend[41::60, 1] = 0.5, 0.25
    reports = [
        report(market, session, float(rng.normal(1.0, 0.5)), symbol, 15)
        for symbol in (0, 1)
        for session in range(5 + 3 * symbol, sessions, 63)
    ]
    shape = market.close.shape
    return replace(
        market,
        reports=tuple(sorted(reports)),
        dividend=dividend,
        volume=rng.uniform(1e5, 1e6, shape),
        implied=rng.uniform(0.15, 0.4, shape),
        rate=rng.uniform(0.0, 0.05, sessions),
    )


def changed_after(market: Market, sessions: int, seed: int) -> Market:
    """Change everything, and whatever of a report was not known, after the first `sessions` sessions."""
    other = reporting_market(seed, len(market.ordinals), 0.1)
    later = {name: getattr(other, name)[sessions:] * 9.0 for name in _PRICES}
    later["volume"] = other.volume[sessions:] * 3.0
    later["implied"] = other.implied[sessions:] * 2.0
    later["dividend"] = np.full_like(market.close[sessions:], 0.1)
    later["special"] = np.full_like(market.close[sessions:], 0.7)
    later["split"] = np.full_like(market.close[sessions:], 2.0)
    mixed: dict[str, Any] = {
        name: np.vstack([getattr(market, name)[:sessions], rows]) for name, rows in later.items()
    }
    rate = np.concatenate([market.rate[:sessions], other.rate[sessions:] + 0.1])
    today = int(market.ordinals[sessions - 1])
    reports: list[Report] = []
    for item in market.reports:
        if item.reaction_ordinal <= today:
            reports.append(item)
        elif item.announced_ordinal <= today:
            reports.append(item._replace(eps=-7.0))
    late = Report(0, today + 40, today + 30, today + 41, 99.0)
    return replace(market, reports=tuple(sorted([*reports, late])), rate=rate, **mixed)
