"""Real prices for the replay: five US stocks with the bill rate, and the S&P 500."""

from __future__ import annotations

from dataclasses import replace
from functools import cache

import numpy as np

from hedgerow.market import Market, samples
from oracle import past
from oracle.keeper import sights_of
from oracle.moment import Sight


@cache
def stocks() -> Market:
    """AAPL, FB, GOOG, IBM and MSFT from 2000 to 2013, with the bill rate of each month."""
    bills, market = samples.bill_rates(), samples.stocks()
    first_days = bills["date"].to_numpy().astype("datetime64[D]")
    rows = np.searchsorted(first_days, market.dates, side="right") - 1
    return replace(market, rate=bills["rate"].to_numpy()[rows])


@cache
def index() -> Market:
    """The S&P 500 from 1999 to 2018 with the bill rate."""
    return samples.index()


@cache
def known_of(name: str) -> list[list[Sight]]:
    """What was known of every symbol of `stocks` or `index` at each close, on the default surface."""
    market = {"stocks": stocks, "index": index}[name]()
    return [sights_of(past.History.of(market, n), {}) for n in range(len(market.symbols))]
