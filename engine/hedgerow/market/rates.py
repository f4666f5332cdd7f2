"""Interest rates: a series or one figure, carried forward over the sessions."""

from __future__ import annotations

import numpy as np
import pyarrow as pa
import pyarrow.compute as pc

from hedgerow.errors import Fault
from hedgerow.kernels.layout import Floats, Ints
from hedgerow.market.bars import Words
from hedgerow.market.columns import RATES, assign
from hedgerow.market.dates import NO_DATE, iso, to_ordinals
from hedgerow.market.numbers import Cells, is_text, to_floats
from hedgerow.market.sources import Source

HIGHEST = 0.5
Series = tuple[Ints, Floats]


def read_rates(source: Source, words: Words) -> tuple[Series, list[Fault]]:
    """Return the days (ordinals, ascending) and annual fractions of a table (date, rate), and its faults.

    A cell is a fraction, 0.045, or a percentage with its sign, 4.5%.
    """
    nothing = np.empty(0, dtype=np.int64), np.empty(0)
    roles, faults = assign(source.names, RATES, {}, source.where)
    if faults:
        return nothing, faults
    ordinal, faults = to_ordinals(source.cells(roles["date"]), words.dates)
    cells = source.cells(roles["rate"])
    rate, wrong = _fractions(cells, words.decimal_comma)
    told = ("a fraction below 0.5, or a percentage with its sign", "write 0.045 or 4.5%")
    high = np.abs(rate) >= HIGHEST
    wrong += cells.faults(high, "bad-rate", lambda cell: (f"an annual rate of {cell}", *told))
    faults += wrong + _twice(source, ordinal, rate)
    whole = (ordinal != NO_DATE) & ~np.isnan(rate)
    order = np.argsort(ordinal[whole], kind="stable")
    return (ordinal[whole][order], rate[whole][order]), faults


def _fractions(cells: Cells, decimal_comma: bool) -> tuple[Floats, list[Fault]]:
    if not is_text(cells.column.type):
        return to_floats(cells, decimal_comma)
    text = pc.utf8_trim_whitespace(cells.column.cast(pa.string()))
    signed = pc.fill_null(pc.ends_with(text, pattern="%"), False)
    bare = Cells(pc.utf8_rtrim(text, characters="% "), cells.where, cells.name, cells.lines_of)
    rate, faults = to_floats(bare, decimal_comma)
    return np.where(signed.to_numpy(), rate / 100.0, rate), faults


def _twice(source: Source, ordinal: Ints, rate: Floats) -> list[Fault]:
    """Return the faults of days with two different rates."""
    order = np.argsort(ordinal, kind="stable")
    again = (
        (np.diff(ordinal[order]) == 0)
        & (np.abs(np.diff(rate[order])) > 0.0)
        & (ordinal[order][1:] != NO_DATE)
    )
    rows = order[1:][again][:20]
    return [
        Fault(source.where, int(line), 0, "rate-twice", f"a second, different rate for {iso(ordinal[row])}")
        for line, row in zip(source.lines_of(rows), rows, strict=True)
    ]


def on_sessions(series: Series, ordinals: Ints, annual: bool) -> Floats:
    """Return the rate of each session, (T,): the last one stated on or before it, 0 before the first.

    `annual` rates are compounded once a year and become continuous ones, log(1 + r).
    """
    days, rates = series
    values = np.append(0.0, np.log1p(rates) if annual else rates)
    return np.asarray(values[np.searchsorted(days, ordinals, side="right")], dtype=np.float64)
