"""The folder of a run: whole or not at all, and safe to open."""

from __future__ import annotations

import csv
import json
import os
import subprocess
import sys
from pathlib import Path

import pandas as pd
import pytest
import yaml

from builders import Builder, collar_that_is_called
from hedgerow.errors import PlaceError
from hedgerow.events import read_logs
from hedgerow.evidence import summarise
from hedgerow.ledger import Ledger
from hedgerow.ledger.legs import LEG_COLUMNS
from hedgerow.ledger.positions import TRADE_COLUMNS
from hedgerow.report.files import RUN_FILES, STRESS_FILES, harmless, write_run
from hedgerow.report.place import OWN_FILES, check_place, part_of, sweep

RUN = {"name": "One week against three", "seed": 1, "variants": ["one week", "none"]}


def two_ledgers() -> list[Ledger]:
    """A called collar and an account that never traded."""
    none = Builder(variant="none")
    none.night()
    return [Ledger(collar_that_is_called().log()), Ledger(none.log())]


def write(folder: Path, **options: object) -> Path:
    """Write both ledgers to a folder."""
    ledgers = two_ledgers()
    return write_run(folder, ledgers, [summarise(one) for one in ledgers], RUN, **options)


def test_every_file_can_be_read_again(tmp_path: Path) -> None:
    """Compares every file of the folder with the ledgers that were written."""
    folder = write(tmp_path / "deep" / "run", extra={"report.html": "<p>é</p>", "x.bin": b"\x00"})
    names = sorted(path.name for path in folder.iterdir())
    assert names == sorted([*RUN_FILES, "report.html", "x.bin"])
    ledgers = two_ledgers()
    for ledger, log in zip(ledgers, read_logs(folder / "events.parquet"), strict=True):
        assert log.same_as(ledger.log)
    trades = pd.read_parquet(folder / "trades.parquet")
    assert list(trades.columns) == TRADE_COLUMNS
    pd.testing.assert_frame_equal(trades, ledgers[0].trades, check_dtype=False)
    legs = pd.read_parquet(folder / "legs.parquet")
    assert list(legs.columns) == LEG_COLUMNS
    assert legs["pnl"].to_list() == ledgers[0].legs["pnl"].to_list()
    equity = pd.read_parquet(folder / "equity.parquet")
    assert equity["variant"].value_counts().to_dict() == {"one week": 5, "none": 1}
    summary = json.loads((folder / "summary.json").read_text(encoding="utf-8"))
    assert summary["variants"]["one week"]["win_rate"] == {
        "value": 1.0,
        "unit": "fraction",
        "meaning": summary["variants"]["none"]["win_rate"]["meaning"],
    }
    assert yaml.safe_load((folder / "run.yaml").read_text(encoding="utf-8")) == RUN
    assert (folder / "report.html").read_text(encoding="utf-8") == "<p>é</p>"


def test_csv_says_the_same_as_parquet(tmp_path: Path) -> None:
    """Compares the CSV's row with the hand-worked trade: dates as days, numbers exact."""
    folder = write(tmp_path / "run")
    with (folder / "trades.csv").open(newline="", encoding="utf-8") as file:
        row = next(csv.DictReader(file))
    assert (row["opened"], row["closed"], row["outcome"]) == ("2011-01-04", "2011-01-07", "best gain")
    assert float(row["pnl"]) == 291.40
    assert row["variant"] == "one week"


def test_two_runs_write_the_same_bytes(tmp_path: Path) -> None:
    """Compares every file of two folders of the same ledgers byte by byte."""
    one, two = write(tmp_path / "one"), write(tmp_path / "two")
    for name in RUN_FILES:
        assert (one / name).read_bytes() == (two / name).read_bytes(), name


@pytest.mark.parametrize("start", ["=", "+", "-", "@", "\t", "\r"])
def test_no_cell_is_a_formula(start: str) -> None:
    """Compares text cells that a spreadsheet would run with the same behind an apostrophe; numbers stay."""
    frame = pd.DataFrame({"reason": [f"{start}cmd()", "plain"], "pnl": [-1.5, 2.0]})
    safe = harmless(frame)
    assert safe["reason"].to_list() == [f"'{start}cmd()", "plain"]
    assert safe["pnl"].to_list() == [-1.5, 2.0]
    assert frame["reason"].iloc[0] == f"{start}cmd()"


