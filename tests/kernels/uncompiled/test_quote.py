"""Values at one moment of the walk, beside Black-Scholes by scipy and sums written out."""

from __future__ import annotations

import math

import numpy as np
import pytest
from scipy.stats import norm

from hedgerow.kernels.layout import CALL, PUT
from hedgerow.kernels.quote import at_the_money_for, escrow, forward_of, next_dividend, quote
from step_records import SMILED, SPOT, TODAY, bar, clock, smile

PAYING = {"pay_cash": 0.6, "pay_ordinal": TODAY + 20, "pay_gap": 91}


def black_scholes(right: int, spot: float, strike: float, years: float, rate: float, sigma: float) -> float:
    """The textbook formula (Hull, Options, Futures and Other Derivatives), by scipy's normal distribution."""
    d1 = (math.log(spot / strike) + (rate + sigma**2 / 2) * years) / (sigma * math.sqrt(years))
    sign = 1 if right == CALL else -1
    owed = strike * math.exp(-rate * years) * norm.cdf(sign * (d1 - sigma * math.sqrt(years)))
    return sign * (spot * norm.cdf(sign * d1) - owed)


def smiled(level: float, anchor: float, days: float, strike: float, forward: float) -> tuple[float, float]:
    """Volatility and standardized moneyness of a strike, written from the definition of the surface."""
    years, m = days / 365, SMILED
    weight = (1 - math.exp(-m.kappa * years)) / (m.kappa * years)
    atm = min(m.cap, max(m.floor, (anchor + (level - anchor) * weight) * m.ratio + m.points))
    z = math.log(strike / forward) / (atm * math.sqrt(years))
    held = float(np.clip(z, -m.wing, m.wing))
    scale = (30 / max(days, 1)) ** m.skew_decay
    return atm * max(0.3, 1 + scale * (m.skew * held + m.curvature * held**2)), abs(z)


@pytest.mark.parametrize(("days", "count"), [(19, 0), (20, 1), (110, 1), (111, 2), (300, 4)])
def test_escrow_is_the_sum_of_the_dividends_to_come(days: int, count: int) -> None:
    """Present values of 0.60 after 20, 111, 202 and 293 days, on the expiry itself too."""
    dues = [20 + 91 * n for n in range(count)]
    assert all(due <= days for due in dues)
    expected = sum(0.6 * math.exp(-0.02 * due / 365) for due in dues)
    assert escrow(bar(**PAYING), TODAY + days, clock()) == pytest.approx(expected, rel=1e-14)


def test_escrow_leaves_out_what_is_past_or_today() -> None:
    """A projection that is overdue counts from the next one on; one for today has gone already."""
    late = bar(**PAYING | {"pay_ordinal": TODAY})
    assert escrow(late, TODAY + 90, clock()) == 0.0
    assert escrow(late, TODAY + 91, clock()) == pytest.approx(0.6 * math.exp(-0.02 * 91 / 365))
    once = bar(**PAYING | {"pay_gap": 0})
    assert escrow(once, TODAY + 300, clock()) == pytest.approx(0.6 * math.exp(-0.02 * 20 / 365))
    assert escrow(bar(), TODAY + 300, clock()) == 0.0


@pytest.mark.parametrize(("due", "gap", "expected"), [(5, 91, 5), (0, 91, 91), (-200, 91, 73), (-3, 0, None)])
def test_the_next_dividend(due: int, gap: int, expected: int | None) -> None:
    """The first of the row of projected days that lies after today; 0 where it is over, or there is none."""
    found = next_dividend(bar(pay_cash=0.5, pay_ordinal=TODAY + due, pay_gap=gap), clock())
    assert found == (0 if expected is None else TODAY + expected)
    assert next_dividend(bar(), clock()) == 0


def test_forward_carries_the_spot_without_its_dividends() -> None:
    """(S - PV) exp(rT), T with the hours of the day still to go."""
    paid = 0.6 * math.exp(-0.02 * 20 / 365)
    moment = clock(extra_days=0.25)
    years = 50.25 / 365
    assert forward_of(SPOT, bar(**PAYING), TODAY + 50, moment) == pytest.approx(
        (SPOT - paid) * math.exp(0.02 * years), rel=1e-14
    )


