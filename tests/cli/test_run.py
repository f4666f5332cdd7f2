"""`hedgerow run`: what it prints and leaves behind, and how it ends."""

from __future__ import annotations

import json
import os
import signal
import subprocess
import sys
import time
from pathlib import Path

import pandas as pd
import pytest
import yaml

import hedgerow as hr
from cli_runs import SESSIONS, WEIGHED, Runner, Said
from hedgerow import __version__
from hedgerow.report.background import BACKGROUND_FILES
from hedgerow.report.build import PAGE
from hedgerow.report.files import RUN_FILES, STRESS_FILES

WIDTH = 100
ALWAYS = (*RUN_FILES, *BACKGROUND_FILES, PAGE)
"""What every run leaves."""


def test_a_study_is_shown_and_its_ledgers_left(hedgerow: Runner) -> None:
    """Title, question, both variants, the yardstick, the cautions; every file of a run below runs/."""
    said = hedgerow("run", "study.yaml")
    assert (said.code, said.err) == (0, "")
    for words in (
        "Short or long",
        "Which of the two?",
        "buy and hold",
        "Before you rely on this",
        "Hypothetical",
    ):
        assert words in said.out
    assert f"2015-01-05 to 2015-06-19, {SESSIONS} sessions" in said.out
    assert said.out.endswith(
        "Every trade and every cent: runs/short-or-long\nThe report: runs/short-or-long/report.html\n"
    )
    written = {path.name for path in Path("runs/short-or-long").iterdir()}
    assert written == set(ALWAYS)


def test_it_fits_the_screen_and_is_plain_when_piped(hedgerow: Runner) -> None:
    """At most a hundred columns, no control characters; evidence and verdict included."""
    hedgerow.write(study__yaml=WEIGHED)
    out = hedgerow("run", "study.yaml").out
    assert max(map(len, out.splitlines())) <= WIDTH
    assert "\x1b" not in out
    assert "\r" not in out


def test_what_is_left_is_what_the_library_gives(hedgerow: Runner) -> None:
    """trades.csv beside the trades of `run_study` on the same file."""
    hedgerow("run", "study.yaml", "--out", "here", "--quiet")
    result = hr.run_study(hr.load_study("study.yaml"))
    expected = pd.concat([one.trades for one in result.results], ignore_index=True)
    left = pd.read_csv("here/trades.csv")
    assert len(left) == len(expected) > 20
    assert left["pnl"].tolist() == pytest.approx(expected["pnl"].tolist())
    assert set(left["variant"]) == {"short", "long"}


def test_the_record_repeats_the_run(hedgerow: Runner) -> None:
    """run.yaml holds the study as it was resolved; run again from it, the ledgers are the same bytes."""
    hedgerow("run", "study.yaml", "--out", "one", "--quiet")
    record = yaml.safe_load(Path("one/run.yaml").read_text(encoding="utf-8"))
    assert record["data"]["fingerprint"] == hr.load_market("prices.csv").fingerprint
    assert set(record["versions"]) >= {"hedgerow", "numpy", "numba", "python"}
    hedgerow.write(again__yaml=yaml.safe_dump(record["study"], sort_keys=False))
    assert hedgerow("run", "again.yaml", "--out", "two", "--quiet").code == 0
    for name in ("trades.csv", "events.parquet", "summary.json"):
        assert Path("one", name).read_bytes() == Path("two", name).read_bytes(), name


def test_json_for_programs(hedgerow: Runner) -> None:
    """One valid object and nothing else; its variants are those of summary.json."""
    said = hedgerow("run", "study.yaml", "--json")
    told = json.loads(said.out, parse_constant=pytest.fail)
    left = json.loads(Path(told["folder"], "summary.json").read_text(encoding="utf-8"))
    assert told["variants"] == left["variants"]
    assert list(told["variants"]) == ["short", "long"]
    assert any("Hypothetical" in caution for caution in told["cautions"])


