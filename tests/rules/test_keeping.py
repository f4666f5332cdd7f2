"""Shares that an assignment brings, legs that wait for them, which way a leg rolls, and cash alone."""

from __future__ import annotations

from typing import Any

import pytest

from hedgerow.rules.explain import explain, paragraphs
from hedgerow.rules.load import load_strategy
from rule_words import codes_of, leg, only_fault

HELD = {"holds_shares": True}


def put_then_calls(**words: Any) -> dict[str, Any]:
    """A put sold, and a call sold against the shares that it brings."""
    legs = {"put": leg("sell", "put"), "call": leg("sell", "call", add_when=HELD, roll={"at": "expiry"})}
    return {"name": "test", "shares": "none", "after_assignment": "keep", "legs": legs} | words


def with_call(**words: Any) -> dict[str, Any]:
    """The same with other words in the call."""
    base = put_then_calls()
    base["legs"]["call"] |= words
    return base


def test_calls_against_shares_that_are_kept() -> None:
    """Covered, whether the condition is the shares alone or they and something else."""
    assert codes_of(put_then_calls()) == []
    both = {"all": [HELD, {"stock_up": {"at_least": "2%"}}]}
    assert codes_of(with_call(add_when=both)) == []
    assert codes_of(with_call(ratio=0.5)) == []


@pytest.mark.parametrize(
    "words",
    [
        with_call(add_when={"any": [HELD, {"held": {"at_least": 3}}]}),
        with_call(add_when={"not": HELD}),
        with_call(add_when={"held": {"at_least": 3}}),
        with_call(ratio=1.5),
        put_then_calls(after_assignment="sell"),
        put_then_calls(legs={"put": leg("sell", "put"), "call": leg("sell", "call")}),
    ],
    ids=["either", "not", "no shares asked", "too many", "sold", "at entry"],
)
def test_naked_calls_are_refused(words: dict[str, Any]) -> None:
    """A call that may be there without shares, more calls than shares, or shares that are sold: no cover."""
    assert codes_of(words) == ["uncovered-call"]


def test_the_message_names_the_way_out() -> None:
    """A call that waits for shares is told that they have to be kept."""
    assert "or `after_assignment: keep`" in only_fault(put_then_calls(after_assignment="sell")).allowed


def test_kept_shares_cover_one_call_and_shares_of_its_own_another() -> None:
    """Two calls over the shares of one assignment are one too many; `shares: long` keeps nothing else."""
    legs = {"put": leg("sell", "put")}
    legs |= {name: leg("sell", "call", add_when=HELD) for name in ("one", "two")}
    assert codes_of(put_then_calls(legs=legs)) == ["uncovered-call"]
    assert codes_of(put_then_calls(shares="long")) == ["idle"]


@pytest.mark.parametrize(
    ("words", "code"),
    [
        ({"name": "a", "after_assignment": "keep"}, "idle"),
        (
            {"name": "a", "shares": "none", "after_assignment": "keep", "legs": {"put": leg("buy", "put")}},
            "idle",
        ),
        ({"name": "a", "after_assignment": "hold"}, "choice"),
        (put_then_calls(legs={"put": leg("sell", "put", roll={"at": "expiry"})}), "twice"),
    ],
)
def test_nothing_to_keep(words: dict[str, Any], code: str) -> None:
    """Shares of the strategy's own, no put sold, a word of no meaning, a put that would be owed twice."""
    assert codes_of(words) == [code]


def test_put_may_roll_while_it_lives() -> None:
    """Bought back and sold again: it is never owed twice."""
    rolled = leg("sell", "put", roll={"if": {"stock_down": {"at_least": "5%"}}, "direction": "down and out"})
    assert codes_of(put_then_calls(legs={"put": rolled})) == []


def test_it_is_told_what_becomes_of_the_shares() -> None:
    """Kept and sold differ in three paragraphs."""
    kept = dict(paragraphs(load_strategy(put_then_calls())))
    assert "kept gain with the stock, up to the strike of the call" in kept["Best case"]
    assert "cash for that is set aside, and the shares are kept" in kept["Obligations"]
    assert "the shares held are delivered" in kept["Obligations"]
    assert kept["Management"].startswith(
        "Shares that an assigned put brings are kept. Later, when the position"
    )
    sold = dict(
        paragraphs(load_strategy({"name": "a", "shares": "none", "legs": {"put": leg("sell", "put")}}))
    )
    assert "Shares that this leaves are sold at that close." in sold["Exit"]


