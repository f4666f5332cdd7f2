"""Best, worst, break-even and odds of structures, beside hand work and scipy's normal distribution."""

from __future__ import annotations

import math
from typing import Any

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from scipy.integrate import quad
from scipy.stats import norm

from hedgerow.kernels.layout import CALL, LOT_SHARES, Floats
from hedgerow.kernels.payoff import chance_beyond, first_expiry, measure, payoff
from step_records import SMILED, SPOT, TODAY, bar, call, clock, position, put, smile

DAYS = 30
SIGMA = 0.25
NAMES = ("best", "worst", "even", "odds_of_best", "odds_of_gain", "owed")


def above(price: float, spot: float = SPOT, sigma: float = SIGMA) -> float:
    """Chance of ending above a price: N(d2) (Hull)."""
    deviation = sigma * math.sqrt(DAYS / 365)
    return float(norm.cdf((math.log(spot / price) + 0.02 * DAYS / 365) / deviation - deviation / 2))


def measured(
    *legs: dict[str, Any], shares: float = 100.0, outlay: float = 0.0, **world: Any
) -> dict[str, float]:
    """What `measure` says of a structure at its nearest expiry, by name."""
    held = position(*legs).legs
    horizon = first_expiry(held, len(legs))
    moment = (SPOT, bar(**world), clock(), smile())
    found = measure(held, len(legs), shares, outlay, horizon, moment, np.zeros(64))
    return dict(zip(NAMES, found, strict=True))


def worth(legs: list[dict[str, Any]], shares: float, price: Any) -> Any:
    """Money of shares and expiring legs at a price, or at each of many, added up plainly."""
    total = shares * price
    for each in legs:
        gain = price - each["strike"] if each["right"] == CALL else each["strike"] - price
        total = total + each["quantity"] * np.maximum(0.0, gain)
    return total


def test_the_nearest_expiry_of_what_is_held() -> None:
    """Legs without a quantity do not count; nothing held has none."""
    held = position(call(100, -100, 60), put(95, 0.0, 10), put(90, 100, 45)).legs
    assert first_expiry(held, 3) == TODAY + 45
    assert first_expiry(held, 1) == TODAY + 60
    assert first_expiry(position().legs, 0) == 0


def test_collar_by_hand() -> None:
    """Shares at 100, a 104 call for 1.50, a 95 put for 1.10: debit 9,960, best 440, worst 460, even 99.60."""
    found = measured(call(104, -100), put(95, 100), outlay=9960.0)
    assert found["best"] == pytest.approx(440.0)
    assert found["worst"] == pytest.approx(460.0)
    assert found["even"] == pytest.approx(99.6)
    assert found["owed"] == 0.0
    assert found["odds_of_best"] == pytest.approx(above(104), rel=1e-12)
    assert found["odds_of_gain"] == pytest.approx(above(99.6), rel=1e-12)


def test_covered_call_by_hand() -> None:
    """Call at 102 for 2.00: best 400 above 102, everything paid lost at zero, even at 98."""
    found = measured(call(102, -100), outlay=9800.0)
    assert (found["best"], found["worst"], found["owed"]) == (pytest.approx(400), pytest.approx(9800), 0.0)
    assert found["even"] == pytest.approx(98.0)
    assert found["odds_of_best"] == pytest.approx(above(102), rel=1e-12)


def test_married_put_by_hand() -> None:
    """Put at 97 for 1.80: nothing bounds the best, 480 lost at worst, even at 101.80."""
    found = measured(put(97, 100), outlay=10_180.0)
    assert found["best"] == math.inf
    assert math.isnan(found["odds_of_best"])
    assert found["worst"] == pytest.approx(480.0)
    assert found["even"] == pytest.approx(101.8)
    assert found["odds_of_gain"] == pytest.approx(above(101.8), rel=1e-9)


def test_protected_short_by_hand() -> None:
    """Short 100 at 100 with a 103 call for 1.20: received 9,880, worst 420, best all of it at zero."""
    found = measured(call(103, 100), shares=-100.0, outlay=-9880.0)
    assert found["best"] == pytest.approx(9880.0)
    assert found["worst"] == pytest.approx(420.0)
    assert found["owed"] == pytest.approx(10_300.0)
    assert found["even"] == pytest.approx(98.8)
    assert found["odds_of_gain"] == pytest.approx(1 - above(98.8), rel=1e-9)


