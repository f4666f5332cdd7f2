"""Tables from files and frames, as arrow tables whose rows know the line they stand on."""

from __future__ import annotations

import csv
import io
from collections.abc import Sequence
from functools import cached_property
from pathlib import Path

import numpy as np
import pandas as pd
import pyarrow as pa
import pyarrow.csv
import pyarrow.parquet

from hedgerow.errors import Fault
from hedgerow.kernels.layout import Ints
from hedgerow.market.numbers import Cells
from hedgerow.textfile import MOST_FAULTS, decode, read_bytes

DELIMITERS = (",", ";", "\t")


class Source:
    """One table: its arrow columns, where it comes from, and the line (or row) of each of its rows.

    `stem` is the file's name without its ending, "" for a frame.
    """

    def __init__(
        self, table: pa.Table, where: str, stem: str = "", text: tuple[str, str, int] | None = None
    ) -> None:
        self.table = table
        self.where = where
        self.stem = stem
        self._text = text  # the text, its delimiter, how many blank lines went before it

    @property
    def name(self) -> str:
        """The file's name without its folder."""
        return Path(self.where).name

    @property
    def names(self) -> list[str]:
        """The names of the columns, as written."""
        return [str(name) for name in self.table.column_names]

    def lines_of(self, rows: Ints) -> Ints:
        """Return the line of some rows, counted from 1; the row itself where there is no text."""
        if self._text is None or len(rows) == 0:
            return np.asarray(rows, dtype=np.int64) + 1
        return self._lines[rows]

    def cells(self, name: str) -> Cells:
        """Return one column; the first of that name."""
        column = self.table.column(self.names.index(name))
        return Cells(column, self.where, name.strip(), self.lines_of)

    @cached_property
    def _lines(self) -> Ints:
        text, delimiter, blank = self._text or ("", ",", 0)
        reader = csv.reader(io.StringIO(text, newline=""), delimiter=delimiter)
        width = len(self.names)
        lines = [blank + reader.line_num for row in reader if len(row) == width]
        return np.array(lines[1:], dtype=np.int64)


def read_table(path: Path) -> tuple[Source | None, list[Fault]]:
    """Return the table of a CSV or Parquet file as far as it can be read, and what is wrong with it."""
    if path.suffix.lower() in (".parquet", ".pq"):
        return _read_parquet(path)
    return _read_csv(path)


def from_frame(frame: pd.DataFrame, where: str = "frame") -> tuple[Source | None, list[Fault]]:
    """Return the table of a pandas frame; an index with a name, or of dates, becomes a column."""
    if not isinstance(frame, pd.DataFrame):
        found = f"a {type(frame).__name__} was given"
        return None, [Fault(where, 0, 0, "not-a-frame", found, "a pandas frame or a path is wanted")]
    named = any(name is not None for name in frame.index.names)
    if named or isinstance(frame.index, pd.DatetimeIndex):
        frame = frame.reset_index(names=None if named else "date")
    columns = [_arrow_column(frame.iloc[:, place]) for place in range(frame.shape[1])]
    table = pa.Table.from_arrays(columns, names=[str(name) for name in frame.columns])
    return Source(table, where), [] if len(table) else [_no_row(where)]


def _arrow_column(column: pd.Series) -> pa.ChunkedArray:
    """Return a pandas column in arrow; objects of several kinds become text, for the faults to show."""
    try:
        array = pa.Array.from_pandas(column)
    except (pa.ArrowInvalid, pa.ArrowTypeError):
        array = pa.array([None if pd.isna(cell) else str(cell) for cell in column], type=pa.string())
    return array if isinstance(array, pa.ChunkedArray) else pa.chunked_array([array])


def _no_row(where: str) -> Fault:
    return Fault(where, 0, 0, "no-row", "there is no row", "at least one row is wanted below the names")