def test_shares_sold_short_are_never_held() -> None:
    """Asked in an exit of short shares the word can never hold; of long ones it may be asked."""
    exits = [{"name": "x", "if": {"not": HELD}}]
    assert codes_of({"name": "a", "shares": "short", "exit": exits}) == ["never"]
    assert codes_of({"name": "a", "exit": exits}) == []


@pytest.mark.parametrize("word", ["accept", "enter", "exit", "stop", "after_assignment"])
def test_cash_has_nothing_else(word: str) -> None:
    """A word about positions beside no position is told as such."""
    values: dict[str, Any] = {
        "accept": {"spread_to_premium": {"at_most": "5%"}},
        "enter": {"on": {"weekday": "monday"}},
        "exit": [{"name": "x", "if": {"held": {"at_least": 3}}}],
        "stop": {"below_entry": "5%"},
        "after_assignment": "keep",
    }
    words = {"name": "Cash", "shares": "none", "legs": {}, word: values[word]}
    assert "idle" in codes_of(words)


def test_cash() -> None:
    """Nothing is held, nothing is ever entered, and the words come back."""
    cash = load_strategy({"name": "Cash", "shares": "none", "legs": {}})
    assert cash.holds_nothing
    assert cash.plain() == {"name": "Cash", "shares": "none", "legs": {}}
    assert load_strategy(cash.plain()) == cash
    assert explain(cash) == (
        "Cash\n\nPosition. Nothing: neither shares nor options.\n\nBest case. Nothing to win but the "
        "interest on cash.\n\nWorst case. Nothing to lose.\n\nEntry. Never: the account stays in cash.\n"
    )


ROLL_IF = {"stock_up": {"at_least": "5%"}}


@pytest.mark.parametrize("way", ["any", "up", "down", "out", "up and out", "down and out"])
def test_ways_of_a_roll(way: str) -> None:
    """Each reads and is told, `any` by saying nothing."""
    words = {"name": "a", "legs": {"call": leg("sell", "call", roll={"if": ROLL_IF, "direction": way})}}
    made = load_strategy(words)
    assert made.legs[0].roll is not None
    assert made.legs[0].roll.direction == way
    text = dict(paragraphs(made))["Management"]
    assert ("but only" in text) == (way != "any")
    assert ("later expiry" in text) == ("out" in way)
    assert ("higher strike" in text) == ("up" in way)
    assert ("lower strike" in text) == ("down" in way)


def test_direction_and_credit_together() -> None:
    """Both are told in one sentence."""
    roll = {"if": ROLL_IF, "direction": "up and out", "only_for": "credit"}
    text = dict(paragraphs(load_strategy({"name": "a", "legs": {"call": leg("sell", "call", roll=roll)}})))
    assert (
        "but only to a higher strike and a later expiry and only if that brings money in."
        in text["Management"]
    )


def test_direction_of_what_has_ended() -> None:
    """A leg made again at expiry alone goes no way; a word that is none is told."""
    words = {"name": "a", "legs": {"call": leg("sell", "call", roll={"at": "expiry", "direction": "up"})}}
    assert codes_of(words) == ["idle"]
    words["legs"]["call"]["roll"] = {"if": ROLL_IF, "direction": "sideways"}
    assert codes_of(words) == ["choice"]


def test_a_leg_cannot_go_where_its_partner_stays() -> None:
    """Out with the expiry of a leg that stays, up with its strike: never; if the partner rolls, it may."""
    call = leg("sell", "call")
    put = {"buy": "put", "expiry": {"with": "call"}, "strike": {"same_as": "call"}}
    for way in ("out", "up", "down and out"):
        words = {
            "name": "a",
            "legs": {"call": call, "put": put | {"roll": {"if": ROLL_IF, "direction": way}}},
        }
        assert set(codes_of(words)) == {"never"}
        words["legs"] = words["legs"] | {"call": call | {"roll": {"if": ROLL_IF}}}
        assert codes_of(words) == []
