"""Rolls ordered at a close: which way, for what money, and for what reason; by hand."""

from __future__ import annotations

from typing import Any

import pytest

from hedgerow.kernels import layout as at
from hedgerow.kernels.closing import order_legs
from hedgerow.kernels.holding import move_legs
from hedgerow.kernels.state import ADDING, LIVE, MOVING, NONE, OPEN, WANTED, Scene
from step_records import (
    DEAR,
    FREE,
    SPOT,
    TODAY,
    bar,
    call,
    clock,
    desk,
    ops,
    plan,
    position,
    put,
    session,
    spec,
    written,
)

ALWAYS = (0.0, at.OP_HELD, -1)
NEVER = (99.0, at.OP_HELD, -1)
SOON, LATER = TODAY + 5, TODAY + 35
ROLLED = {"strike_rule": at.FROM_SPOT, "strike_value": 0.02, "cycle": at.MONTHLY, "roll_length": 1}


def ordered(rule: Any, held: Any, expiry: int = LATER, spot: float = SPOT, charged: Any = FREE) -> Any:
    """The desk after the legs of a position have been looked at: operation 0 always holds, 1 never does."""
    books = desk(rule, charged)._replace(ops=ops(ALWAYS, NEVER))
    look = bar(open=spot, high=spot, low=spot, close=spot)
    scene = Scene(7, 0, look, session(), look, session(*([expiry] * 4)))
    order_legs(books, held, scene, clock(), 0)
    return books


def short_call(strike: float, expiry: int, **values: Any) -> Any:
    """Shares under one call that was written."""
    leg = call(strike, -100, expiry - TODAY, **values)
    return position(leg, shares=100.0, lots=1.0, status=OPEN, entered=3)


# the new call stands at 102: above, at or below the one held, at the same or a later expiry
@pytest.mark.parametrize(
    ("way", "goes"),
    [
        (at.ROLL_ANY, (True, True, True, True, False)),
        (at.ROLL_UP, (True, True, False, False, False)),
        (at.ROLL_DOWN, (False, False, True, False, False)),
        (at.ROLL_OUT, (False, True, False, True, False)),
        (at.ROLL_UP_AND_OUT, (False, True, False, False, False)),
        (at.ROLL_DOWN_AND_OUT, (False, False, False, False, False)),
    ],
)
def test_ways_to_roll(way: int, goes: tuple[bool, ...]) -> None:
    """Up only, up and out, down only, out only, nowhere at all: which of them each word lets through."""
    held = ((98, LATER), (98, SOON), (105, LATER), (102, SOON), (102, LATER))
    for (strike, expiry), wanted in zip(held, goes, strict=True):
        one = short_call(strike, expiry)
        books = ordered(plan(spec(**ROLLED, roll_way=way), moves=1), one)
        assert (one.legs[0].status == MOVING, len(written(books))) == (wanted, int(wanted))
        assert (one.legs[0].wanted_strike > 0.0, one.orders) == (wanted, int(wanted))


def test_down_and_out() -> None:
    """From 105 in five days to 102 in thirty-five."""
    one = short_call(105, SOON)
    books = ordered(plan(spec(**ROLLED, roll_way=at.ROLL_DOWN_AND_OUT), moves=1), one)
    (row,) = written(books)
    assert (row.kind, row.reason, row.leg) == (at.KIND_SIGNALLED, at.WHY_ROLL, 0)
    assert (row.strike, row.expiry, row.spot) == (102.0, LATER, SPOT)


@pytest.mark.parametrize(("strike", "mid", "goes"), [(99, 1.75, True), (88, 12.02, False)])
def test_only_for_a_credit(strike: float, mid: float, goes: bool) -> None:
    """To 102 in 35 days, worth 2.30: more than the 99 call with five days asks, less than the 88 call."""
    one = short_call(strike, SOON, mid=mid)
    ordered(plan(spec(**ROLLED, roll_credit=1), moves=1), one)
    assert one.legs[0].status == (MOVING if goes else LIVE)
    assert (one.legs[0].strike, one.legs[0].expiry) == (strike, SOON)  # until it fills, the leg stays itself


