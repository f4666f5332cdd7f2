"""A call sold is covered for as long as it can live: by shares, or by calls that live longer."""

from __future__ import annotations

from itertools import product
from typing import Any

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from hedgerow.kernels.layout import DAILY, MONTHLY, QUARTERLY, WEEKLY
from hedgerow.market.sessions import choose_expiries, sessions_between
from hedgerow.rules.cover import outlasts
from hedgerow.rules.legs import LEAST_DAYS, Expiry
from random_strategies import expiries
from rule_words import codes_of, leg, only_fault

CYCLES = {"daily": DAILY, "weekly": WEEKLY, "monthly": MONTHLY, "quarterly": QUARTERLY}
ORDINALS = sessions_between(734_500, 738_900)


def codes(shares: str, **legs: dict[str, Any]) -> list[str]:
    """The codes of the faults of a structure."""
    return codes_of(
        {"name": "test", "shares": shares, "legs": {name.replace("_", " "): it for name, it in legs.items()}}
    )


def call_with(other: str, side: str = "buy", **words: Any) -> dict[str, Any]:
    """A call that expires with another leg."""
    return leg(side, "call", **words) | {"expiry": {"with": other}}


@pytest.mark.parametrize(
    ("shares", "legs", "covered"),
    [
        ("long", {"call": leg("sell", "call")}, True),
        ("none", {"call": leg("sell", "call")}, False),
        ("short", {"call": leg("sell", "call")}, False),
        ("long", {"call": leg("sell", "call", ratio=2)}, False),
        ("long", {"call": leg("sell", "call", ratio=0.5)}, True),
        ("long", {"call": leg("sell", "call"), "more": leg("sell", "call")}, False),
        ("long", {"call": leg("sell", "call", ratio=0.5), "more": leg("sell", "call", ratio=0.5)}, True),
        ("none", {"call": leg("sell", "call"), "long": call_with("call")}, True),
        ("none", {"call": leg("sell", "call", ratio=2), "long": call_with("call")}, False),
        ("none", {"call": leg("sell", "call"), "long": call_with("call", ratio=2)}, True),
        ("long", {"call": leg("sell", "call", ratio=2), "long": call_with("call")}, True),
        ("long", {"call": leg("sell", "call", ratio=3), "long": call_with("call")}, False),
        ("none", {"call": leg("sell", "call"), "put": leg("buy", "put")}, False),
        ("none", {"call": leg("sell", "call", 30), "long": leg("buy", "call", 180)}, True),
        ("none", {"call": leg("sell", "call", 180), "long": leg("buy", "call", 30)}, False),
        ("none", {"call": leg("sell", "call", 30, "weekly"), "long": leg("buy", "call", 30, "weekly")}, True),
        (
            "none",
            {"call": leg("sell", "call", 30, "weekly"), "long": leg("buy", "call", 30, "monthly")},
            False,
        ),
        ("short", {"call": leg("sell", "call"), "long": call_with("call")}, True),
        ("none", {"put": leg("sell", "put", ratio=4)}, True),
    ],
)
def test_what_covers_a_call(shares: str, legs: dict[str, Any], covered: bool) -> None:
    """Compares with what a broker's desk would call covered, worked out by hand case by case."""
    assert codes(shares, **legs) == ([] if covered else ["uncovered-call"])


def test_three_calls_are_matched_with_what_covers_each() -> None:
    """The long-lived call covers the long-lived one sold, shares the other; either way round in the file."""
    near, far, long = leg("sell", "call", 30), leg("sell", "call", 180), leg("buy", "call", 210)
    assert codes("long", near=near, far=far, long=long) == []
    assert codes("long", far=far, long=long, near=near) == []
    assert codes("none", near=near, far=far, long=long) == ["uncovered-call"]


@pytest.mark.parametrize(
    ("sold", "bought", "covered"),
    [
        ({"roll": {"at": "expiry"}}, {}, False),
        ({"roll": {"if": {"held": {"at_least": 3}}}}, {}, False),
        ({}, {"roll": {"at": "expiry"}}, True),
        ({}, {"add_when": {"held": {"at_least": 3}}}, False),
        ({"add_when": {"held": {"at_least": 3}}}, {}, True),
        ({"add_when": {"held": {"at_least": 3}}}, {"add_when": {"held": {"at_least": 3}}}, True),
        ({"add_when": {"held": {"at_least": 3}}}, {"add_when": {"held": {"at_least": 4}}}, False),
    ],
)
def test_rolls_and_later_legs(sold: dict[str, Any], bought: dict[str, Any], covered: bool) -> None:
    """A call made again outlives a cover that ends once; a cover that comes later covers nothing before."""
    legs = {"call": leg("sell", "call", 30, **sold), "long": leg("buy", "call", 180, **bought)}
    assert codes("none", **legs) == ([] if covered else ["uncovered-call"])


def test_rolls_of_one_expiry() -> None:
    """Both end together: the sold one may be made again at expiry only if the other is."""
    again = {"at": "expiry"}
    both = {"call": leg("sell", "call", roll=again), "long": call_with("call", roll=again)}
    assert codes("none", **both) == []
    alone = {"call": leg("sell", "call", roll=again), "long": call_with("call")}
    assert codes("none", **alone) == ["uncovered-call"]
    struck_anew = {
        "long": leg("buy", "call"),
        "call": call_with("long", "sell", roll={"if": {"held": {"at_least": 3}}}),
    }
    assert codes("none", **struck_anew) == []


