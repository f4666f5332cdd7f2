"""The volatility a European price implies: round trips, and the prices no volatility explains."""

from __future__ import annotations

import math

import pytest
from hypothesis import assume, given
from hypothesis import strategies as st

from hedgerow.kernels.implied import (
    IMPLIED_ABOVE,
    IMPLIED_BELOW,
    IMPLIED_OK,
    IMPLIED_UNDEFINED,
    implied_european,
)
from hedgerow.kernels.layout import CALL, PUT
from hedgerow.kernels.lognormal import european, vega


@given(
    st.sampled_from([CALL, PUT]),
    st.floats(20.0, 500.0),
    st.floats(0.005, 3.0),
    st.floats(-0.02, 0.1),
    st.floats(0.02, 2.0),
)
def test_the_round_trip_returns_the_volatility(right: int, k: float, t: float, r: float, v: float) -> None:
    """Value, then invert: as exact as a price rounded to 16 digits allows, its rounding over vega."""
    price = european(right, 100.0, k, t, r, 0.01, v)
    slope = vega(100.0, k, t, r, 0.01, v)
    assume(slope > 1e-6)
    found, status = implied_european(right, price, 100.0, k, t, r, 0.01)
    assert status == IMPLIED_OK
    assert found == pytest.approx(v, abs=1e-13 + 2e-15 * (100.0 + k) / slope * 10)


def test_prices_out_of_reach_say_so() -> None:
    """Under the discounted forward's intrinsic value, and at or over the most: NaN and its own status."""
    below, status = implied_european(CALL, 4.99, 105.0, 100.0, 0.5, 0.0, 0.0)
    assert math.isnan(below)
    assert status == IMPLIED_BELOW
    for right, most in ((CALL, 105.0), (PUT, 100.0 * math.exp(-0.02))):
        above, status = implied_european(right, most, 105.0, 100.0, 0.5, 0.04, 0.0)
        assert math.isnan(above)
        assert status == IMPLIED_ABOVE


@pytest.mark.parametrize("price", [5.0, 0.0])
def test_a_price_exactly_at_its_least_implies_nought(price: float) -> None:
    """Intrinsic value to the last bit needs no volatility."""
    spot = 105.0 if price else 95.0
    assert implied_european(CALL, price, spot, 100.0, 0.5, 0.0, 0.0) == (0.0, IMPLIED_OK)


@pytest.mark.parametrize(
    "terms",
    [
        (2.0, 100.0, 100.0, 0.0),
        (2.0, 0.0, 100.0, 1.0),
        (2.0, 100.0, 0.0, 1.0),
        (math.nan, 100.0, 100.0, 1.0),
        (2.0, math.nan, 100.0, 1.0),
    ],
)
def test_where_the_question_means_nothing(terms: tuple[float, float, float, float]) -> None:
    """No time, no price, no strike, not a number: NaN and a status of its own."""
    found, status = implied_european(CALL, *terms, 0.02, 0.0)
    assert math.isnan(found)
    assert status == IMPLIED_UNDEFINED


@pytest.mark.parametrize("cents", [0.01, 1e-6, 1e-100])
def test_tiny_prices_far_out_converge(cents: float) -> None:
    """A strike at twice the price for a cent and for far less: the found volatility gives the price back."""
    found, status = implied_european(CALL, cents, 100.0, 200.0, 0.1, 0.0, 0.0)
    assert status == IMPLIED_OK
    assert european(CALL, 100.0, 200.0, 0.1, 0.0, 0.0, found) == pytest.approx(cents, rel=1e-9)
