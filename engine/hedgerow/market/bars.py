"""Rows of prices from every table, put together, judged, and laid out on sessions and symbols."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field

import numpy as np
import pyarrow as pa
import pyarrow.compute as pc
from numpy.typing import NDArray

from hedgerow.errors import Fault
from hedgerow.kernels.layout import Floats, Ints
from hedgerow.market.columns import PRICES, assign
from hedgerow.market.dates import NO_DATE, to_ordinals
from hedgerow.market.numbers import Cells, is_text, to_floats
from hedgerow.market.sources import Source
from hedgerow.market.table import Finding

LONG_FILES = ("prices", "data", "bars", "quotes", "history", "")
_HIGHEST_IMPLIED = 3.0
HIGHEST_PRICE = 10_000_000.0  # a share; the dearest ever traded stood below a tenth of it (from memory)
PRICE_ROLES = ("open", "high", "low", "close", "adjusted_close")
Mask = NDArray[np.bool_]


@dataclass(frozen=True)
class Words:
    """How the tables are to be read: which column is what, the order of dates, the decimal sign."""

    columns: Mapping[str, str] = field(default_factory=dict)
    dates: str = ""
    decimal_comma: bool = False


@dataclass(frozen=True)
class Bars:
    """Rows of prices as read, one array of shape (n,) a column, rows in the order of the files.

    `symbol` is an index into `names`; `values` holds the numbers by role; `source` and `row` tell where a
    row stands.
    """

    names: tuple[str, ...]
    symbol: Ints
    ordinal: Ints
    values: dict[str, Floats]
    source: Ints
    row: Ints

    def __len__(self) -> int:
        return len(self.ordinal)

    def take(self, rows: Mask | Ints) -> Bars:
        """Return some of the rows."""
        values = {role: column[rows] for role, column in self.values.items()}
        return Bars(
            self.names, self.symbol[rows], self.ordinal[rows], values, self.source[rows], self.row[rows]
        )


def read_bars(sources: list[Source], words: Words) -> tuple[Bars, list[Fault], list[Finding]]:
    """Return the rows of all tables that have a symbol and a date, the faults, and what was left unread."""
    parts: list[tuple[list[str], Bars]] = []
    faults: list[Fault] = []
    unused: dict[str, None] = {}
    for number, source in enumerate(sources):
        part, wrong, others = _read_source(number, source, words)
        faults += wrong
        unused |= dict.fromkeys(others)
        if part is not None:
            parts.append(part)
    findings = []
    if unused:
        text = "columns that are not used: " + ", ".join(unused)
        findings.append(Finding("columns-unused", "note", "", "", text))
    return _joined(parts), faults, findings


def _read_source(
    number: int, source: Source, words: Words
) -> tuple[tuple[list[str], Bars] | None, list[Fault], list[str]]:
    roles, faults = assign(source.names, PRICES, words.columns, source.where)
    if faults:
        return None, faults, []
    names, symbol, wrong = symbol_codes(source, roles)
    faults += wrong
    ordinal, wrong = to_ordinals(source.cells(roles["date"]), words.dates)
    faults += wrong
    values: dict[str, Floats] = {}
    for role, column in roles.items():
        if role not in ("symbol", "date"):
            values[role], wrong = to_floats(source.cells(column), words.decimal_comma)
            faults += wrong
            if role in PRICE_ROLES:
                faults += _absurd(source.cells(column), values[role])
    faults += _percent(values.get("implied"), source.where)
    count = len(ordinal)
    bars = Bars((), symbol, ordinal, values, np.full(count, number), np.arange(count))
    whole = (symbol >= 0) & (ordinal != NO_DATE)
    others = [name for name in source.names if name not in roles.values() and name.strip()]
    return (names, bars if whole.all() else bars.take(whole)), faults, others


def _absurd(cells: Cells, values: Floats) -> list[Fault]:
    """Return the faults of prices that no share has ever had."""
    told = (f"at most {HIGHEST_PRICE:,.0f} a share is read", "correct the price, or take the row away")
    high = np.isfinite(values) & (values > HIGHEST_PRICE)
    return cells.faults(
        high, "price-too-high", lambda cell: (f"the price {cell} stands in the column `{cells.name}`", *told)
    )


def _percent(implied: Floats | None, where: str) -> list[Fault]:
    """Return the fault of implied volatilities written in percent."""
    known = np.empty(0) if implied is None else implied[~np.isnan(implied)]
    if len(known) == 0 or float(np.median(known)) < _HIGHEST_IMPLIED:
        return []
    found = f"the implied volatilities are around {float(np.median(known)):.4g}"
    told = ("they are annual fractions: 0.25 is 25 %", "divide the column by 100")
    return [Fault(where, 1, 0, "implied-percent", found, *told)]


def symbol_codes(source: Source, roles: Mapping[str, str]) -> tuple[list[str], Ints, list[Fault]]:
    """Return the symbols of a table, the index of each row's symbol (-1 none), and the rows without one.

    A table without a column of symbols is about the symbol its file is named after.
    """
    count = len(source.table)
    if "symbol" not in roles:
        if source.stem.lower() in LONG_FILES:
            told = ("there is no column for `symbol`", "each row has its symbol")
            remedy = "add the column, or name the file after its symbol"
            return [], np.full(count, -1), [Fault(source.where, 1, 0, "column-missing", *told, remedy)]
        return [source.stem], np.zeros(count, dtype=np.int64), []
    cells = source.cells(roles["symbol"])
    return _codes(cells)


def _codes(cells: Cells) -> tuple[list[str], Ints, list[Fault]]:
    column = cells.column
    if not is_text(column.type):
        column = column.cast(pa.string())
    if not pa.types.is_dictionary(column.type):
        column = column.dictionary_encode()
    encoded = column.combine_chunks()
    encoded = encoded.chunk(0) if isinstance(encoded, pa.ChunkedArray) else encoded
    raw = [str(name).strip() for name in encoded.dictionary.to_pylist()]
    names = sorted(set(raw) - {""})
    place = {name: index for index, name in enumerate(names)}
    lookup = np.array([place.get(name, -1) for name in raw] + [-1], dtype=np.int64)
    codes = lookup[pc.fill_null(encoded.indices.cast(pa.int64()), -1).to_numpy()]
    faults = cells.faults(codes < 0, "no-symbol", lambda _: ("the symbol is empty", "every row has one", ""))
    odd = np.array([not name.isprintable() for name in names] + [False], dtype=np.bool_)
    told = ("a symbol is written in letters, digits and signs that show", "take what does not show away")
    faults += cells.faults(
        odd[codes], "symbol-unprintable", lambda cell: (f"the symbol is {cell.strip()!a}", *told)
    )
    return names, codes, faults


def _joined(parts: list[tuple[list[str], Bars]]) -> Bars:
    names = tuple(sorted({name for names, _ in parts for name in names}))
    place = {name: index for index, name in enumerate(names)}
    others = (role for _, bars in parts for role in bars.values)
    roles = list(dict.fromkeys([*PRICES.must[1:], *others]))
    symbols = [np.array([place[n] for n in own] + [-1])[bars.symbol] for own, bars in parts]
    values = {
        role: np.concatenate(
            [bars.values.get(role, np.full(len(bars), np.nan)) for _, bars in parts] or [np.empty(0)]
        )
        for role in roles
    }
    empty = [np.empty(0, dtype=np.int64)]
    return Bars(
        names,
        np.concatenate(symbols or empty).astype(np.int64),
        np.concatenate([bars.ordinal for _, bars in parts] or empty),
        values,
        np.concatenate([bars.source for _, bars in parts] or empty),
        np.concatenate([bars.row for _, bars in parts] or empty),
    )


@dataclass(frozen=True)
class Axis:
    """The sessions rows stand on: `ordinals` (T,), and each row's place among (T, N) laid out flat, (n,)."""

    ordinals: Ints
    place: Ints

    @classmethod
    def of(cls, bars: Bars) -> Axis:
        """Return the axis of every day that occurs; at least one row is wanted."""
        first = int(bars.ordinal.min())
        present = np.bincount(bars.ordinal - first) > 0
        session = (np.cumsum(present) - 1)[bars.ordinal - first]
        return cls(np.flatnonzero(present) + first, session * len(bars.names) + bars.symbol)


def grid(bars: Bars, axis: Axis, role: str) -> Floats:
    """Return one role's numbers as (T, N), NaN where there is no row."""
    laid = np.full((len(axis.ordinals), len(bars.names)), np.nan)
    if role in bars.values:
        laid.ravel()[axis.place] = bars.values[role]
    return laid
