"""Which rows of prices can be used: repeated rows, order, impossible prices.

A row that cannot be used is dropped with a finding. The one repair is a high or low widened to an open or
close that stands a little outside it, which is a finding too.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import replace

import numpy as np

from hedgerow.errors import Fault
from hedgerow.kernels.layout import Ints
from hedgerow.market.bars import Bars, Mask
from hedgerow.market.dates import iso
from hedgerow.market.sources import Source
from hedgerow.market.table import Finding

PRICES = ("open", "high", "low", "close")
WIDEN_FRACTION = 0.01
_ROUNDING = 1e-9
_MOST_CONFLICTS = 20


def by_symbol(bars: Bars, rows: Mask, code: str, severity: str, text: str) -> list[Finding]:
    """Return one finding a symbol for some rows; `{count}` of the text becomes "3 rows" or "1 row"."""
    findings = []
    counts = np.bincount(bars.symbol[rows], minlength=len(bars.names))
    for index in np.flatnonzero(counts):
        first = int(bars.ordinal[rows & (bars.symbol == index)].min())
        count = f"{counts[index]:,} row{'s' if counts[index] > 1 else ''}"
        findings.append(Finding(code, severity, bars.names[index], iso(first), text.format(count=count)))
    return findings


def order_findings(bars: Bars, sources: Sequence[Source]) -> list[Finding]:
    """Return one note for each table in which the dates of some symbol do not ascend."""
    if len(bars) == 0:
        return []
    order = np.lexsort((np.arange(len(bars)), bars.symbol, bars.source))
    same = (np.diff(bars.symbol[order]) == 0) & (np.diff(bars.source[order]) == 0)
    back = np.append(False, same & (np.diff(bars.ordinal[order]) < 0))
    tables = np.unique(bars.source[order][back])
    text = "the dates of {} do not ascend; the rows were sorted"
    return [Finding("unsorted", "note", "", "", text.format(sources[number].name)) for number in tables]


def without_repeats(bars: Bars, sources: Sequence[Source]) -> tuple[Bars, list[Fault], list[Finding]]:
    """Return the rows with each date of a symbol once.

    A row repeated word for word is dropped with a finding; two different rows for one date are a fault.
    """
    if len(bars) == 0:
        return bars, [], []
    span = int(bars.ordinal.max()) + 1
    key = bars.symbol * span + bars.ordinal
    order = np.argsort(key, kind="stable")
    later = np.append(False, np.diff(key[order]) == 0)
    if not later.any():
        return bars, [], []
    group = np.maximum.accumulate(np.where(later, 0, np.arange(len(key))))
    repeats, firsts = order[later], order[group[later]]
    alike = np.ones(len(repeats), dtype=np.bool_)
    for column in bars.values.values():
        one, other = column[firsts], column[repeats]
        alike &= (one == other) | (np.isnan(one) & np.isnan(other))
    faults = _conflicts(bars, sources, firsts[~alike], repeats[~alike])
    dropped = np.zeros(len(bars), dtype=np.bool_)
    dropped[repeats] = True
    same = np.zeros(len(bars), dtype=np.bool_)
    same[repeats[alike]] = True
    text = "{count} repeated word for word; each was kept once"
    return bars.take(~dropped), faults, by_symbol(bars, same, "repeated-row", "warning", text)


def _conflicts(bars: Bars, sources: Sequence[Source], firsts: Ints, repeats: Ints) -> list[Fault]:
    faults = []
    for first, repeat in list(zip(firsts, repeats, strict=True))[:_MOST_CONFLICTS]:
        here, there = sources[int(bars.source[repeat])], sources[int(bars.source[first])]
        line = int(here.lines_of(bars.row[[repeat]])[0])
        earlier = int(there.lines_of(bars.row[[first]])[0])
        place = f"line {earlier}" if here is there else f"{there.where}, line {earlier}"
        name, day = bars.names[bars.symbol[repeat]], iso(bars.ordinal[repeat])
        found = f"{name} has a second, different row for {day}; the first is on {place}"
        told = ("a symbol has one row a day", "take away the wrong one")
        faults.append(Fault(here.where, line, 0, "date-twice", found, *told))
    if len(repeats) > _MOST_CONFLICTS:
        where = sources[int(bars.source[repeats[-1]])].where
        found = f"{len(repeats) - _MOST_CONFLICTS:,} more dates have two different rows"
        faults.append(Fault(where, 0, 0, "date-twice", found))
    return faults


def usable(bars: Bars) -> tuple[Bars, list[Finding]]:
    """Return the rows with possible prices, and what was dropped or mended."""
    prices = [bars.values[role] for role in PRICES]
    missing = np.isnan(prices[0]) | np.isnan(prices[1]) | np.isnan(prices[2]) | np.isnan(prices[3])
    blank = missing & np.all([np.isnan(price) for price in prices], axis=0)
    with np.errstate(invalid="ignore"):
        positive = (prices[0] > 0) & (prices[1] > 0) & (prices[2] > 0) & (prices[3] > 0)
    low_side = ~missing & ~positive
    crossed = positive & (prices[1] < prices[2])
    outside, far = _outside(bars, positive & ~crossed)
    findings = [
        *by_symbol(bars, blank, "no-prices", "note", "{count} without any price, dropped"),
        *by_symbol(bars, missing & ~blank, "missing-price", "warning", "{count} without some price, dropped"),
        *by_symbol(
            bars, low_side, "price-not-positive", "warning", "{count} with a price of 0 or less, dropped"
        ),
        *by_symbol(
            bars, crossed, "high-below-low", "warning", "{count} with the high below the low, dropped"
        ),
        *by_symbol(bars, far, "outside-range", "warning", f"{{count}} with an open or close {_FAR}, dropped"),
        *by_symbol(bars, outside & ~far, "range-widened", "warning", _WIDENED),
    ]
    kept = _widened(bars.take(positive & ~crossed & ~far))
    kept, without_volume = _emptied(kept, "volume", "a volume below 0, taken as unknown", least=0.0)
    kept, without_implied = _emptied(kept, "implied", "an implied volatility of 0 or less, taken as unknown")
    return kept, [*findings, *without_volume, *without_implied]


def _widened(bars: Bars) -> Bars:
    """Return the rows with every high and low reaching to the open and the close."""
    first, high, low, last = (bars.values[role] for role in PRICES)
    reach = {
        "high": np.maximum(high, np.maximum(first, last)),
        "low": np.minimum(low, np.minimum(first, last)),
    }
    return replace(bars, values=bars.values | reach)


def _emptied(
    bars: Bars, role: str, text: str, least: float = np.nextafter(0.0, 1.0)
) -> tuple[Bars, list[Finding]]:
    """Return the rows with a role's numbers below `least` made unknown, and one finding a symbol of them."""
    if role not in bars.values:
        return bars, []
    bad = bars.values[role] < least
    findings = by_symbol(bars, bad, f"{role}-impossible", "warning", "{count} with " + text)
    return replace(bars, values=bars.values | {role: np.where(bad, np.nan, bars.values[role])}), findings


_FAR = f"more than {WIDEN_FRACTION:.0%} outside the day's low and high"
_WIDENED = "{count} with an open or close just outside low and high; the range was widened to hold it"


def _outside(bars: Bars, judged: Mask) -> tuple[Mask, Mask]:
    """Return the rows whose open or close stands outside low and high, and those of them far outside."""
    first, high, low, last = (bars.values[role] for role in PRICES)
    top, bottom = np.maximum(first, last), np.minimum(first, last)
    with np.errstate(invalid="ignore", divide="ignore"):
        beyond = np.maximum(top / high - 1.0, low / bottom - 1.0)
    return judged & (beyond > _ROUNDING), judged & (beyond > WIDEN_FRACTION)
