"""The automatic block length against its closed form, and the other choices of resampling against theirs."""

from __future__ import annotations

import numpy as np
import pytest
from arch.bootstrap import SPA

from hedgerow.evidence.longrun import block_lengths, long_run_variance, resampled_days


def autoregression(rho: float, days: int, paths: int, seed: int) -> np.ndarray:
    """First-order autoregressions (days, paths) after they have settled."""
    random = np.random.default_rng(seed)
    value = np.zeros(paths)
    rows = []
    for _ in range(days + 100):
        value = rho * value + random.standard_normal(paths)
        rows.append(value)
    return np.array(rows[100:])


def closed_form(rho: float, days: int) -> float:
    """The best mean block of the stationary bootstrap for an autoregression.

    Patton, Politis & White 2009: (2 g^2 / d)^(1/3) n^(1/3) with g = sum |k| autocovariance(k) and d = 2 x
    (long-run variance)^2; for an autoregression g = 2 rho / (1 - rho)^2 and (1 + rho) / (1 - rho), times the
    variance.
    """
    g, long_run = 2.0 * rho / (1.0 - rho) ** 2, (1.0 + rho) / (1.0 - rho)
    return float((2.0 * g**2 / (2.0 * long_run**2)) ** (1.0 / 3.0) * days ** (1.0 / 3.0))


def test_closed_form_is_the_published_one() -> None:
    """Compares the closed form for rho .7 and 200 observations with 11.47 (recomputed independently)."""
    assert closed_form(0.7, 200) == pytest.approx(11.47, abs=0.005)


@pytest.mark.parametrize(("rho", "days"), [(0.7, 200), (0.3, 4000), (0.7, 4000)])
def test_automatic_length_is_near_the_closed_form(rho: float, days: int) -> None:
    """Compares the middle of 40 automatic lengths with the closed form.

    The estimate leaves out far autocovariances, so on a short record it is too small on the whole: within
    35 % at 200 observations, within 20 % at 4,000.
    """
    middle = float(np.median(block_lengths(autoregression(rho, days, 40, seed=3))))
    assert middle == pytest.approx(closed_form(rho, days), rel=0.35 if days == 200 else 0.2)


def test_length_of_noise_and_of_nothing() -> None:
    """Compares independent draws, and a column that never moves, with blocks of next to one session."""
    noise = np.random.default_rng(1).standard_normal((3000, 20))
    noise[:, 3] = 0.25
    lengths = block_lengths(noise)
    assert lengths[3] == 1.0
    assert np.median(lengths) < 4.0
    assert lengths.min() >= 1.0


def test_long_run_variance_of_an_autoregression() -> None:
    """Compares the mean over 40 records with the closed form 1 / (1 - rho)^2, within 8 %.

    Blocks of 60 leave out about 1 / 60 x 2 rho / (1 - rho^2), 3 %, for rho .5.
    """
    estimates = long_run_variance(autoregression(0.5, 5000, 40, seed=4), 60)
    assert float(np.mean(estimates)) == pytest.approx(4.0, rel=0.08)


def test_long_run_variance_is_the_one_the_library_works_out() -> None:
    """Compares with the sum over lags in the package arch, which its own test for superior ability uses."""
    series = autoregression(0.6, 300, 3, seed=5)
    test = SPA(np.zeros(300), -series, block_size=7, reps=1, seed=1)
    test.compute()
    assert long_run_variance(series, 7) == pytest.approx(test._loss_diff_var, rel=1e-9)


def test_long_run_variance_is_that_of_resampled_means() -> None:
    """Compares the closed form with the variance of 4,000 resampled means, whose own error is 2.2 %."""
    series = autoregression(0.6, 300, 1, seed=6)[:, 0]
    random = np.random.default_rng(2)
    means = [series[days].mean() for days in resampled_days(300, 9, 4000, random)]
    assert 300 * np.var(means) == pytest.approx(long_run_variance(series, 9)[0], rel=0.08)


def test_blocks_are_as_long_as_asked() -> None:
    """Compares the mean run of following days with the block, over 400 replications of 500 days."""
    random = np.random.default_rng(3)
    runs = [int(np.sum(np.diff(days, prepend=-2) != 1)) for days in resampled_days(500, 8, 400, random)]
    assert 500 / np.mean(runs) == pytest.approx(8.0, rel=0.05)
