"""The shipped strategies: each is right, and holds what its name promises."""

from __future__ import annotations

from pathlib import Path

import pytest

from hedgerow.rules.explain import explain
from hedgerow.rules.load import load_strategy
from hedgerow.rules.schema import Strategy

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
    """One has the call alone and a stop, the other the put alone."""
    covered, married = shipped("covered-call"), shipped("married-put")
    assert [leg.right for leg in covered.legs] == ["call"]
    assert covered.stop is not None
    assert covered.stop.distance == 0.07
    assert [leg.right for leg in married.legs] == ["put"]
    assert married.stop is None


def test_leg_that_is_not_there() -> None:
    """Asking for an unknown leg is a mistake of the program, not of the file."""
    with pytest.raises(KeyError):
        shipped("collar").leg("cal")
