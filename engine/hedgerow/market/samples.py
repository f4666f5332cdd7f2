"""Real prices that install from the package index: five US stocks, the S&P 500, bill rates.

The packages are found by path and never imported. Sources and terms:

- stocks: `bokeh-sampledata`, `_data/stocks.csv.gz`: AAPL, FB, GOOG, IBM, MSFT, 2000-03-01 to 2013-03-01,
  prices as traded and an adjusted close; from Quandl WIKI Prices, declared public domain by its publisher.
- S&P 500: `arch`, `data/sp500`: 1999 to 2018, price index, no dividends; shipped with that package (NCSA
  licence) as its example data. On most days before 2009 the open equals the close before.
- bill rates: `arch`, `data/frenchdata`: the one-month US Treasury bill's return a month, 1926 to 2018, from
  the data library of Kenneth R. French; shipped with that package as its example data.
"""

from __future__ import annotations

import gzip
import importlib.util
from collections.abc import Callable
from pathlib import Path
from typing import Any

import numpy as np
import pandas as pd

from hedgerow.errors import DataError, Fault, nearest_word
from hedgerow.market.load import load_market
from hedgerow.market.sources import parse_csv
from hedgerow.market.table import Market

PREFIX = "sample:"
"""What a place of prices begins with that is one of SAMPLES."""

STOCKS = ("bokeh_sampledata", "_data/stocks.csv.gz")
INDEX = ("arch", "data/sp500/sp500.csv.gz")
BILLS = ("arch", "data/frenchdata/frenchdata.csv.gz")
STOCKS_SOURCE = "Quandl WIKI Prices, declared public domain, by way of bokeh-sampledata"
INDEX_SOURCE = "S&P 500 prices 1999-2018, example data of the package arch"


def _text(package: str, inner: str) -> str:
    """Return a packed text file of a package, found by path; raises DataError when it is not installed."""
    spec = importlib.util.find_spec(package)
    folders = [] if spec is None else list(spec.submodule_search_locations or [])
    paths = [Path(folder) / inner for folder in folders]
    found = next((path for path in paths if path.is_file()), None)
    if found is None:
        raise DataError.one(
            package,
            "sample-missing",
            f"the package {package} has no file {inner} here",
            "the sample prices come from it",
            "install it with: pip install 'hedgerow[samples]'",
        )
    return gzip.decompress(found.read_bytes()).decode("utf-8")


def _frame(package: str, inner: str) -> pd.DataFrame:
    """Return a packed CSV file of a package as text cells; raises DataError when it cannot be read."""
    source, faults = parse_csv(_text(package, inner), f"{package}/{inner}")
    if source is None or faults:
        raise DataError(faults)
    frame: pd.DataFrame = source.table.to_pandas()
    return frame


def stocks_frame() -> pd.DataFrame:
    """Return the five stocks as they come: Ticker, Date, Open ... Volume, Adj Close, all cells text.

    Raises DataError when the package is not installed.
    """
    return _frame(*STOCKS)


def stocks(bills: bool = False) -> Market:
    """Return the five stocks with splits and dividends recovered from the adjusted close; `bills` adds rates.

    Raises DataError when a package is not installed.
    """
    rates: dict[str, Any] = {"rates": bill_rates()} if bills else {}
    return load_market(stocks_frame(), adjustment="none", recover={}, source=STOCKS_SOURCE, **rates)


def index_frame() -> pd.DataFrame:
    """Return the S&P 500 as it comes: Date, Open, High, Low, Close, Adj Close, Volume, all cells text.

    Raises DataError when the package is not installed.
    """
    return _frame(*INDEX).drop(columns="Adj Close")


def index(bills: bool = True) -> Market:
    """Return the S&P 500 as the index SPX, with the bill rate or without any rate.

    Raises DataError when the package is not installed.
    """
    words = {"symbols": {"SPX": {"kind": "index", "name": "S&P 500"}}, "source": INDEX_SOURCE}
    rates = {"rates": bill_rates()} if bills else {}
    return load_market(index_frame(), symbol="SPX", adjustment="none", **words, **rates)


def bill_rates() -> pd.DataFrame:
    """Return the one-month bill rate from the first day of each month: date, rate (annual, continuous).

    The return of a month's bill is known when it begins: twelve times its logarithm is the annual rate.
    Raises DataError when the package is not installed.
    """
    raw = _frame(*BILLS)
    month = pd.to_datetime(raw["Date"].str.strip() + "01", format="%Y%m%d")
    monthly = raw["RF"].astype("float64").to_numpy() / 100.0
    return pd.DataFrame({"date": month, "rate": 12.0 * np.log1p(monthly)})


SAMPLES: dict[str, Callable[[], Market]] = {"five-stocks": lambda: stocks(bills=True), "sp500": index}
"""The samples by the name that stands after `sample:`, each with the bill rate."""


def sample_fault(place: str | Path) -> Fault | None:
    """Return what is wrong with a place that begins with `sample:`; None for samples and other places."""
    name = str(place).removeprefix(PREFIX)
    if not str(place).startswith(PREFIX) or name in SAMPLES:
        return None
    known = [f"{PREFIX}{word}" for word in SAMPLES]
    allowed = "allowed: " + ", ".join(f"`{word}`" for word in known)
    found = f"is `{place}`, which is no sample"
    return Fault("market", 0, 0, "unknown-sample", found, allowed, nearest_word(str(place), known))


def named_sample(place: str | Path) -> Market | None:
    """Return the market of a place that names a sample, None for any other place.

    Raises DataError for a name that is none of SAMPLES, and when a package is not installed.
    """
    fault = sample_fault(place)
    if fault is not None:
        raise DataError([fault])
    return SAMPLES[str(place).removeprefix(PREFIX)]() if str(place).startswith(PREFIX) else None
