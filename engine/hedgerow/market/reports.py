"""Earnings reports: when they came, when their dates were known, and the first session that reacts."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np

from hedgerow.errors import Fault
from hedgerow.kernels.layout import Ints
from hedgerow.market.actions import known_symbols
from hedgerow.market.bars import Words
from hedgerow.market.columns import REPORTS, assign
from hedgerow.market.dates import NO_DATE, iso, to_ordinals
from hedgerow.market.numbers import Cells, to_floats
from hedgerow.market.sources import Source
from hedgerow.market.table import Finding, Report

ANNOUNCED_DAYS = 21  # a date of report is known three weeks ahead where nothing is said (common practice)
_TIMES = {"": 1, "after": 1, "after close": 1, "amc": 1, "before": 0, "before open": 0, "bmo": 0}


def read_reports(
    source: Source, symbols: Sequence[str], words: Words
) -> tuple[tuple[Report, ...], list[Fault], list[Finding]]:
    """Return the reports of a table (symbol, date, eps, announced, time), sorted, its faults and findings."""
    roles, faults = assign(source.names, REPORTS, {}, source.where)
    if faults:
        return (), faults, []
    symbol, faults, findings = known_symbols(source, roles, symbols)
    ordinal, wrong = to_ordinals(source.cells(roles["date"]), words.dates)
    eps, wrong_eps = to_floats(source.cells(roles["eps"]), words.decimal_comma)
    announced, wrong_days = _announced(source, roles, ordinal, words)
    later, wrong_times = _times(source, roles)
    faults += wrong + wrong_eps + wrong_days + wrong_times
    rows = np.flatnonzero((symbol >= 0) & (ordinal != NO_DATE))
    reports = [
        Report(int(symbol[i]), int(ordinal[i]), int(announced[i]), int(ordinal[i] + later[i]), float(eps[i]))
        for i in rows
    ]
    faults += _twice(source, reports, rows, symbols)
    unique = {report[:2]: report for report in reports}
    return tuple(sorted(unique.values())), faults, findings


def _announced(
    source: Source, roles: dict[str, str], ordinal: Ints, words: Words
) -> tuple[Ints, list[Fault]]:
    """Return the day from which each report's date was known; three weeks ahead where nothing is written."""
    usual = ordinal - ANNOUNCED_DAYS
    if "announced" not in roles:
        return usual, []
    cells = source.cells(roles["announced"])
    known = np.flatnonzero(~cells.blank())
    days = np.full(len(ordinal), NO_DATE, dtype=np.int64)
    faults: list[Fault] = []
    if len(known):
        written = Cells(
            cells.column.take(known), cells.where, cells.name, lambda rows: cells.lines_of(known[rows])
        )
        days[known], faults = to_ordinals(written, words.dates)
    late = (days > ordinal) & (ordinal != NO_DATE)
    told = ("a date is known no later than the report itself", "correct the day, or leave it empty")
    faults += cells.faults(
        late, "announced-late", lambda cell: (f"announced on {cell}, after the report", *told)
    )
    return np.where(days == NO_DATE, usual, days), faults


def _times(source: Source, roles: dict[str, str]) -> tuple[Ints, list[Fault]]:
    """Return 0 for a report whose own day reacts, 1 where the next one does."""
    if "time" not in roles:
        return np.ones(len(source.table), dtype=np.int64), []
    cells: Cells = source.cells(roles["time"])
    words = [str(cell or "").strip().lower() for cell in cells.column.to_pylist()]
    later = np.array([_TIMES.get(word, -1) for word in words], dtype=np.int64)
    told = ("`before` (the open) or `after` (the close) is allowed", "an empty cell means after")
    faults = cells.faults(later < 0, "bad-time", lambda cell: (f"`{cell}` is no time of a report", *told))
    return np.abs(later), faults


def _twice(source: Source, reports: Sequence[Report], rows: Ints, symbols: Sequence[str]) -> list[Fault]:
    """Return the faults of a symbol's day with two different reports."""
    first: dict[tuple[int, int], Report] = {}
    faults = []
    for report, row in zip(reports, rows, strict=True):
        key = (report.symbol_index, report.ordinal)
        if repr(first.setdefault(key, report)) != repr(report):
            line = int(source.lines_of(np.array([row]))[0])
            found = f"{symbols[key[0]]} has a second, different report for {iso(key[1])}"
            faults.append(
                Fault(source.where, line, 0, "report-twice", found, remedy="take away the wrong one")
            )
    return faults[:20]
