"""The standard normal distribution against scipy and its own symmetries."""

from __future__ import annotations

import math

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st
from scipy.special import ndtr, ndtri
from scipy.stats import multivariate_normal

from hedgerow.kernels.normal import bivariate_cdf, cdf, pdf, quantile


@pytest.mark.parametrize("x", [-37.0, -20.0, -8.0, -3.1, -1.0, 0.0, 0.3, 2.0, 5.5, 9.0])
def test_cdf_equals_scipy_in_both_tails(x: float) -> None:
    """Relative to scipy.special.ndtr, 1e-12: the tails lose no digits to subtraction."""
    assert cdf(x) == pytest.approx(float(ndtr(x)), rel=1e-12, abs=0.0)


@pytest.mark.parametrize("x", [-6.0, -1.0, 0.0, 0.7, 4.0])
def test_pdf_is_the_slope_of_cdf(x: float) -> None:
    """A central difference of the probability, whose error is about the step squared."""
    assert pdf(x) == pytest.approx((cdf(x + 1e-4) - cdf(x - 1e-4)) / 2e-4, rel=1e-6)


@pytest.mark.parametrize("p", [1e-300, 1e-40, 1e-12, 1e-5, 0.02, 0.074, 0.076, 0.3, 0.5, 0.9, 0.9999])
def test_quantile_equals_scipy_in_all_three_ranges(p: float) -> None:
    """Relative to scipy.special.ndtri, 1e-14, in the middle, the tail and the far tail of AS 241."""
    assert quantile(p) == pytest.approx(float(ndtri(p)), rel=1e-14, abs=1e-15)


def test_quantile_of_the_published_check_values() -> None:
    """Wichura 1988 gives -0.6744897501960817, -3.090232306167814 and -9.262340089798408 (from memory)."""
    assert quantile(0.25) == pytest.approx(-0.6744897501960817, rel=1e-15)
    assert quantile(0.001) == pytest.approx(-3.090232306167814, rel=1e-15)
    assert quantile(1e-20) == pytest.approx(-9.262340089798408, rel=1e-15)


def test_quantile_at_the_ends_is_infinite() -> None:
    """A certain or an impossible event has no finite quantile."""
    assert [quantile(p) for p in (-0.1, 0.0)] == [-math.inf, -math.inf]
    assert [quantile(p) for p in (1.0, 1.1)] == [math.inf, math.inf]


@given(st.floats(-8.0, 6.0))
def test_quantile_takes_cdf_back(x: float) -> None:
    """The round trip; near 1 a probability itself is rounded to 1e-16, which moves x by 1e-16 / density."""
    slack = 1e-15 + 4e-16 / pdf(x) if x > 0 else 1e-14 * max(1.0, abs(x))
    assert abs(quantile(cdf(x)) - x) <= slack * 4


@given(st.floats(-30.0, 30.0))
def test_the_two_sides_add_to_one(x: float) -> None:
    """P(X <= x) + P(X <= -x) = 1, to rounding."""
    assert np.isclose(cdf(x) + cdf(-x), 1.0, rtol=0, atol=3e-16)


def test_two_variables_equal_scipy() -> None:
    """scipy.stats.multivariate_normal at 400 random points, half near correlations of one: 1e-14."""
    rng = np.random.default_rng(9)
    for k in range(400):
        x, y = (float(value) for value in rng.normal(scale=2.0, size=2))
        rho = float(rng.uniform(-1.0, 1.0))
        if k % 2:
            rho = float(np.sign(rho)) * (1.0 - 10.0 ** float(rng.uniform(-8.0, -1.0)))
        expected = float(multivariate_normal.cdf([x, y], cov=[[1.0, rho], [rho, 1.0]], allow_singular=True))
        assert bivariate_cdf(x, y, rho) == pytest.approx(expected, abs=1e-14)


@pytest.mark.parametrize(("x", "y"), [(0.3, -0.7), (-1.2, -0.4), (1.5, 1.5)])
def test_two_variables_in_closed_form(x: float, y: float) -> None:
    """Independent: the product. The same: the lesser. Opposite: what both leave. At nought: an arcsine."""
    assert bivariate_cdf(x, y, 0.0) == pytest.approx(cdf(x) * cdf(y), rel=1e-15)
    assert bivariate_cdf(x, y, 1.0) == cdf(min(x, y))
    assert bivariate_cdf(x, y, -1.0) == pytest.approx(max(cdf(x) + cdf(y) - 1.0, 0.0), abs=1e-15)
    assert bivariate_cdf(0.0, 0.0, 0.5) == pytest.approx(0.25 + math.asin(0.5) / (2.0 * math.pi), rel=1e-14)
