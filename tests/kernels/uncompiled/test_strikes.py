"""Strike rules, beside the figures they ask for: inverted back, or met and not met one strike further."""

from __future__ import annotations

import math
from typing import Any

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from scipy.optimize import brentq

from hedgerow.kernels import layout as at
from hedgerow.kernels.layout import CALL, PUT
from hedgerow.kernels.lognormal import delta
from hedgerow.kernels.payoff import chance_beyond
from hedgerow.kernels.quote import at_the_money_for, forward_of, quote
from hedgerow.kernels.strikes import choose_strike, premium, wanted_strike
from step_records import DEAR, FREE, SMILED, SPOT, TODAY, bar, clock, costs, smile, spec

EXPIRY = TODAY + 30
WORLD = bar(pay_cash=0.8, pay_ordinal=TODAY + 12, pay_gap=91, level=0.3)


def market(charged: Any = FREE, spot: float = SPOT) -> tuple[float, Any, Any, Any, Any]:
    """Spot, bar, clock, smile and costs as the rules take them."""
    return spot, WORLD, clock(), smile(SMILED), costs(charged)


def volatility_of(strike: float) -> float:
    """The surface's volatility at a strike."""
    return quote(CALL, strike, EXPIRY, SPOT, WORLD, clock(), smile(SMILED))[1]


def wanted(**values: Any) -> float:
    """The strike a rule wants before it is moved to the grid."""
    return wanted_strike(spec(**values), EXPIRY, SPOT, WORLD, clock(), smile(SMILED))


def chosen(
    money: float = 0.0, income: float = 0.0, reference: float = 0.0, charged: Any = FREE, **values: Any
) -> float:
    """The listed strike a rule leads to on a grid of one."""
    return choose_strike(spec(**values), EXPIRY, 1.0, market(charged), (reference, money, income))


def forward_delta(right: int, strike: float) -> float:
    """N(d1) on the forward, without a sign, at the strike's own volatility."""
    forward = forward_of(SPOT, WORLD, EXPIRY, clock())
    return abs(delta(right, forward, strike, 30 / 365, 0.0, 0.0, volatility_of(strike)))


def odds_beyond(right: int, strike: float) -> float:
    """The chance of ending above a call's strike, or below a put's."""
    over = chance_beyond(strike, EXPIRY, (SPOT, WORLD, clock(), smile(SMILED)))
    return over if right == CALL else 1 - over


@pytest.mark.parametrize("right", [CALL, PUT])
@settings(max_examples=25)
@given(size=st.integers(5, 80).map(lambda n: n / 100))
def test_delta_inverts_back(right: int, size: float) -> None:
    """The strike at which the delta is the one asked for, by bisection, to a tenth of a cent."""
    exact = brentq(lambda strike: forward_delta(right, strike) - size, 60.0, 160.0)
    assert wanted(right=right, strike_rule=at.DELTA, strike_value=size) == pytest.approx(exact, abs=0.001)


@pytest.mark.parametrize("right", [CALL, PUT])
@settings(max_examples=25)
@given(odds=st.integers(5, 90).map(lambda n: n / 100))
def test_odds_invert_back(right: int, odds: float) -> None:
    """The strike at which the chance is the one asked for, by bisection, to a tenth of a cent."""
    exact = brentq(lambda strike: odds_beyond(right, strike) - odds, 60.0, 160.0)
    assert wanted(right=right, strike_rule=at.ODDS, strike_value=odds) == pytest.approx(exact, abs=0.001)


@given(count=st.integers(-12, 12).map(lambda n: n / 4))
def test_deviations_invert_back(count: float) -> None:
    """ln(K / F) over the at-the-money volatility times the root of time."""
    strike = wanted(right=CALL, strike_rule=at.DEVIATIONS, strike_value=count)
    atm = at_the_money_for(WORLD, EXPIRY, clock(), smile(SMILED))
    forward = forward_of(SPOT, WORLD, EXPIRY, clock())
    assert math.log(strike / forward) / (atm * math.sqrt(30 / 365)) == pytest.approx(count, abs=1e-12)


@pytest.mark.parametrize(
    ("share", "snap", "expected"),
    [
        (0.0, at.SNAP_UP, 101.0),
        (-0.04, at.SNAP_DOWN, 96.0),
        (0.026, at.SNAP_NEAREST, 103.0),
        (0.026, at.SNAP_UP, 104.0),
    ],
)
def test_a_distance_from_the_spot_on_the_grid(share: float, snap: int, expected: float) -> None:
    """Spot 100.60 on a grid of one, by hand: 100.60, 96.576 and 103.2156 moved as asked."""
    rule = spec(strike_rule=at.FROM_SPOT, strike_value=share, snap=snap)
    assert choose_strike(rule, EXPIRY, 1.0, market(spot=100.6), (0.0, 0.0, 0.0)) == expected