def test_formula_names_reach_the_csv_unarmed(tmp_path: Path) -> None:
    """Compares a variant named like a formula in the CSV (apostrophe) with the Parquet file (as it is)."""
    ledger = Ledger(collar_that_is_called("=1+1").log())
    folder = write_run(tmp_path / "run", [ledger], [summarise(ledger)], RUN)
    assert (folder / "trades.csv").read_text(encoding="utf-8").splitlines()[1].startswith("'=1+1,")
    assert pd.read_parquet(folder / "trades.parquet")["variant"].to_list() == ["=1+1"]


def test_a_finished_run_is_not_overwritten(tmp_path: Path) -> None:
    """Compares a second run in the same place: refused, then allowed when told; nothing else is left."""
    folder = write(tmp_path / "run", extra={"report.html": "<p>old</p>"})
    with pytest.raises(PlaceError, match="a finished run stands there"):
        write(folder)
    assert (folder / "report.html").exists()
    write(folder, replace=True)
    assert sorted(path.name for path in folder.iterdir()) == sorted(RUN_FILES)
    assert [path.name for path in tmp_path.iterdir()] == ["run"]


@pytest.mark.parametrize("name", ["note.txt", "mine/letter.txt", "shards/note.txt", "empty/"])
def test_a_run_with_something_of_others_in_it_is_not_replaced(tmp_path: Path, name: str) -> None:
    """A file or folder that no run makes is named, and it and the run stay to the byte."""
    folder = write(tmp_path / "run")
    before = (folder / "trades.csv").read_bytes()
    stranger = folder / name
    (stranger if name.endswith("/") else stranger.parent).mkdir(exist_ok=True)
    if not name.endswith("/"):
        stranger.write_text("mine", encoding="utf-8")
    with pytest.raises(PlaceError, match=rf"`{name.strip('/')}` beside it belongs to no run"):
        write(folder, replace=True)
    assert stranger.exists()
    assert (folder / "trades.csv").read_bytes() == before


def test_a_run_inside_a_run_is_refused(tmp_path: Path) -> None:
    """At any depth; the folder's name is told and nothing is made."""
    folder = write(tmp_path / "run")
    for inside in ("sub", "deep/below/sub"):
        with pytest.raises(PlaceError, match=r"/run is the folder of a finished run"):
            write(folder / inside)
    assert sorted(path.name for path in folder.iterdir()) == sorted(RUN_FILES)


def test_the_files_of_a_run_are_its_own() -> None:
    """Every file that is written is among those that may be deleted when a run is replaced."""
    assert {*RUN_FILES, *STRESS_FILES} <= set(OWN_FILES)


def test_a_place_that_was_taken_meanwhile_gives_way_to_the_next(tmp_path: Path) -> None:
    """Runs to the same names: each lies whole in a folder of its own, whatever stood there first."""
    names = [tmp_path / "run", tmp_path / "run-2", tmp_path / "run-3"]
    names[1].write_text("a file", encoding="utf-8")
    places = [write(names[0], others=iter(names[1:])) for _ in range(2)]
    assert places == [names[0], names[2]]
    for place in places:
        assert sorted(path.name for path in place.iterdir()) == sorted(RUN_FILES)
    assert len(list(tmp_path.iterdir())) == 3


def test_what_a_killed_run_left_is_swept(tmp_path: Path) -> None:
    """The part of a process that has ended goes with the next run; all other folders stay."""
    ended = subprocess.Popen([sys.executable, "-c", ""])
    ended.wait()
    mine = part_of(tmp_path / "other")
    dead = mine.with_name(mine.name.replace(str(os.getpid()), str(ended.pid)))
    foreign = dead.with_name(dead.name.replace(".other.", ".foreign."))
    elsewhere = tmp_path / f".other.another-machine.{ended.pid}.part"
    for folder in (mine, dead, foreign, elsewhere):
        folder.mkdir()
        (folder / "trades.csv").write_text("x", encoding="utf-8")
    (foreign / "letter.txt").write_text("mine", encoding="utf-8")
    sweep(tmp_path, OWN_FILES)
    assert {path.name for path in tmp_path.iterdir()} == {mine.name, foreign.name, elsewhere.name}
    dead.mkdir()
    write(tmp_path / "run")
    assert not dead.exists()


