"""The language at a glance and its handbook: every word is there, with a meaning."""

from __future__ import annotations

import re
from pathlib import Path

import pytest

from hedgerow.rules.condition import CONDITION_WORDS
from hedgerow.rules.document import tree_of_text
from hedgerow.rules.entering import (
    CYCLES_ENDED,
    PERIODS,
    RANK_FIGURES,
    CoolDown,
    Enter,
    FigureValue,
    Ladder,
    On,
    Rank,
)
from hedgerow.rules.glossary import Section, sections
from hedgerow.rules.legs import CYCLES, STRIKE_RULES, Expiry, Leg, Roll, Strike
from hedgerow.rules.load import read_strategy
from hedgerow.rules.schema import Accept, ExitRule, Stop, Strategy
from hedgerow.rules.vocabulary import signal_names

ROOT = Path(__file__).parents[2]
HANDBOOK = (ROOT / "strategies" / "README.md").read_text(encoding="utf-8")
MODELS = (Strategy, Leg, Expiry, Strike, Roll, Accept, ExitRule, Stop)
ENTERING = (Enter, On, Rank, FigureValue, CoolDown, Ladder)


def section(title: str) -> Section:
    """One section by its title."""
    return next(found for found in sections() if found.title == title)


def all_words() -> list[str]:
    """Every word of the language: of the models, of conditions, of strikes and cycles, and the signals."""
    of_models = [word for model in (*MODELS, *ENTERING) for word in model.words()]
    choices = (*STRIKE_RULES, *CYCLES, *PERIODS, *CYCLES_ENDED, *RANK_FIGURES)
    return sorted({*of_models, *CONDITION_WORDS, *choices, *signal_names()})


def test_every_word_has_a_meaning() -> None:
    """Nothing is listed without saying what may stand after it and what it means."""
    rows = [row for found in sections() for row in found.rows]
    assert all(row.word and row.allowed and row.meaning for row in rows)
    listed = {row.word for row in rows}
    assert {word for model in (*MODELS, *ENTERING) for word in model.words()} <= listed
    assert {*CONDITION_WORDS, *signal_names()} <= listed


def test_rows_say_what_the_models_say() -> None:
    """Compares a few rows with the ranges written by hand."""
    expiry = {row.word: row for row in section("expiry of a leg").rows}
    assert expiry["days"].allowed == "whole number from 1 to 1100 (calendar days)"
    assert expiry["listed"].allowed == "daily | weekly | monthly | quarterly"
    accept = {row.word: row for row in section("accept, of the whole structure at entry").rows}
    assert accept["odds_of_best"].allowed == "{at_least | at_most | between: percent from 0% to 100%}"
    assert accept["net_credit"].allowed == "true"
    signals = {row.word: row for row in section("Signals").rows}
    assert signals["rsi"].allowed == "sessions: 14; number from 0 to 100 (points)"
    assert signals["close_over_mean"].allowed == "sessions; yes or no"
    assert signals["weekday"].allowed.startswith("is: monday, tuesday")


@pytest.mark.parametrize("word", all_words())
def test_every_word_is_in_the_handbook(word: str) -> None:
    """As code: in backticks, in a table or in an example."""
    assert any(re.search(rf"(?<![a-z_]){re.escape(word)}(?![a-z_])", code) for code in code_of(HANDBOOK)), (
        word
    )


def code_of(text: str) -> list[str]:
    """What stands as code in a Markdown text: in backticks, in fences, and indented by four."""
    fences = re.findall(r"```\w*\n(.*?)```", text, flags=re.DOTALL)
    without = re.sub(r"```\w*\n.*?```", "", text, flags=re.DOTALL)
    return [
        *fences,
        *re.findall(r"`([^`]+)`", without),
        *re.findall(r"^ {4}(.*\n)", without, flags=re.MULTILINE),
    ]


def test_whole_file_of_the_handbook_is_right() -> None:
    """The handbook's example of a whole file is read without a fault."""
    (example,) = re.findall(r"```yaml\n(.*?)```", HANDBOOK, flags=re.DOTALL)
    strategy, faults = read_strategy(tree_of_text(example, "README.md"))
    assert [str(fault) for fault in faults] == []
    assert strategy is not None
    assert [leg.name for leg in strategy.legs] == ["call", "put"]


@pytest.mark.parametrize("example", re.findall(r"`(\{[a-z_]+: [^N].*?\})`", HANDBOOK))
def test_small_examples_of_the_handbook_are_yaml(example: str) -> None:
    """Each example in backticks is a mapping of words of the language."""
    tree = tree_of_text(example, "README.md")
    assert tree.faults == []
    assert set(tree.plain) <= {*all_words(), "between", "at_least", "at_most"}


def test_every_shipped_strategy_is_in_the_handbook() -> None:
    """The table at its top names each file once."""
    files = sorted(path.name for path in (ROOT / "strategies").glob("*.yaml"))
    assert sorted(re.findall(r"^\| `([a-z-]+\.yaml)` \|", HANDBOOK, flags=re.MULTILINE)) == files
