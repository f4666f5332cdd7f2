"""What all models of the language share: closed words, frozen values, every fault at once, bounds."""

from __future__ import annotations

import math
from typing import Annotated, Any, ClassVar

import pytest
from pydantic import Field, ValidationError

from hedgerow.rules.base import Between, Bounds, Words, gathered, loosened
from hedgerow.rules.figures import Number, Percent, Whole
from hedgerow.rules.words import Loose, WordsError


class Inner(Words):
    """A mapping for these tests."""

    one_of: ClassVar[tuple[str, ...]] = ("left", "right")

    left: Annotated[int, Whole(0, 9)] | None = None
    right: Annotated[int, Whole(0, 9)] | None = None


class Outer(Words):
    """A mapping with a mapping and a list inside."""

    size: Annotated[int, Whole(1, 5)]
    inner: Inner | None = None
    many: Annotated[tuple[Inner, ...], Field(strict=False)] = ()
    word: Annotated[float, Percent(0, 1)] = Field(default=0.5, alias="from")


def faults(words: Any) -> list[Loose]:
    """Every fault of a mapping read as Outer."""
    with pytest.raises(ValidationError) as caught:
        Outer.model_validate(words)
    return loosened(caught.value)


def test_right_words_make_a_model() -> None:
    """Text and Python values alike; the alias is the word of the language."""
    made = Outer.model_validate({"size": "3", "inner": {"left": 1}, "many": [{"right": "2"}], "from": "20%"})
    assert (made.size, made.inner, made.many, made.word) == (3, Inner(left=1), (Inner(right=2),), 0.2)
    assert Outer.words() == ("size", "inner", "many", "from")


def test_models_are_frozen_and_compare_by_value() -> None:
    """What exists is valid for good."""
    made = Outer.model_validate({"size": 3, "many": [{"left": 1}]})
    with pytest.raises(ValidationError):
        made.size = 4  # type: ignore[misc]  # the point of the test
    assert made == Outer(size=3, many=[{"left": 1}])
    assert hash(made) == hash(Outer(size=3, many=[{"left": 1}]))


def test_every_fault_in_one_pass() -> None:
    """Unknown words, a missing one, two of one group, none of it, figures out of range: all at once."""
    found = faults({"szie": 3, "inner": {"left": 1, "right": 99}, "many": [{}, 5], "from": 7})
    assert {(fault.path, fault.code) for fault in found} == {
        (("szie",), "unknown-word"),
        (("size",), "missing"),
        (("inner", "right"), "one-of"),
        (("inner", "right"), "range"),
        (("many", 0), "one-of"),
        (("many", 1), "shape"),
        (("from",), "percent"),
    }


def test_unknown_word_is_answered_with_the_nearest() -> None:
    """By the words of the mapping it stands in."""
    (fault,) = [
        fault
        for fault in faults({"size": 1, "inner": {"lefd": 1, "left": 2}})
        if fault.code == "unknown-word"
    ]
    assert fault.path == ("inner", "lefd")
    assert fault.remedy == "did you mean `left`?"


@pytest.mark.parametrize("words", [None, "x", 5, [], True])
def test_no_mapping_at_all(words: Any) -> None:
    """The words that may stand are told."""
    (fault,) = faults(words)
    assert fault.code == "shape"
    assert fault.allowed == "allowed: a mapping of `size`, `inner`, `many`, `from`"


def test_no_list_at_all() -> None:
    """A mapping where a list is wanted."""
    (fault,) = faults({"size": 1, "many": {"left": 1}})
    assert (fault.code, fault.found, fault.allowed) == ("shape", "is a mapping", "allowed: a list")


def test_words_come_back() -> None:
    """Compares the written words with what was read: defaults left out, lists as lists."""
    words = {"size": 2, "many": [{"left": 1}], "from": "20%"}
    assert Outer.model_validate(words).plain() == words
    assert Outer.model_validate({"size": 2, "from": "50%"}).plain() == {"size": 2}


def test_keys_that_are_no_text() -> None:
    """From Python, a number as a key is told as an unknown word."""
    assert [fault.path for fault in faults({"size": 1, 5: 2})] == [("5",)]


@pytest.mark.parametrize(
    ("words", "low", "high"),
    [
        ({"at_least": "2%"}, 0.02, math.inf),
        ({"at_most": "2%"}, -math.inf, 0.02),
        ({"between": ["2%", "5%"]}, 0.02, 0.05),
        ({"between": ("2%", "2%")}, 0.02, 0.02),
    ],
)
def test_bounds(words: dict[str, Any], low: float, high: float) -> None:
    """Compares the ends with those by hand, and the words with those that come back."""
    between = Between(Percent(-1, 1))
    bounds = between.read(words)
    assert (bounds.low, bounds.high) == (low, high)
    assert between.read(between.write(bounds)) == bounds
    assert between.read(bounds) is bounds


@pytest.mark.parametrize(
    ("words", "codes"),
    [
        ({}, ["one-of"]),
        ({"atleast": "2%"}, ["unknown-word", "one-of"]),
        ({"at_least": "2%", "at_most": "3%"}, ["one-of"]),
        ({"at_least": 2}, ["percent"]),
        ({"between": ["5%", "2%"]}, ["reversed"]),
        ({"between": ["2%"]}, ["shape"]),
        ({"between": "2%"}, ["shape"]),
        ({"between": [2, "x"]}, ["percent", "percent"]),
        ("2%", ["shape"]),
        (None, ["shape"]),
    ],
)
def test_no_bounds(words: Any, codes: list[str]) -> None:
    """Nothing, two at once, a bare number, reversed ends, no pair."""
    with pytest.raises(WordsError) as caught:
        Between(Percent(-1, 1)).read(words)
    assert [fault.code for fault in caught.value.faults] == codes


def test_bounds_of_one_direction() -> None:
    """Where only one word makes sense the others are unknown."""
    with pytest.raises(WordsError) as caught:
        Between(Number(0, 1), ("at_most",)).read({"at_least": 0.5})
    assert [fault.code for fault in caught.value.faults] == ["unknown-word", "one-of"]


def test_what_bounds_hold() -> None:
    """Both ends belong to the range; nothing unknown does."""
    bounds = Bounds(low=0.0, high=1.0)
    assert bounds.holds(0.0)
    assert bounds.holds(1.0)
    assert not bounds.holds(1.1)
    assert not bounds.holds(math.nan)
    assert Bounds().holds(-1e300)


def test_gathered_raises_only_with_faults() -> None:
    """No fault, no error."""
    gathered([])
    with pytest.raises(WordsError):
        gathered([Loose((), "x", "is wrong")])