def test_a_run_ends_with_a_verdict_that_is_in_the_summary(hedgerow: Runner) -> None:
    """Below the cautions on the screen; the same in summary.json and --json; the stress in two files."""
    hedgerow.write(study__yaml=WEIGHED)
    said = hedgerow("run", "study.yaml", "--out", "mine")
    assert {path.name for path in Path("mine").iterdir()} == {*ALWAYS, *STRESS_FILES}
    left = json.loads(Path("mine/summary.json").read_text(encoding="utf-8"))["evidence"]
    words = " ".join(said.out.split())
    verdict = " ".join(left["verdict"]["paragraph"].split())
    assert words.index("Before you rely on this") < words.index(verdict)
    assert words.endswith(f"{verdict} Every trade and every cent: mine The report: mine/report.html")
    told = json.loads(hedgerow("run", "study.yaml", "--out", "other", "--json").out)
    assert told["evidence"] == left
    frame = pd.read_parquet("mine/stress.parquet")
    pd.testing.assert_frame_equal(frame, pd.read_csv("mine/stress.csv"), check_dtype=False)
    assert set(frame["first"]) == {"short", "long"}
    assert {0.8, 1.4} <= set(frame["ratio"])


def test_evidence_none_is_quick_and_leaves_none(hedgerow: Runner) -> None:
    """No verdict on the screen, no part of the summary, no files of a stress."""
    said = hedgerow("run", "study.yaml", "--out", "mine")
    assert said.code == 0
    assert "Verdict" not in said.out
    assert "evidence" not in json.loads(Path("mine/summary.json").read_text(encoding="utf-8"))
    assert {path.name for path in Path("mine").iterdir()} == set(ALWAYS)


def test_a_short_record_has_no_verdict_and_says_so(hedgerow: Runner) -> None:
    """Fifty sessions: one line in its place, the rest as ever."""
    ends = "window: {from: 2015-04-01, to: 2015-06-08}\n"
    hedgerow.write(study__yaml=WEIGHED + ends)
    said = hedgerow("run", "study.yaml")
    assert said.code == 0
    assert "No verdict: the record is too short" in said.out
    assert "evidence" not in json.loads(Path("runs/short-or-long/summary.json").read_text(encoding="utf-8"))


def test_tries_are_counted_across_studies_of_a_folder(hedgerow: Runner) -> None:
    """The same again is not new; another is; the caution counts all whose ledgers lie side by side."""
    hedgerow.write(study__yaml=WEIGHED)
    first = hedgerow("run", "study.yaml", "--out", "one")
    assert "2 variants were tried" in first.out
    assert "2 variants in this study;" in " ".join(first.out.split())
    assert "2 variants were tried" in hedgerow("run", "study.yaml", "--out", "two").out
    more = WEIGHED.replace("  short: {}", "  shorter: {legs.call.expiry.days: 14}")
    hedgerow.write(more__yaml=more)
    third = hedgerow("run", "more.yaml", "--out", "three")
    assert "3 variants were tried" in third.out
    assert "2 variants in this study, 3 on these prices in all" in " ".join(third.out.split())
    assert not Path("runs").exists()
    assert len(Path("tries.jsonl").read_text(encoding="utf-8").splitlines()) == 3


def test_tries_that_cannot_be_recorded_are_told_and_the_run_stands(hedgerow: Runner) -> None:
    """Where the record is a folder: one line on the error stream, exit 0, the ledgers are there."""
    Path("tries.jsonl").mkdir()
    said = hedgerow("run", "study.yaml", "--out", "mine", "--quiet")
    assert (said.code, said.out, len(said.told)) == (0, "mine\n", 1)
    assert "later runs count too few" in said.err
    assert Path("mine/run.yaml").is_file()


