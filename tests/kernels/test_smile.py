"""The smile's scalars: against facts of listed chains, closed forms and numerical slopes."""

from __future__ import annotations

import math

import numpy as np
import pytest

from hedgerow.kernels import smile
from hedgerow.kernels.layout import SmileModel

DEFAULT = SmileModel(
    kappa=0.0,
    ratio=1.0,
    points=0.0,
    skew=-0.11,
    curvature=0.05,
    skew_decay=0.0,
    wing=2.5,
    report_moves=5.0,
    floor=0.05,
    cap=3.0,
)


def normal(x: float) -> float:
    """Cumulative normal, from the error function of the standard library."""
    return 0.5 * math.erfc(-x / math.sqrt(2.0))


def relative_volatility_at_delta(delta: float, days: float, atm: float) -> float:
    """Find by bisection the relative volatility where the put (delta < 0) or call has that delta."""
    years = days / 365.0
    low, high = -2.5, 2.5
    for _ in range(80):
        z = 0.5 * (low + high)
        volatility = smile.volatility_at(atm, z * atm * math.sqrt(years), years, days, DEFAULT)
        deviation = volatility * math.sqrt(years)
        d1 = -z * atm * math.sqrt(years) / deviation + 0.5 * deviation
        call_delta = normal(d1)
        wanted = 1.0 + delta if delta < 0 else delta
        low, high = (z, high) if call_delta > wanted else (low, z)
    return volatility / atm


@pytest.mark.parametrize("days", [30.0, 91.0])
@pytest.mark.parametrize("atm", [0.2, 0.4])
@pytest.mark.parametrize(
    ("delta", "published", "within"), [(-0.25, 1.10, 0.02), (-0.10, 1.35, 0.09), (0.25, 0.95, 0.02)]
)
def test_the_default_smile_has_the_shape_of_listed_chains(
    days: float, atm: float, delta: float, published: float, within: float
) -> None:
    """25-delta put about 1.10 x at the money, 10-delta put 1.35 x, 25-delta call .95 x, at 30 and 91 days.

    Source: five large US stocks, 2023, recomputed from listed chains. "About" is two hundredths near the
    money. Far out the default stays under (1.27 to 1.30): one parabola through both near strikes gives that.
    """
    assert relative_volatility_at_delta(delta, days, atm) == pytest.approx(published, abs=within)


def test_implied_falls_by_about_a_third_across_a_report() -> None:
    """30-day implied falls by about a third across an earnings report (recomputed from chains, 2023)."""
    before = smile.at_the_money(0.30, 0.30, 30.0, True, DEFAULT)
    after = smile.at_the_money(0.30, 0.30, 29.0, False, DEFAULT)
    assert 1.0 - after / before == pytest.approx(1.0 / 3.0, abs=0.04)


def test_a_report_adds_one_move_in_place_of_one_ordinary_day() -> None:
    """Identity: variance to expiry with the report is 20 ordinary days and one of 25 times the variance."""
    days = 21.0 * 365.0 / 252.0
    bumped = smile.at_the_money(0.30, 0.30, days, True, DEFAULT)
    daily_variance = 0.30**2 / 252.0
    assert bumped**2 * days / 365.0 == pytest.approx(20.0 * daily_variance + 25.0 * daily_variance, rel=1e-12)


def test_a_report_of_one_ordinary_move_changes_nothing() -> None:
    """Identity: one ordinary move is no bump."""
    plain = DEFAULT._replace(report_moves=1.0)
    assert smile.at_the_money(0.3, 0.3, 30.0, True, plain) == smile.at_the_money(0.3, 0.3, 30.0, False, plain)


@pytest.mark.parametrize("kappa", [0.1, 1.5, 8.0])
@pytest.mark.parametrize("years", [0.02, 0.25, 3.0])
def test_pull_weight_is_the_mean_of_an_exponential(kappa: float, years: float) -> None:
    """Against the mean of exp(-kappa t) over the tenor by the midpoint rule with 20,000 steps."""
    times = (np.arange(20_000) + 0.5) * years / 20_000
    assert smile.pull_weight(kappa, years) == pytest.approx(np.exp(-kappa * times).mean(), rel=1e-7)


def test_without_pull_the_level_stands_and_the_anchor_is_not_asked() -> None:
    """Exactly the level, even when the anchor is unknown."""
    assert smile.pull_weight(0.0, 2.0) == 1.0
    assert smile.at_the_money(0.23, math.nan, 700.0, False, DEFAULT) == 0.23


def test_a_long_tenor_is_pulled_to_the_anchor() -> None:
    """Closed form: anchor + (level - anchor) (1 - exp(-kT)) / (kT); k = 2, T = 1: .2 + .2 x .43233."""
    pulled = smile.at_the_money(0.4, 0.2, 365.0, False, DEFAULT._replace(kappa=2.0))
    assert pulled == pytest.approx(0.2 + 0.2 * 0.4323323584, rel=1e-9)


def test_premium_floor_and_cap() -> None:
    """Hand-worked: .2 x 1.1 + .01 = .23; the floor and the cap bound it."""
    premium = DEFAULT._replace(ratio=1.1, points=0.01)
    assert smile.at_the_money(0.2, 0.2, 30.0, False, premium) == pytest.approx(0.23, rel=1e-15)
    assert smile.at_the_money(0.01, 0.01, 30.0, False, premium) == 0.05
    assert smile.at_the_money(9.0, 9.0, 30.0, False, premium) == 3.0


def test_an_unknown_level_stays_unknown() -> None:
    """NaN in, NaN out: neither floor nor cap nor smile may invent a volatility."""
    for report_inside in (False, True):
        atm = smile.at_the_money(math.nan, 0.2, 30.0, report_inside, DEFAULT)
        assert math.isnan(atm)
        assert math.isnan(smile.volatility_at(atm, 0.01, 0.1, 36.5, DEFAULT))


