"""Signals in conditions: every signal of the registry, its parameters, and the bound that its kind needs."""

from __future__ import annotations

import math
from typing import Any

import pytest
from hypothesis import given
from pydantic import ValidationError

from hedgerow.rules.base import Bounds, loosened
from hedgerow.rules.signalwords import SignalTest, SignalValue, takes_bounds
from hedgerow.rules.vocabulary import signal_names, signal_words
from hedgerow.rules.words import Loose
from hedgerow.signals import SIGNALS
from random_strategies import signals

NUMBERS = {
    "rsi",
    "momentum",
    "distance_from_high",
    "volatility_rank",
    "eps_growth",
    "sessions_to_report",
    "sessions_since_report",
    "sessions_to_ex_dividend",
}


def faults(words: Any, model: type[SignalValue] = SignalTest) -> list[Loose]:
    """Every fault of a signal's words."""
    with pytest.raises(ValidationError) as caught:
        model.model_validate(words)
    return loosened(caught.value)


def needed(name: str) -> dict[str, Any]:
    """The parameters of a signal that have no default, with a value in range."""
    words = signal_words(name)
    assert words is not None
    return {item.name: 20 for item in words.parameters if item.default is None}


def test_names_are_those_of_the_registry() -> None:
    """The language has no list of its own, and an unknown name has no words."""
    assert signal_names() == tuple(sorted(SIGNALS))
    assert signal_words("rso") is None
    assert {name for name in signal_names() if takes_bounds(name)} == NUMBERS


@pytest.mark.parametrize("name", sorted(set(SIGNALS) - NUMBERS - {"weekday"}))
def test_yes_or_no_takes_no_bound(name: str) -> None:
    """Alone it reads; with each kind of bound it is refused where the bound stands."""
    made = SignalTest.model_validate({"signal": name, **needed(name)})
    assert made.bounds is None
    for bound in ({"at_least": 1}, {"at_most": 1}, {"between": [1, 2]}, {"is": ["monday"]}):
        (fault,) = faults({"signal": name, **needed(name), **bound})
        assert (fault.path, fault.code) == (tuple(bound), "bound")
        assert "true or false" in fault.found


@pytest.mark.parametrize("name", sorted(NUMBERS))
def test_number_needs_exactly_one_bound(name: str) -> None:
    """None is refused, two are refused, one of the right unit is read, one of the wrong unit is refused."""
    words = {"signal": name, **needed(name)}
    number = SIGNALS[name].number
    assert number is not None
    right, wrong = ("5%", 5) if number.unit == "fraction" else (5, "5%")
    (fault,) = faults(words)
    assert (fault.path, fault.code) == ((), "bound")
    assert "one-of" in [fault.code for fault in faults(words | {"at_least": right, "at_most": right})]
    made = SignalTest.model_validate(words | {"at_least": right})
    assert made.bounds == Bounds(low=0.05 if number.unit == "fraction" else 5.0, high=math.inf)
    assert faults(words | {"at_least": wrong})[0].path == ("at_least",)


def test_weekdays() -> None:
    """A list of names, or one name; nothing else bounds the day of the week."""
    assert SignalTest.model_validate({"signal": "weekday", "is": ["monday", "friday"]}).days == (
        "monday",
        "friday",
    )
    assert SignalTest.model_validate({"signal": "weekday", "is": "friday"}).days == ("friday",)


@pytest.mark.parametrize(
    ("words", "path", "code"),
    [
        ({}, (), "missing"),
        ({"is": []}, ("is",), "missing"),
        ({"is": 5}, ("is",), "missing"),
        ({"is": ["mon"]}, ("is", 0), "unknown-name"),
        ({"is": ["Friday"]}, ("is", 0), "unknown-name"),
        ({"is": ["friday", "friday"]}, ("is", 1), "repeated"),
        ({"is": ["friday"], "at_least": 1}, ("at_least",), "bound"),
    ],
)
def test_no_weekdays(words: dict[str, Any], path: tuple[Any, ...], code: str) -> None:
    """Nothing, no names, unknown names, names twice, a number."""
    (fault,) = faults({"signal": "weekday", **words})
    assert (fault.path, fault.code) == (path, code)


