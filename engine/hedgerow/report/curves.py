"""The curves of a run as columns of its page: growth, idle sessions, attribution by month, volatility."""

from __future__ import annotations

from collections.abc import Sequence
from typing import Any

import numpy as np
from numpy.typing import NDArray

from hedgerow.kernels.layout import Floats
from hedgerow.ledger import Ledger
from hedgerow.report.folder import RunFolder
from hedgerow.report.pack import column

__all__ = ["HEADINGS", "attribution_of", "curves_of", "days_since_1970", "volatility_of"]

HEADINGS = ("stock", "calls", "puts", "dividends", "interest", "costs")
"""Where money comes from, in the order shown."""

MONEY_DIGITS = 1e-7
"""Part of the largest value that a curve is rounded to; far finer than any screen."""


def days_since_1970(dates: NDArray[Any]) -> Floats:
    """Return dates as days since 1970-01-01, NaN for no date."""
    days = np.asarray(dates).astype("datetime64[D]")
    return np.where(np.isnat(days), np.nan, days.astype(np.int64).astype(np.float64))


def curves_of(folder: RunFolder) -> dict[str, Any]:
    """Return the sessions, each variant's equity at each close and idle stretches, and the yardstick."""
    variants = [
        {"name": name, "equity": _money(value), "idle": _idle(empty)}
        for name, value, empty in zip(folder.names, folder.equity, folder.empty, strict=True)
    ]
    other = folder.yardstick
    return {
        "dates": column(days_since_1970(folder.dates)),
        "variants": variants,
        "yardstick": None if other is None else _money(other),
    }


def _money(values: Floats) -> dict[str, Any]:
    """A curve rounded to a power of ten that is too small to be seen."""
    largest = float(np.nanmax(np.abs(values), initial=1.0))
    return column(values, 10.0 ** np.floor(np.log10(largest * MONEY_DIGITS)))


def _idle(closes: NDArray[np.bool_]) -> list[list[int]]:
    """Stretches [first, last] of sessions, counted from the run's first, that closed with no position."""
    empty = np.concatenate(([False], closes, [False])).astype(np.int8)
    turns = np.flatnonzero(np.diff(empty)).reshape(-1, 2)
    return [[int(first), int(last) - 1] for first, last in turns]


def attribution_of(ledgers: Sequence[Ledger]) -> dict[str, Any]:
    """Return for every variant the months and the money of each of HEADINGS in each month.

    Legs are counted by their right; where positions were not marked at every close, under `options`.
    """
    return {ledger.log.meta.variant: _months(ledger) for ledger in ledgers}


def _months(ledger: Ledger) -> dict[str, Any]:
    frame = ledger.by_month
    rights = {leg.name: f"{leg.right}s" for leg in ledger.log.meta.legs}
    parts = {heading: np.zeros(len(frame)) for heading in HEADINGS}
    for name in frame.columns.drop(["variant", "month", "deposits", "change"]):
        heading = rights.get(name, name)
        parts[heading] = parts.get(heading, 0.0) + frame[name].to_numpy(np.float64)
    months = frame["month"].to_numpy().astype("datetime64[M]").astype(np.int64)
    return {
        "months": column(months),
        "parts": {name: column(value, 0.01) for name, value in parts.items() if np.any(value != 0.0)},
    }


def volatility_of(folder: RunFolder) -> dict[str, Any]:
    """Return the picture of volatility: days since 1970 and columns of annual fractions."""
    known = folder.daily[folder.daily["assumed"].notna()]
    names = ("assumed", "assumed_low", "assumed_high", "realized")
    columns = {name: column(known[name].to_numpy(np.float64), 1e-4) for name in names}
    return {"dates": column(days_since_1970(known["date"].to_numpy())), **columns}
