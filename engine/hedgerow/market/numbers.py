"""A column of numbers: from text, integers, decimals or floats to float64, with the faults of each cell."""

from __future__ import annotations

import re
from collections.abc import Callable

import numpy as np
import pyarrow as pa
import pyarrow.compute as pc
from numpy.typing import NDArray

from hedgerow.errors import Fault
from hedgerow.kernels.layout import Floats, Ints

LinesOf = Callable[[Ints], Ints]
Telling = Callable[[str], tuple[str, str, str]]
NOTHING = ("", "na", "n/a", "nan", "null", "none", "-", "--", ".", "#n/a")
_NUMBER = r"^[+-]?(\d+\.?\d*|\.\d+)([eE][+-]?\d+)?$"
MOST_LISTED = 20


class Cells:
    """One column of a table with what is needed to tell where a cell stands."""

    def __init__(self, column: pa.ChunkedArray, where: str, name: str, lines_of: LinesOf) -> None:
        self.column = column
        self.where = where
        self.name = name
        self.lines_of = lines_of

    def faults(self, bad: NDArray[np.bool_], code: str, tell: Telling) -> list[Fault]:
        """Return the faults of the cells at `bad`, the first ones each, the rest counted in one more."""
        rows = np.flatnonzero(bad)
        listed = rows[:MOST_LISTED]
        lines = self.lines_of(listed)
        cells = [str(self.column[int(row)].as_py()) for row in listed]
        faults = [
            Fault(self.where, int(line), 0, code, *tell(cell))
            for line, cell in zip(lines, cells, strict=True)
        ]
        if len(rows) > len(listed):
            found = (
                f"{len(rows) - len(listed):,} more cells of the column `{self.name}` are wrong in this way"
            )
            faults.append(Fault(self.where, 0, 0, code, found))
        return faults

    def blank(self) -> NDArray[np.bool_]:
        """Return which cells hold nothing, or a word for nothing, (n,)."""
        if not is_text(self.column.type):
            return np.array(pc.is_null(self.column, nan_is_null=True).to_numpy(), dtype=np.bool_)
        text = pc.utf8_lower(pc.utf8_trim_whitespace(self.column.cast(pa.string())))
        return np.array(pc.or_kleene(pc.is_null(text), _is_nothing(text)).to_numpy(), dtype=np.bool_)


def _is_nothing(text: pa.ChunkedArray) -> pa.ChunkedArray:
    return pc.is_in(text, value_set=pa.array(NOTHING))


def is_text(kind: pa.DataType) -> bool:
    """Return whether an arrow type holds text, encoded by a dictionary or not."""
    if pa.types.is_dictionary(kind):
        kind = kind.value_type
    return bool(pa.types.is_string(kind) or pa.types.is_large_string(kind) or pa.types.is_string_view(kind))


def to_floats(cells: Cells, decimal_comma: bool = False) -> tuple[Floats, list[Fault]]:
    """Return a column as float64, NaN where nothing is written, with the cells that are no finite number."""
    column = cells.column
    if pa.types.is_boolean(column.type) or not (is_text(column.type) or _is_number(column.type)):
        found = f"the column `{cells.name}` holds {column.type}"
        fault = Fault(cells.where, 1, 0, "not-numbers", found, "numbers are wanted")
        return np.full(len(column), np.nan), [fault]
    if is_text(column.type):
        return _from_text(cells, decimal_comma)
    values = _numpy(column.cast(pa.float64()))
    return values, cells.faults(np.isinf(values), "infinite", lambda cell: _told(cells.name, cell))


def _is_number(kind: pa.DataType) -> bool:
    kinds = (pa.types.is_integer, pa.types.is_floating, pa.types.is_decimal, pa.types.is_null)
    return any(is_kind(kind) for is_kind in kinds)


def _numpy(column: pa.ChunkedArray) -> Floats:
    return np.array(column.to_numpy(), dtype=np.float64)


def _from_text(cells: Cells, decimal_comma: bool) -> tuple[Floats, list[Fault]]:
    text = pc.utf8_trim_whitespace(cells.column.cast(pa.string()))
    if decimal_comma:
        text = pc.replace_substring(text, ",", ".")
    try:
        values = _numpy(text.cast(pa.float64()))
    except pa.ArrowInvalid:
        text = pc.if_else(_is_nothing(pc.utf8_lower(text)), pa.scalar(None, pa.string()), text)
        good = pc.fill_null(pc.match_substring_regex(text, _NUMBER), False)
        values = _numpy(pc.if_else(good, text, pa.scalar(None, pa.string())).cast(pa.float64()))
        bad = np.array(pc.and_(pc.invert(good), pc.is_valid(text)).to_numpy(), dtype=np.bool_)
        return values, cells.faults(
            bad | np.isinf(values), "not-a-number", lambda cell: _told(cells.name, cell)
        )
    return values, cells.faults(np.isinf(values), "infinite", lambda cell: _told(cells.name, cell))


def _told(name: str, cell: str) -> tuple[str, str, str]:
    """Return what was found in a cell that is no number, what is allowed, and what to do."""
    shown = cell if len(cell) <= 40 else cell[:37] + "..."
    found = f"`{shown}` stands in the column `{name}`"
    bare = cell.strip()
    if re.fullmatch(r"[+-]?\d{1,3}(,\d{3})+(\.\d+)?", bare):
        return found, "a number has no thousands separator", f"write {bare.replace(',', '')}"
    if re.fullmatch(r"[+-]?\d{1,3}([ '_\u00a0]\d{3})+(\.\d+)?", bare):
        return found, "a number has no thousands separator", "write the digits alone"
    if re.fullmatch(r"[+-]?[\d.]*,\d+", bare):
        return found, "a number has a decimal point", "write a point, or say `decimal: comma` in dataset.yaml"
    if re.fullmatch(r"[+-]?[$€£¥]\s*[\d.,]+|[\d.,]+\s*[$€£¥%]", bare):
        return found, "a bare number is wanted", "take the sign away; dataset.yaml names the currency"
    if found_ratio := re.fullmatch(r"(\d+)\s*(?::|/|for|-for-)\s*(\d+)", bare):
        new, old = int(found_ratio[1]), max(int(found_ratio[2]), 1)
        return found, "a ratio is one number: new shares for one old", f"write {new / old:.6g}"
    if re.fullmatch(r"[+-]?inf(inity)?|[+-]?1?e\d+|[+-]?\d[\d.]*e\+?\d+", bare.lower()):
        return found, "a finite number is wanted", "leave the cell empty when nothing is known"
    return found, "a number is wanted", "leave the cell empty when nothing is known"
