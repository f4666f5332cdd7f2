"""European options against QuantLib, against identities, and at the limits."""

from __future__ import annotations

import math
from typing import Any

import numpy as np
import pytest
from hypothesis import assume, given
from hypothesis import strategies as st

from hedgerow.kernels import lognormal as one
from hedgerow.kernels.layout import CALL, PUT
from option_oracles import Terms, draw, european_option

DRAWS = 250


def terms_of(seed: int) -> list[Terms]:
    """Random options, with and without a yield, from one day to three years."""
    rng = np.random.default_rng(seed)
    return [draw(rng, (1, 1100), with_yield=bool(k % 2)) for k in range(DRAWS)]


def test_values_equal_quantlib() -> None:
    """Analytic European engine, 250 random options: within 1e-9 on a strike of 100."""
    for terms in terms_of(1):
        assert one.european(*terms.scalars) == pytest.approx(european_option(terms).NPV(), abs=1e-9), terms


@pytest.mark.parametrize("name", ["delta", "gamma", "vega", "theta", "rho"])
def test_greeks_equal_quantlib(name: str) -> None:
    """The same greek of QuantLib's analytic engine, 250 random options, to eight digits."""
    both_rights = {"gamma", "vega"}
    for terms in terms_of(2):
        scalars: tuple[Any, ...] = terms.scalars[1:] if name in both_rights else terms.scalars
        expected = getattr(european_option(terms), name)()
        assert getattr(one, name)(*scalars) == pytest.approx(expected, rel=1e-8, abs=1e-8), terms


def test_the_chance_above_is_minus_the_slope_in_the_strike() -> None:
    """Breeden & Litzenberger 1978: e^(-rT) P(S > K) = -dC/dK, by a central difference (error about 1e-7)."""
    for terms in terms_of(3):
        if terms.volatility * math.sqrt(terms.days / 365) < 0.02:
            continue
        _, spot, strike, years, rate, carry, volatility = terms.scalars
        h = 1e-3
        up = one.european(CALL, spot, strike + h, years, rate, carry, volatility)
        down = one.european(CALL, spot, strike - h, years, rate, carry, volatility)
        chance = one.chance_above(spot, strike, years, rate, carry, volatility)
        assert chance * math.exp(-rate * years) == pytest.approx((down - up) / (2 * h), abs=1e-6)


prices = st.floats(0.5, 2000.0)
years_left = st.floats(1e-4, 5.0)
rates = st.floats(-0.05, 0.2)
volatilities = st.floats(0.01, 3.0)


@given(prices, prices, years_left, rates, rates, volatilities)
def test_put_call_parity(s: float, k: float, t: float, r: float, q: float, v: float) -> None:
    """Call less put is the discounted forward less the discounted strike, to rounding."""
    parity = s * math.exp(-q * t) - k * math.exp(-r * t)
    call, put = one.european(CALL, s, k, t, r, q, v), one.european(PUT, s, k, t, r, q, v)
    assert call - put == pytest.approx(parity, abs=1e-12 * (s + k))


@given(prices, prices, years_left, rates, rates, volatilities)
def test_a_pair_is_the_two_values(s: float, k: float, t: float, r: float, q: float, v: float) -> None:
    """Both at once equal the single values, to rounding, and neither is negative."""
    call, put = one.european_pair(s, k, t, r, q, v)
    assert min(call, put) >= 0.0
    assert call == pytest.approx(one.european(CALL, s, k, t, r, q, v), abs=1e-12 * (s + k))
    assert put == pytest.approx(one.european(PUT, s, k, t, r, q, v), abs=1e-12 * (s + k))


@given(prices, prices, years_left, rates, volatilities, st.floats(1.001, 3.0))
def test_values_rise_and_fall_as_they_must(
    s: float, k: float, t: float, r: float, v: float, f: float
) -> None:
    """A call falls with the strike, a put rises; both rise with volatility; no call is over the stock."""
    slack = 1e-12 * (s + k * f)
    call = one.european(CALL, s, k, t, r, 0.0, v)
    put = one.european(PUT, s, k, t, r, 0.0, v)
    assert one.european(CALL, s, k * f, t, r, 0.0, v) <= call + slack
    assert one.european(PUT, s, k * f, t, r, 0.0, v) >= put - slack
    assert one.european(CALL, s, k, t, r, 0.0, v * f) >= call - slack
    assert one.european(PUT, s, k, t, r, 0.0, v * f) >= put - slack
    assert max(s - k * math.exp(-r * t), 0.0) - slack <= call <= s


