"""What a strategy becomes for the walk: every word of entry and management in its field."""

from __future__ import annotations

import datetime as dt
from typing import Any

import numpy as np
import pytest

from hedgerow.kernels import layout
from hedgerow.market.calendar import sessions_between
from hedgerow.rules.load import load_strategy
from hedgerow.rules.program import Program, compile_strategy
from hedgerow.rules.schema import SignalValue
from rule_words import collar, leg

ORDINALS = sessions_between(dt.date(2013, 1, 2).toordinal(), dt.date(2013, 3, 28).toordinal())
MONDAYS = (ORDINALS + 6) % 7 == 0


def values(wanted: SignalValue) -> Any:
    """A signal that holds, or grows, from the tenth session on."""
    rising = np.repeat(np.arange(ORDINALS.size)[:, None], 2, axis=1)
    return rising >= 10 if wanted.signal == "macd_positive" else rising.astype(np.float64)


def program(words: dict[str, Any]) -> Program:
    """A strategy compiled for two symbols."""
    return compile_strategy(load_strategy(words), values, ORDINALS, 2, "modern")


def plan_of(words: dict[str, Any]) -> Any:
    """Its one record of the plan."""
    return program(words).plan[0]


def test_nothing_said_is_one_position_whenever_flat() -> None:
    """Compares the fields with what leaving the words out means."""
    plan = plan_of(collar())
    names = ("ladder", "spacing", "cooling", "rank_figure", "rank_low", "keep_shares")
    assert [int(plan[name]) for name in names] == [1, 0, 0, layout.RANK_NONE, 0, 0]
    assert program(collar()).may_enter.all()
    assert plan["specs"][0]["roll_way"] == layout.ROLL_ANY


def test_pace_of_entries() -> None:
    """Ladder, spacing and pause are the counts of the file."""
    plan = plan_of(collar(enter={"ladder": {"positions": 3, "spacing": 5}, "cool_down": {"sessions": 10}}))
    assert (plan["ladder"], plan["spacing"], plan["cooling"]) == (3, 5, 10)


@pytest.mark.parametrize(
    ("figure", "code"),
    [("odds_of_best", 1), ("best_over_worst", 2), ("net_credit", 3), ("best_gain", 4), ("worst_loss", 5)],
)
@pytest.mark.parametrize("order", ["high", "low"])
def test_ranking_by_a_figure(figure: str, code: int, order: str) -> None:
    """The code of the figure and the order go to the plan, and no score is worked out before."""
    words = collar(enter={"rank": {"by": {"figure": figure}, "order": order}})
    assert plan_of(words)["rank_figure"] == code
    assert plan_of(words)["rank_low"] == (order == "low")
    assert program(words).rank.shape == (1, 1)


def test_ranking_by_a_signal_is_a_score() -> None:
    """High first; the sign turns where the low come first."""
    high = program(collar(enter={"rank": {"by": {"signal": "rsi"}}}))
    low = program(collar(enter={"rank": {"by": {"signal": "rsi"}, "order": "low"}}))
    assert high.plan[0]["rank_figure"] == layout.RANK_NONE
    np.testing.assert_array_equal(high.rank, -low.rank)
    assert high.rank[5, 0] == 5.0


def test_days_and_conditions_of_entry_hold_together() -> None:
    """Mondays from the tenth session on, the same for both symbols."""
    found = program(
        collar(enter={"on": {"weekday": "monday"}, "when": {"signal": "macd_positive"}})
    ).may_enter
    expected = MONDAYS & (np.arange(ORDINALS.size) >= 10)
    np.testing.assert_array_equal(found, np.repeat(expected[:, None], 2, axis=1))
    assert 0 < expected.sum() < MONDAYS.sum()


@pytest.mark.parametrize(
    ("way", "code"),
    [("any", 0), ("up", 1), ("down", 2), ("out", 3), ("up and out", 4), ("down and out", 5)],
)
def test_way_of_a_roll(way: str, code: int) -> None:
    """The code of the direction stands in the record of its leg."""
    roll = {"if": {"stock_up": {"at_least": "5%"}}, "direction": way, "only_for": "credit"}
    spec = plan_of({"name": "a", "legs": {"call": leg("sell", "call", roll=roll)}})["specs"][0]
    assert (spec["roll_way"], spec["roll_credit"], spec["roll_at_expiry"]) == (code, 1, 0)


def test_kept_shares_and_the_leg_that_waits_for_them() -> None:
    """The switch of the plan, and one operation: the position holds shares."""
    legs = {"put": leg("sell", "put"), "call": leg("sell", "call", add_when={"holds_shares": True})}
    made = program({"name": "a", "shares": "none", "after_assignment": "keep", "legs": legs})
    assert made.plan[0]["keep_shares"] == 1
    spec = made.plan[0]["specs"][1]
    (op,) = made.ops[spec["add_start"] : spec["add_start"] + spec["add_length"]]
    assert (op["code"], op["value"], op["arg"]) == (layout.OP_HOLDS_SHARES, 1.0, -1)


def test_cash_never_enters() -> None:
    """No legs, no shares, and no session at which a position may be opened."""
    made = program({"name": "Cash", "shares": "none", "legs": {}})
    assert not made.may_enter.any()
    assert (made.plan[0]["legs"], made.plan[0]["shares"]) == (0, 0.0)
    assert made.expiries.shape == (0, ORDINALS.size)


def test_codes_follow_each_other() -> None:
    """The operation added later does not share its code with one of those before it."""
    earlier = [value for name, value in vars(layout).items() if name.startswith("OP_")]
    assert sorted(earlier) == list(range(14))