def test_what_has_no_bound() -> None:
    """A call written alone can owe anything; its best is the premium, below the strike."""
    found = measured(call(105, -100), shares=0.0, outlay=-90.0)
    assert (found["worst"], found["owed"]) == (math.inf, math.inf)
    assert found["best"] == pytest.approx(90.0)
    assert found["odds_of_best"] == pytest.approx(1 - above(105), rel=1e-12)
    assert found["even"] == pytest.approx(105.9)
    assert found["odds_of_gain"] == pytest.approx(1 - above(105.9), rel=1e-9)


def test_put_spread_is_best_on_the_low_side() -> None:
    """95/90 put spread for 1.40: best 360 below 90, worst 140 above 95, even at 93.60."""
    found = measured(put(95, 100), put(90, -100), shares=0.0, outlay=140.0)
    assert found["best"] == pytest.approx(360.0)
    assert found["worst"] == pytest.approx(140.0)
    assert found["owed"] == 0.0
    assert found["odds_of_best"] == pytest.approx(1 - above(90), rel=1e-12)
    assert found["even"] == pytest.approx(93.6)
    assert found["odds_of_gain"] == pytest.approx(1 - above(93.6), rel=1e-12)


def test_condor_is_best_in_the_middle() -> None:
    """Written 95 put and 105 call inside a 90 put and a 110 call, for 1.60: best between those written."""
    legs = [put(90, 100), put(95, -100), call(105, -100), call(110, 100)]
    found = measured(*legs, shares=0.0, outlay=-160.0)
    assert found["best"] == pytest.approx(160.0)
    assert found["worst"] == pytest.approx(340.0)
    assert found["owed"] == pytest.approx(500.0)
    assert found["even"] == pytest.approx(93.4)
    assert found["odds_of_best"] == pytest.approx(above(95) - above(105), rel=1e-12)
    assert found["odds_of_gain"] == pytest.approx(above(93.4) - above(106.6), rel=1e-12)


def test_wings_that_are_best_on_both_sides() -> None:
    """Bought 95 put and 105 call inside a written 90 put and 110 call: best below 90 and above 110."""
    legs = [put(90, -100), put(95, 100), call(105, 100), call(110, -100)]
    found = measured(*legs, shares=0.0, outlay=200.0)
    assert found["best"] == pytest.approx(300.0)
    assert found["odds_of_best"] == pytest.approx(1 - above(90) + above(110), rel=1e-12)
    assert found["odds_of_gain"] == pytest.approx(1 - above(93) + above(107), rel=1e-12)


def test_shares_alone() -> None:
    """Bought: everything paid can be lost, nothing bounds the gain; sold short: the other way about."""
    held = measured(outlay=10_020.0)
    assert (held["best"], held["worst"], held["owed"]) == (math.inf, pytest.approx(10_020.0), 0.0)
    assert held["even"] == pytest.approx(100.2)
    short = measured(shares=-100.0, outlay=-9980.0)
    assert (short["best"], short["worst"], short["owed"]) == (pytest.approx(9980.0), math.inf, math.inf)
    assert short["even"] == pytest.approx(99.8)


def test_a_leg_that_lives_on_is_worth_its_value() -> None:
    """A 60-day put under a 30-day call: at the first expiry it is a 30-day put (Black-Scholes, scipy)."""
    legs = [call(104, -100, 30), put(95, 100, 60)]
    price, years = 92.0, 30 / 365
    d1 = (math.log(price / 95) + (0.02 + SIGMA**2 / 2) * years) / (SIGMA * math.sqrt(years))
    owed = 95 * math.exp(-0.02 * years) * norm.cdf(SIGMA * math.sqrt(years) - d1)
    put_value = owed - price * norm.cdf(-d1)
    found = payoff(position(*legs).legs, 2, 100.0, price, TODAY + 30, 0.02)
    assert found == pytest.approx(100 * price + 100 * put_value, rel=1e-9)