def test_message_says_which_call_and_why() -> None:
    """No cover, too little, too short, made again: four sentences."""
    words = {"name": "test", "shares": "none", "legs": {"call": leg("sell", "call")}}
    fault = only_fault(words)
    assert fault.found == "`legs.call` sells a call that nothing covers"
    assert "shares: long" in fault.allowed
    more = only_fault(words | {"shares": "long", "legs": {"call": leg("sell", "call", ratio=3)}})
    assert more.found == "`legs.call` sells 3 calls a lot, of which 1 are covered"
    shorter = {"call": leg("sell", "call", 90), "wing": leg("buy", "call", 30)}
    assert "may outlive `wing`" in only_fault(words | {"legs": shorter}).found
    again = {"call": leg("sell", "call", 30, roll={"at": "expiry"}), "wing": leg("buy", "call", 90)}
    assert "is written again on its own and would outlive `wing`" in only_fault(words | {"legs": again}).found


def chosen(expiry: Expiry) -> np.ndarray[Any, np.dtype[np.int64]]:
    """The listed expiry that a rule finds at each session of some years, 0 where there is none."""
    assert expiry.days is not None
    at_least = expiry.choose == "at_least"
    return choose_expiries(CYCLES[expiry.listed], expiry.days, at_least, ORDINALS)


@settings(max_examples=150)
@given(expiries(), expiries())
def test_what_is_said_to_outlast_never_ends_first(one: dict[str, Any], other: dict[str, Any]) -> None:
    """Compares the rule of thumb with the listed expiries of twelve years, session by session."""
    longer, shorter = Expiry.model_validate(one), Expiry.model_validate(other)
    if not outlasts(longer, shorter):
        longer, shorter = shorter, longer
    if not outlasts(longer, shorter):
        return
    far, near = chosen(longer), chosen(shorter)
    both = (far > 0) & (near > 0)
    assert (far[both] >= near[both]).all()


@pytest.mark.parametrize(("long_cycle", "short_cycle"), list(product(LEAST_DAYS, LEAST_DAYS)))
def test_a_much_longer_rule_outlasts(long_cycle: str, short_cycle: str) -> None:
    """So that the rule of thumb is not simply no: half a year against the shortest days, on all cycles."""
    longer = Expiry.model_validate({"days": 250, "listed": long_cycle})
    shorter = Expiry.model_validate({"days": LEAST_DAYS[short_cycle], "listed": short_cycle})
    assert outlasts(longer, shorter)
    assert not outlasts(shorter, longer)


@pytest.mark.parametrize("shorter_days", [20, 60, 120, 300])
@pytest.mark.parametrize("chooses", list(product(["nearest", "at_least"], repeat=2)))
def test_just_long_enough(shorter_days: int, chooses: tuple[str, str]) -> None:
    """Compares, for all pairs of cycles, the first days that are said to outlast with the listed expiries."""
    for longer_cycle, shorter_cycle in product(LEAST_DAYS, LEAST_DAYS):
        days = max(shorter_days, LEAST_DAYS[shorter_cycle])
        shorter = Expiry.model_validate({"days": days, "listed": shorter_cycle, "choose": chooses[1]})
        near = chosen(shorter)
        rules = (
            Expiry.model_validate({"days": longer, "listed": longer_cycle, "choose": chooses[0]})
            for longer in range(max(days, LEAST_DAYS[longer_cycle]), 1100)
        )
        far = chosen(next(rule for rule in rules if outlasts(rule, shorter)))
        both = (far > 0) & (near > 0)
        assert (far[both] >= near[both]).all(), (longer_cycle, shorter_cycle)


def test_unknown_days_outlast_nothing() -> None:
    """A rule that could not be read, or follows another leg, says nothing by itself."""
    own = Expiry.model_validate({"days": 30})
    follows = Expiry.model_validate({"with": "call"})
    assert not outlasts(None, own)
    assert not outlasts(own, None)
    assert not outlasts(own, follows)


@settings(max_examples=80)
@given(
    st.sampled_from(["long", "none"]),
    st.lists(
        st.tuples(st.sampled_from(["buy", "sell"]), st.sampled_from([0.5, 1, 2])), min_size=1, max_size=4
    ),
)
def test_one_expiry_is_covered_just_when_it_cannot_lose_without_end(
    shares: str, drawn: list[tuple[str, float]]
) -> None:
    """Compares with the payoff far above every strike: shares plus calls bought less calls sold, in lots."""
    legs: dict[str, Any] = {}
    for at, (side, ratio) in enumerate(drawn):
        words = leg(side, "call", ratio=ratio)
        legs[f"c{at}"] = words if at == 0 else words | {"expiry": {"with": "c0"}}
    slope = (shares == "long") + sum(ratio if side == "buy" else -ratio for side, ratio in drawn)
    assert ("uncovered-call" in codes(shares, **legs)) == (slope < 0)
