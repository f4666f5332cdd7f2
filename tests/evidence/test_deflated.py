"""Sharpe ratios beyond the published figures: against simulation, identities and limits."""

from __future__ import annotations

import json
import math

import numpy as np
import pytest
from scipy import stats

from hedgerow.evidence.deflated import (
    NORMAL,
    Shape,
    best_of_many,
    deflated_sharpe,
    expected_maximum,
    independent_trials,
    minimum_track_record,
    probabilistic_sharpe,
    shape_of,
    sharpe_error,
    sharpe_scale,
)

NAMES = tuple(f"rule {number}" for number in range(6))


def test_shape_is_scipys() -> None:
    """Compares skewness and kurtosis with scipy's; a record that never moves counts as normal."""
    returns = np.random.default_rng(1).gamma(2.0, 0.01, 900)
    shape = shape_of(returns)
    assert shape.skewness == pytest.approx(stats.skew(returns), rel=1e-12)
    assert shape.kurtosis == pytest.approx(stats.kurtosis(returns, fisher=False), rel=1e-12)
    assert shape_of(np.zeros(5)) == NORMAL


def test_error_of_skewed_returns_against_simulation() -> None:
    """Compares the standard error with the spread of 6,000 ratios of 250 skewed returns each, within 4 %.

    Returns are a gamma variable of shape 4 turned round: skewness -1, kurtosis 4.5. The spread of 6,000 is
    known to 1 %; the formula is to first order in 1 / 250.
    """
    draws = 0.5 + (4.0 - np.random.default_rng(2).gamma(4.0, 1.0, (6000, 250))) / 2.0
    ratios = draws.mean(axis=1) / draws.std(axis=1, ddof=1)
    assert sharpe_error(0.5, 250, Shape(-1.0, 4.5)) == pytest.approx(ratios.std(), rel=0.04)
    assert sharpe_error(0.5, 250) < 0.9 * ratios.std()


def test_scaling_against_simulation() -> None:
    """Compares the scale to 12 periods with ratios of sums over an autoregression of rho .3, within 3 %."""
    random, value = np.random.default_rng(3), np.zeros(40_000)
    rows = []
    for _ in range(32):
        value = 0.3 * value + random.standard_normal(value.size)
        rows.append(0.2 + value)
    months = np.array(rows[20:])
    one, twelve = months[0], months.sum(axis=0)
    scale = (twelve.mean() / twelve.std()) / (one.mean() / one.std())
    assert sharpe_scale(12, 0.3) == pytest.approx(scale, rel=0.03)
    assert sharpe_scale(1, 0.3) == 1.0


def test_probability_rises_with_everything_good() -> None:
    """Compares the probability with itself at a longer record, a higher ratio, less skew."""
    base = probabilistic_sharpe(0.05, 500, Shape(-1.0, 6.0))
    assert probabilistic_sharpe(0.05, 1000, Shape(-1.0, 6.0)) > base
    assert probabilistic_sharpe(0.06, 500, Shape(-1.0, 6.0)) > base
    assert probabilistic_sharpe(0.05, 500, Shape(0.0, 6.0)) > base
    assert probabilistic_sharpe(0.05, 500, Shape(-1.0, 6.0), 0.02) < base
    assert probabilistic_sharpe(0.02, 500, Shape(-1.0, 6.0), 0.02) == pytest.approx(0.5)
    assert math.isnan(probabilistic_sharpe(1.0, 500, Shape(2.0, 1.0)))


def test_track_record_is_where_the_probability_reaches_its_confidence() -> None:
    """Compares the probability at the minimum record with 95 %, and a ratio too low with: never."""
    shape = Shape(-0.7, 5.0)
    needed = minimum_track_record(0.06, shape, 0.01)
    assert probabilistic_sharpe(0.06, round(needed), shape, 0.01) == pytest.approx(0.95, abs=1e-3)
    assert minimum_track_record(0.01, shape, 0.01) == math.inf