def test_best_of_two_expiries_lies_at_the_call() -> None:
    """With a longer put the best is at the call's strike or just below, and its odds those of reaching it."""
    legs = [call(104, -100, 30), put(95, 100, 60)]
    held = position(*legs).legs
    found = measured(*legs, outlay=10_000.0)
    grid = np.linspace(40.0, 200.0, 3201)
    values = [payoff(held, 2, 100.0, float(p), TODAY + 30, 0.02) - 10_000.0 for p in grid]
    assert found["best"] == pytest.approx(max(values), abs=1.0)
    assert found["odds_of_best"] == pytest.approx(above(104), rel=1e-9)
    assert found["worst"] == pytest.approx(-min(values), abs=60.0)


def test_the_chance_of_ending_beyond_follows_the_smile() -> None:
    """N(d2) with the strike's own volatility and the spot without its dividends; always above zero."""
    world = bar(pay_cash=1.0, pay_ordinal=TODAY + 10, pay_gap=0)
    moment = (SPOT, world, clock(), smile(SMILED))
    base, years = SPOT - math.exp(-0.02 * 10 / 365), DAYS / 365
    weight = (1 - math.exp(-2 * years)) / (2 * years)
    atm = (0.25 + 0.0 * weight) * 1.1 + 0.01
    z = (math.log(90 / base) - 0.02 * years) / (atm * math.sqrt(years))
    sigma = atm * (1 - 0.11 * z + 0.05 * z * z)
    expected = above(90, base, sigma)
    assert chance_beyond(90.0, TODAY + DAYS, moment) == pytest.approx(expected, rel=1e-12)
    assert chance_beyond(0.0, TODAY + DAYS, moment) == 1.0


@st.composite
def structures(draw: st.DrawFn) -> tuple[list[dict[str, Any]], float, float]:
    """One to four legs of one expiry over shares or none, and money paid."""
    strikes = st.integers(85, 115).map(float)
    sizes = st.sampled_from([-100.0, 100.0])
    made = st.builds(
        lambda kind, strike, size: kind(strike, size), st.sampled_from([call, put]), strikes, sizes
    )
    legs = draw(st.lists(made, min_size=1, max_size=4))
    shares = draw(st.sampled_from([0.0, LOT_SHARES, -LOT_SHARES]))
    paid = float(worth(legs, shares, 100.0)) + draw(st.integers(-300, 300))
    return legs, shares, paid


@settings(max_examples=60)
@given(structures())
def test_random_structures_against_a_fine_grid(drawn: tuple[list[dict[str, Any]], float, float]) -> None:
    """Best, worst, what is owed, and the chance of a gain, from prices 0 to 1,000 in steps of a half."""
    legs, shares, outlay = drawn
    found = measured(*legs, shares=shares, outlay=outlay)
    prices = np.arange(0.0, 1000.5, 0.5)
    values = worth(legs, shares, prices)
    slope = values[-1] - values[-2]
    best = math.inf if slope > 0 else values.max() - outlay
    worst = math.inf if slope < 0 else outlay - values.min()
    assert found["best"] == pytest.approx(best, abs=1e-6)
    assert found["worst"] == pytest.approx(worst, abs=1e-6)
    assert found["owed"] == (math.inf if slope < 0 else pytest.approx(max(0.0, -values.min()), abs=1e-6))
    assert found["odds_of_gain"] == pytest.approx(chance_of(lambda v: v > outlay, legs, shares), abs=2e-3)
    assert 0.0 <= found["odds_of_gain"] <= 1.0 + 1e-12


def chance_of(test: Any, legs: list[dict[str, Any]], shares: float) -> float:
    """The chance that the payoff passes a test, by counting lognormal quantiles."""
    size = 4000
    deviation = SIGMA * math.sqrt(DAYS / 365)
    draws = norm.ppf((np.arange(size) + 0.5) / size)
    prices: Floats = SPOT * np.exp(0.02 * DAYS / 365 - deviation**2 / 2 + deviation * draws)
    return float(np.mean(test(worth(legs, shares, prices))))


def test_the_chance_integrates_the_density() -> None:
    """The lognormal density above 97, integrated numerically by scipy."""
    deviation = SIGMA * math.sqrt(DAYS / 365)
    centre = math.log(SPOT) + 0.02 * DAYS / 365 - deviation**2 / 2
    area, _ = quad(lambda x: norm.pdf(x, centre, deviation), math.log(97.0), math.log(400.0))
    assert chance_beyond(97.0, TODAY + DAYS, (SPOT, bar(), clock(), smile())) == pytest.approx(area, abs=1e-7)