def test_a_sample_is_named_in_place_of_a_folder(hedgerow: Runner, monkeypatch: pytest.MonkeyPatch) -> None:
    """By --market and in a study whose record repeats it; without the package it is said what to install."""
    text = "name: Index\nmarket: sample:sp500\nwindow: {from: 2018-01-02}\nstrategy: {name: Shares}\n"
    hedgerow.write(index__yaml=text + "account: {cash: 1000000}\nevidence: none\n")
    assert hedgerow("run", "index.yaml", "--out", "mine", "--quiet").code == 0
    record = yaml.safe_load(Path("mine/run.yaml").read_text(encoding="utf-8"))
    assert record["study"]["market"] == "sample:sp500"
    assert hedgerow("run", "mine/run.yaml", "--out", "again", "--quiet").code == 0
    assert Path("mine/events.parquet").read_bytes() == Path("again/events.parquet").read_bytes()
    monkeypatch.setattr("importlib.util.find_spec", lambda name: None)
    said = hedgerow("run", "rule.yaml", "--market", "sample:five-stocks")
    assert (said.code, said.out, len(said.told)) == (2, "", 1)
    assert "pip install 'hedgerow[samples]'" in said.err


def test_quiet_prints_only_the_folder(hedgerow: Runner) -> None:
    """For scripts."""
    assert hedgerow("run", "study.yaml", "--quiet", "--out", "mine") == Said(0, "mine\n", "")


def test_without_a_place_every_run_gets_its_own(hedgerow: Runner) -> None:
    """The second run of a study is numbered."""
    assert hedgerow("run", "study.yaml", "--quiet").out == "runs/short-or-long\n"
    assert hedgerow("run", "study.yaml", "--quiet").out == "runs/short-or-long-2\n"


def test_a_finished_run_is_not_overwritten_unless_told(hedgerow: Runner) -> None:
    """Refused with a way out before anything is walked; --replace puts the new run there."""
    hedgerow("run", "study.yaml", "--quiet", "--out", "mine")
    before = Path("mine/run.yaml").read_bytes()
    said = hedgerow("run", "rule.yaml", "--market", "prices.csv", "--out", "mine")
    assert (said.code, said.out, len(said.told)) == (2, "", 1)
    assert "a finished run stands there" in said.err
    assert "--replace" in said.err
    assert Path("mine/run.yaml").read_bytes() == before
    assert (
        hedgerow("run", "rule.yaml", "--market", "prices.csv", "--out", "mine", "--replace", "--quiet").code
        == 0
    )
    assert Path("mine/run.yaml").read_bytes() != before
    assert not [name for name in hedgerow.files() if name.startswith(".")]


def test_other_files_are_never_overwritten(hedgerow: Runner) -> None:
    """A folder that holds no run is left alone, with --replace too."""
    Path("mine").mkdir()
    Path("mine/letter.txt").write_text("dear", encoding="utf-8")
    said = hedgerow("run", "study.yaml", "--out", "mine", "--replace")
    assert said.code == 2
    assert "holds other files" in said.err
    assert [path.name for path in Path("mine").iterdir()] == ["letter.txt"]


def test_a_strategy_needs_a_market(hedgerow: Runner) -> None:
    """With one it runs under its own name; without one it is told what to add; a study names its own."""
    said = hedgerow("run", "rule.yaml", "--market", "prices.csv")
    assert said.code == 0
    assert said.out.startswith("Small collar\n")
    bare = hedgerow("run", "rule.yaml")
    assert (bare.code, len(bare.told)) == (2, 1)
    assert "add --market FOLDER" in bare.err
    both = hedgerow("run", "study.yaml", "--market", "prices.csv")
    assert (both.code, len(both.told)) == (2, 1)
    assert "leave --market out" in both.err


@pytest.mark.parametrize("workers", ["1", "3"])
def test_the_number_of_threads_changes_nothing(hedgerow: Runner, workers: str) -> None:
    """The same bytes as with two."""
    hedgerow("run", "study.yaml", "--quiet", "--out", "two")
    hedgerow("run", "study.yaml", "--quiet", "--out", "other", "--workers", workers)
    assert Path("two/events.parquet").read_bytes() == Path("other/events.parquet").read_bytes()


def test_no_yardstick_when_none_is_wanted(hedgerow: Runner) -> None:
    """`yardstick: none` leaves its column out."""
    hedgerow.write(study__yaml=Path("study.yaml").read_text(encoding="utf-8") + "yardstick: none\n")
    said = hedgerow("run", "study.yaml")
    assert said.code == 0
    assert "buy and hold" not in said.out