def test_the_wing_is_flat_and_the_bend_has_a_floor() -> None:
    """Beyond 2.5 deviations the volatility stays; no strike has less than .3 of at the money."""
    at_wing = smile.bend_of_strike(-2.5, 1.0, DEFAULT)
    assert smile.bend_of_strike(-9.0, 1.0, DEFAULT) == at_wing == pytest.approx(1 + 0.275 + 0.3125)
    steep = DEFAULT._replace(skew=-1.0, curvature=0.0)
    assert smile.bend_of_strike(2.0, 1.0, steep) == smile.LEAST_BEND


def test_slope_in_log_moneyness_falls_with_the_root_of_tenor() -> None:
    """At-the-money skew falls about with 1/sqrt(T) (from memory): four times the tenor, half the slope."""
    slopes = []
    for days in (30.0, 120.0):
        years = days / 365.0
        step = 1e-5
        up = smile.volatility_at(0.3, step, years, days, DEFAULT)
        down = smile.volatility_at(0.3, -step, years, days, DEFAULT)
        slopes.append((up - down) / (2 * step))
    assert slopes[0] / slopes[1] == pytest.approx(2.0, rel=1e-6)
    assert slopes[0] < 0


def test_decay_flattens_long_tenors_and_leaves_thirty_days() -> None:
    """Closed form (30 / days) ** decay: 1 at 30 days, a half at 120 days for a decay of a half."""
    decaying = DEFAULT._replace(skew_decay=0.5)
    assert smile.skew_scale(30.0, decaying) == 1.0
    assert smile.skew_scale(120.0, decaying) == pytest.approx(0.5, rel=1e-15)
    assert smile.skew_scale(120.0, DEFAULT) == 1.0


def test_no_time_left_is_no_division_by_zero() -> None:
    """At expiry the smile is flat and finite."""
    assert smile.volatility_at(0.3, 0.1, 0.0, 0.0, DEFAULT) == 0.3
    assert math.isfinite(smile.at_the_money(0.3, 0.3, 0.0, True, DEFAULT))


def price(right: int, strike: float, total: float, model: SmileModel) -> float:
    """Black 1976 value at forward 1 with the smile's volatility, undiscounted; the year is the tenor."""
    deviation = smile.volatility_at(total, math.log(strike), 1.0, 365.0, model)
    d1 = -math.log(strike) / deviation + 0.5 * deviation
    call = normal(d1) - strike * normal(d1 - deviation)
    return call if right == 0 else call - 1.0 + strike


@pytest.mark.parametrize("total", [0.05, 0.3, 1.0, 2.5])
@pytest.mark.parametrize("z", [-2.0, -0.7, 0.4, 1.9])
def test_the_room_for_slope_is_the_slope_of_prices(total: float, z: float) -> None:
    """Numerical slope of Black values in the strike: -N(d2) + n(d2) g'(z), as the check derives it."""
    strike = math.exp(z * total)
    step = strike * 1e-5
    slope = (price(0, strike + step, total, DEFAULT) - price(0, strike - step, total, DEFAULT)) / (2 * step)
    bend = smile.bend_of_strike(z, 1.0, DEFAULT)
    d2 = -z / bend - 0.5 * total * bend
    density = math.exp(-0.5 * d2 * d2) / math.sqrt(2 * math.pi)
    room = smile.room_for_slope(d2) - (DEFAULT.skew + 2 * DEFAULT.curvature * z)
    assert slope == pytest.approx(-density * room, rel=1e-4, abs=1e-9)


@pytest.mark.parametrize("d2", [-40.0, -25.001, -24.999, -8.0, 0.0, 3.0])
def test_room_for_slope_in_the_tail(d2: float) -> None:
    """Against scipy: N(x)/n(x) = sqrt(pi/2) erfcx(-x/sqrt 2); 1e-5 where a series of two terms serves."""
    from scipy.special import erfcx

    want = math.sqrt(math.pi / 2) * float(erfcx(-d2 / math.sqrt(2)))
    assert smile.room_for_slope(d2) == pytest.approx(want, rel=1e-5 if d2 < -25 else 1e-9)


def test_the_default_smile_leaves_room_and_a_steep_one_does_not() -> None:
    """Prices strike by strike agree with the check, for the default and for a smile that must be refused."""
    strikes = np.exp(np.linspace(-2.4, 2.4, 97) * 0.2)
    for model, sound in ((DEFAULT, True), (DEFAULT._replace(skew=0.0, curvature=0.6), False)):
        calls = np.diff([price(0, float(k), 0.2, model) for k in strikes])
        puts = np.diff([price(1, float(k), 0.2, model) for k in strikes])
        assert bool((calls < 0).all() and (puts > 0).all()) is sound
        assert (smile.steepest(0.2, 1.0, 100, model)[0] > 0) is sound


@pytest.mark.parametrize(("strike", "observed"), [(0.90, 0.202), (0.95, 0.168), (1.0, 0.134), (1.05, 0.108)])
def test_the_shape_reaches_an_index_chain(strike: float, observed: float) -> None:
    """An index chain of April 2013, 62 days (recomputed from the chain): steeper, and within half a point.

    Skew -.245 and curvature .02 pass through the near strikes; such a smile keeps prices in order.
    """
    index = DEFAULT._replace(skew=-0.245, curvature=0.02)
    years = 62.0 / 365.0
    assert smile.volatility_at(0.134, math.log(strike), years, 62.0, index) == pytest.approx(
        observed, abs=0.005
    )
    assert smile.steepest(0.134 * math.sqrt(years), 1.0, 100, index)[0] > 0.0
