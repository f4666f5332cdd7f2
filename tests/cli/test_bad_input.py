"""What people get wrong, through the command: a message a fault, its place, no traceback, nothing written."""

from __future__ import annotations

import errno
import json
import os
import re
import subprocess
import sys
from pathlib import Path
from typing import Any

import numpy as np
import pytest

import hedgerow.report.files
from cli_runs import RULE, STUDY, Runner, Said
from price_tables import walk_frame

ALIAS_BOMB = "a: &a [x,x,x,x]\n" + "".join(
    f"{name}: &{name} [*{before},*{before},*{before},*{before}]\n"
    for before, name in zip("abcdefgh", "bcdefghi", strict=True)
)


def refused(hedgerow: Runner, *words: str) -> list[str]:
    """The messages of a command that must be refused, having written nothing."""
    before = hedgerow.files()
    said = hedgerow("run", *words)
    assert said.code == 2, said
    assert said.out == ""
    assert "Traceback" not in said.err
    assert hedgerow.files() == before
    assert all(len(line) > 20 for line in said.told)
    return said.told


def changed(hedgerow: Runner, name: str, old: str, new: str) -> None:
    """Change a file's text; what is replaced must stand in it."""
    path = hedgerow.folder / name
    text = path.read_text(encoding="utf-8")
    assert old in text
    path.write_text(text.replace(old, new), encoding="utf-8")


def lines_of(hedgerow: Runner) -> list[str]:
    """The lines of prices.csv."""
    return (hedgerow.folder / "prices.csv").read_text(encoding="utf-8").splitlines()


def test_a_file_that_is_not_there(hedgerow: Runner) -> None:
    """The study, its strategy, its market: each named, with line and column where a file names it."""
    (line,) = refused(hedgerow, "no.yaml")
    assert line.startswith("no.yaml: there is no such file")
    changed(hedgerow, "study.yaml", "rule.yaml", "rules.yaml")
    changed(hedgerow, "study.yaml", "prices.csv", "price.csv")
    told = refused(hedgerow, "study.yaml")
    assert told[0].startswith("study.yaml:3:9: `market` is `price.csv`, and nothing is there")
    assert told[1].startswith("study.yaml:6:11: `strategy` is `rules.yaml`, and no file is there")
    (line,) = refused(hedgerow, "rule.yaml", "--market", "elsewhere")
    assert "elsewhere" in line


@pytest.mark.parametrize("name", ["study.yaml", "rule.yaml", "prices.csv"])
@pytest.mark.parametrize(
    ("content", "words"),
    [
        (b"", ""),
        (bytes(range(256)) * 9, "not a text file"),
        ("name: Größe\n".encode("latin-1"), "not UTF-8 text"),
    ],
)
def test_empty_binary_and_wrongly_encoded_files(
    hedgerow: Runner, name: str, content: bytes, words: str
) -> None:
    """One message that names the file; of a wrong encoding also the line."""
    (hedgerow.folder / name).write_bytes(content)
    told = refused(hedgerow, "study.yaml")
    assert len(told) == 1
    assert told[0].startswith(name)
    assert words in told[0]
    if "UTF-8" in words:
        assert re.match(rf"{name}:1:\d+: ", told[0])


def test_a_date_twice(hedgerow: Runner) -> None:
    """Two rows of one symbol and day that differ: which to believe is not guessed."""
    rows = lines_of(hedgerow)
    again = rows[5].split(",")
    again[5] = f"{float(again[5]) - 0.01:.2f}"
    hedgerow.write(prices__csv="\n".join([*rows, ",".join(again)]) + "\n")
    (line,) = refused(hedgerow, "study.yaml")
    assert line.startswith(f"prices.csv:{len(rows) + 1}: ")
    assert again[1] in line


