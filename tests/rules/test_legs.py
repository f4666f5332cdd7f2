"""Legs: side, expiry, strike, ratio and roll, word by word."""

from __future__ import annotations

from typing import Any

import pytest
from pydantic import ValidationError

from hedgerow.rules.base import loosened
from hedgerow.rules.legs import LEAST_DAYS, STRIKE_RULES, Expiry, Leg, Roll, Strike
from hedgerow.rules.words import Loose
from rule_words import leg

RULES: dict[str, tuple[Any, Any]] = {
    "from_spot": ("-4%", -0.04),
    "steps": ("-2", -2),
    "delta": ("0.25", 0.25),
    "odds": ("20%", 0.2),
    "deviations": ("-1.5", -1.5),
    "same_as": ("call", "call"),
    "zero_cost_with": ("call", "call"),
    "worst_loss_within": ("5%", 0.05),
}


def faults(model: type[Leg] | type[Expiry] | type[Strike] | type[Roll], words: Any) -> list[Loose]:
    """Every fault of a part of a leg."""
    with pytest.raises(ValidationError) as caught:
        model.model_validate(words)
    return loosened(caught.value)


def made_leg(**words: Any) -> Leg:
    """A leg named `wing` from words."""
    return Leg.model_validate({"<name>": "wing", **words})


@pytest.mark.parametrize(("side", "right", "sign"), [("sell", "call", -1), ("buy", "put", 1)])
def test_side_and_right(side: str, right: str, sign: int) -> None:
    """Compares what the walk asks of a leg with its words."""
    made = made_leg(**leg(side, right))
    assert (made.name, made.right, made.sign, made.sold, made.ratio) == ("wing", right, sign, sign < 0, 1.0)


@pytest.mark.parametrize(
    ("words", "path", "code"),
    [
        ({"sell": "call", "buy": "call"}, ("buy",), "one-of"),
        ({"sell": "cal"}, ("sell",), "choice"),
        ({}, (), "one-of"),
        ({"sell": "call", "ratio": 0.1}, ("ratio",), "range"),
        ({"sell": "call", "ratio": "1/2"}, ("ratio",), "number"),
        ({"sell": "call", "quantity": 2}, ("quantity",), "unknown-word"),
        ({"sell": "call", "strike": None}, ("strike",), "shape"),
        ({"sell": "call", "expiry": 30}, ("expiry",), "shape"),
    ],
)
def test_wrong_legs(words: dict[str, Any], path: tuple[str, ...], code: str) -> None:
    """Both sides, none, an unknown right, ratios out of range, parts of the wrong shape."""
    plain = {"<name>": "wing", "expiry": {"days": 30}, "strike": {"delta": 0.3}}
    assert (path, code) in [(fault.path, fault.code) for fault in faults(Leg, plain | words)]


def test_expiry_of_its_own() -> None:
    """Days with the defaults of the language."""
    made = Expiry.model_validate({"days": "30"})
    assert (made.days, made.with_leg, made.listed, made.choose) == (30, None, "monthly", "nearest")


def test_expiry_with_another() -> None:
    """The word `with` is the attribute `with_leg`."""
    made = Expiry.model_validate({"with": "call"})
    assert (made.days, made.with_leg) == (None, "call")
    assert made.plain() == {"with": "call"}


@pytest.mark.parametrize(("cycle", "least"), LEAST_DAYS.items())
def test_days_that_a_cycle_can_serve(cycle: str, least: int) -> None:
    """From half a step of the cycle on; below it the fault names a cycle that fits."""
    assert Expiry.model_validate({"days": least, "listed": cycle}).days == least
    assert Expiry.model_validate({"days": 1100, "listed": cycle}).days == 1100
    if least > 1:
        (fault,) = faults(Expiry, {"days": least - 1, "listed": cycle})
        assert (fault.path, fault.code) == (("days",), "cycle")
        fitting = fault.remedy.split("`")[1].removeprefix("listed: ")
        assert LEAST_DAYS[fitting] <= least - 1