def test_the_spread_can_take_the_credit() -> None:
    """Sold at 2.30 less 40 %, bought back at 1.75 and 40 % more: no credit is left."""
    one = short_call(99, SOON, mid=1.75)
    ordered(plan(spec(**ROLLED, roll_credit=1), moves=1), one, charged=DEAR._replace(half_spread=0.4))
    assert one.legs[0].status == LIVE


def test_reasons_of_what_is_opened_anew() -> None:
    """An addition is one where it is ordered and where it fills; one written again is a roll."""
    rule = plan(spec(**(ROLLED | {"roll_length": 0}), add_length=1, roll_at_expiry=1), moves=1)
    for status, kept, reason in ((NONE, ADDING, at.WHY_ADDED), (WANTED, WANTED, at.WHY_ROLL)):
        one = position({"status": status}, shares=100.0, lots=1.0, status=OPEN, entered=3)
        books = ordered(rule, one)
        assert one.legs[0].status == kept
        move_legs(books, one, 8, SPOT, bar(), clock())
        assert [row.reason for row in written(books)] == [reason, reason]
        assert (one.legs[0].status, one.legs[0].quantity, one.legs[0].strike) == (LIVE, -100.0, 102.0)
        assert one.orders == 0


def test_what_does_not_hold_is_left_alone() -> None:
    """The condition of the roll, and that of the addition, do not hold."""
    rule = plan(spec(**ROLLED, roll_start=1), spec(**ROLLED, add_start=1, add_length=1), moves=1)
    one = position(call(98, -100, 5), {"status": NONE}, shares=100.0, status=OPEN, entered=3)
    assert len(written(ordered(rule, one))) == 0
    assert [leg.status for leg in one.legs[:2]] == [LIVE, NONE]


def test_no_listed_expiry_no_order() -> None:
    """Nothing is ordered where no expiry lies ahead."""
    one = short_call(98, SOON)
    assert len(written(ordered(plan(spec(**ROLLED), moves=1), one, expiry=TODAY))) == 0
    assert (one.legs[0].status, one.legs[0].wanted_strike) == (LIVE, 0.0)


def test_a_leg_goes_with_its_partner() -> None:
    """A call that shares its put's expiry is written again for the day on which the put ends."""
    rule = plan(spec(**ROLLED, with_leg=1), spec(side=1.0, right=at.PUT), moves=1)
    one = position(call(98, -100, 5), put(95, 100, 90), shares=100.0, status=OPEN, entered=3)
    (row,) = written(ordered(rule, one))
    assert (row.leg, row.expiry) == (0, TODAY + 90)


def test_a_roll_that_finds_no_bid_is_declined() -> None:
    """A call far out that nobody pays for: the leg is left as it is, and the log says so."""
    far = ROLLED | {"strike_value": 1.2}
    one = short_call(99, SOON, mid=1.75)
    (row,) = written(ordered(plan(spec(**far), moves=1), one, charged=DEAR))
    assert (row.kind, row.reason, row.leg) == (at.KIND_DECLINED, at.WHY_NO_BID, 0)
    assert (one.legs[0].status, one.legs[0].strike, one.legs[0].quantity) == (LIVE, 99.0, -100.0)
    assert (one.legs[0].wanted_strike, one.orders) == (0.0, 0)


@pytest.mark.parametrize(("status", "left"), [(NONE, NONE), (WANTED, WANTED), (LIVE, LIVE)])
def test_a_bid_that_is_gone_by_the_open(status: int, left: int) -> None:
    """Ordered at 100, the stock opens at 45: nobody pays for the 102 call, and nothing is done."""
    rule = plan(spec(**ROLLED, add_length=1, roll_at_expiry=1, side=-1.0), moves=1)
    one = short_call(99, SOON, mid=1.75) if status == LIVE else position({"status": status}, shares=100.0)
    books = ordered(rule, one, charged=DEAR)
    move_legs(books, one, 8, 45.0, bar(), clock())
    assert [row.kind for row in written(books)] == [at.KIND_SIGNALLED, at.KIND_DECLINED]
    assert (one.legs[0].status, one.legs[0].wanted_strike) == (left, 0.0)
    assert one.legs[0].quantity == (-100.0 if status == LIVE else 0.0)
