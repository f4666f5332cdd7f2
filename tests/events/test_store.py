"""A log as a file: exact, deterministic, whole or not at all."""

from __future__ import annotations

import hashlib
from pathlib import Path

import numpy as np
import pandas as pd
import pyarrow as pa
import pyarrow.parquet as pq
import pytest
from hypothesis import given, settings
from hypothesis import strategies as some

from builders import Builder, collar_that_is_called
from hedgerow.errors import PlaceError
from hedgerow.events import EventLog, read_log, read_logs, write_logs
from hedgerow.events.store import write_atomically
from random_logs import random_log_builder


def strange_floats(log: EventLog) -> EventLog:
    """The log with every kind of float that a careless store would change."""
    events = np.array(log.events)
    payload = np.array([0x7FF8000000000123], dtype=np.uint64).view(np.float64)[0]
    events["volatility"][:6] = [np.nan, payload, -0.0, 0.0, np.inf, 5e-324]
    return EventLog(log.meta, events, log.terms, log.days, log.marks)


@settings(max_examples=15, deadline=None)
@given(some.integers(0, 10**6))
def test_random_logs_come_back_bit_for_bit(tmp_path_factory: pytest.TempPathFactory, seed: int) -> None:
    """Compares every field of every record written and read again, bit for bit."""
    path = tmp_path_factory.mktemp("log") / "events.parquet"
    log = random_log_builder(seed).log()
    write_logs(path, [log])
    assert read_log(path).same_as(log)


def test_strange_floats_survive(tmp_path: Path) -> None:
    """Compares a NaN with a payload, signed zeros, infinity and the smallest number with what is read."""
    log = strange_floats(collar_that_is_called().log())
    write_logs(tmp_path / "log.parquet", [log])
    assert read_log(tmp_path / "log.parquet").same_as(log)


def test_same_bytes_every_time(tmp_path: Path) -> None:
    """Compares the digests of two files of the same logs, and of one that differs in a cent."""
    logs = [collar_that_is_called("one").log(), collar_that_is_called("two").log()]
    digests = []
    for name in ("a", "b"):
        write_logs(tmp_path / name, logs)
        digests.append(hashlib.sha256((tmp_path / name).read_bytes()).hexdigest())
    assert digests[0] == digests[1]
    write_logs(tmp_path / "c", logs[:1])
    assert hashlib.sha256((tmp_path / "c").read_bytes()).hexdigest() != digests[0]


def test_several_variants_in_one_file(tmp_path: Path) -> None:
    """Compares three variants of one file, one of them only a deposit, with what was written."""
    empty = Builder(variant="never traded")
    empty.night()
    logs = [collar_that_is_called("one week").log(), empty.log(), random_log_builder(5).log()]
    logs[2] = EventLog(
        type(logs[2].meta).from_dict({**logs[2].meta.as_dict(), "variant": "random"}),
        logs[2].events,
        logs[2].terms,
        logs[2].days,
        logs[2].marks,
    )
    path = tmp_path / "events.parquet"
    write_logs(path, logs)
    for wrote, read in zip(logs, read_logs(path), strict=True):
        assert read.same_as(wrote)
    assert read_log(path, "never traded").events.size == 1
    with pytest.raises(PlaceError, match=r"no variant `two weeks`.*`one week`, `never traded`, `random`"):
        read_log(path, "two weeks")
    with pytest.raises(PlaceError, match="no variant was named"):
        read_log(path)


def test_many_row_groups(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    """Compares a log written in groups of three rows with the one written in one."""
    monkeypatch.setattr("hedgerow.events.store.ROWS_A_GROUP", 3)
    log = random_log_builder(11).log()
    write_logs(tmp_path / "log.parquet", [log])
    assert pq.ParquetFile(tmp_path / "log.parquet").num_row_groups > 5
    assert read_log(tmp_path / "log.parquet").same_as(log)


def test_anyone_can_read_the_words(tmp_path: Path) -> None:
    """Compares the file as any Parquet reader sees it with the story: words, dates, a variant column."""
    path = tmp_path / "events.parquet"
    write_logs(path, [collar_that_is_called().log()])
    frame = pd.read_parquet(path)
    events = frame[frame["table"] == "events"]
    assert events["kind"].to_list()[:4] == ["deposit", "opened", "shares", "leg"]
    assert set(events["variant"]) == {"one week"}
    assert events["cash"].sum() == pytest.approx(100_291.40)
    assert str(events["date"].iloc[3]) == "2011-01-04"
    assert frame.loc[frame["table"] == "terms", "best_gain"].to_list() == [270.0]


def test_names_must_differ(tmp_path: Path) -> None:
    """Negative control: two logs of one variant name."""
    log = collar_that_is_called().log()
    with pytest.raises(ValueError, match="different variant names"):
        write_logs(tmp_path / "log.parquet", [log, log])


@pytest.mark.parametrize("kind", ["missing", "text", "other parquet", "folder", "later format"])
def test_what_is_no_log_is_refused(tmp_path: Path, kind: str) -> None:
    """Negative control: a file that is missing, not Parquet, not a log, a folder, or of a later format."""
    path = tmp_path / "events.parquet"
    if kind == "text":
        path.write_text("symbol,date\n")
    if kind == "other parquet":
        pq.write_table(pa.table({"a": [1]}), path)
    if kind == "folder":
        path.mkdir()
    if kind == "later format":
        schema = pa.schema([("a", pa.int64())], metadata={b"hedgerow.log": b'{"format": 99}'})
        pq.write_table(pa.table({"a": [1]}, schema=schema), path)
    with pytest.raises(PlaceError, match="this event log cannot be read"):
        read_logs(path)


def test_nothing_is_left_of_a_failed_write(tmp_path: Path) -> None:
    """Compares the folder after a write that broke in the middle with the folder before it."""
    path = tmp_path / "log.parquet"
    path.write_text("the old one")

    def half(part: Path) -> None:
        part.write_text("half")
        raise OSError(28, "No space left on device")

    with pytest.raises(PlaceError, match="No space left on device"):
        write_atomically(path, half)
    assert [one.name for one in tmp_path.iterdir()] == ["log.parquet"]
    assert path.read_text() == "the old one"
    with pytest.raises(PlaceError, match="could not be written"):
        write_logs(tmp_path / "nowhere" / "log.parquet", [])
