"""Faults that need more than one part of a strategy to see, one by one and together."""

from __future__ import annotations

from typing import Any

import pytest

from hedgerow.rules.load import load_strategy
from rule_words import codes_of, collar, faults_of, leg, only_fault, with_leg


def strategy(**words: Any) -> dict[str, Any]:
    """A strategy of these words with a name."""
    return {"name": "test", **words}


def place_of(words: dict[str, Any]) -> tuple[str, str]:
    """The code of the one fault, and the dotted name with which its sentence begins."""
    fault = only_fault(words)
    return fault.code, fault.found.split("`")[1]


def test_the_plain_collar_is_right() -> None:
    """The base that the cases below change has no fault of its own."""
    assert faults_of(collar()) == []


@pytest.mark.parametrize(
    ("words", "place"),
    [
        (with_leg("put", expiry={"with": "cal"}), "legs.put.expiry.with"),
        (with_leg("put", strike={"same_as": "calls"}), "legs.put.strike.same_as"),
        (with_leg("put", strike={"zero_cost_with": "cll"}), "legs.put.strike.zero_cost_with"),
        (with_leg("put", strike={"spend": {"share": "50%", "of": "cal"}}), "legs.put.strike.spend.of"),
        (
            collar(exit=[{"name": "x", "if": {"leg_lost": {"leg": "cal", "at_least": "5%"}}}]),
            "exit.x.if.leg_lost.leg",
        ),
        (
            collar(exit=[{"name": "x", "if": {"days_left": {"leg": "cal", "at_most": 5}}}]),
            "exit.x.if.days_left.leg",
        ),
        (
            with_leg("call", roll={"if": {"all": [{"leg_lost": {"leg": "cal", "at_least": "5%"}}]}}),
            "legs.call.roll.if.all.1.leg_lost.leg",
        ),
        (
            with_leg("put", add_when={"not": {"days_left": {"leg": "cal", "at_most": 5}}}),
            "legs.put.add_when.not.days_left.leg",
        ),
    ],
)
def test_leg_that_is_not_there(words: dict[str, Any], place: str) -> None:
    """Wherever a leg is named, an unknown one is told with the nearest right name."""
    assert place_of(words) == ("unknown-name", place)
    assert only_fault(words).remedy == "did you mean `call`?"


@pytest.mark.parametrize("strike", [{"same_as": "put"}, {"spend": {"share": "5%", "of": "put"}}])
def test_leg_that_names_itself(strike: dict[str, Any]) -> None:
    """A leg cannot be reckoned from itself."""
    assert "reference" in codes_of(with_leg("put", strike=strike))


def test_leg_that_expires_with_itself() -> None:
    """The other legs are told as what is allowed."""
    words = strategy(legs={"put": leg("buy", "put") | {"expiry": {"with": "put"}}, "low": leg("sell", "put")})
    fault = only_fault(words)
    assert (fault.code, fault.allowed) == ("reference", "allowed: another leg, of `low`")


def test_expiries_in_a_circle() -> None:
    """Each circle once, with all of its legs."""
    words = with_leg("call", expiry={"with": "put"})
    fault = only_fault(words)
    assert fault.code == "circle"
    assert "`call` -> `put` -> `call`" in fault.found


def test_strikes_in_a_circle() -> None:
    """Through different rules too."""
    words = with_leg("call", with_leg("put", strike={"same_as": "call"}), strike={"zero_cost_with": "put"})
    assert codes_of(words) == ["circle"]


def test_three_legs_in_a_circle_and_one_that_leads_into_it() -> None:
    """The circle is told once, not for the leg that only leads into it."""
    legs = {
        "a": leg("buy", "put") | {"strike": {"same_as": "b"}},
        "b": leg("buy", "put") | {"strike": {"same_as": "c"}},
        "c": leg("buy", "put") | {"strike": {"same_as": "b"}},
    }
    assert codes_of(strategy(legs=legs)) == ["circle"]


def test_worst_case_is_solved_last() -> None:
    """One leg alone may be solved for the worst case, and no other may wait for it."""
    solved = {"worst_loss_within": "5%"}
    both = with_leg("low put", with_leg("put", strike=solved), **leg("buy", "put", strike=solved))
    assert codes_of(both) == ["circle"]
    waits = with_leg("call", with_leg("put", strike=solved), strike={"same_as": "put"})
    assert codes_of(waits) == ["circle"]
    assert codes_of(with_leg("put", strike=solved)) == []


