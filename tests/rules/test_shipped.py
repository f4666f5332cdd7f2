"""The shipped strategies: each is right, and holds what its name promises."""

from __future__ import annotations

from pathlib import Path

import pytest

from hedgerow.rules.explain import explain
from hedgerow.rules.load import load_strategy
from hedgerow.rules.schema import HoldsSharesTest, SignalTest, Strategy

FOLDER = Path(__file__).parents[2] / "strategies"
FILES = sorted(FOLDER.glob("*.yaml"))


def shipped(name: str) -> Strategy:
    """One shipped strategy."""
    return load_strategy(FOLDER / f"{name}.yaml")


@pytest.mark.parametrize("path", FILES, ids=lambda path: path.name)
def test_each_is_right_and_can_be_told(path: Path) -> None:
    """No fault, a name, a paragraph for readers, a text; and words that come back as the same strategy."""
    strategy = load_strategy(path)
    assert strategy.about
    assert explain(strategy).startswith(strategy.name + "\n\n" + strategy.about)
    assert load_strategy(strategy.plain()) == strategy


def test_weekly_collar() -> None:
    """Shares, a call at the first strike at or above the price, a put four percent below, one week."""
    strategy = shipped("collar-weekly")
    call, put = strategy.legs
    assert (strategy.shares, call.sold, call.right, put.sold, put.right) == (
        "long",
        True,
        "call",
        False,
        "put",
    )
    assert (call.expiry.days, call.expiry.listed, put.expiry.with_leg) == (7, "weekly", "call")
    assert (call.strike.from_spot, call.strike.snap) == (0.0, "up")
    assert (put.strike.from_spot, put.strike.snap) == (-0.04, "down")
    assert strategy.accept is not None
    assert strategy.accept.net_credit is True
    assert strategy.fill == "close"
    assert strategy.exit == ()


def test_buy_write_follows_the_published_rule() -> None:
    """One month, first strike at or above, sold again at expiry and close (Cboe methodology, from memory)."""
    strategy = shipped("index-buywrite")
    (call,) = strategy.legs
    assert (call.expiry.days, call.expiry.listed) == (30, "monthly")
    assert (call.strike.steps, call.strike.snap) == (0, "up")
    assert call.roll is None  # the position ends, and all of it is put into the next one
    assert strategy.fill == "close"
    assert strategy.exit == ()


def test_different_month_collar_outlives_its_calls() -> None:
    """The put is months longer than the call, and the call is sold again."""
    strategy = shipped("collar-different-month")
    call, put = strategy.leg("call"), strategy.leg("put")
    assert call.expiry.days is not None
    assert put.expiry.days is not None
    assert put.expiry.days >= 3 * call.expiry.days
    assert call.roll is not None
    assert call.roll.at_expiry
    assert put.roll is None


def test_covered_call_and_married_put_are_halves_of_a_collar() -> None:
    """One has the call alone and a stop, the other the put alone, five to eight months out."""
    covered, married = shipped("covered-call"), shipped("married-put")
    assert [leg.right for leg in covered.legs] == ["call"]
    assert covered.stop is not None
    assert covered.stop.distance == 0.07
    assert [leg.right for leg in married.legs] == ["put"]
    assert married.stop is None
    assert married.leg("put").expiry.days is not None
    assert 150 <= married.leg("put").expiry.days <= 240


STRUCTURES = {
    "collar": ("long", "-call +put"),
    "collar-debit": ("long", "+put -call"),
    "collar-different-month-in-the-money": ("long", "+put -call"),
    "collar-reverse": ("long", "-call +put"),
    "collar-reverse-different-month": ("long", "+put -call"),
    "collar-zero-cost": ("long", "+put -call"),
    "conversion": ("long", "-call +put"),
    "reversal": ("short", "+call -put"),
    "covered-call-in-the-money": ("long", "-call"),
    "covered-call-out-of-the-money": ("long", "-call"),
    "cash-secured-put": ("none", "-put"),
    "cash-secured-put-then-calls": ("none", "-put -call"),
    "put-credit-spread": ("none", "-put +put"),
    "call-debit-spread": ("none", "+call -call"),
    "married-put-with-income": ("long", "+put -call"),
    "put-spread-collar": ("long", "+put -put -call"),
    "rolling-protective-put": ("long", "+put"),
    "laddered-hedge": ("long", "+put"),
    "shares-alone": ("long", ""),
    "cash": ("none", ""),
}