def test_one_trial_deflates_nothing() -> None:
    """Compares the deflated ratio of a single trial with the probabilistic one; fewer is refused."""
    assert expected_maximum(1) == 0.0
    assert deflated_sharpe(0.1, 500, NORMAL, 1, 0.002) == probabilistic_sharpe(0.1, 500)
    with pytest.raises(ValueError, match="at least one trial"):
        expected_maximum(0.5)


@pytest.mark.parametrize(("rho", "trials"), [(0.0, 100.0), (1.0, 1.0), (0.5, 50.5), (-0.3, 100.0)])
def test_independent_trials(rho: float, trials: float) -> None:
    """Compares with pencil and paper: uncorrelated trials all count, identical ones count once."""
    assert independent_trials(100, rho) == pytest.approx(trials)


def test_best_of_many_by_hand() -> None:
    """Compares every figure with the formulas put together by hand."""
    returns = np.random.default_rng(4).normal(0.0, 0.01, (750, 6))
    returns[:, 2] += 0.002
    found = best_of_many(returns, NAMES, trials=40)
    ratios = returns.mean(axis=0) / returns.std(axis=0, ddof=1)
    shape, variance = shape_of(returns[:, 2]), ratios.var(ddof=1)
    correlation = np.corrcoef(returns.T)
    alike = independent_trials(40, (correlation.sum() - 6.0) / 30.0)
    assert (found.best, found.trials) == ("rule 2", 40)
    assert found.sharpe == pytest.approx(ratios[2] * math.sqrt(252))
    assert found.sharpe_of_luck == pytest.approx(math.sqrt(variance * 252) * expected_maximum(40))
    assert found.chance_above_nothing == pytest.approx(probabilistic_sharpe(ratios[2], 750, shape))
    assert found.chance_above_luck == pytest.approx(deflated_sharpe(ratios[2], 750, shape, 40, variance))
    assert found.trials_independent == pytest.approx(alike)
    assert found.chance_above_luck < found.chance_above_nothing
    assert found.sessions_needed == pytest.approx(minimum_track_record(ratios[2], shape))


def test_best_of_noise_is_no_more_than_luck() -> None:
    """Compares the best of 50 rules of noise, 200 times, with what is promised: rarely above luck.

    The chance is above .95 for one in twenty at most, if the best were as surprising as one; five standard
    errors of 200 are .077.
    """
    random = np.random.default_rng(5)
    names = tuple(f"rule {number}" for number in range(50))
    sure = [
        best_of_many(random.normal(0.0, 0.01, (250, 50)), names).chance_above_luck > 0.95 for _ in range(200)
    ]
    plain = [
        best_of_many(random.normal(0.0, 0.01, (250, 50)), names).chance_above_nothing > 0.95
        for _ in range(50)
    ]
    assert np.mean(sure) <= 0.05 + 0.077
    assert np.mean(plain) > 0.8  # what is said without counting the tries


def test_still_variants_count_as_tries() -> None:
    """Compares a study with a variant that never traded: it has no ratio, and is one try more."""
    returns = np.random.default_rng(6).normal(0.0005, 0.01, (500, 3))
    returns[:, 1] = 0.0
    found = best_of_many(returns, ("a", "b", "c"))
    assert found.trials == 3
    assert found.best in ("a", "c")
    with pytest.raises(ValueError, match="none of the variants moved"):
        best_of_many(np.zeros((50, 2)), ("a", "b"))


def test_single_variant() -> None:
    """Compares one variant alone with: no luck of many to allow for."""
    found = best_of_many(np.random.default_rng(7).normal(0.001, 0.01, (500, 1)), ("only",))
    assert found.sharpe_of_luck == 0.0
    assert found.chance_above_luck == found.chance_above_nothing
    plain = found.as_dict()
    assert json.loads(json.dumps(plain, allow_nan=False)) == plain
    assert plain["sharpe"]["unit"] == "ratio a year"
