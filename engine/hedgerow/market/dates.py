"""A column of dates: ISO first, other forms only where they cannot be misread.

Text is read once for every different date of a column, not for every row.
"""

from __future__ import annotations

import datetime
import re
from dataclasses import dataclass

import numpy as np
import pyarrow as pa
import pyarrow.compute as pc

from hedgerow.errors import Fault
from hedgerow.kernels.layout import Ints
from hedgerow.market.numbers import Cells, is_text

EPOCH_ORDINAL = datetime.date(1970, 1, 1).toordinal()
EARLIEST = datetime.date(1700, 1, 1).toordinal()
LATEST = datetime.date(2199, 12, 30).toordinal()
NO_DATE = 0
ORDERS = ("month first", "day first")
_MONTHS = ("jan", "feb", "mar", "apr", "may", "jun", "jul", "aug", "sep", "oct", "nov", "dec")
_MONTH = r"(?P<name>[A-Za-z]{3,9})\.?"
_CLOCK = r"(?:[T ]+\d{1,2}:\d{2}(?::\d{2}(?:\.\d+)?)?\s*(?:Z|UTC|[+-]\d{2}:?\d{2})?)?"


@dataclass(frozen=True, slots=True)
class Form:
    """One way of writing a date."""

    name: str
    pattern: re.Pattern[str]


def _form(name: str, pattern: str) -> Form:
    return Form(name, re.compile(pattern + _CLOCK))


_YMD = r"(?P<y>\d{4})%s(?P<m>\d{1,2})%s(?P<d>\d{1,2})"
_FORMS = (
    _form("2012-03-30", _YMD % ("-", "-")),
    _form("20120330", r"(?P<y>\d{4})(?P<m>\d{2})(?P<d>\d{2})"),
    _form("2012/03/30", _YMD % ("/", "/")),
    _form("30.03.2012", r"(?P<d>\d{1,2})\.(?P<m>\d{1,2})\.(?P<y>\d{4})"),
    _form("30 Mar 2012", rf"(?P<d>\d{{1,2}})[ -]{_MONTH}[ -](?P<y>\d{{4}})"),
    _form("Mar 30, 2012", rf"{_MONTH} (?P<d>\d{{1,2}}),? (?P<y>\d{{4}})"),
    _form("month first", r"(?P<m>\d{1,2})[/-](?P<d>\d{1,2})[/-](?P<y>\d{4})"),
    _form("day first", r"(?P<d>\d{1,2})[/-](?P<m>\d{1,2})[/-](?P<y>\d{4})"),
)
_ISO = _FORMS[0]


def to_ordinals(cells: Cells, order: str = "") -> tuple[Ints, list[Fault]]:
    """Return a column as proleptic ordinals, 0 where a cell is no date, and the faults of the column.

    `order` is "month first" or "day first" for dates like 03/04/2012, or empty: then the column itself must
    show which it is.
    """
    kind = cells.column.type
    if pa.types.is_timestamp(kind) or pa.types.is_date(kind):
        return _from_stamps(cells)
    if pa.types.is_integer(kind):
        cells = Cells(cells.column.cast(pa.string()), cells.where, cells.name, cells.lines_of)
    elif not is_text(kind):
        found = f"the column `{cells.name}` holds {kind}"
        fault = Fault(cells.where, 1, 0, "not-dates", found, "dates like 2012-03-30 are wanted")
        return np.full(len(cells.column), NO_DATE, dtype=np.int64), [fault]
    return _from_text(cells, order)


def _from_stamps(cells: Cells) -> tuple[Ints, list[Fault]]:
    column = cells.column
    if pa.types.is_timestamp(column.type) and column.type.tz is not None:
        column = pc.local_timestamp(column)
    days = column.cast(pa.date32(), safe=False).cast(pa.int32())
    ordinals = pc.fill_null(days, NO_DATE - EPOCH_ORDINAL).to_numpy().astype(np.int64) + EPOCH_ORDINAL
    told = ("the date is missing", "every row has one", "")
    missing = cells.faults(ordinals == NO_DATE, "no-date", lambda _: told)
    return ordinals, missing + _far(cells, ordinals)