@pytest.mark.parametrize(
    ("steps", "snap", "expected"),
    [(0.0, at.SNAP_UP, 101.0), (2.0, at.SNAP_DOWN, 102.0), (-3.0, at.SNAP_NEAREST, 98.0)],
)
def test_steps_from_the_money(steps: float, snap: int, expected: float) -> None:
    """Listed strikes counted from the one at the money, spot 100.60, by hand."""
    rule = spec(strike_rule=at.STEPS, strike_value=steps, snap=snap)
    assert choose_strike(rule, EXPIRY, 1.0, market(spot=100.6), (0.0, 0.0, 0.0)) == expected


def test_the_same_strike_as_another_leg() -> None:
    """Just that leg's strike; nothing when it lies outside what is listed."""
    assert chosen(reference=97.0, strike_rule=at.SAME_AS) == 97.0
    assert chosen(reference=251.0, strike_rule=at.SAME_AS) == 0.0


@pytest.mark.parametrize(("value", "listed"), [(-0.59, True), (-0.62, False), (1.49, True), (1.52, False)])
def test_what_lies_outside_the_listed_strikes(value: float, listed: bool) -> None:
    """Strikes are listed from 0.4 to 2.5 times the price."""
    assert (chosen(strike_rule=at.FROM_SPOT, strike_value=value) > 0.0) is listed


def price(side: float, right: int, strike: float, charged: Any = DEAR) -> float:
    """What a leg costs or brings."""
    spot, world, moment, surface, fees = market(charged)
    return premium(side, (right, strike, EXPIRY), spot, world, moment, surface, fees)


@settings(max_examples=12)
@given(share=st.integers(10, 150).map(lambda n: n / 100))
def test_spending_a_share_of_another_premium_on_a_put(share: float) -> None:
    """The put found costs at most that share of what the call brought; the next dearer one costs more."""
    money = price(-1.0, CALL, 102.0)
    strike = chosen(money, charged=DEAR, side=1.0, right=PUT, strike_rule=at.SPEND, strike_value=share)
    if strike == 0.0:
        assert price(1.0, PUT, 60.0) > share * money
        return
    assert price(1.0, PUT, strike) <= share * money + 1e-9
    assert price(1.0, PUT, strike + 1.0) > share * money


@settings(max_examples=12)
@given(money=st.integers(30, 900).map(lambda n: n / 100))
def test_zero_cost_with_a_bought_leg(money: float) -> None:
    """The call written brings in at least what the put costs; one strike further out it would not."""
    strike = chosen(money, charged=DEAR, side=-1.0, right=CALL, strike_rule=at.ZERO_COST)
    assert price(-1.0, CALL, strike) >= money - 1e-9
    assert price(-1.0, CALL, strike + 1.0) < money


@settings(max_examples=12)
@given(money=st.integers(30, 900).map(lambda n: n / 100))
def test_zero_cost_with_a_written_leg(money: float) -> None:
    """The put bought costs at most what the call brings; one strike higher it would not."""
    strike = chosen(money, charged=DEAR, side=1.0, right=PUT, strike_rule=at.ZERO_COST)
    assert price(1.0, PUT, strike) <= money + 1e-9
    assert price(1.0, PUT, strike + 1.0) > money


def test_a_budget_that_nothing_meets() -> None:
    """No put for a cent's share of a cent; no call that brings in more than the stock's price."""
    put = {"side": 1.0, "right": PUT, "strike_rule": at.SPEND}
    assert chosen(0.01, charged=DEAR, strike_value=0.01, **put) == 0.0
    assert chosen(120.0, charged=DEAR, side=-1.0, right=CALL, strike_rule=at.ZERO_COST) == 0.0


@settings(max_examples=12)
@given(within=st.integers(5, 150).map(lambda n: n / 1000), income=st.integers(0, 300).map(lambda n: n / 100))
def test_a_put_that_keeps_the_worst_loss_within(within: float, income: float) -> None:
    """Debit less strike is within the share of the debit at the put found, and not one strike lower."""
    rule = {"side": 1.0, "right": PUT, "strike_rule": at.WORST_WITHIN, "strike_value": within}
    strike = chosen(0.0, income, charged=DEAR, **rule)

    def worst(at_strike: float) -> float:
        debit = SPOT * (1.0 + DEAR.slippage) - income + price(1.0, PUT, at_strike)
        return (debit - at_strike) / debit

    if strike == 0.0:
        assert min(worst(float(listed)) for listed in range(40, 221)) > within
        return
    assert worst(strike) <= within + 1e-12
    assert worst(strike - 1.0) > within


def test_premiums_are_the_ask_and_the_bid() -> None:
    """Mid plus and minus the half-spread; equal without costs."""
    mid = quote(CALL, 103.0, EXPIRY, SPOT, WORLD, clock(), smile(SMILED))[0]
    assert price(1.0, CALL, 103.0, FREE) == price(-1.0, CALL, 103.0, FREE) == mid
    assert price(-1.0, CALL, 103.0) < mid < price(1.0, CALL, 103.0)
