"""Conditions: nesting, words about the position, and what is told when a word is wrong."""

from __future__ import annotations

from typing import Any

import pytest
from pydantic import TypeAdapter, ValidationError

from hedgerow.rules.base import Bounds, loosened
from hedgerow.rules.condition import (
    CONDITION_WORDS,
    POSITION_WORDS,
    AllOf,
    AnyOf,
    Condition,
    DaysLeftTest,
    GainTest,
    HeldTest,
    HoldsSharesTest,
    LegLostTest,
    LossTest,
    NotOf,
    StockDownTest,
    StockUpTest,
    walked,
)
from hedgerow.rules.signalwords import SignalTest
from hedgerow.rules.words import Loose

READ: TypeAdapter[Any] = TypeAdapter(Condition)
RSI = {"signal": "rsi", "at_most": 70}


def faults(words: Any) -> list[Loose]:
    """Every fault of a condition."""
    with pytest.raises(ValidationError) as caught:
        READ.validate_python(words)
    return loosened(caught.value)


@pytest.mark.parametrize(
    ("words", "kind"),
    [
        ({"all": [RSI]}, AllOf),
        ({"any": [RSI, RSI]}, AnyOf),
        ({"not": RSI}, NotOf),
        (RSI, SignalTest),
        ({"gain": {"at_least": "2%"}}, GainTest),
        ({"loss": {"at_least": "50%", "of": "worst"}}, LossTest),
        ({"days_left": {"at_most": 3, "leg": "call"}}, DaysLeftTest),
        ({"held": {"at_least": "5"}}, HeldTest),
        ({"stock_up": {"at_least": "5%"}}, StockUpTest),
        ({"stock_down": {"at_least": "5%"}}, StockDownTest),
        ({"leg_lost": {"leg": "call", "at_least": "80%"}}, LegLostTest),
        ({"holds_shares": True}, HoldsSharesTest),
    ],
)
def test_every_word_has_its_class(words: dict[str, Any], kind: type) -> None:
    """One class a word, chosen by the word; a model reads as itself; words come back."""
    made = READ.validate_python(words)
    assert type(made) is kind
    assert READ.validate_python(made) is made
    assert READ.validate_python(made.plain()) == made


def test_every_word_is_known() -> None:
    """The list of words is that of the classes above."""
    assert set(CONDITION_WORDS) == {"all", "any", "not", "signal", *POSITION_WORDS}
    assert len(POSITION_WORDS) == 8


def test_figures_inside() -> None:
    """Compares attribute by attribute with the words, percents as fractions."""
    gain = READ.validate_python({"gain": {"at_least": "50%", "of": "best"}})
    assert (gain.gain.at_least, gain.gain.of) == (0.5, "best")
    assert READ.validate_python({"loss": {"at_least": "2%"}}).loss.of == "debit"
    left = READ.validate_python({"days_left": {"at_most": 3}})
    assert (left.days_left.at_most, left.days_left.leg) == (3, None)
    lost = READ.validate_python({"leg_lost": {"leg": "call", "at_least": "80%"}})
    assert (lost.leg_lost.leg, lost.leg_lost.at_least) == ("call", 0.8)
    assert READ.validate_python(RSI).bounds == Bounds(high=70.0)


def test_walk_over_a_tree() -> None:
    """Every condition with its path, the outer before the inner, as written by hand here."""
    tree = READ.validate_python({"all": [RSI, {"not": {"any": [{"held": {"at_least": 1}}, RSI]}}]})
    assert [(path, type(part).__name__) for path, part in walked(tree)] == [
        ((), "AllOf"),
        (("all", 0), "SignalTest"),
        (("all", 1), "NotOf"),
        (("all", 1, "not"), "AnyOf"),
        (("all", 1, "not", "any", 0), "HeldTest"),
        (("all", 1, "not", "any", 1), "SignalTest"),
    ]


@pytest.mark.parametrize("words", [None, "rsi", 5, [RSI], {}, True])
def test_no_condition(words: Any) -> None:
    """Anything but a mapping of one known word is told all words."""
    (fault,) = faults(words)
    assert fault.code == "shape"
    assert all(f"`{word}`" in fault.allowed for word in CONDITION_WORDS)


def test_unknown_word() -> None:
    """With the nearest right one."""
    (fault,) = faults({"los": {"at_least": "2%"}})
    assert (fault.path, fault.code, fault.remedy) == (("los",), "unknown-word", "did you mean `loss`?")


def test_two_conditions_in_one_mapping() -> None:
    """The second is told how to stand beside the first."""
    (fault,) = faults({"gain": {"at_least": "2%"}, "loss": {"at_least": "2%"}})
    assert fault.path == ("loss",)
    assert fault.remedy == "put both under `all: [...]` or `any: [...]`"


def test_word_that_is_no_condition_beside_one() -> None:
    """It is told as any unknown word is."""
    (fault,) = faults({"gain": {"at_least": "2%"}, "why": "x"})
    assert (fault.path, fault.code) == (("why",), "unknown-word")


def test_faults_deep_inside_keep_their_path() -> None:
    """Paths lead through lists and words, and no tag of a union shows."""
    found = faults({"all": [{"any": [{"not": {"loss": {"at_least": 2}}}]}, {"held": {"at_least": 0}}, 5]})
    assert [(fault.path, fault.code) for fault in found] == [
        (("all", 0, "any", 0, "not", "loss", "at_least"), "percent"),
        (("all", 1, "held", "at_least"), "range"),
        (("all", 2), "shape"),
    ]


@pytest.mark.parametrize("word", ["all", "any"])
def test_nothing_to_join(word: str) -> None:
    """An empty list is no condition."""
    (fault,) = faults({word: []})
    assert fault.path == (word,)


@pytest.mark.parametrize(
    ("words", "path"),
    [
        ({"gain": {"at_least": "0%"}}, ("gain", "at_least")),
        ({"gain": {"at_least": "2%", "of": "worst"}}, ("gain", "of")),
        ({"loss": {"at_least": "2%", "of": "best"}}, ("loss", "of")),
        ({"loss": {"at_most": "2%"}}, ("loss", "at_most")),
        ({"days_left": {"at_most": -1}}, ("days_left", "at_most")),
        ({"days_left": {"at_most": "3%"}}, ("days_left", "at_most")),
        ({"held": {"at_least": 2.5}}, ("held", "at_least")),
        ({"stock_down": {"at_least": "101%"}}, ("stock_down", "at_least")),
        ({"stock_up": "5%"}, ("stock_up",)),
        ({"leg_lost": {"at_least": "80%"}}, ("leg_lost", "leg")),
        ({"leg_lost": {"leg": "NO", "at_least": "80%"}}, ("leg_lost", "leg")),
        ({"holds_shares": False}, ("holds_shares",)),
        ({"holds_shares": "yes"}, ("holds_shares",)),
    ],
)
def test_wrong_figures(words: dict[str, Any], path: tuple[str, ...]) -> None:
    """Each wrong figure or word is told where it stands."""
    assert path in [fault.path for fault in faults(words)]
