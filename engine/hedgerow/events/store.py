"""A log as one Parquet file: exact, the same bytes every time, written whole or not at all.

One row is one record of one table of one variant. The columns `variant table date symbol kind leg reason`
are words for people; the other columns are the records themselves (codes end in `_code`), and a field that
a table does not have is null. What the codes mean stands as JSON in the schema's metadata.
Floats are stored without a dictionary, because a dictionary would merge different NaN and signed zeros.
"""

from __future__ import annotations

import json
import os
from collections.abc import Callable, Iterator, Sequence
from pathlib import Path
from typing import Any

import numpy as np
import pyarrow as pa
import pyarrow.parquet as pq

from hedgerow.errors import PlaceError
from hedgerow.events.kinds import KIND_WORDS, reason_words
from hedgerow.events.log import LAYOUTS, EventLog, LogMeta, words_by_code
from hedgerow.kernels.layout import Records

__all__ = ["read_log", "read_logs", "write_atomically", "write_logs"]

META_KEY = b"hedgerow.log"
FORMAT = 1
CODED = ("symbol", "kind", "leg", "reason")
WORD_COLUMNS = ("variant", "table", "symbol", "kind", "leg", "reason")
ROWS_A_GROUP = 1 << 20


def write_logs(path: str | Path, logs: Sequence[EventLog]) -> None:
    """Write logs, one a variant, to one Parquet file; the file appears whole or not at all.

    Raises PlaceError when the place cannot be written and ValueError when two logs share a variant name.
    """
    names = [log.meta.variant for log in logs]
    if len(set(names)) != len(names):
        raise ValueError("the logs of one file must have different variant names, but two are the same")
    write_atomically(Path(path), lambda part: _write(part, logs))


def read_logs(path: str | Path) -> tuple[EventLog, ...]:
    """Return the logs of a file, in the order written. Raises PlaceError when it is not such a file."""
    place = Path(path)
    try:
        with pq.ParquetFile(place) as file:
            return _read(place, file)
    except OSError as error:
        raise _unreadable(place, error.strerror or str(error)) from error
    except pa.ArrowInvalid as error:
        raise _unreadable(place, "it is not a Parquet file, or it is damaged") from error


def read_log(path: str | Path, variant: str | None = None) -> EventLog:
    """Return the log of one variant (the only one when not named).

    Raises PlaceError when the file is no log, lacks the variant, or holds several and none was named.
    """
    logs = {log.meta.variant: log for log in read_logs(path)}
    if variant is None and len(logs) == 1:
        return next(iter(logs.values()))
    if variant not in logs:
        raise PlaceError.one(
            str(path),
            "no such variant",
            "no variant was named" if variant is None else f"there is no variant `{variant}` in this log",
            f"it holds {', '.join(f'`{name}`' for name in logs)}",
        )
    return logs[variant]


def write_atomically(path: Path, write: Callable[[Path], None]) -> None:
    """Let `write` fill a temporary file beside `path`, then move it there in one step.

    Raises PlaceError when the disk is full or the place cannot be written; nothing is left behind then.
    """
    part = path.with_name(f".{path.name}.{os.getpid()}.part")
    try:
        write(part)
        os.replace(part, path)
    except OSError as error:
        raise PlaceError.one(
            str(path), "cannot write", f"the file could not be written: {error.strerror or error}"
        ) from error
    finally:
        part.unlink(missing_ok=True) if part.parent.is_dir() else None


def _column(table: str, field: str) -> str:
    return f"{field}_code" if field in CODED and table in LAYOUTS else field


def _schema(metadata: bytes) -> pa.Schema:
    fields: dict[str, pa.DataType] = {name: pa.string() for name in WORD_COLUMNS[:2]}
    fields["date"] = pa.date32()
    fields |= {name: pa.string() for name in WORD_COLUMNS[2:]}
    for table, layout in LAYOUTS.items():
        for field in layout.names or ():
            fields[_column(table, field)] = pa.from_numpy_dtype(layout[field])
    return pa.schema(list(fields.items()), metadata={META_KEY: metadata})


