"""`hedgerow run` on large studies, and `hedgerow look`: what is said, what is left, what a kill does."""

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

from cli_runs import Runner
from hedgerow.report import large_text

GRID = """\
name: Grid
question: Which one?
market: prices.csv
account: {cash: 100000, per_position: 1/2}
pricing: {volatility: {blend: [{close: 10}]}}
strategy: rule.yaml
grid:
  legs.call.expiry.days: [7, 14]
  legs.put.strike.from_spot: {from: -6%, to: -2%, step: 2%}
walk_forward: {choose: 30 sessions, judge: 15 sessions, gap: 5 sessions}
held_out: {from: 2015-05-15}
"""
MANY = """\
name: Many
market: prices.csv
account: {cash: 100000, per_position: 1/2}
pricing: {volatility: {blend: [{close: 10}]}}
strategy: rule.yaml
grid: {legs.put.strike.from_spot: {from: -50%, to: -0.1%, step: 0.1%}}
evidence: none
yardstick: none
"""


@pytest.fixture
def run(hedgerow: Runner) -> Runner:
    """The command in a folder with a grid of six variants."""
    hedgerow.write(grid__yaml=GRID, many__yaml=MANY)
    return hedgerow


def test_a_grid_is_shown_and_left(run: Runner) -> None:
    """Best ones, what is left of them, the record out of sample, cautions; the folder and no other."""
    said = run("run", "grid.yaml")
    assert (said.code, said.err) == (0, "")
    for words in (
        "6 variants, the whole grid (2 x 3)",
        "What the best one is worth",
        "Of 6 tries",
        "Against buy and hold",
        "Out of sample",
        "not looked at",
        "6 variants were tried",
        "Hypothetical",
    ):
        assert words in said.out, words
    assert max(map(len, said.out.splitlines())) <= 100
    assert {path.name for path in Path("runs").iterdir()} == {"grid", "tries.jsonl"}
    table = pd.read_csv("runs/grid/variants.csv")
    pd.testing.assert_frame_equal(table, pd.read_parquet("runs/grid/variants.parquet"))
    assert table["legs.put.strike.from_spot"].tolist() == [-0.06, -0.04, -0.02] * 2
    summary = json.loads(Path("runs/grid/summary.json").read_text(encoding="utf-8"))
    best = summary["grid"]["best"]["variant"]
    assert table["sharpe"].idxmax() + 1 == best
    (told,) = summary["variants"].values()
    assert told["account"]["sharpe"]["value"] == table["sharpe"].max()
    assert set(pd.read_parquet("runs/grid/walk_forward.parquet")["variant"]) <= set(range(7))


def test_the_record_repeats_it_byte_for_byte(run: Runner) -> None:
    """run.yaml of the folder, run again with another number of threads: shards, tables, findings."""
    assert run("run", "grid.yaml", "--out", "one", "--quiet").out == "one\n"
    assert run("run", "one/run.yaml", "--out", "two", "--quiet", "--workers", "1").code == 0
    one, two = bytes_of("one"), bytes_of("two")
    assert len(one) > 15
    assert {name for name in one if one[name] != two[name]} <= {
        "run.yaml"
    }  # the prices' path as it was given


def test_tries_are_counted_across_studies(run: Runner) -> None:
    """Six of a grid, then a grid of four of which two are the same: eight different ones on these prices."""
    run("run", "grid.yaml", "--quiet")
    run.write(more__yaml=GRID.replace("[7, 14]", "[7, 21]").replace("from: -6%", "from: -4%"))
    out = run("run", "more.yaml").out
    assert "4 variants, the whole grid (2 x 2)" in out
    assert "Of 8 tries (4 of them before, on these prices)" in " ".join(out.split())
    assert "8 variants were tried" in out
    assert "Of 8 tries" in " ".join(run("run", "more.yaml").out.split())


def test_json_for_programs(run: Runner) -> None:
    """One object: folder, best variant, findings, cautions."""
    told = json.loads(run("run", "grid.yaml", "--json").out, parse_constant=pytest.fail)
    assert set(told) == {"folder", "variants", "grid", "cautions"}
    assert told["grid"]["walk_forward"]["judged"]


def test_a_best_one_that_hardly_trades_is_marked(run: Runner, monkeypatch: pytest.MonkeyPatch) -> None:
    """With few positions, or little at work, it is told how many and how much; otherwise nothing is."""
    monkeypatch.setattr(large_text, "FEW_POSITIONS", 0)
    monkeypatch.setattr(large_text, "LITTLE_AT_WORK", 0.0)
    assert "HARDLY" not in run("run", "grid.yaml", "--out", "one").out
    table = pd.read_csv("one/variants.csv")
    best = table.loc[table["sharpe"].idxmax()]
    monkeypatch.setattr(large_text, "FEW_POSITIONS", int(best["positions"]) + 1)
    told = run("run", "grid.yaml", "--out", "two").out
    assert f"IT HARDLY TRADES: {best['positions']:,.0f} position" in told
    monkeypatch.setattr(large_text, "FEW_POSITIONS", 0)
    monkeypatch.setattr(large_text, "LITTLE_AT_WORK", float(best["capital_at_work"]) + 0.01)
    assert "IT HARDLY TRADES" in run("run", "grid.yaml", "--out", "three").out