@pytest.mark.parametrize("right", [CALL, PUT])
@pytest.mark.parametrize("strike", [70.0, 95.0, 100.0, 104.0, 150.0])
@pytest.mark.parametrize("days", [4, 30, 200])
def test_european_quotes(right: int, strike: float, days: int) -> None:
    """Value, volatility and moneyness of options on a cash-settled index with projected dividends."""
    world = bar(**PAYING | {"level": 0.35, "anchor": 0.2})
    value, volatility, away = quote(right, strike, TODAY + days, 101.0, world, clock(), smile(SMILED))
    held = sum(0.6 * math.exp(-0.02 * due / 365) for due in (20, 111) if due <= days)
    years = days / 365
    sigma, z = smiled(0.35, 0.2, days, strike, (101.0 - held) * math.exp(0.02 * years))
    assert volatility == pytest.approx(sigma, rel=1e-12)
    assert away == pytest.approx(z, rel=1e-9)
    expected = black_scholes(right, 101.0 - held, strike, years, 0.02, sigma)
    assert value == pytest.approx(expected, rel=1e-9, abs=1e-12)


@pytest.mark.parametrize("strike", [80.0, 100.0, 125.0])
def test_parity_holds_where_exercise_waits(strike: float) -> None:
    """Call less put is the escrowed spot less the discounted strike (put-call parity, Hull)."""
    world, moment = bar(**PAYING), clock()
    call, *_ = quote(CALL, strike, TODAY + 150, SPOT, world, moment, smile(SMILED))
    put, *_ = quote(PUT, strike, TODAY + 150, SPOT, world, moment, smile(SMILED))
    base = SPOT - escrow(world, TODAY + 150, moment)
    assert call - put == pytest.approx(base - strike * math.exp(-0.02 * 150 / 365), abs=1e-10)


@pytest.mark.parametrize("strike", [60.0, 90.0, 100.0, 110.0, 160.0])
def test_american_quotes_are_worth_at_least_the_european_ones(strike: float) -> None:
    """And at least what exercise pays now, to half a tick; a call without dividends exactly the European."""
    early = clock(american=1)
    for right in (CALL, PUT):
        for world in (bar(), bar(**PAYING)):
            american, *_ = quote(right, strike, TODAY + 150, SPOT, world, early, smile(SMILED))
            european, *_ = quote(right, strike, TODAY + 150, SPOT, world, clock(), smile(SMILED))
            intrinsic = max(0.0, SPOT - strike if right == CALL else strike - SPOT)
            assert american >= european - 1e-12
            assert american >= intrinsic - 0.005
    call, *_ = quote(CALL, strike, TODAY + 150, SPOT, bar(), early, smile(SMILED))
    assert call == quote(CALL, strike, TODAY + 150, SPOT, bar(), clock(), smile(SMILED))[0]


def test_a_call_may_be_exercised_before_the_dividend() -> None:
    """Deep in the money before a dividend of 8 a call is worth what it is to just before it."""
    rich = bar(pay_cash=8.0, pay_ordinal=TODAY + 2, pay_gap=0, level=0.1, anchor=0.1)
    value, *_ = quote(CALL, 60.0, TODAY + 30, SPOT, rich, clock(american=1), smile())
    expected = black_scholes(CALL, SPOT, 60.0, 2 / 365, 0.02, 0.1)
    assert value == pytest.approx(expected, abs=0.01)
    assert value > SPOT - 60.0


@pytest.mark.parametrize(("right", "expected"), [(CALL, 7.0), (PUT, 0.0)])
def test_without_time_only_exercise_pays(right: int, expected: float) -> None:
    """Intrinsic value, volatility and moneyness zero, at and after the expiry."""
    for days in (0, -3):
        assert quote(right, 93.0, TODAY + days, SPOT, bar(), clock(), smile()) == (expected, 0.0, 0.0)


def test_dividends_that_eat_the_whole_price() -> None:
    """Where projected dividends exceed the price the put is worth its strike and what is missing."""
    eaten = bar(pay_cash=60.0, pay_ordinal=TODAY + 5, pay_gap=10)
    value, volatility, _ = quote(PUT, 90.0, TODAY + 30, SPOT, eaten, clock(), smile())
    assert value > 90.0
    assert volatility == 0.0


@pytest.mark.parametrize(("reaction", "inside"), [(0, False), (1, True), (30, True), (31, False)])
def test_a_report_inside_the_tenor_bumps_the_volatility(reaction: int, inside: bool) -> None:
    """One move of five ordinary daily moves instead of one: sqrt(s^2 + 24 s^2 / (252 T))."""
    world = bar(report=TODAY + reaction)
    base = 0.25 * 1.1 + 0.01
    years = 30 / 365
    expected = math.sqrt(base**2 + (5.0**2 - 1) * base**2 / 252 / years) if inside else base
    found = at_the_money_for(world, TODAY + 30, clock(), smile(SMILED))
    assert found == pytest.approx(expected, rel=1e-12)
