"""`hedgerow today`: what it prints and writes, and what it says of wrong input."""

from __future__ import annotations

import json
import subprocess
import sys

import pandas as pd
import pytest

from cli_runs import Runner

ACCEPTS = """\
name: Hard to please
legs:
  call: {sell: call, expiry: {days: 7, listed: weekly}, strike: {from_spot: 0%, snap: up}}
  put: {buy: put, expiry: {with: call}, strike: {from_spot: -5%, snap: down}}
accept: {worst_loss: {at_most: 0.5%}}
enter: {when: {signal: momentum, sessions: 10, at_least: -90%}}
"""


def test_it_prints_a_sheet_of_a_hundred_columns(hedgerow: Runner) -> None:
    """Piped it is plain text, no line beyond 100 columns, the cautions at its end."""
    said = hedgerow("today", "rule.yaml", "--market", "prices.csv")
    assert said.code == 0, said.err
    lines = said.out.splitlines()
    assert max(map(len, lines)) <= 100
    assert "\x1b" not in said.out
    assert lines[0].startswith("Small collar: the close of ")
    assert "To open: " in said.out
    assert "This is no advice" in " ".join(said.out.split())
    assert hedgerow.files() == {"prices.csv", "rule.yaml", "study.yaml"}


def test_json_and_files_say_the_same(hedgerow: Runner) -> None:
    """What is printed as JSON is what lies in the folder; the table has one row a symbol."""
    said = hedgerow(
        "today", "study.yaml", "--variant", "long", "--as-of", "2015-05-20", "--json", "--out", "s"
    )
    assert said.code == 0, said.err
    told = json.loads(said.out)
    assert told["as_of"] == "2015-05-20"
    assert told == json.loads((hedgerow.folder / "s/today.json").read_text(encoding="utf-8"))
    table = pd.read_csv(hedgerow.folder / "s/today.csv")
    assert table["symbol"].tolist() == [look["symbol"] for look in told["looks"]]
    opened = [look for look in told["looks"] if look["status"] == "open"]
    assert opened
    for look in opened:
        assert all(leg["low"] <= leg["mid"] <= leg["high"] for leg in look["plan"]["legs"])


def test_only_a_sheet_is_replaced(hedgerow: Runner) -> None:
    """A folder that holds an earlier sheet gets the new one; one with other files is never touched."""
    words = ("today", "rule.yaml", "--market", "prices.csv", "--out")
    assert hedgerow(*words, "s", "--as-of", "2015-05-20").code == 0
    assert hedgerow(*words, "s").code == 0
    assert json.loads((hedgerow.folder / "s/today.json").read_text(encoding="utf-8"))["as_of"] == "2015-06-19"
    before = hedgerow.files()
    said = hedgerow(*words, ".")
    assert (said.code, len(said.told)) == (2, 1)
    assert hedgerow.files() == before


def test_the_condition_that_failed_is_told_with_its_figure(hedgerow: Runner) -> None:
    """A worst loss above the rule's bound: what it is now, and by how much it is off."""
    hedgerow.write(hard__yaml=ACCEPTS)
    told = json.loads(hedgerow("today", "hard.yaml", "--market", "prices.csv", "--json").out)
    assert {look["status"] for look in told["looks"]} == {"declined"}
    for look in told["looks"]:
        (test,) = look["tests"]
        assert test["text"].startswith("the worst loss is at most 0.5%")
        assert test["holds"] is False
        assert test["value"] > test["bound"] == pytest.approx(0.005)


@pytest.mark.parametrize(
    ("words", "found"),
    [
        (("study.yaml",), "has 2 variants"),
        (("study.yaml", "--variant", "shrt"), "did you mean `short`?"),
        (("rule.yaml",), "add --market"),
        (("rule.yaml", "--market", "none.csv"), "no such file"),
        (("rule.yaml", "--market", "prices.csv", "--as-of", "yesterday"), "is no date"),
        (("rule.yaml", "--market", "prices.csv", "--as-of", "2031-01-02"), "outside the data"),
        (("rule.yaml", "--market", "prices.csv", "--as-of", "2015-01-10"), "is no session"),
        (("absent.yaml",), "absent.yaml"),
    ],
)
def test_wrong_input_is_one_sentence(hedgerow: Runner, words: tuple[str, ...], found: str) -> None:
    """Exit code 2, one line that says what was found, nothing printed, nothing written."""
    before = hedgerow.files()
    said = hedgerow("today", *words, "--out", "s")
    assert (said.code, len(said.told), said.out) == (2, 1, ""), said
    assert found in said.err
    assert hedgerow.files() == before


def test_the_first_session_knows_no_volatility(hedgerow: Runner) -> None:
    """At the first close nothing can be priced, and the sheet says so of every symbol."""
    told = json.loads(
        hedgerow("today", "rule.yaml", "--market", "prices.csv", "--as-of", "2015-01-05", "--json").out
    )
    assert [look["reason"] for look in told["looks"]] == ["no volatility known"] * 2
    assert told["record"] is None


def test_light_until_used() -> None:
    """Loading the command imports neither the compiler nor pandas."""
    code = "import sys, hedgerow.cli.today; print({'numba', 'pandas'} & set(sys.modules))"
    done = subprocess.run([sys.executable, "-c", code], capture_output=True, text=True, check=True)
    assert done.stdout.strip() == "set()"