@pytest.mark.parametrize(("name", "structure"), STRUCTURES.items())
def test_what_each_is_made_of(name: str, structure: tuple[str, str]) -> None:
    """Shares and legs, bought + and sold -, as the trade calls the structure (common practice)."""
    strategy = shipped(name)
    legs = " ".join(f"{'-' if leg.sold else '+'}{leg.right}" for leg in strategy.legs)
    assert (strategy.shares, legs) == structure
    assert all(leg.ratio == 1 for leg in strategy.legs)


@pytest.mark.parametrize("name", ["conversion", "reversal", "call-debit-spread", "put-credit-spread"])
def test_legs_that_must_end_together(name: str) -> None:
    """One expiry for both legs; a conversion's and a reversal's share their strike too."""
    first, second = shipped(name).legs
    assert second.expiry.with_leg == first.name
    assert (second.strike.same_as == first.name) == (name in ("conversion", "reversal"))


def test_debit_spread_has_the_strikes_of_the_collar() -> None:
    """The call bought lies where the collar's put does, the call sold where its call does."""
    collar, spread = shipped("collar"), shipped("call-debit-spread")
    assert spread.leg("low call").strike == collar.leg("put").strike
    assert spread.leg("high call").strike == collar.leg("call").strike


def test_covered_calls_in_at_and_out_of_the_money() -> None:
    """Below the price, at it, and at a delta under a half; each with a stop."""
    inside, at, out = (shipped(f"covered-call{end}") for end in ("-in-the-money", "", "-out-of-the-money"))
    assert (inside.leg("call").strike.from_spot or 0) < 0
    assert at.leg("call").strike.steps == 0
    assert (out.leg("call").strike.delta or 1) < 0.5
    assert all(strategy.stop is not None for strategy in (inside, at, out))
    roll = out.leg("call").roll
    assert roll is not None
    assert (roll.direction, roll.only_for) == ("up and out", "credit")


def test_report_is_left_in_time() -> None:
    """Decided two sessions before it reacts and filled at the next open, which is still the eve."""
    strategy = shipped("covered-call-in-the-money")
    (rule,) = strategy.exit
    assert isinstance(rule.condition, SignalTest)
    assert rule.condition.signal == "sessions_to_report"
    assert rule.condition.bounds is not None
    assert rule.condition.bounds.high == 2
    assert strategy.fill == "open"


def test_different_months() -> None:
    """Three to five months of put, calls sold again while it lives; one put is in the money and shared."""
    names = ("collar-different-month-in-the-money", "collar-reverse-different-month")
    for strategy in map(shipped, names):
        put, call = strategy.leg("put"), strategy.leg("call")
        assert put.expiry.days is not None
        assert 90 <= put.expiry.days <= 150
        assert call.roll is not None
        assert call.roll.at_expiry
        assert (put.strike.from_spot or 0) > 0
    assert shipped(names[0]).leg("call").strike.same_as == "put"


def test_puts_that_are_rolled() -> None:
    """Before expiry and at it, so that shares are never bare; the ladder has three about a month apart."""
    for name in ("rolling-protective-put", "laddered-hedge"):
        roll = shipped(name).leg("put").roll
        assert roll is not None
        assert roll.at_expiry
        assert roll.condition is not None
    enter = shipped("laddered-hedge").enter
    assert enter is not None
    assert enter.ladder is not None
    assert (enter.ladder.positions, enter.ladder.spacing) == (3, 21)


def test_married_put_with_income_sells_after_a_rise() -> None:
    """No call at entry; one is added later, and both legs have their rolls."""
    strategy = shipped("married-put-with-income")
    assert strategy.leg("call").add_when is not None
    assert strategy.leg("put").add_when is None
    assert all(leg.roll is not None for leg in strategy.legs)


def test_shares_that_are_kept() -> None:
    """Calls wait for the shares that the put brings."""
    strategy = shipped("cash-secured-put-then-calls")
    assert strategy.after_assignment == "keep"
    assert strategy.leg("call").add_when == HoldsSharesTest(holds_shares=True)
    assert shipped("cash-secured-put").after_assignment == "sell"


def test_put_spread_collar_follows_the_quarters() -> None:
    """Set anew on quarterly expiries, at their close."""
    strategy = shipped("put-spread-collar")
    assert strategy.enter is not None
    assert strategy.enter.on is not None
    assert strategy.enter.on.expiry_of == "quarterly"
    assert strategy.fill == "close"
    assert strategy.leg("put").expiry.listed == "quarterly"


def test_leg_that_is_not_there() -> None:
    """Asking for an unknown leg is a mistake of the program, not of the file."""
    with pytest.raises(KeyError):
        shipped("collar").leg("cal")