def test_parameters_and_their_defaults() -> None:
    """Defaults are filled in, in the order of the registry, and left out again when the words are written."""
    made = SignalTest.model_validate({"signal": "macd_crossed_down", "slow": "30"})
    assert made.params == (("fast", 12), ("slow", 30), ("smooth", 9))
    assert made.arguments == {"fast": 12, "slow": 30, "smooth": 9}
    assert made.plain() == {"signal": "macd_crossed_down", "slow": 30}


@pytest.mark.parametrize(
    ("words", "path", "code"),
    [
        ({"signal": "close_over_mean"}, (), "missing"),
        ({"signal": "close_over_mean", "sessions": "20%"}, ("sessions",), "whole"),
        ({"signal": "close_over_mean", "sessions": 0}, ("sessions",), "range"),
        ({"signal": "close_over_mean", "sessions": 20, "width": 2}, ("width",), "unknown-word"),
        ({"signal": "close_over_mean", "session": 20, "sessions": 20}, ("session",), "unknown-word"),
        ({"signal": "macd_positive", "fast": 30, "slow": 20}, (), "parameter"),
        ({"signal": "close_over_maen", "sessions": 20}, ("signal",), "unknown-name"),
        ({"signal": None}, ("signal",), "text"),
        ({"signal": True}, ("signal",), "text"),
        ({"signal": ["rsi"]}, ("signal",), "text"),
        ({"signal": "rsi", "at_least": 50, "of": ""}, ("of",), "text"),
        ({"signal": "rsi", "at_least": 120}, ("at_least",), "range"),
        ({"signal": "rsi", "between": [70, 30]}, ("between",), "reversed"),
        ({"signal": "rsi", "at_least": 5, "is": ["monday"]}, ("is",), "bound"),
    ],
)
def test_wrong_words(words: dict[str, Any], path: tuple[Any, ...], code: str) -> None:
    """Each is told where it stands, with a code for programs."""
    (fault,) = faults(words)
    assert (fault.path, fault.code) == (path, code)


def test_unknown_signal_is_answered_with_the_nearest() -> None:
    """And with all that are known."""
    (fault,) = faults({"signal": "momentun", "sessions": 20})
    assert fault.remedy == "did you mean `momentum`?"
    assert "`volatility_rank`" in fault.allowed


def test_ranking_takes_the_number_alone() -> None:
    """A bound is refused, a yes-or-no signal is refused, and so is the day of the week."""
    assert SignalValue.model_validate({"signal": "momentum", "sessions": 63}).plain() == {
        "signal": "momentum",
        "sessions": 63,
    }
    assert [f.path for f in faults({"signal": "rsi", "at_least": 5}, SignalValue)] == [("at_least",)]
    for name in ("macd_positive", "weekday"):
        (fault,) = faults({"signal": name}, SignalValue)
        assert (fault.path, fault.code) == (("signal",), "bound")
        assert "`momentum`" in fault.allowed


@pytest.mark.parametrize("words", [None, 5, "rsi", ["rsi"]])
def test_no_mapping(words: Any) -> None:
    """A signal is a mapping, and the message shows one."""
    (fault,) = faults(words)
    assert fault.code == "shape"
    assert "{signal: NAME" in fault.allowed


@given(signals())
def test_any_signal_comes_back(words: dict[str, Any]) -> None:
    """Compares a random signal with what its own words read as."""
    made = SignalTest.model_validate(words)
    assert SignalTest.model_validate(made.plain()) == made
    assert made.of == words.get("of")


def test_made_from_python() -> None:
    """The fields themselves make a model too, as a program that writes strategies would."""
    made = SignalTest(signal="rsi", params=(("sessions", 14),), bounds=Bounds(low=30.0))
    assert made == SignalTest.model_validate({"signal": "rsi", "at_least": 30})
    assert SignalTest.model_validate(made) is made
