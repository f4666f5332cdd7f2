"""Changes by dotted path: what they do to a strategy, and what is told when a path leads nowhere."""

from __future__ import annotations

from typing import Any

import pytest

from hedgerow.rules.document import Tree, tree_of_mapping, tree_of_text
from hedgerow.rules.load import load_strategy, read_strategy
from hedgerow.rules.overrides import changed
from rule_words import collar, only_fault

CUT = {"name": "cut", "if": {"loss": {"at_least": "2%"}}}
TURNED = {"name": "trend.turned", "if": {"any": [{"signal": "macd_crossed_down"}, {"held": {"at_least": 9}}]}}
BASE = collar(exit=[CUT, TURNED], accept={"net_debit": {"at_most": "1%"}}, shares="long")

BASE_TEXT = """\
name: base
legs:
  put:
    buy: put
    expiry: {days: 30}
    strike: {delta: 0.3}
exit:
  - {name: cut, if: {loss: {at_least: 2%}}}
  - {name: time, if: {held: {at_least: 5}}}
"""


def after(changes: dict[str, Any]) -> dict[str, Any]:
    """The words of the base with changes made."""
    return load_strategy(BASE, changes).plain()


def test_one_value() -> None:
    """Only that value differs."""
    plain = after({"legs.call.expiry.days": 60})
    assert plain["legs"]["call"]["expiry"] == {"days": 60}
    assert plain["legs"]["put"] == load_strategy(BASE).plain()["legs"]["put"]


def test_whole_mapping() -> None:
    """A mapping is replaced, not merged: the rule that stood there is gone."""
    assert after({"legs.put.strike": {"delta": 0.2}})["legs"]["put"]["strike"] == {"delta": 0.2}


def test_exit_by_its_name() -> None:
    """Names with dots and blanks too."""
    assert after({"exit.cut.if.loss.at_least": "3%"})["exit"][0]["if"] == {"loss": {"at_least": "3%"}}
    assert after({"exit.trend.turned.if.any.2.held.at_least": 4})["exit"][1]["if"]["any"][1] == {
        "held": {"at_least": 4}
    }
    assert after({"exit.cut": {"name": "new", "if": {"held": {"at_least": 1}}}})["exit"][0]["name"] == "new"


def test_item_by_its_number() -> None:
    """Counted from 1, as the faults count."""
    assert after({"exit.2.if.any.1.fast": 10})["exit"][1]["if"]["any"][0] == {
        "signal": "macd_crossed_down",
        "fast": 10,
    }


def test_whole_list() -> None:
    """All exits at once, and none."""
    assert after({"exit": [CUT]})["exit"] == [CUT]
    assert "exit" not in after({"exit": []})
    assert "exit" not in after({"exit": "none"})


def test_taking_away() -> None:
    """Legs, exits, optional words; what follows moves up."""
    assert list(after({"legs.put": "none"})["legs"]) == ["call"]
    assert [rule["name"] for rule in after({"exit.cut": "none"})["exit"]] == ["trend.turned"]
    assert "accept" not in after({"accept": "none"})
    assert "snap" not in after({"legs.call.strike.snap": "none"})["legs"]["call"]["strike"]


def test_none_where_it_is_a_word() -> None:
    """`shares: none` means no shares; the calls are then uncovered, which is told."""
    assert only_fault(BASE, {"shares": "none"}).code == "uncovered-call"
    assert after({"shares": "none", "legs.call": "none", "legs.put.expiry": {"days": 30}})["shares"] == "none"


def test_adding_what_was_not_there() -> None:
    """A leg, and words inside mappings that did not stand there."""
    leg = {"sell": "put", "expiry": {"with": "call"}, "strike": {"from_spot": "-20%"}}
    assert list(after({"legs.low put": leg})["legs"]) == ["call", "put", "low put"]
    assert after({"enter.when": {"signal": "macd_positive"}})["enter"] == {
        "when": {"signal": "macd_positive"}
    }
    assert after({"legs.call.roll.at": "expiry"})["legs"]["call"]["roll"] == {"at": "expiry"}


def test_changes_are_made_in_order() -> None:
    """A later one sees what an earlier one did."""
    plain = after({"exit": [CUT], "exit.cut.if.loss.at_least": "9%"})
    assert plain["exit"] == [{"name": "cut", "if": {"loss": {"at_least": "9%"}}}]