def test_unsorted_dates_are_sorted(hedgerow: Runner) -> None:
    """No fault: rows in any order are the same market and give the same bytes."""
    hedgerow("run", "study.yaml", "--quiet", "--out", "one")
    head, *rows = lines_of(hedgerow)
    mixed = np.random.default_rng(4).permutation(rows)
    hedgerow.write(prices__csv="\n".join([head, *mixed]) + "\n")
    assert hedgerow("run", "study.yaml", "--quiet", "--out", "two").code == 0
    assert Path("one/events.parquet").read_bytes() == Path("two/events.parquet").read_bytes()


def test_text_among_prices(hedgerow: Runner) -> None:
    """Every cell that is no number, each with its line, in one pass."""
    rows = lines_of(hedgerow)
    for at, word in ((9, "n/m"), (30, "12,5")):
        cells = rows[at].split(",")
        rows[at] = ",".join([*cells[:2], f'"{word}"', *cells[3:]])
    hedgerow.write(prices__csv="\n".join(rows) + "\n")
    told = refused(hedgerow, "study.yaml")
    assert [line.split(" ")[0] for line in told] == ["prices.csv:10:", "prices.csv:31:"]
    assert "`n/m`" in told[0]


def test_a_window_outside_the_data(hedgerow: Runner) -> None:
    """Both ends and an unknown symbol in one pass, each with line and column and what there is."""
    extra = "window: {from: 2014-12-31, to: 2031-01-01}\nsymbols: [A, BB]\n"
    hedgerow.write(study__yaml=STUDY + extra)
    told = refused(hedgerow, "study.yaml")
    assert told[0].startswith(
        "study.yaml:12:14: `symbols.2` is `BB`, which is no symbol of the market; the market has A, B"
    )
    assert told[1].startswith("study.yaml:11:16: `window.from` is 2014-12-31, which lies outside the data")
    assert told[2].startswith("study.yaml:11:32: `window.to` is 2031-01-01, which lies outside the data")
    assert "the data hold 2015-01-05 to 2015-06-19" in told[1]


@pytest.mark.parametrize(
    ("window", "words"),
    [
        ("{from: 2015-02-30}", "which is no such date"),
        ("{from: 2015-03-07, to: 2015-03-08}", "holds no session"),
        ("{from: 2015-05-02, to: 2015-03-02}", "before `from`"),
    ],
)
def test_windows_that_are_none(hedgerow: Runner, window: str, words: str) -> None:
    """A day that is not in the calendar, a weekend, an end before its beginning."""
    hedgerow.write(study__yaml=STUDY + f"window: {window}\n")
    (line,) = refused(hedgerow, "study.yaml")
    assert line.startswith("study.yaml:11:")
    assert words in line


def test_no_symbol_is_left(hedgerow: Runner) -> None:
    """The only symbol asked for has no price in the window; an empty list of symbols is none."""
    frame = walk_frame("AB", 120)
    frame[(frame["symbol"] == "A") | (frame["date"] < "2015-02-01")].to_csv("prices.csv", index=False)
    hedgerow.write(study__yaml=STUDY + "symbols: [B]\nwindow: {from: 2015-03-02}\n")
    (line,) = refused(hedgerow, "study.yaml")
    assert line.startswith("study.yaml:11:10: `symbols` leaves no symbol with a price in the window")
    hedgerow.write(study__yaml=STUDY + "symbols: []\n")
    (line,) = refused(hedgerow, "study.yaml")
    assert "allowed: `all`, or a list of symbols" in line


@pytest.mark.parametrize(
    ("old", "new", "words"),
    [
        ("{days: 7, listed: weekly}", "{days: 46, listed: quarterly}", "no listed expiry near"),
        ("from_spot: 0%, snap: up", "from_spot: 160%", "strike not listed"),
    ],
)
def test_what_is_not_listed_that_day(hedgerow: Runner, old: str, new: str, words: str) -> None:
    """Not refused: the entries are declined, counted, and the reason is told."""
    changed(hedgerow, "rule.yaml", old, new)
    changed(hedgerow, "study.yaml", "  long: {legs.call.expiry.days: 21}\n", "")
    said = hedgerow("run", "study.yaml")
    assert said.code == 0
    assert "Entries not made, and why" in said.out
    found = re.search(rf"short: .*{words}[ (]+(\d+)", " ".join(said.out.split()))
    assert found is not None, said.out
    assert int(found[1]) > 20