@pytest.mark.parametrize(
    ("words", "path", "code"),
    [
        ({}, (), "one-of"),
        ({"days": 30, "with": "call"}, ("with",), "one-of"),
        ({"days": 0}, ("days",), "range"),
        ({"days": 1101}, ("days",), "range"),
        ({"days": "30d"}, ("days",), "whole"),
        ({"days": "12:30"}, ("days",), "whole"),
        ({"days": 7}, ("days",), "cycle"),
        ({"days": 30, "listed": "fortnightly"}, ("listed",), "choice"),
        ({"days": 30, "choose": "NO"}, ("choose",), "choice"),
        ({"with": "call", "listed": "weekly"}, ("listed",), "idle"),
        ({"with": "call", "choose": "nearest"}, ("choose",), "idle"),
        ({"with": "Call"}, ("with",), "name"),
    ],
)
def test_wrong_expiries(words: dict[str, Any], path: tuple[str, ...], code: str) -> None:
    """Neither or both rules, days out of range or of the wrong cycle, words that mean nothing there."""
    (fault,) = faults(Expiry, words)
    assert (fault.path, fault.code) == (path, code)


@pytest.mark.parametrize("rule", RULES)
def test_each_strike_rule(rule: str) -> None:
    """The one rule that stands is found, with its value as a number, and comes back as written."""
    written, value = RULES[rule]
    made = Strike.model_validate({rule: written, "snap": "up"})
    assert made.rule == rule
    assert getattr(made, rule) == value
    assert made.snap == "up"
    assert Strike.model_validate(made.plain()) == made
    assert made.partner == ("call" if value == "call" else None)


def test_spend() -> None:
    """A share of what another leg brings in."""
    made = Strike.model_validate({"spend": {"share": "50%", "of": "call"}})
    assert made.spend is not None
    assert (made.rule, made.spend.share, made.spend.of, made.partner) == ("spend", 0.5, "call", "call")


def test_the_rules_are_all_there() -> None:
    """The table above and `spend` are the whole list."""
    assert {*RULES, "spend"} == set(STRIKE_RULES)


def test_two_rules_are_one_too_many() -> None:
    """For every pair of rules the later one is told to stand beside the other."""
    for one in RULES:
        for other in RULES:
            if STRIKE_RULES.index(one) < STRIKE_RULES.index(other):
                (fault,) = faults(Strike, {one: RULES[one][0], other: RULES[other][0]})
                assert (fault.path, fault.code) == ((other,), "one-of")
                assert fault.found == f"stands beside `{one}`"


@pytest.mark.parametrize(
    ("words", "code"),
    [
        ({}, "one-of"),
        ({"snap": "up"}, "one-of"),
        ({"from_spot": "-91%"}, "range"),
        ({"from_spot": -0.04}, "percent"),
        ({"steps": 1.5}, "whole"),
        ({"delta": 0}, "range"),
        ({"delta": 1}, "range"),
        ({"delta": "25%"}, "number"),
        ({"odds": "0%"}, "range"),
        ({"odds": 0.2}, "percent"),
        ({"deviations": 7}, "range"),
        ({"same_as": True}, "name"),
        ({"spend": "50%"}, "shape"),
        ({"spend": {"share": "50%"}}, "missing"),
        ({"worst_loss_within": "100%"}, "range"),
        ({"from_spot": "0%", "snap": "sideways"}, "choice"),
        ({"from_spto": "0%"}, "unknown-word"),
    ],
)
def test_wrong_strikes(words: dict[str, Any], code: str) -> None:
    """No rule, figures without a sign or with one too many, ranges, misspelt words."""
    assert code in [fault.code for fault in faults(Strike, words)]


def test_rolls() -> None:
    """At expiry, on a condition, or both; the word `if` is the attribute `condition`."""
    assert Roll.model_validate({"at": "expiry"}).at_expiry
    roll = Roll.model_validate({"if": {"held": {"at_least": 3}}, "only_for": "credit"})
    assert not roll.at_expiry
    assert roll.condition is not None
    assert roll.only_for == "credit"
    assert Roll.model_validate({"at": "expiry", "if": {"held": {"at_least": 3}}}).at_expiry


@pytest.mark.parametrize(
    ("words", "code"),
    [
        ({}, "one-of"),
        ({"only_for": "credit"}, "one-of"),
        ({"at": "friday"}, "choice"),
        ({"at": "expiry", "to": 1}, "unknown-word"),
    ],
)
def test_wrong_rolls(words: dict[str, Any], code: str) -> None:
    """A roll that does not say when, or says it wrongly."""
    assert [fault.code for fault in faults(Roll, words)] == [code]