@pytest.mark.parametrize(
    ("path", "found", "near"),
    [
        ("legs.cal.expiry.days", "is `cal`, which is no leg of the strategy", "did you mean `call`?"),
        ("leg.call.expiry.days", "is not a word of a strategy", "did you mean `legs`?"),
        ("exit.cutt.if", "is `cutt`, which is no item of the list, which has 2", "did you mean `cut`?"),
        ("exit.3.if", "is `3`, which is no item of the list, which has 2", ""),
        ("exit.0.if", "is `0`, which is no item of the list, which has 2", ""),
        ("shares.long", "leads through `shares`, which is a plain value", ""),
        ("", "is no path", ""),
    ],
)
def test_paths_that_lead_nowhere(path: str, found: str, near: str) -> None:
    """The path is told as it was written, with what stands there and the nearest right name."""
    fault = only_fault(BASE, {path: 1})
    assert fault.where == "changes"
    assert found in fault.found
    assert fault.remedy == near


def test_last_word_of_a_path_that_is_unknown() -> None:
    """It is told by the mapping it would stand in."""
    fault = only_fault(BASE, {"legs.call.expiry.dyas": 21})
    assert fault.code == "unknown-word"
    assert fault.remedy == "did you mean `days`?"


def test_taking_away_what_is_not_there() -> None:
    """Nothing silently does nothing."""
    fault = only_fault(BASE, {"stop": "none"})
    assert "not a word of what stands there" in fault.found


def test_exit_of_a_strategy_without_any() -> None:
    """Told as such."""
    fault = only_fault(collar(), {"exit.cut.if": {"held": {"at_least": 1}}})
    assert "names an exit, and the strategy has none" in fault.found


def test_required_words_cannot_be_taken_away() -> None:
    """The fault is that of the word that is missing."""
    assert only_fault(BASE, {"name": "none"}).code == "missing"
    assert only_fault(BASE, {"legs.put.strike": "none"}).code == "missing"


def with_changes(changes: str) -> tuple[Tree, list[tuple[str, int, int, str]]]:
    """The base file changed by another file, and the places and codes of the faults of what comes out."""
    tree = changed(tree_of_text(BASE_TEXT, "base.yaml"), tree_of_text(changes, "study.yaml"))
    _, faults = read_strategy(tree)
    return tree, [(fault.where, fault.line, fault.column, fault.code) for fault in faults]


@pytest.mark.parametrize(
    ("changes", "place"),
    [
        ("legs.put.expiry.days: 0\n", ("study.yaml", 1, 23, "range")),
        ("a: 1\n", ("study.yaml", 1, 1, "unknown-word")),
        ("legs.put.strike: {delta: 0.3, odds: 20%}\n", ("study.yaml", 1, 31, "one-of")),
        ("legs.put.strike.odds: 20%\n", ("study.yaml", 1, 1, "one-of")),
        ("exit.cut: none\nexit.time.if.held.at_least: 0\n", ("study.yaml", 2, 29, "range")),
        ("legs.put.sides: 1\n", ("study.yaml", 1, 1, "unknown-word")),
        ("legs.put.ratio:\n", ("study.yaml", 1, 1, "empty")),
        ("enter.whn: {signal: macd_positive}\n", ("study.yaml", 1, 1, "unknown-word")),
    ],
)
def test_faults_stand_in_the_file_that_wrote_them(changes: str, place: tuple[str, int, int, str]) -> None:
    """Compares with lines and columns counted by hand in the changes."""
    assert with_changes(changes)[1] == [place]


def test_faults_of_the_base_stay_in_the_base() -> None:
    """After an exit was taken away, the faults of those below keep their own lines."""
    text = BASE_TEXT.replace("{at_least: 5}", "{at_least: 5%}")
    tree = changed(tree_of_text(text, "base.yaml"), tree_of_text("exit.cut: none\n", "study.yaml"))
    _, faults = read_strategy(tree)
    assert [(fault.where, fault.line, fault.code) for fault in faults] == [("base.yaml", 9, "whole")]


def test_a_fault_of_the_base_can_be_changed_away() -> None:
    """What a variant replaces is not read."""
    text = BASE_TEXT.replace("delta: 0.3", "delta: 3").replace("at_least: 5", "at_least: x")
    tree = changed(
        tree_of_text(text, "base.yaml"),
        tree_of_text("legs.put.strike: {delta: 0.3}\nexit.time: none\n", "study.yaml"),
    )
    strategy, faults = read_strategy(tree)
    assert faults == []
    assert strategy is not None


def test_the_base_is_left_as_it_was() -> None:
    """Changes are made on a copy."""
    base = tree_of_mapping(BASE)
    changed(base, tree_of_mapping({"exit.cut": "none", "legs.call.expiry.days": 60}))
    assert read_strategy(base)[0] == load_strategy(BASE)