def test_capital_too_small_for_one_lot(hedgerow: Runner) -> None:
    """Not refused either: how many entries were declined, and why."""
    changed(hedgerow, "study.yaml", "cash: 100000", "cash: 1000")
    said = hedgerow("run", "study.yaml", "--json")
    assert said.code == 0
    summary = json.loads(said.out)["variants"]["short"]
    assert summary["positions"]["value"] == 0
    shown = hedgerow("run", "study.yaml")
    found = re.search(r"short: .*capital too small for one lot (\d+)", shown.out)
    assert found is not None
    assert int(found[1]) > 20


def test_an_alias_bomb(hedgerow: Runner) -> None:
    """Anchors and aliases are refused where they stand, in no time and without growing."""
    hedgerow.write(study__yaml=ALIAS_BOMB)
    told = refused(hedgerow, "study.yaml")
    assert told[0].startswith("study.yaml:1:4: the anchor &a")
    assert len(told) <= 60


def test_a_repeated_key(hedgerow: Runner) -> None:
    """The second one is pointed at, and the first named."""
    hedgerow.write(study__yaml=STUDY + "market: other.csv\n")
    (line,) = refused(hedgerow, "study.yaml")
    assert line.startswith("study.yaml:11:1: the key `market` stands a second time; the first is on line 3")


def test_text_that_looks_like_something_else(hedgerow: Runner) -> None:
    """`NO` is the symbol NO and `12:30` the text 12:30, not false and not 750."""
    frame = walk_frame("AB", 120)
    frame["symbol"] = frame["symbol"].replace({"B": "NO"})
    frame.to_csv("prices.csv", index=False, date_format="%Y-%m-%d")
    hedgerow.write(study__yaml=STUDY.replace("Short or long", "12:30") + "symbols: [NO]\n")
    said = hedgerow("run", "study.yaml", "--out", "mine")
    assert said.code == 0
    assert said.out.startswith("12:30\n")
    assert set(json.loads(said_symbols())) == {"NO"}
    hedgerow.write(study__yaml=STUDY.replace("100000", "12:30"))
    (line,) = refused(hedgerow, "study.yaml")
    assert line.startswith("study.yaml:4:17: `account.cash` is `12:30`")


def said_symbols() -> str:
    """The symbols traded in the run under `mine`, as JSON."""
    import pandas as pd

    return json.dumps(sorted(set(pd.read_csv("mine/trades.csv", keep_default_na=False)["symbol"])))


def test_a_percent_without_its_sign(hedgerow: Runner) -> None:
    """Both of them, and what to write instead."""
    hedgerow.write(rule__yaml=RULE.replace("0%", "0").replace("-5%", "-5"))
    told = refused(hedgerow, "rule.yaml", "--market", "prices.csv")
    assert len(told) == 2
    assert told[0].split(" ")[0].endswith("rule.yaml:3:77:")
    assert all("%" in line for line in told)


def test_unknown_words(hedgerow: Runner) -> None:
    """A signal, a word of the study and one of a variant, each with the nearest right word."""
    hedgerow.write(rule__yaml=RULE + "enter: {when: {signal: close_over_men, sessions: 20}}\n")
    hedgerow.write(study__yaml=STUDY.replace("account:", "acount:").replace("legs.call", "legs.cal"))
    told = "\n".join(refused(hedgerow, "study.yaml"))
    for place, word in (
        ("rule.yaml:5:24", "close_over_mean"),
        ("study.yaml:4:1", "account"),
        ("study.yaml:9:10", "call"),
    ):
        assert re.search(rf"{place}: .*did you mean `{word}`\?", told), told


