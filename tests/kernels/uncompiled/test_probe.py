"""What one close says of structures and positions, as plain Python, against figures worked by hand."""

from __future__ import annotations

import math
from typing import Any

import numpy as np
import pytest

from hedgerow.kernels import layout as at
from hedgerow.kernels.layout import CALL, PUT
from hedgerow.kernels.probe import CHOOSE, HELD, PRICE, PROBED, probe, trigger_figures
from hedgerow.kernels.state import BAR, OPEN, POSITION, WANTED, World
from step_records import FLAT_SMILE, FREE, TODAY, call, costs, ops, plan, put, records, session, smile, spec

EXPIRY = TODAY + 30
UP = {"strike_rule": at.FROM_SPOT, "strike_value": 0.02, "snap": at.SNAP_UP, "cycle": at.MONTHLY}
DOWN = {"side": 1.0, "right": PUT, "strike_rule": at.FROM_SPOT, "strike_value": -0.04, "cycle": at.MONTHLY}
SIGNS = at.HAS_BAR | at.FRESH


def world(rule: Any, operations: Any = None, **bar: Any) -> World:
    """One stock at 100 on two sessions alike, volatility 25 %, without costs."""
    usual = {"open": 100.0, "high": 100.0, "low": 100.0, "close": 100.0, "level": 0.25, "anchor": 0.25}
    bars = records(BAR, (2, 1), **({"signs": SIGNS, "split": 1.0} | usual | bar))
    few: dict[str, Any] = dict.fromkeys(World._fields, records(BAR, 1))
    few |= {"bars": bars, "sessions": np.array([session(EXPIRY, EXPIRY)] * 2).view(np.recarray)}
    few |= {"american": np.ones(1, np.uint8), "plan": [rule], "costs": [costs(FREE)]}
    few |= {"smile": [smile(FLAT_SMILE)], "totals": [None], "scratch": np.zeros(64)}
    few |= {"ops": ops((0.0, at.OP_SIGNAL, 0)) if operations is None else operations}
    few |= {"words": np.full((2, 1), 5)}
    return World(**few)


def looked(place: World, held: Any, task: int) -> Any:
    """What the last session says of one position."""
    out = np.zeros(1, PROBED).view(np.recarray)
    assert probe(place, 1, held, out, task) == 1
    return out[0]


def held(*legs: dict[str, Any], **values: Any) -> Any:
    """One position of these legs."""
    out = records(POSITION, 1, **values)
    for number, fields in enumerate(legs):
        for name, value in fields.items():
            out[0].legs[number][name] = value
    return out


def test_a_collar_chosen_and_measured() -> None:
    """Call at 102, put at 96 around 100: what it costs, wins and loses follows from its two premiums."""
    rule = plan(spec(**UP), spec(**DOWN))
    one = held()
    found = looked(world(rule), one, CHOOSE)
    legs = one[0].legs
    assert [legs[k].strike for k in (0, 1)] == [102.0, 96.0]
    credit = 100.0 * (legs[0].mid - legs[1].mid)
    assert found.credit == pytest.approx(credit)
    assert found.debit == pytest.approx(10_000.0 - credit)
    assert found.best == pytest.approx(200.0 + credit)
    assert found.worst == pytest.approx(400.0 - credit)
    assert found.even == pytest.approx(100.0 - credit / 100.0)
    assert found.stake == pytest.approx(found.debit)
    assert (found.why, found.horizon, found.due) == (at.WHY_NONE, EXPIRY, 0)
    assert [found.fills[k] for k in (0, 1)] == [pytest.approx(legs[k].mid) for k in (0, 1)]
    assert found.odds == pytest.approx(found.chances[0])
    assert 0.0 < found.chances[1] < found.chances[0] < 0.5