def test_warnings_of_the_data_are_counted(hedgerow: Runner) -> None:
    """A bar with its high below its low is a warning, and the command that lists it is named."""
    rows = Path("prices.csv").read_text(encoding="utf-8").splitlines()
    cells = rows[40].split(",")
    rows[40] = ",".join([*cells[:3], cells[4], cells[3], *cells[5:]])
    hedgerow.write(prices__csv="\n".join(rows) + "\n")
    said = hedgerow("run", "study.yaml")
    assert said.code == 0
    assert "The data check has 1 warning: hedgerow data check prices.csv" in said.out


def test_a_place_with_a_space_is_quoted_in_a_command(hedgerow: Runner) -> None:
    """So that the command shown can be given as it stands."""
    rows = Path("prices.csv").read_text(encoding="utf-8").splitlines()
    cells = rows[40].split(",")
    rows[40] = ",".join([*cells[:3], cells[4], cells[3], *cells[5:]])
    Path("my prices.csv").write_text("\n".join(rows) + "\n", encoding="utf-8")
    study = Path("study.yaml").read_text(encoding="utf-8").replace("prices.csv", "my prices.csv")
    hedgerow.write(study__yaml=study)
    assert "hedgerow data check 'my prices.csv'" in hedgerow("run", "study.yaml").out


@pytest.mark.parametrize("name", ["", " "])
def test_an_empty_name_is_no_folder(hedgerow: Runner, name: str) -> None:
    """It would mean the current folder: refused before anything is run or written."""
    before = hedgerow.files()
    said = hedgerow("run", "study.yaml", "--out", name)
    assert said.code == 2
    assert "an empty name is no folder" in " ".join(said.err.replace("│", " ").split())
    assert hedgerow.files() == before


def test_the_version_and_no_words() -> None:
    """--version says it; no words at all show the help."""
    command = [sys.executable, "-c", "from hedgerow.cli.main import main; main()"]
    done = subprocess.run([*command, "--version"], capture_output=True, text=True, check=True)
    assert done.stdout.strip() == __version__
    bare = subprocess.run(command, capture_output=True, text=True, check=False)
    assert bare.returncode in (0, 2)
    assert "run" in bare.stdout + bare.stderr


def test_help_loads_nothing_heavy() -> None:
    """Neither what compiles, reads or computes nor the models of the words are imported for --help."""
    code = (
        "import sys; sys.argv = ['hedgerow', '--help']\n"
        "from hedgerow.cli.main import main\n"
        "try:\n    main()\nexcept SystemExit: pass\n"
        "heavy = {'numba', 'pandas', 'pydantic', 'numpy', 'pyarrow', 'scipy', 'yaml'}\n"
        "print(sorted(heavy & set(sys.modules)))"
    )
    done = subprocess.run([sys.executable, "-c", code], capture_output=True, text=True, check=True)
    assert done.stdout.splitlines()[-1] == "[]"


def test_a_reader_that_leaves_is_no_error(hedgerow: Runner) -> None:
    """`hedgerow run ... | head -1`: nothing on the error stream, the ledgers are there."""
    code = "from hedgerow.cli.main import main; main()"
    with subprocess.Popen(
        [sys.executable, "-c", code, "run", "study.yaml", "--out", "mine"],
        stdout=subprocess.PIPE,
        stderr=subprocess.PIPE,
        text=True,
    ) as running:
        assert running.stdout is not None
        assert running.stderr is not None
        running.stdout.close()
        err = running.stderr.read()
    assert err == ""
    assert Path("mine/run.yaml").is_file()
    assert hedgerow.folder == Path.cwd()