def test_a_signal_of_a_symbol_that_is_not_there(hedgerow: Runner) -> None:
    """Known only once the market is read; still told with its line and column."""
    when = "enter: {when: {signal: close_over_mean, sessions: 20, of: INDEX}}\n"
    hedgerow.write(rule__yaml=RULE + when)
    (line,) = refused(hedgerow, "study.yaml")
    assert line.startswith("rule.yaml:5:59: ")
    assert "`INDEX` is no symbol of the market" in line
    (line,) = refused(hedgerow, "rule.yaml", "--market", "prices.csv")
    assert "rule.yaml:5:59: " in line


def test_an_observed_volatility_that_is_not_there(hedgerow: Runner) -> None:
    """A column that the prices do not have, and a symbol that is none."""
    changed(hedgerow, "study.yaml", "{blend: [{close: 21}]}", "{observed: column}")
    (line,) = refused(hedgerow, "study.yaml")
    assert line.startswith("study.yaml:5:34: `pricing.volatility.observed` ")
    changed(hedgerow, "study.yaml", "observed: column", "observed: VIXX")
    (line,) = refused(hedgerow, "study.yaml")
    assert "`VIXX` is no symbol of the market" in line


def test_several_files_at_once(hedgerow: Runner) -> None:
    """Faults of the study and of its strategy come together, file by file, line by line."""
    changed(hedgerow, "rule.yaml", "snap: up", "snap: upwards")
    changed(hedgerow, "rule.yaml", "days: 7", "days: week")
    changed(hedgerow, "study.yaml", "per_position: 1/2", "per_position: 3/2")
    told = refused(hedgerow, "study.yaml")
    assert sorted({line.split(":")[0] for line in told}) == ["rule.yaml", "study.yaml"]
    assert len(told) >= 3


@pytest.mark.parametrize("place", ["prices.csv", "prices.csv/below", "prices.csv/far/below"])
def test_a_place_that_cannot_be_written(hedgerow: Runner, place: str) -> None:
    """A file stands there, or above: said at once, before anything is walked."""
    (line,) = refused(hedgerow, "study.yaml", "--out", place)
    assert line.startswith(f"{place}: the run ")


@pytest.mark.skipif(not Path("/proc/self").is_dir(), reason="needs a folder in which nobody can write")
def test_a_folder_in_which_nobody_can_write(hedgerow: Runner) -> None:
    """Where the system takes no new files."""
    (line,) = refused(hedgerow, "study.yaml", "--out", "/proc/mine")
    assert line.startswith("/proc/mine: the run could not be written: ")


def full(*_: Any, **__: Any) -> None:
    """Stand in for a write to a full disk."""
    raise OSError(errno.ENOSPC, os.strerror(errno.ENOSPC))


@pytest.mark.parametrize("writer", ["write_logs", "write_frame", "move_in"])
def test_a_full_disk(hedgerow: Runner, monkeypatch: pytest.MonkeyPatch, writer: str) -> None:
    """At the first file, among the others, and at the last step: one message, nothing left, old runs kept."""
    assert hedgerow("run", "study.yaml", "--out", "mine", "--quiet").code == 0
    before = {name: (hedgerow.folder / name).stat().st_mtime_ns for name in hedgerow.files()}
    monkeypatch.setattr(hedgerow_files(), writer, full)
    (line,) = refused(hedgerow, "study.yaml", "--out", "mine", "--replace")
    assert line == "mine: the run could not be written: No space left on device; nothing was left behind"
    (line,) = refused(hedgerow, "study.yaml", "--out", "new/below")
    assert line.startswith("new/below: ")
    assert {name: (hedgerow.folder / name).stat().st_mtime_ns for name in hedgerow.files()} == before


def hedgerow_files() -> Any:
    """The module that writes the folder of a run."""
    return hedgerow.report.files