def _far(cells: Cells, ordinals: Ints) -> list[Fault]:
    """Return the faults of dates no market has seen, and make them no date."""
    far = (ordinals != NO_DATE) & ((ordinals < EARLIEST) | (ordinals > LATEST))
    ordinals[far] = NO_DATE
    told = (f"{iso(EARLIEST)} to {iso(LATEST)} is read", "correct the year")
    return cells.faults(far, "far-date", lambda cell: (f"the date {cell}", *told))


def _from_text(cells: Cells, order: str) -> tuple[Ints, list[Fault]]:
    encoded = pc.utf8_trim_whitespace(cells.column.cast(pa.string())).combine_chunks().dictionary_encode()
    codes = pc.fill_null(encoded.indices, -1).to_numpy()
    plain = _all_iso(encoded.dictionary)
    if plain is not None and (codes >= 0).all():
        rows = plain[codes]
        return rows, _far(cells, rows)
    words: list[str] = encoded.dictionary.to_pylist()
    form, doubt = _common_form([word for word in words if word], order)
    if doubt:
        first = int(np.flatnonzero(codes >= 0)[0])
        line = int(cells.lines_of(np.array([first]))[0])
        return np.full(len(codes), NO_DATE, dtype=np.int64), [
            Fault(cells.where, line, 0, "date-order", *doubt)
        ]
    table = np.array([_ordinal(word, form) for word in words] + [NO_DATE], dtype=np.int64)
    rows = table[codes]
    faults = cells.faults(rows == NO_DATE, "bad-date", lambda cell: _told(cell, form))
    return rows, faults + _far(cells, rows)


def _all_iso(words: pa.Array) -> Ints | None:
    """Return the ordinals of words that are all written like 2012-03-30, None when some is not."""
    try:
        days = words.cast(pa.date32()).cast(pa.int32())
    except pa.ArrowInvalid:
        return None
    return np.asarray(days.to_numpy(), dtype=np.int64) + EPOCH_ORDINAL


def _common_form(words: list[str], order: str) -> tuple[Form, tuple[str, str, str] | None]:
    """Return the form that most of the dates are written in, or why it cannot be told."""
    forms = [form for form in _FORMS if form.name not in ORDERS or order in ("", form.name)]
    fits = [(sum(_ordinal(word, form) != NO_DATE for word in words), form) for form in forms]
    most = max((count for count, _ in fits), default=0)
    best = [form for count, form in fits if count == most]
    if most == 0:
        return _ISO, None
    if len(best) == 1 or best[0].name not in ORDERS:
        return best[0], None
    found = f"dates like `{words[0]}` can be read day first or month first"
    remedy = "write 2012-03-30, or say `dates: day first` or `dates: month first` in dataset.yaml"
    return _ISO, (found, "a date has one meaning", remedy)


def _ordinal(word: str, form: Form) -> int:
    """Return the ordinal of a date written in a form, 0 when it is not written so or is no day."""
    found = form.pattern.fullmatch(word)
    if found is None:
        return NO_DATE
    parts = found.groupdict()
    month = _month(parts["name"]) if parts.get("name") else int(parts["m"])
    try:
        return datetime.date(int(parts["y"]), month, int(parts["d"])).toordinal()
    except ValueError:
        return NO_DATE


def _month(name: str) -> int:
    short = name[:3].lower()
    return _MONTHS.index(short) + 1 if short in _MONTHS else 0


def _told(cell: str, form: Form) -> tuple[str, str, str]:
    """Return what was found in a cell that is no date, what is allowed, and what to do."""
    if not cell.strip() or cell == "None":
        return "the date is missing", "every row has one", ""
    named = {"month first": "03/30/2012 (month first)", "day first": "30/03/2012 (day first)"}
    wanted = f"the dates of this column are written like {named.get(form.name, form.name)}"
    same = form.pattern.fullmatch(cell.strip()) is not None
    found = f"`{cell}` is no day of the calendar" if same else f"`{cell}` is not written like the others"
    return found, wanted, "write every date like 2012-03-30"


def iso(ordinal: int) -> str:
    """Return an ordinal as an ISO date."""
    return datetime.date.fromordinal(int(ordinal)).isoformat()
