"""A new folder: the same every time, whole or not at all, and everything in it runs."""

from __future__ import annotations

import json
from pathlib import Path

import pandas as pd
import pytest
import yaml

import hedgerow as hr
from cli_runs import Runner
from hedgerow.desk.demo import DEMO_STOCKS, demo
from json_schema import errors

FILES = {
    "README.md",
    "study.yaml",
    "positions.yaml",
    "rules/collar.yaml",
    "rules/married-put.yaml",
    "data/dataset.yaml",
    "data/prices.csv",
    "data/dividends.csv",
    "schemas/strategy.json",
    "schemas/study.json",
}


def laid(folder: Path) -> dict[str, bytes]:
    """Every file below a folder."""
    files = (path for path in folder.rglob("*") if path.is_file())
    return {path.relative_to(folder).as_posix(): path.read_bytes() for path in files}


def test_every_command_of_its_readme_runs(hedgerow: Runner, monkeypatch: pytest.MonkeyPatch) -> None:
    """The lines of the README of a new folder, in their order, from inside it."""
    assert hedgerow("new", "mine").code == 0
    monkeypatch.chdir(hedgerow.folder / "mine")
    text = (hedgerow.folder / "mine/README.md").read_text(encoding="utf-8")
    commands = [line.split()[1:] for line in text.split("```")[1].strip().splitlines()]
    assert [words[0] for words in commands] == ["data", "rules", "run", "today"]
    for words in commands:
        said = hedgerow(*words)
        assert said.code == 0, (words, said.err)
        assert said.out
    assert "Held: 1" in said.out
    assert "To open: nothing" not in said.out


def test_it_is_the_same_every_time(hedgerow: Runner) -> None:
    """Two folders hold the same files, byte for byte."""
    hedgerow("new", "one")
    hedgerow("new", "other")
    one, other = (laid(hedgerow.folder / name) for name in ("one", "other"))
    assert set(one) == FILES
    assert one == other


@pytest.mark.parametrize("place", [".", "rule.yaml", "rule.yaml/inside"])
def test_what_stands_there_stays(hedgerow: Runner, place: str) -> None:
    """A folder with files, a file, and a place below a file: one sentence, and nothing is left behind."""
    before = laid(hedgerow.folder)
    said = hedgerow("new", place)
    assert (said.code, len(said.told), said.out) == (2, 1, "")
    assert laid(hedgerow.folder) == before


def test_schemas_stand_where_the_files_say_and_take_them(hedgerow: Runner) -> None:
    """The first line of each rule and study leads to a schema that finds no fault in it."""
    hedgerow("new", "mine")
    for path in (*(hedgerow.folder / "mine/rules").iterdir(), hedgerow.folder / "mine/study.yaml"):
        text = path.read_text(encoding="utf-8")
        named = text.splitlines()[0].split("$schema=")[1]
        schema = json.loads((path.parent / named).read_text(encoding="utf-8"))
        assert errors(yaml.safe_load(text), schema) == []


def test_its_prices_are_sessions_of_the_exchange_and_tell_no_findings() -> None:
    """The invented prices read as a market without findings; their moves have the size they were given."""
    market = hr.Market.from_frame(demo().prices, adjustment="none")
    assert market.findings == ()
    assert market.symbols == tuple(DEMO_STOCKS)
    moves = pd.DataFrame(market.close, columns=market.symbols).pct_change().std()
    for symbol, (_, deviation, _) in DEMO_STOCKS.items():
        assert moves[symbol] == pytest.approx(deviation, rel=0.08)