@pytest.mark.skipif(not Path("/dev/full").exists(), reason="needs a device that is always full")
def test_an_output_that_is_full(hedgerow: Runner) -> None:
    """What is printed cannot be: one line on the error stream, exit code 1."""
    command = [sys.executable, "-c", "from hedgerow.cli.main import main; main()", "rules", "words"]
    with Path("/dev/full").open("w") as nowhere:
        done = subprocess.run(command, stdout=nowhere, stderr=subprocess.PIPE, text=True, check=False)
    assert (done.returncode, done.stderr) == (
        1,
        "The output could not be written: No space left on device.\n",
    )
    assert hedgerow.folder.is_dir()


@pytest.mark.parametrize(
    "words", [("run",), ("run", "a.yaml", "--workers", "0"), ("walk",), ("run", "--frobnicate", "a")]
)
def test_wrong_words_on_the_command_line(hedgerow: Runner, words: tuple[str, ...]) -> None:
    """Usage, not a traceback; exit code 2."""
    said: Said = hedgerow(*words)
    assert said.code == 2
    assert said.out == ""
    assert "Usage" in said.err


@pytest.mark.parametrize(
    ("old", "new", "told"),
    [
        ("cash: 100000,", "cash: 100,000,", "a number is written without a separator of thousands"),
        (
            "market: prices.csv",
            "market: prices.csv\nsymbols: []",
            "`symbols` is an empty list; allowed: `all`",
        ),
        (
            "{blend: [{close: 21}]}",
            "{ratio: eleven}",
            "pricing.volatility.ratio: `eleven` is no plain number; allowed: a number from",
        ),
    ],
)
def test_the_message_names_what_was_meant(hedgerow: Runner, old: str, new: str, told: str) -> None:
    """A comma among thousands, a list of nothing, a word of the premiums by its whole path."""
    changed(hedgerow, "study.yaml", old, new)
    assert any(told in line for line in refused(hedgerow, "study.yaml"))


def test_a_table_of_prices_is_no_strategy(hedgerow: Runner) -> None:
    """It is told what it is not, and how prices are given."""
    (told,) = refused(hedgerow, "prices.csv")
    assert told.startswith("prices.csv: this is no file of words")
    assert "--market FILE" in told


def test_faults_of_an_earlier_run_are_told_with_their_place(hedgerow: Runner) -> None:
    """Edited by hand, its run.yaml is read like a study: file, line and column; other prices may be named."""
    assert hedgerow("run", "study.yaml", "--out", "one", "--quiet", "--no-report").code == 0
    changed(hedgerow, "one/run.yaml", "cash: 100000", "cash: abc")
    (told,) = refused(hedgerow, "one/run.yaml")
    assert re.match(r"one/run\.yaml:\d+:\d+: `account\.cash` is `abc`", told)
    changed(hedgerow, "one/run.yaml", "cash: abc", "cash: 100000")
    (hedgerow.folder / "prices.csv").rename(hedgerow.folder / "moved.csv")
    (told,) = refused(hedgerow, "one/run.yaml")
    assert "and nothing is there" in told
    again = hedgerow("run", "one/run.yaml", "--market", "moved.csv", "--out", "two", "--quiet", "--no-report")
    assert again.code == 0
    for name in ("trades.csv", "equity.parquet"):
        assert (hedgerow.folder / "two" / name).read_bytes() == (hedgerow.folder / "one" / name).read_bytes()


def test_the_ledger_for_people_holds_no_rounding_dust(hedgerow: Runner) -> None:
    """No number of trades.csv has more than twelve digits; the Parquet file keeps every bit."""
    assert hedgerow("run", "study.yaml", "--out", "one", "--quiet", "--no-report").code == 0
    text = (hedgerow.folder / "one" / "trades.csv").read_text(encoding="utf-8")
    assert all(len(number.replace(".", "").lstrip("0")) <= 12 for number in re.findall(r"\d*\.\d+", text))
