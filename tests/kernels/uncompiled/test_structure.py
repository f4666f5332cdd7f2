"""The structure of one lot: legs chosen, cost, capital and why it is declined; all by hand."""

from __future__ import annotations

import math
from typing import Any

import pytest

from hedgerow.kernels import layout as at
from hedgerow.kernels.layout import CALL, PUT
from hedgerow.kernels.state import NONE, WANTED
from hedgerow.kernels.structure import (
    capital_of,
    choose_legs,
    has_bids,
    judge,
    leg_price,
    lot_cost,
    price_leg,
    spread_share,
    stake_of,
)
from step_records import (
    DEAR,
    FREE,
    SPOT,
    TODAY,
    bar,
    call,
    clock,
    costs,
    desk,
    plan,
    position,
    put,
    session,
    smile,
    spec,
)

EXPIRY = TODAY + 30
CALL_UP = {"strike_rule": at.FROM_SPOT, "strike_value": 0.02, "snap": at.SNAP_UP, "cycle": at.MONTHLY}
PUT_DOWN = {
    "side": 1.0,
    "right": PUT,
    "strike_rule": at.FROM_SPOT,
    "strike_value": -0.04,
    "cycle": at.MONTHLY,
}
FIGURES = (440.0, 460.0, 99.6, 0.4, 0.5, 0.0)  # best, worst, even, odds of best, odds of gain, owed


def chosen(rule: Any, *expiries: int, charged: Any = DEAR, spot: float = SPOT) -> tuple[int, Any]:
    """Why the legs of a rule cannot be chosen, or 0, and the position with them."""
    held = position()
    return choose_legs(desk(rule, charged), held, session(*expiries), spot, bar(), clock()), held


def test_a_collar_is_chosen() -> None:
    """Strikes 102 and 96 on a grid of one, one contract a lot, both at the session's expiry, priced."""
    rule = plan(spec(**CALL_UP), spec(**PUT_DOWN, with_leg=0))
    why, held = chosen(rule, EXPIRY, 0)
    assert why == at.WHY_NONE
    first, second = held.legs[0], held.legs[1]
    assert (first.strike, first.expiry, first.quantity, first.right) == (102.0, EXPIRY, -100.0, CALL)
    assert (second.strike, second.expiry, second.quantity, second.right) == (96.0, EXPIRY, 100.0, PUT)
    assert (first.status, second.status, held.legs[2].status) == (WANTED, WANTED, NONE)
    assert first.volatility == second.volatility == 0.25
    assert first.mid > 1.0
    assert second.mid > 0.5


@pytest.mark.parametrize(("since", "strikes"), [(TODAY, (102.0, 96.0)), (TODAY + 1, (105.0, 95.0))])
def test_strikes_were_wider_apart_once(since: int, strikes: tuple[float, float]) -> None:
    """Before the day from which today's spacing holds they are five apart at this price."""
    rule = plan(spec(**CALL_UP), spec(**PUT_DOWN), modern_from=since)
    why, held = chosen(rule, EXPIRY, EXPIRY)
    assert why == at.WHY_NONE
    assert (held.legs[0].strike, held.legs[1].strike) == strikes


def test_no_listed_expiry_and_no_listed_strike() -> None:
    """A leg whose expiry is not listed that day, and one three times above the price."""
    assert chosen(plan(spec(**CALL_UP)), 0)[0] == at.WHY_NO_EXPIRY
    far = spec(**CALL_UP | {"strike_value": 2.0})
    assert chosen(plan(far), EXPIRY)[0] == at.WHY_NO_STRIKE


def test_nobody_bids() -> None:
    """A call far above the price for a few days is worth less than half a tick: it cannot be sold."""
    far = spec(**CALL_UP | {"strike_value": 0.5})
    assert chosen(plan(far), TODAY + 4)[0] == at.WHY_NO_BID
    assert chosen(plan(spec(**PUT_DOWN | {"strike_value": -0.5})), TODAY + 4)[0] == at.WHY_NONE


def test_legs_that_are_added_later_wait() -> None:
    """They are neither chosen nor paid at entry."""
    rule = plan(spec(**CALL_UP, add_length=1), spec(**PUT_DOWN))
    why, held = chosen(rule, EXPIRY, EXPIRY)
    assert why == at.WHY_NONE
    assert (held.legs[0].status, held.legs[1].status) == (NONE, WANTED)


