"""Sharpe ratios: their errors, their scaling, and what is left after many tries, against published figures.

Tolerances are half of the last place printed.
"""

from __future__ import annotations

import math

import pytest
from scipy.integrate import quad
from scipy.stats import norm

from hedgerow.evidence.deflated import (
    Shape,
    deflated_sharpe,
    expected_maximum,
    minimum_track_record,
    probabilistic_sharpe,
    sharpe_error,
    sharpe_scale,
)

SKEWED = Shape(-3.0, 10.0)
DAILY = 2.5 / math.sqrt(250.0)
VARIANCE = 0.5 / 250.0


def test_deflated_ratio_of_100_trials() -> None:
    """Compares with the example of Bailey & Lopez de Prado 2014, "The Deflated Sharpe Ratio" (from memory).

    A ratio of 2.5 a year over 1,250 days, skewness -3, kurtosis 10, trials that vary by .5 a year: the best
    of 100 is expected at .1132 a day, and the chance to be above it is .9004.
    """
    assert math.sqrt(VARIANCE) * expected_maximum(100) == pytest.approx(0.1132, abs=5e-5)
    assert deflated_sharpe(DAILY, 1250, SKEWED, 100, VARIANCE) == pytest.approx(0.9004, abs=5e-5)


@pytest.mark.parametrize(("shape", "trials"), [(SKEWED, 46), (Shape(), 88)])
def test_trials_that_leave_95_percent(shape: Shape, trials: int) -> None:
    """Compares with the same paper (from memory): .9505 after 46 skewed trials, or after 88 normal ones."""
    assert deflated_sharpe(DAILY, 1250, shape, trials, VARIANCE) == pytest.approx(0.9505, abs=5e-5)


@pytest.mark.parametrize(("trials", "published"), [(10, 1.5746), (100, 2.5306), (1000, 3.2551)])
def test_expected_maximum(trials: int, published: float) -> None:
    """Compares with values of that paper's formula, recomputed independently."""
    assert expected_maximum(trials) == pytest.approx(published, abs=5e-5)


@pytest.mark.parametrize("trials", [10, 100, 1000])
def test_expected_maximum_against_its_integral(trials: int) -> None:
    """Compares the formula, an approximation for many, with the integral of x d(Phi(x)^N): within 2.5 %."""
    exact, _ = quad(lambda x: x * trials * norm.pdf(x) * norm.cdf(x) ** (trials - 1), -8.0, 8.0)
    assert expected_maximum(trials) == pytest.approx(exact, rel=0.025)


SHAPE_OF_24_MONTHS = Shape(-2.448, 10.164)


@pytest.mark.parametrize(("shape", "chance"), [(Shape(), 0.982), (SHAPE_OF_24_MONTHS, 0.913)])
def test_probabilistic_ratio(shape: Shape, chance: float) -> None:
    """Compares with Bailey & Lopez de Prado 2012, "The Sharpe Ratio Efficient Frontier" (from memory).

    A monthly ratio of .458 over 24 months.
    """
    assert probabilistic_sharpe(0.458, 24, shape) == pytest.approx(chance, abs=5e-4)


@pytest.mark.parametrize(("shape", "months"), [(Shape(), 15.25), (SHAPE_OF_24_MONTHS, 34.56)])
def test_minimum_track_record(shape: Shape, months: float) -> None:
    """Compares with the same paper (from memory), at 95 %.

    The ratio is printed with three places, so the record is known to 2 x .0005 / .458, .2 %.
    """
    assert minimum_track_record(0.458, shape) == pytest.approx(months, rel=0.0022)


@pytest.mark.parametrize(("sharpe", "returns", "error"), [(0.5, 60, 0.137), (1.0, 250, 0.077)])
def test_standard_errors(sharpe: float, returns: int, error: float) -> None:
    """Compares with Lo 2002, "The Statistics of Sharpe Ratios", table of standard errors; recomputed too."""
    assert sharpe_error(sharpe, returns) == pytest.approx(error, abs=5e-4)


@pytest.mark.parametrize(("rho", "published"), [(0.2, 2.88), (-0.2, 4.17), (0.0, math.sqrt(12.0))])
def test_scaling_of_monthly_ratios_to_a_year(rho: float, published: float) -> None:
    """Compares with Lo 2002: 2.88 and 4.17 for an autocorrelation of .2 and -.2; the root of 12 for none."""
    assert sharpe_scale(12, rho) == pytest.approx(published, abs=5e-3)