@given(prices, prices, years_left, volatilities)
def test_delta_and_odds_lie_between_nought_and_one(s: float, k: float, t: float, v: float) -> None:
    """Call delta less put delta is 1 without a yield; the odds never pass the call's delta (d2 < d1)."""
    call, put = one.delta(CALL, s, k, t, 0.02, 0.0, v), one.delta(PUT, s, k, t, 0.02, 0.0, v)
    assert 0.0 <= call <= 1.0
    assert call - put == pytest.approx(1.0, abs=1e-14)
    assert 0.0 <= one.chance_above(s, k, t, 0.02, 0.0, v) <= call + 1e-15


@pytest.mark.parametrize("years", [0.0, -1.0])
def test_at_or_after_expiry_a_value_is_what_exercise_pays(years: float) -> None:
    """Intrinsic value, all greeks but delta zero, odds nought or one."""
    assert one.european(CALL, 105.0, 100.0, years, 0.05, 0.0, 0.2) == 5.0
    assert one.european(PUT, 105.0, 100.0, years, 0.05, 0.0, 0.2) == 0.0
    assert one.european_pair(95.0, 100.0, years, 0.05, 0.0, 0.2) == (0.0, 5.0)
    assert one.chance_above(105.0, 100.0, years, 0.05, 0.0, 0.2) == 1.0
    assert one.chance_above(95.0, 100.0, years, 0.05, 0.0, 0.2) == 0.0
    assert one.delta(PUT, 95.0, 100.0, years, 0.05, 0.0, 0.2) == -1.0
    assert one.gamma(95.0, 100.0, years, 0.05, 0.0, 0.2) == 0.0
    assert one.vega(95.0, 100.0, years, 0.05, 0.0, 0.2) == 0.0
    assert one.theta(CALL, 95.0, 100.0, years, 0.05, 0.0, 0.2) == 0.0
    assert one.rho(CALL, 95.0, 100.0, years, 0.05, 0.0, 0.2) == 0.0


@pytest.mark.parametrize("right", [CALL, PUT])
@pytest.mark.parametrize("spot", [80.0, 120.0])
def test_without_volatility_the_price_follows_its_forward(right: int, spot: float) -> None:
    """Volatility of nought equals a volatility of 1e-6, values and greeks: no jump into the limit."""
    for function in (one.european, one.delta, one.theta, one.rho):
        certain = function(right, spot, 100.0, 0.5, 0.04, 0.01, 0.0)
        assert certain == pytest.approx(function(right, spot, 100.0, 0.5, 0.04, 0.01, 1e-6), abs=1e-12)


def test_nothing_and_no_strike_have_their_values() -> None:
    """A worthless stock: the put pays the discounted strike. A strike of nought or less is always paid."""
    owed = 100.0 * math.exp(-0.05)
    assert one.european(CALL, 0.0, 100.0, 1.0, 0.05, 0.0, 0.2) == 0.0
    assert one.european(PUT, 0.0, 100.0, 1.0, 0.05, 0.0, 0.2) == owed
    assert one.european(CALL, 50.0, 0.0, 1.0, 0.05, 0.0, 0.2) == 50.0
    assert one.european(CALL, 50.0, -10.0, 1.0, 0.0, 0.0, 0.2) == 60.0
    assert one.european(PUT, 50.0, -10.0, 1.0, 0.05, 0.0, 0.2) == 0.0
    assert one.chance_above(50.0, 0.0, 1.0, 0.05, 0.0, 0.2) == 1.0


@given(prices, st.floats(1e-3, 1.0), st.floats(0.01, 0.5))
def test_far_from_the_money_nothing_is_negative(s: float, t: float, v: float) -> None:
    """Forty standard deviations out: nought; as far in: the discounted forward difference."""
    away = 40.0 * v * math.sqrt(t)
    assume(away < 300.0)
    assert one.european(CALL, s, s * math.exp(away), t, 0.0, 0.0, v) == 0.0
    deep = one.european(CALL, s, s * math.exp(-away), t, 0.0, 0.0, v)
    assert deep == pytest.approx(s - s * math.exp(-away), rel=1e-14)


@pytest.mark.parametrize("place", range(1, 7))
def test_what_is_not_a_number_stays_so(place: int) -> None:
    """NaN in any argument gives NaN out, never a plausible figure."""
    terms: list[float] = [CALL, 100.0, 95.0, 0.5, 0.03, 0.01, 0.2]
    terms[place] = math.nan
    assert math.isnan(one.european(CALL, *terms[1:]))
    assert math.isnan(one.european(PUT, *terms[1:]))