@pytest.mark.parametrize(
    ("name", "strike"),
    [
        ("call", {"worst_loss_within": "5%"}),
        ("call", {"spend": {"share": "50%", "of": "put"}}),
        ("low put", {"spend": {"share": "50%", "of": "put"}}),
        ("low put", {"zero_cost_with": "put"}),
    ],
)
def test_sides_of_solved_strikes(name: str, strike: dict[str, Any]) -> None:
    """What is spent must come in; two legs that cost nothing together are one sold and one bought."""
    base = collar()
    base["legs"]["low put"] = leg("buy", "put")
    assert codes_of(with_leg(name, base, strike=strike)) == ["side"]


def test_sides_that_are_right() -> None:
    """The put spends what the call brings; the call pays for the put."""
    assert codes_of(with_leg("put", strike={"spend": {"share": "50%", "of": "call"}})) == []
    assert codes_of(with_leg("call", strike={"zero_cost_with": "put"})) == []


def test_more_than_four_legs() -> None:
    """Five are one too many, told at the legs."""
    legs = {f"put {at}": leg("buy", "put") for at in range(5)}
    fault = only_fault(strategy(legs=legs))
    assert (fault.code, fault.found, fault.allowed) == ("legs", "`legs` has 5 legs", "allowed: at most 4")


def test_nothing_held() -> None:
    """No shares and no legs is no position."""
    assert codes_of(strategy(shares="none")) == ["empty-position"]
    assert only_fault(strategy(shares="none")).remedy == "for cash alone write `legs: {}` beside it"
    assert codes_of(strategy(shares="none", legs={})) == []
    assert codes_of(strategy()) == []


@pytest.mark.parametrize("word", ["gain", "loss", "days_left", "held", "stock_up", "stock_down", "leg_lost"])
def test_words_about_a_position_before_there_is_one(word: str) -> None:
    """Each is refused in `enter.when`, however deep."""
    inner = {"at_most": 3} if word == "days_left" else {"at_least": 5 if word == "held" else "5%"}
    inner |= {"leg": "call"} if word == "leg_lost" else {}
    for condition, place in (
        ({word: inner}, "enter.when"),
        ({"any": [{"not": {word: inner}}]}, "enter.when.any.1.not"),
    ):
        assert place_of(collar(enter={"when": condition})) == ("position-word", f"{place}.{word}")


def test_exit_names_repeated() -> None:
    """The second of the name is told, with the number of the first."""
    rules = [{"name": name, "if": {"held": {"at_least": 3}}} for name in ("cut", "time", "cut")]
    fault = only_fault(collar(exit=rules))
    assert fault.code == "repeated"
    assert "exit 1 too" in fault.found


def test_bounds_that_cannot_hold_together() -> None:
    """Within one `all`; in one `any`, or with other parameters, they may."""
    high, low = {"signal": "rsi", "at_least": 70}, {"signal": "rsi", "at_most": 30}
    assert place_of(collar(enter={"when": {"all": [high, low]}})) == ("contradiction", "enter.when.all.2")
    assert codes_of(collar(enter={"when": {"any": [high, low]}})) == []
    assert codes_of(collar(enter={"when": {"all": [high, low | {"sessions": 5}]}})) == []
    assert codes_of(collar(enter={"when": {"all": [high, low | {"of": "IDX"}]}})) == []
    assert codes_of(collar(enter={"when": {"all": [high, {"signal": "rsi", "at_most": 80}]}})) == []


@pytest.mark.parametrize(
    ("shares", "stop", "code"),
    [
        ("long", {"below_entry": "7%"}, ""),
        ("short", {"above_entry": "7%"}, ""),
        ("long", {"above_entry": "7%"}, "stop"),
        ("short", {"below_entry": "7%"}, "stop"),
        ("none", {"below_entry": "7%"}, "stop"),
        ("long", {}, "one-of"),
        ("long", {"below_entry": "7%", "above_entry": "7%"}, "one-of"),
        ("long", {"below_entry": "0%"}, "range"),
        ("long", {"below_entry": 7}, "percent"),
    ],
)
def test_stops(shares: str, stop: dict[str, Any], code: str) -> None:
    """On the side on which shares lose, at a distance, and only with shares."""
    words = strategy(shares=shares, legs={"put": leg("buy", "put")}, stop=stop)
    found = codes_of(words)
    assert (code in found) if code else found == []