def test_given_legs_are_valued_and_left_where_they_are() -> None:
    """The strikes stay; at half the volatility both premiums are lower, and so is the range of outcomes."""
    rule = plan(spec(**UP), spec(**DOWN))
    wide, calm = (held(call(105.0, -100.0, status=WANTED), put(90.0, 100.0, status=WANTED)) for _ in range(2))
    looked(world(rule), wide, PRICE)
    looked(world(rule, level=0.125, anchor=0.125), calm, PRICE)
    assert [calm[0].legs[k].strike for k in (0, 1)] == [105.0, 90.0]
    assert all(calm[0].legs[k].mid < wide[0].legs[k].mid for k in (0, 1))


@pytest.mark.parametrize(("signs", "why"), [(at.HAS_BAR, at.WHY_NO_VOLATILITY), (0, at.WHY_NONE)])
def test_what_is_not_known_is_not_told(signs: int, why: int) -> None:
    """Without volatility, or without a bar, every figure is NaN."""
    found = looked(world(plan(spec(**UP)), signs=signs), held(), CHOOSE)
    assert found.why == why
    assert all(math.isnan(found[name]) for name in ("debit", "best", "worst", "odds", "stake"))


def test_a_position_held_is_worth_its_parts() -> None:
    """Bought at 95 for 9,500 with a call sold at 2: the gain is 500 and what the call has lost."""
    rule = plan(spec(**UP))
    one = held(call(102.0, -100.0), shares=100.0, status=OPEN, flows=-9_300.0, outlay=9_300.0)
    found = looked(world(rule), one, HELD)
    mid = one[0].legs[0].mid
    assert one[0].gain == pytest.approx(10_000.0 - 9_300.0 - 100.0 * mid)
    assert found.leaving == pytest.approx(-100.0 * mid)
    assert (found.best, found.worst) == (pytest.approx(10_200.0 - 9_300.0), pytest.approx(9_300.0))
    assert found.early[0] == 0


@pytest.mark.parametrize(("strike", "cash", "early"), [(80.0, 2.0, 1), (80.0, 0.01, 0), (101.0, 2.0, 0)])
def test_a_written_call_and_its_dividend(strike: float, cash: float, early: int) -> None:
    """Deep in the money it is exercised for a dividend above its time value, not for a small one."""
    bar = {"pay_cash": cash, "pay_ordinal": TODAY + 10}
    found = looked(world(plan(spec(**UP)), **bar), held(call(strike, -100.0), shares=100.0), HELD)
    assert found.due == TODAY + 10
    assert found.early[0] == early
    assert bool(found.reach[0] > 0.99) is (strike == 80.0)


def test_a_deep_written_put_is_exercised() -> None:
    """At 160 with the stock at 100 and 2 % interest a year's put is worth no more than 60; near 100 it is."""
    rule = plan(spec(side=-1.0, right=PUT), shares=0.0)
    deep, near = (looked(world(rule), held(put(k, -100.0, 365)), HELD) for k in (160.0, 101.0))
    assert (deep.early[0], near.early[0]) == (1, 0)


def test_triggers_say_what_they_compare() -> None:
    """Days left, sessions held, gain and signals, each in its place among the operations."""
    asked = ops(
        (0.03, at.OP_GAIN_OF_DEBIT, -1),
        (7.0, at.OP_DAYS_LEFT, -1),
        (0.0, at.OP_AND, -1),
        (5.0, at.OP_HELD, -1),
        (0.0, at.OP_SIGNAL, 2),
        (0.0, at.OP_SIGNAL, 1),
        (0.0, at.OP_HOLDS_SHARES, -1),
        (0.5, at.OP_LEG_LOST, 0),
    )
    one = held(
        call(102.0, -100.0, mid=0.25, entry_price=1.0), shares=100.0, gain=200.0, stake=10_000.0, entered=-8
    )
    out = np.zeros((1, asked.size))
    assert trigger_figures(world(plan(spec(**UP)), asked), 1, one, out) == 1
    assert out[0].tolist() == [0.02, 30.0, -math.inf, 9.0, 1.0, 0.0, 1.0, 0.75]
    assert one[0].legs[0].right == CALL