def _read_parquet(path: Path) -> tuple[Source | None, list[Fault]]:
    where = str(path)
    data, faults = read_bytes(path)
    if data is None:
        return None, faults
    if not data:
        return None, [_empty(where)]
    try:
        table = pyarrow.parquet.read_table(pa.BufferReader(data))
    except (pa.ArrowException, OSError) as error:
        detail = str(error).split(". ")[0].split("\n")[0].split("'<Buffer>': ")[-1]
        found = f"this is not a Parquet file that can be read: {detail}"
        return None, [Fault(where, 0, 0, "not-parquet", found, remedy="write the file again")]
    return Source(table, where, path.stem), [] if len(table) else [_no_row(where)]


def _empty(where: str) -> Fault:
    return Fault(where, 0, 0, "file-empty", "the file is empty", "a line of names and rows are wanted")


def _read_csv(path: Path) -> tuple[Source | None, list[Fault]]:
    where = str(path)
    data, faults = read_bytes(path)
    if data is None:
        return None, faults
    text, faults = decode(data, where)
    if text is None:
        return None, faults
    if not text.strip():
        return None, [_empty(where)]
    return parse_csv(text, where, path.stem)


def parse_csv(text: str, where: str, stem: str = "") -> tuple[Source | None, list[Fault]]:
    """Return the table of a CSV text as far as it can be read, all cells as text, and its faults."""
    if "\n" not in text:
        text = text.replace("\r", "\n")
    blank = text[: len(text) - len(text.lstrip("\r\n"))].count("\n")
    text = text.lstrip("\r\n")
    header = text.split("\n", 1)[0]
    delimiter = max(DELIMITERS, key=header.count)
    names = [name.strip() for name in next(csv.reader([header.rstrip("\r")], delimiter=delimiter), [])]
    spoiled: list[str] = []
    try:
        table = _parse(text, delimiter, names, spoiled)
    except pa.ArrowInvalid as error:
        found = f"the rows cannot be read: {str(error).split(chr(10))[0]}"
        return None, [Fault(where, 0, 0, "csv-unreadable", found, remedy="check quotes and delimiters")]
    faults = _ragged(text, where, delimiter, len(names), blank) if spoiled else []
    if not faults and len(table) == 0:
        faults = [_no_row(where)]
    return Source(table, where, stem, (text, delimiter, blank)), faults


def _parse(text: str, delimiter: str, names: Sequence[str], spoiled: list[str]) -> pa.Table:
    def skip(row: pyarrow.csv.InvalidRow) -> str:
        spoiled.append(row.text)
        return "skip"

    keys = [str(place) for place in range(len(names))]
    table = pyarrow.csv.read_csv(
        pa.BufferReader(text.encode("utf-8")),
        read_options=pyarrow.csv.ReadOptions(column_names=keys, skip_rows=1, block_size=1 << 23),
        parse_options=pyarrow.csv.ParseOptions(
            delimiter=delimiter, newlines_in_values='"' in text, invalid_row_handler=skip
        ),
        convert_options=pyarrow.csv.ConvertOptions(column_types=dict.fromkeys(keys, pa.string())),
    )
    return table.rename_columns(list(names))


def _ragged(text: str, where: str, delimiter: str, width: int, blank: int) -> list[Fault]:
    """Return the faults of rows with more or fewer cells than there are names."""
    faults: list[Fault] = []
    reader = csv.reader(io.StringIO(text, newline=""), delimiter=delimiter)
    for row in reader:
        if row and len(row) != width:
            found = "1 cell stands in this row" if len(row) == 1 else f"{len(row)} cells stand in this row"
            allowed = f"the line of names has {width}"
            remedy = "put cells that hold the delimiter in quotes" if len(row) > width else "fill the row"
            if any("\n" in cell for cell in row):
                remedy = "close the quote"
            faults.append(Fault(where, blank + reader.line_num, 0, "ragged-row", found, allowed, remedy))
    listed = faults[: MOST_FAULTS - 10]
    if len(faults) > len(listed):
        found = f"{len(faults) - len(listed):,} more rows have too many or too few cells"
        listed.append(Fault(where, 0, 0, "ragged-row", found))
    return listed