def _describe(logs: Sequence[EventLog]) -> bytes:
    calendars: list[list[str]] = []
    variants = []
    for log in logs:
        meta = log.meta.as_dict()
        dates = meta.pop("dates")
        if dates not in calendars:
            calendars.append(dates)
        rows = {table: int(getattr(log, table).size) for table in LAYOUTS}
        variants.append({"meta": meta, "calendar": calendars.index(dates), "rows": rows})
    return json.dumps(
        {"format": FORMAT, "calendars": calendars, "variants": variants}, ensure_ascii=False
    ).encode()


def _write(path: Path, logs: Sequence[EventLog]) -> None:
    schema = _schema(_describe(logs))
    floats = [field.name for field in schema if pa.types.is_floating(field.type)]
    with pq.ParquetWriter(
        path, schema, compression="zstd", use_dictionary=list(WORD_COLUMNS), use_byte_stream_split=floats
    ) as writer:
        for log in logs:
            for table in LAYOUTS:
                if getattr(log, table).size:
                    writer.write_table(_arrow(log, table, schema), row_group_size=ROWS_A_GROUP)


def _arrow(log: EventLog, table: str, schema: pa.Schema) -> pa.Table:
    records: Records = getattr(log, table)
    known = dict(_words(log, table, records))
    for field in records.dtype.names or ():
        known[_column(table, field)] = pa.array(np.ascontiguousarray(records[field]))
    columns = [known.get(field.name, pa.nulls(records.size, field.type)) for field in schema]
    return pa.Table.from_arrays(columns, schema=schema)


def _words(log: EventLog, table: str, records: Records) -> Iterator[tuple[str, pa.Array]]:
    meta, fields = log.meta, records.dtype.names or ()
    yield "variant", pa.repeat(pa.scalar(meta.variant, pa.string()), records.size)
    yield "table", pa.repeat(pa.scalar(table, pa.string()), records.size)
    yield "date", pa.array(meta.dates[records["session"]])
    if "symbol" in fields:
        yield "symbol", _text(words_by_code(("", *meta.symbols), records["symbol"], 1))
    if table == "events":
        yield "kind", _text(words_by_code(KIND_WORDS, records["kind"], 0))
        yield "leg", _text(log.leg_column(records["leg"]))
        yield "reason", _text(words_by_code(reason_words(meta.exits), records["reason"], 0))


def _text(words: Any) -> pa.Array:
    return pa.array(words, type=pa.string())


def _read(place: Path, file: pq.ParquetFile) -> tuple[EventLog, ...]:
    raw = (file.schema_arrow.metadata or {}).get(META_KEY)
    if raw is None:
        raise _unreadable(place, "it is a Parquet file but holds no event log")
    described = json.loads(raw)
    if described["format"] != FORMAT:
        raise _unreadable(place, f"its format is {described['format']}, this version reads {FORMAT}")
    groups = iter(range(file.num_row_groups))
    logs = []
    for variant in described["variants"]:
        dates = described["calendars"][variant["calendar"]]
        meta = LogMeta.from_dict({**variant["meta"], "dates": dates})
        tables = {name: _table(file, groups, name, variant["rows"][name]) for name in LAYOUTS}
        logs.append(EventLog(meta, **tables, known=False))
    return tuple(logs)


def _table(file: pq.ParquetFile, groups: Iterator[int], table: str, rows: int) -> Records:
    layout = LAYOUTS[table]
    records = np.zeros(rows, dtype=layout)
    fields = {_column(table, field): field for field in layout.names or ()}
    filled = 0
    while filled < rows:
        part = file.read_row_group(next(groups), columns=list(fields))
        for column, field in fields.items():
            records[field][filled : filled + part.num_rows] = part.column(column).to_numpy()
        filled += part.num_rows
    return records


def _unreadable(place: Path, why: str) -> PlaceError:
    return PlaceError.one(
        str(place), "not a log", f"this event log cannot be read: {why}", "expected a file written by a run"
    )