@pytest.mark.skipif(not hasattr(os, "mkfifo"), reason="signals to processes are tried on POSIX")
@pytest.mark.parametrize("thread", ["is", "is not"])
def test_stopped_in_the_middle(hedgerow: Runner, thread: str) -> None:
    """Ctrl-C while the main thread walks, or others do: one line, exit code 130, nothing written."""
    wait = (
        "import threading, time, hedgerow.walk.run as at\n"
        "from hedgerow.cli.main import main\n"
        "whole = at._step\n"
        "def slow(*given):\n"
        f"    if threading.current_thread() {thread} threading.main_thread():\n"
        "        print('walking', flush=True)\n"
        "        time.sleep(0.2)\n"
        "    return whole(*given)\n"
        "at._step, at.CHUNK_SESSIONS = slow, 2\n"
        "main()"
    )
    before = hedgerow.files()
    with subprocess.Popen(
        [sys.executable, "-c", wait, "run", "study.yaml", "--out", "mine/below"],
        stdout=subprocess.PIPE,
        stderr=subprocess.PIPE,
        text=True,
        preexec_fn=lambda: signal.signal(signal.SIGINT, signal.default_int_handler),
    ) as running:
        assert running.stdout is not None
        assert running.stderr is not None
        assert running.stdout.readline() == "walking\n"
        running.send_signal(signal.SIGINT)
        begun = time.monotonic()
        err = running.stderr.read()
        assert running.wait() == 130
    assert time.monotonic() - begun < 10
    assert err == "Stopped by the keyboard: nothing was left half-written.\n"
    assert hedgerow.files() == before


def test_a_report_is_made_again_from_its_folder(hedgerow: Runner) -> None:
    """The same bytes as the run wrote; without one when told so; a page of two runs where --out says."""
    hedgerow("run", "study.yaml", "--out", "mine", "--quiet")
    page = Path("mine/report.html")
    first = page.read_bytes()
    page.unlink()
    again = hedgerow("report", "mine")
    assert (again.code, again.out, again.err) == (0, "mine/report.html\n", "")
    assert page.read_bytes() == first
    hedgerow("run", "study.yaml", "--out", "bare", "--quiet", "--no-report")
    assert not Path("bare/report.html").exists()
    both = hedgerow("report", "mine", "bare", "--out", "both.html")
    assert (both.code, both.out) == (0, "both.html\n")
    assert "Short or long: short (2)" in Path("both.html").read_text(encoding="utf-8")


def test_a_report_of_what_is_no_run_is_refused(hedgerow: Runner) -> None:
    """No folder, a folder of something else, and --out beside one run: a sentence each, exit code 2."""
    hedgerow("run", "study.yaml", "--out", "mine", "--quiet")
    Path("other").mkdir()
    for words, told in (
        (("nowhere",), "no finished run lies there"),
        (("other",), "no finished run lies there"),
        (("mine", "--out", "x.html"), "--out was given too"),
    ):
        said = hedgerow("report", *words)
        assert (said.code, said.out) == (2, "")
        assert told in said.err


def test_a_repeat_on_other_prices_says_so_first(hedgerow: Runner) -> None:
    """On the same prices nothing is said; one close changed, and it is told aside, the run being made."""
    assert hedgerow("run", "study.yaml", "--out", "one", "--quiet", "--no-report").code == 0
    same = hedgerow("run", "one/run.yaml", "--out", "two", "--quiet", "--no-report")
    assert (same.code, same.err) == (0, "")
    prices = pd.read_csv("prices.csv")
    prices.loc[50, "close"] = prices.loc[50, "low"]
    prices.to_csv("prices.csv", index=False)
    other = hedgerow("run", "one/run.yaml", "--out", "three", "--quiet", "--no-report")
    assert other.code == 0
    assert other.err.startswith("one/run.yaml: these are not the prices of the run that is repeated")


def test_the_first_warning_about_the_data_stands_on_top(hedgerow: Runner) -> None:
    """A close that halves without a recorded split is named, with its symbol, before any figure."""
    prices = pd.read_csv("prices.csv")
    name = prices["symbol"].iloc[0]
    late = (prices["symbol"] == name) & (prices.groupby("symbol").cumcount() >= 60)
    prices.loc[late, ["open", "high", "low", "close"]] /= 2.0
    prices.to_csv("prices.csv", index=False)
    said = hedgerow("run", "study.yaml", "--no-report")
    assert said.code == 0
    assert said.out.startswith("Mind the data: ")
    assert name in said.out.splitlines()[0]