def test_other_places_are_refused(tmp_path: Path) -> None:
    """Negative control: a file, and a folder of other files even when told to replace; empty is fine."""
    (tmp_path / "file").write_text("x")
    with pytest.raises(PlaceError, match="a file of this name"):
        check_place(tmp_path / "file")
    (tmp_path / "home").mkdir()
    (tmp_path / "home" / "letter.txt").write_text("x")
    with pytest.raises(PlaceError, match="holds other files"):
        write(tmp_path / "home", replace=True)
    (tmp_path / "empty").mkdir()
    assert (write(tmp_path / "empty") / "run.yaml").is_file()


def test_a_place_below_a_file_is_refused(tmp_path: Path) -> None:
    """Negative control: the parent is a file, so no folder can be made; nothing is left behind."""
    (tmp_path / "file").write_text("x")
    with pytest.raises(PlaceError, match=r"could not be written"):
        write(tmp_path / "file" / "run")
    assert [path.name for path in tmp_path.iterdir()] == ["file"]


@pytest.mark.parametrize("standing", [False, True])
def test_a_write_that_breaks_leaves_the_place_as_it_was(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch, standing: bool
) -> None:
    """Compares the place after the disk filled up in the middle with the place before."""
    folder = tmp_path / "deep" / "run"
    if standing:
        write(folder)

    def full(*_: object, **__: object) -> None:
        raise OSError(28, "No space left on device")

    monkeypatch.setattr("hedgerow.report.files.write_frame", full)
    with pytest.raises(PlaceError, match="No space left on device"):
        write(folder, replace=True)
    if standing:
        assert sorted(path.name for path in folder.iterdir()) == sorted(RUN_FILES)
        assert [path.name for path in folder.parent.iterdir()] == ["run"]
    else:
        assert list(tmp_path.iterdir()) == []


def test_an_old_run_comes_back_when_the_move_fails(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    """Compares a run whose replacement could not be moved into place with itself."""
    folder = write(tmp_path / "run", extra={"report.html": "old"})
    real = os.replace

    def stubborn(source: Path, target: Path) -> None:
        if str(source).endswith(".part") and Path(target) == folder:
            raise OSError(5, "Input/output error")
        real(source, target)

    monkeypatch.setattr("os.replace", stubborn)
    with pytest.raises(PlaceError, match="Input/output error"):
        write(folder, replace=True)
    assert (folder / "report.html").read_text() == "old"
    assert [path.name for path in tmp_path.iterdir()] == ["run"]


def test_ctrl_c_leaves_nothing(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    """Compares the place after an interrupt in the middle of writing with an empty one."""

    def interrupted(*_: object, **__: object) -> None:
        raise KeyboardInterrupt

    monkeypatch.setattr("hedgerow.report.files.write_frame", interrupted)
    with pytest.raises(KeyboardInterrupt):
        write(tmp_path / "run")
    assert list(tmp_path.iterdir()) == []


FULL_DISK = """
import resource, sys
from pathlib import Path
sys.path[:0] = sys.argv[2:]
from test_files import write
from hedgerow.errors import PlaceError
resource.setrlimit(resource.RLIMIT_FSIZE, (2000, 2000))
try:
    write(Path(sys.argv[1]) / "run")
except PlaceError as error:
    print("refused:", error)
"""


@pytest.mark.skipif(sys.platform == "win32", reason="file size limits are of POSIX")
def test_a_real_limit_of_file_size_is_a_readable_refusal(tmp_path: Path) -> None:
    """Compares a process that may write only 2,000 bytes a file with one message and nothing left."""
    here = Path(__file__).parent
    engine = str(Path(sys.modules["hedgerow.report"].__file__ or "").parents[2])
    done = subprocess.run(
        [sys.executable, "-c", FULL_DISK, str(tmp_path), engine, str(here), str(here.parent)],
        capture_output=True,
        text=True,
        check=True,
    )
    assert "refused:" in done.stdout
    assert "could not be written: File too large" in done.stdout
    assert ".part" not in done.stdout
    assert list(tmp_path.iterdir()) == []
