"""Growth, volatility, Sharpe and Sortino."""

from __future__ import annotations

import math

import numpy as np
import pytest
from scipy import stats

from hedgerow.evidence import ratios


def test_sharpe_and_volatility_against_scipy() -> None:
    """Compares both with scipy's mean and standard error: Sharpe x sqrt(n / 252) is the t statistic."""
    returns = np.random.default_rng(1).normal(0.0004, 0.01, 900)
    t, _ = stats.ttest_1samp(returns, 0.0)
    assert ratios.sharpe(returns) == pytest.approx(t * math.sqrt(252 / 900), rel=1e-12)
    assert ratios.volatility_a_year(returns) == pytest.approx(stats.tstd(returns) * math.sqrt(252), rel=1e-12)


def test_sharpe_of_a_published_example() -> None:
    """Compares a textbook-style table, worked out by hand: returns 2, -1, 3, 0 %.

    Mean 1 %, deviations 1, -2, 2, -1: sample variance 10/3, deviation 1.8257 %; ratio .54772 a session.
    """
    returns = np.array([0.02, -0.01, 0.03, 0.0])
    assert ratios.sharpe(returns) / math.sqrt(252) == pytest.approx(0.5477225575, abs=1e-9)


def test_sortino_by_hand() -> None:
    """Compares the same returns: only -1 % falls short, root mean square over all four .5 %; ratio 2."""
    returns = np.array([0.02, -0.01, 0.03, 0.0])
    assert ratios.sortino(returns) / math.sqrt(252) == pytest.approx(2.0, abs=1e-12)


def test_sortino_with_a_target() -> None:
    """Compares a downside deviation with the root of scipy's second moment of the clipped excess."""
    returns = np.random.default_rng(2).normal(0.0002, 0.01, 500)
    rate = np.full(501, 0.03)
    excess = ratios.excess_returns(returns, rate)
    assert excess == pytest.approx(returns - (math.exp(0.03 / 252) - 1.0))
    moment = np.sum(np.clip(excess, None, 0.0) ** 2) / 500
    assert ratios.sortino(excess) == pytest.approx(excess.mean() / math.sqrt(moment) * math.sqrt(252))
    assert ratios.excess_returns(returns, None) is returns


def test_excess_uses_the_rate_known_before() -> None:
    """Compares the excess of one session with the rate at the close before it, not after it."""
    excess = ratios.excess_returns(np.array([0.01]), np.array([0.0252, 99.0]))
    assert excess[0] == pytest.approx(0.01 - math.expm1(0.0001))


def test_growth_doubles_in_ten_years() -> None:
    """Compares a doubling in 3,652.5 days with the tenth root of two (7.18 %)."""
    assert ratios.growth_a_year(50.0, 100.0, 3652.5) == pytest.approx(2 ** (1 / 10) - 1)


@pytest.mark.parametrize(("first", "last", "days"), [(100, 100, 0), (0, 100, 10), (100, -5, 10)])
def test_growth_that_has_no_meaning(first: float, last: float, days: float) -> None:
    """Compares growth from or to nothing, or in no time, with: not known."""
    assert math.isnan(ratios.growth_a_year(first, last, days))


def test_growth_too_large_for_a_number() -> None:
    """Compares a hundredfold in one day with infinity."""
    assert ratios.growth_a_year(1.0, 100.0, 1) == math.inf


def test_still_and_short_curves() -> None:
    """Compares curves that do not move, or have one return, with: not known."""
    still = np.zeros(10)
    assert math.isnan(ratios.sharpe(still))
    assert math.isnan(ratios.sortino(still))
    assert ratios.volatility_a_year(still) == 0.0
    one = np.array([0.01])
    assert math.isnan(ratios.sharpe(one))
    assert math.isnan(ratios.sortino(one))
    assert math.isnan(ratios.volatility_a_year(one))
    assert math.isnan(ratios.sortino(np.array([0.01, 0.02])))


def test_returns_of_a_curve() -> None:
    """Compares returns with pencil and paper."""
    assert ratios.returns_of(np.array([100.0, 110.0, 99.0])) == pytest.approx([0.1, -0.1])