def test_a_leg_referred_to_is_chosen_first() -> None:
    """The put stands first in the file and spends what the call brings: order 1, 0."""
    spend = {"side": 1.0, "right": PUT, "strike_rule": at.SPEND, "strike_value": 1.0, "strike_leg": 1}
    rule = plan(spec(**spend, cycle=at.MONTHLY), spec(**CALL_UP))
    rule.order[:2] = (1, 0)
    why, held = chosen(rule, EXPIRY, EXPIRY)
    fees = costs(DEAR)
    income = leg_price(held.legs[1], -1.0, clock(), fees)
    assert why == at.WHY_NONE
    assert leg_price(held.legs[0], 1.0, clock(), fees) <= income
    one_higher = position(put(held.legs[0].strike + 1.0, 100.0))
    price_leg(one_higher.legs[0], SPOT, bar(), clock(), smile())
    assert leg_price(one_higher.legs[0], 1.0, clock(), fees) > income


def wanted(*legs: dict[str, Any]) -> Any:
    """A position whose legs wait to be traded."""
    return position(*({**leg, "status": WANTED} for leg in legs))


def test_what_a_lot_costs() -> None:
    """Call sold at 1.43 (mid 1.50 less 4.5 %), put bought at 0.91 (0.87 and 4.5 %): credit 52; by hand.

    Shares at 100.10 with slippage: 10,010 - 52; fees 100 x 0.01 and twice 0.65.
    """
    held = wanted(call(102, -100, mid=1.5, moneyness=1.0), put(96, 100, mid=0.87, moneyness=1.0))
    books = desk(plan(spec(), spec()), DEAR)
    debit, credit, fees = lot_cost(books, held, SPOT, clock())
    assert credit == pytest.approx(52.0)
    assert debit == pytest.approx(10_010.0 - 52.0)
    assert fees == pytest.approx(2.3)
    short = desk(plan(spec(), spec(), shares=-1.0), DEAR)
    assert lot_cost(short, held, SPOT, clock())[0] == pytest.approx(-9990.0 - 52.0)
    none = desk(plan(spec(), spec(), shares=0.0), DEAR)
    assert lot_cost(none, held, SPOT, clock()) == (
        pytest.approx(-52.0),
        pytest.approx(52.0),
        pytest.approx(1.3),
    )


def test_the_spread_over_the_premium() -> None:
    """(1.57 - 1.43) + (0.91 - 0.83) over 1.50 + 0.87; nothing where nothing is traded."""
    held = wanted(call(102, -100, mid=1.5, moneyness=1.0), put(96, 100, mid=0.87, moneyness=1.0))
    assert spread_share(desk(plan(spec(), spec()), DEAR), held, clock()) == pytest.approx(0.22 / 2.37)
    assert spread_share(desk(plan(spec(), spec()), FREE), held, clock()) == 0.0
    assert spread_share(desk(plan(), DEAR), position(), clock()) == 0.0


def test_bids_of_what_is_to_be_sold() -> None:
    """Only legs that wait and are written need one."""
    books = desk(plan(spec(), spec()), DEAR)
    assert not has_bids(books, wanted(call(150, -100, mid=0.004)), clock())
    assert has_bids(books, wanted(call(150, 100, mid=0.004)), clock())
    assert has_bids(books, position(call(150, -100, mid=0.004)), clock())


@pytest.mark.parametrize(
    ("bound", "value", "why"),
    [
        ("net_debit_most", -0.01, at.WHY_NET_DEBIT),  # wanted a credit of 1 % of the stock's price, got 0.4 %
        ("worst_most", 0.04, at.WHY_WORST_LOSS),  # 460 of 10,000 is 4.6 %
        ("worst_least", 0.05, at.WHY_WORST_LOSS),
        ("best_most", 0.04, at.WHY_BEST_GAIN),  # 4.4 %
        ("best_least", 0.05, at.WHY_BEST_GAIN),
        ("odds_most", 0.39, at.WHY_ODDS),
        ("odds_least", 0.41, at.WHY_ODDS),
        ("ratio_least", 0.96, at.WHY_BEST_OVER_WORST),  # 440 over 460 is 0.9565
        ("spread_most", 0.09, at.WHY_SPREAD),
    ],
)
def test_each_condition_declines(bound: str, value: float, why: int) -> None:
    """Alone among free ones, just missed; a free rule takes the structure."""
    assert judge(plan(), 10_000.0, 40.0, 10_000.0, FIGURES, 0.1) == at.WHY_NONE
    assert judge(plan(**{bound: value}), 10_000.0, 40.0, 10_000.0, FIGURES, 0.1) == why