def test_one_look_and_no_second(run: Runner) -> None:
    """The look is told with its count; a second is refused with exit code 2, unless asked for."""
    run("run", "grid.yaml", "--quiet")
    said = run("look", "runs/grid")
    assert (said.code, said.err) == (0, "")
    assert "1 look by this study, 1 by all studies" in said.out
    assert "positions there, " in said.out or "position there, " in said.out
    assert "both parts begin with the same cash" in said.out
    assert max(map(len, said.out.splitlines())) <= 100
    refused = run("look", "runs/grid")
    assert (refused.code, refused.out, len(refused.told)) == (2, "", 1)
    assert "--look-again" in refused.err
    assert "2 looks by this study" in run("look", "runs/grid", "--look-again").out
    assert json.loads(Path("runs/grid/held-out.json").read_text(encoding="utf-8"))["looks"] == 2


@pytest.mark.parametrize(
    ("words", "told"),
    [
        (("look", "nowhere"), "not the folder of a finished large study"),
        (("look", "runs/plain"), "not the folder of a finished large study"),
        (("look", "runs/many"), "keeps no part of the prices aside"),
        (("run", "study.yaml", "--cluster", "tcp://127.0.0.1:1"), "names its variants one by one"),
        (("run", "grid.yaml", "--out", "runs/many"), "a finished run stands there"),
    ],
)
def test_what_cannot_be_done_is_one_sentence(run: Runner, words: tuple[str, ...], told: str) -> None:
    """Exit code 2, what was found and what to do; nothing on standard output."""
    run("run", "study.yaml", "--out", "runs/plain", "--quiet")
    run.write(few__yaml=MANY.replace("-50%", "-0.3%"))
    run("run", "few.yaml", "--out", "runs/many", "--quiet")
    said = run(*words)
    assert (said.code, said.out, len(said.told)) == (2, "", 1)
    assert told in said.err


def test_faults_of_a_grid_come_before_anything_is_walked(run: Runner) -> None:
    """One line a fault with line and value; no folder. `rules check` says the same, and counts."""
    run.write(bad__yaml=GRID.replace("[7, 14]", "[7, 0]"))
    said = run("run", "bad.yaml")
    assert (said.code, len(said.told)) == (2, 1)
    assert "bad.yaml:8:3: `grid.legs.call.expiry.days`, value 0:" in said.err
    assert not Path("runs").exists()
    assert said.told[0] in run("rules", "check", "bad.yaml").out
    assert "study `Grid`, 6 variants" in run("rules", "check", "grid.yaml").out


def test_a_foreign_folder_is_refused(run: Runner) -> None:
    """Unfinished work of another study, and a folder with other files in the place for it."""
    run("run", "grid.yaml", "--out", "here", "--quiet")
    Path("there.unfinished").mkdir()
    Path("there.unfinished", "notes.txt").touch()
    said = run("run", "grid.yaml", "--out", "there")
    assert (said.code, len(said.told)) == (2, 1)
    assert "holds other files" in said.err
    Path("here").rename("other.unfinished")
    Path("other.unfinished", "run.yaml").unlink()
    said = run("run", "many.yaml", "--out", "other")
    assert (said.code, len(said.told)) == (2, 1)
    assert "was begun with another study" in said.err


def bytes_of(folder: str) -> dict[str, bytes]:
    """The bytes of every file below a folder."""
    whole = sorted(path for path in Path(folder).rglob("*") if path.is_file())
    return {str(path.relative_to(folder)): path.read_bytes() for path in whole}


def test_killed_outright_it_goes_on_and_ends_with_the_same_bytes(run: Runner) -> None:
    """500 variants in a process that is killed after some shards, then the same command again.

    Every shard, variants.parquet and every other file beside those of a run that nobody disturbed.
    """
    command = [sys.executable, "-c", "from hedgerow.cli.main import main; main()"]
    process = subprocess.Popen([*command, "run", "many.yaml", "--out", "broken", "--quiet"], cwd=os.getcwd())
    shards = Path("broken.unfinished/shards")
    deadline = time.monotonic() + 60
    while len(list(shards.glob("batch-*"))) < 3 and time.monotonic() < deadline:
        time.sleep(0.005)
    process.send_signal(signal.SIGKILL)
    assert process.wait() == -signal.SIGKILL, "it was over before it could be killed"
    assert not Path("broken").exists()
    said = run("run", "many.yaml", "--out", "broken", "--quiet")
    assert said.code == 0
    assert "Going on where it was stopped" in said.err
    run("run", "many.yaml", "--out", "whole", "--quiet")
    broken, whole = bytes_of("broken"), bytes_of("whole")
    assert len(whole) > 16 + 10
    assert {name for name in broken if not name.endswith(".part")} == set(whole)
    assert all(broken[name] == data for name, data in whole.items())
