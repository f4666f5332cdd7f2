"""Invented prices for a new folder: a few stocks that walk at random, so that no rule can know better."""

from __future__ import annotations

import datetime as dt
import hashlib
from dataclasses import dataclass
from functools import cached_property

import numpy as np
import pandas as pd

from hedgerow.kernels.layout import Floats, Ints
from hedgerow.market.calendar import sessions_between

__all__ = ["DEMO_STOCKS", "Demo", "demo"]

FIRST, LAST = dt.date(2021, 1, 4), dt.date(2024, 12, 31)
DRIFT = 0.00025  # a session
DEMO_STOCKS = {
    "ALDER": (38.0, 0.014, 0.22),
    "HAZEL": (64.0, 0.012, 0.35),
    "ROWAN": (120.0, 0.017, 0.0),
    "WILLOW": (27.0, 0.020, 0.10),
}
"""Price on the first day, deviation of a session, dividend a quarter (0 none)."""
DIVIDEND_SESSIONS = 63


@dataclass(frozen=True)
class Demo:
    """The invented market as the tables of a dataset: `prices` and `dividends`."""

    prices: pd.DataFrame
    dividends: pd.DataFrame

    @cached_property
    def dates(self) -> list[str]:
        """The sessions as ISO dates."""
        return sorted(set(self.prices["date"]))

    def close(self, symbol: str, date: str) -> float:
        """The close of a symbol on a session."""
        rows = self.prices[(self.prices["symbol"] == symbol) & (self.prices["date"] == date)]
        return float(rows["close"].iloc[0])


def demo() -> Demo:
    """Make the invented market; the same every time."""
    days = sessions_between(FIRST.toordinal(), LAST.toordinal())
    dates = [dt.date.fromordinal(int(day)).isoformat() for day in days]
    frames = [_walk(symbol, days, dates) for symbol in DEMO_STOCKS]
    paid = [
        {"symbol": symbol, "date": day, "amount": amount}
        for at, (symbol, (_, _, amount)) in enumerate(DEMO_STOCKS.items())
        for day in dates[20 + 7 * at :: DIVIDEND_SESSIONS]
        if amount
    ]
    return Demo(pd.concat(frames, ignore_index=True), pd.DataFrame(paid))


def _walk(symbol: str, days: Ints, dates: list[str]) -> pd.DataFrame:
    """One stock's bars, drawn by a key of its name."""
    start, deviation, _ = DEMO_STOCKS[symbol]
    key = int.from_bytes(hashlib.sha256(symbol.encode()).digest()[:8], "big")
    random = np.random.default_rng(key)
    close = start * np.exp(np.cumsum(random.normal(DRIFT, deviation, days.size)))
    before = np.concatenate([[start], close[:-1]])
    opened = before * np.exp(random.normal(0.0, 0.3 * deviation, days.size))
    reach = np.abs(random.normal(0.0, 0.4 * deviation, (2, days.size)))
    return pd.DataFrame(
        {
            "symbol": symbol,
            "date": dates,
            "open": _cents(opened),
            "high": _cents(np.maximum(opened, close) * (1.0 + reach[0])),
            "low": _cents(np.minimum(opened, close) * (1.0 - reach[1])),
            "close": _cents(close),
        }
    )


def _cents(prices: Floats) -> Floats:
    return np.round(prices, 2)