@pytest.mark.parametrize(
    ("bound", "value"),
    [
        ("net_debit_most", -0.004),
        ("worst_most", 0.046),
        ("worst_least", 0.046),
        ("best_most", 0.044),
        ("best_least", 0.044),
        ("odds_most", 0.4),
        ("odds_least", 0.4),
        ("ratio_least", 0.95),
        ("spread_most", 0.1),
    ],
)
def test_each_condition_accepts_what_meets_it(bound: str, value: float) -> None:
    """Both ends of a bound are included."""
    assert judge(plan(**{bound: value}), 10_000.0, 40.0, 10_000.0, FIGURES, 0.1) == at.WHY_NONE


def test_a_credit_is_wanted() -> None:
    """More than nothing."""
    rule = plan(net_credit=1.0)
    assert judge(rule, 10_000.0, 0.0, 10_000.0, FIGURES, 0.1) == at.WHY_NET_CREDIT
    assert judge(rule, 10_000.0, 0.01, 10_000.0, FIGURES, 0.1) == at.WHY_NONE


def test_odds_that_are_not_known_meet_no_bound() -> None:
    """An unbounded best has no odds: free rules take it, bounded ones do not."""
    unbounded = (math.inf, 460.0, 101.0, math.nan, 0.5, 0.0)
    assert judge(plan(), 10_000.0, 0.0, 10_000.0, unbounded, 0.0) == at.WHY_NONE
    assert judge(plan(odds_least=0.1), 10_000.0, 0.0, 10_000.0, unbounded, 0.0) == at.WHY_ODDS
    assert judge(plan(best_most=9.0), 10_000.0, 0.0, 10_000.0, unbounded, 0.0) == at.WHY_BEST_GAIN


@pytest.mark.parametrize(
    ("debit", "owed", "fees", "shares", "expected"),
    [
        (9960.0, 0.0, 2.3, 100.0, 9962.3),  # a collar: what is paid
        (-160.0, 500.0, 2.6, 0.0, 342.6),  # a condor: its width less its premium
        (-9880.0, 10_300.0, 1.3, -100.0, 10_000.0),  # a protected short: never less than the stock's price
        (5.0, 0.0, 0.0, 0.0, 100.0),  # a cheap option: at least 1 % of a lot
    ],
)
def test_what_a_lot_ties_up(debit: float, owed: float, fees: float, shares: float, expected: float) -> None:
    """Money of one lot at a stock price of 100."""
    assert capital_of(debit, owed, fees, shares, SPOT) == pytest.approx(expected)


@pytest.mark.parametrize(
    ("debit", "owed", "shares", "stake"),
    [
        (9_800.0, 0.0, 100.0, 9_800.0),  # a collar: what was paid
        (-80.0, 9_500.0, 0.0, 9_420.0),  # a put secured by cash: strike less premium
        (-10_050.0, 10_000.0, -100.0, 10_000.0),  # a reversal: the price of the shares, not a debit of -50
        (-9_700.0, 20_500.0, -100.0, 10_800.0),  # short shares under a call: all that could be owed
    ],
)
def test_what_gains_are_measured_on(debit: float, owed: float, shares: float, stake: float) -> None:
    """Money of one lot of a stock at 100: paid and owed; of shares sold short at least their price."""
    assert stake_of(debit, owed, shares, SPOT) == stake


@pytest.mark.parametrize("base", [0.0, -25.0])
def test_a_gain_that_is_locked_in_is_not_declined(base: float) -> None:
    """Nothing or less is tied up: without bounds all is taken, and a worst that is a gain is no loss."""
    locked = (25.0, -25.0, math.nan, 1.0, 1.0, 0.0)
    assert judge(plan(), base, 25.0, 10_000.0, locked, 0.0) == at.WHY_NONE
    assert judge(plan(worst_most=0.05, best_least=0.01), base, 25.0, 10_000.0, locked, 0.0) == at.WHY_NONE
    assert (
        judge(plan(worst_most=0.05), base, 25.0, 10_000.0, (25.0, 5.0, *locked[2:]), 0.0) == at.WHY_WORST_LOSS
    )