@pytest.mark.parametrize(
    ("accept", "code"),
    [
        ({"best_gain": {"at_least": "1%"}}, "unbounded"),
        ({"odds_of_best": {"at_least": "1%"}}, "unbounded"),
        ({"best_over_worst": {"at_least": 1}}, "unbounded"),
        ({"worst_loss": {"at_most": "5%"}}, ""),
        ({"net_credit": True}, "never"),
        ({"net_debit": {"at_most": "-1%"}}, "never"),
        ({"net_debit": {"at_most": "1%"}}, ""),
    ],
)
def test_accept_of_a_married_put(accept: dict[str, Any], code: str) -> None:
    """Its gain has no bound and it brings no money in; its worst loss and its cost may be asked."""
    words = strategy(legs={"put": leg("buy", "put", 180)}, accept=accept)
    assert codes_of(words) == ([code] if code else [])


def test_accept_of_premium_without_legs() -> None:
    """Shares alone have no premium, and a leg that comes later has none at entry."""
    assert codes_of(strategy(accept={"net_debit": {"at_most": "1%"}})) == ["no-legs"]
    later = strategy(
        legs={"call": leg("sell", "call", add_when={"stock_up": {"at_least": "5%"}})},
        accept={"net_credit": True},
    )
    assert codes_of(later) == ["no-legs"]


def test_worst_loss_without_a_bound() -> None:
    """Shares sold short with nothing above them."""
    words = strategy(shares="short", accept={"worst_loss": {"at_most": "5%"}})
    assert codes_of(words) == ["unbounded"]
    covered = strategy(
        shares="short", legs={"call": leg("buy", "call")}, accept={"worst_loss": {"at_most": "5%"}}
    )
    assert codes_of(covered) == []


def test_shares_of_what_has_no_bound() -> None:
    """Half of the best gain of a married put, half of the worst loss of shares sold short."""
    best = [{"name": "half", "if": {"gain": {"at_least": "50%", "of": "best"}}}]
    worst = [{"name": "half", "if": {"loss": {"at_least": "50%", "of": "worst"}}}]
    put = {"put": leg("buy", "put")}
    assert place_of(strategy(legs=put, exit=best)) == ("unbounded", "exit.half.if.gain.of")
    assert place_of(strategy(shares="short", exit=worst)) == ("unbounded", "exit.half.if.loss.of")
    assert codes_of(strategy(legs=put, exit=worst)) == []
    assert codes_of(collar(exit=best)) == []


def test_days_left_without_legs() -> None:
    """There is no expiry to count to."""
    words = strategy(exit=[{"name": "time", "if": {"days_left": {"at_most": 3}}}])
    assert codes_of(words) == ["no-legs"]


def test_roll_of_a_leg_that_ends_with_another() -> None:
    """At expiry only if the other is made again too; on a condition always."""
    at_expiry, early = {"at": "expiry"}, {"if": {"stock_up": {"at_least": "5%"}}}
    assert place_of(with_leg("put", roll=at_expiry)) == ("roll", "legs.put.roll")
    assert codes_of(with_leg("put", with_leg("call", roll=at_expiry), roll=at_expiry)) == []
    assert codes_of(with_leg("put", roll=early)) == []


def test_checks_run_on_what_is_right_of_a_faulty_file() -> None:
    """A bad percent in one leg hides neither a missing partner nor a word about the position at entry."""
    words = with_leg("call", strike={"from_spot": 2})
    words["legs"]["put"]["expiry"] = {"with": "cal"}
    words["enter"] = {"when": {"all": [{"signal": "rsi"}, {"held": {"at_least": 3}}]}}
    words["exit"] = [{"name": "x", "if": {"los": 3}}, {"name": "x", "if": {"held": {"at_least": 3}}}]
    assert sorted(codes_of(words)) == sorted(
        ["percent", "unknown-name", "bound", "position-word", "unknown-word", "repeated"]
    )


def test_structure_is_not_judged_while_a_leg_is_unknown() -> None:
    """What covers a call is not guessed when the leg that may cover it cannot be read."""
    legs = {"call": leg("sell", "call"), "long": leg("buy", "call") | {"expiry": {"days": "many"}}}
    assert codes_of(strategy(shares="none", legs=legs)) == ["whole"]


def test_a_strategy_made_in_python_is_judged_too() -> None:
    """A model that exists is valid: made from models instead of words, the same checks hold."""
    from pydantic import ValidationError

    from hedgerow.rules.schema import Strategy

    made = load_strategy(collar())
    assert Strategy(name="again", legs=made.legs).legs == made.legs
    with pytest.raises(ValidationError, match="covers"):
        Strategy(name="again", shares="none", legs=made.legs)
