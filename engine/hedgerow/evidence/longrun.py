"""What a mean over days that depend on each other is worth: long-run variance and block length."""

from __future__ import annotations

from collections.abc import Iterator

import numpy as np
from numpy.typing import NDArray

__all__ = ["block_lengths", "long_run_variance", "moving", "resampled_days"]

Floats = NDArray[np.float64]
Ints = NDArray[np.int64]

LEAST_SPREAD = 1e-14
"""Standard deviation, relative to the largest value, below which a series counts as still."""
LEAST_ROWS = 20
"""Rows below which autocovariances say nothing."""


def moving(columns: Floats) -> NDArray[np.bool_]:
    """Return which columns (K,) of a series (T, K) are more than one value and rounding."""
    return np.asarray(columns.std(axis=0) > LEAST_SPREAD * np.abs(columns).max(axis=0))


def block_lengths(series: Floats) -> Floats:
    """Return the mean block length in sessions (K,) for the stationary bootstrap of each column of (T, K).

    Politis & White 2004, "Automatic Block-Length Selection for the Dependent Bootstrap", Econometric Reviews
    23, corrected by Patton, Politis & White 2009, ibid. 28. At least 1; 1 for one that does not move
    or has too few rows.
    """
    from arch.bootstrap import optimal_block_length

    columns = np.asarray(series, dtype=np.float64).reshape(len(series), -1)
    lengths = np.ones(columns.shape[1])
    active = moving(columns)
    if active.any() and len(columns) >= LEAST_ROWS:
        with np.errstate(divide="ignore", invalid="ignore"):  # of a stretch that does not move; seen to below
            lengths[active] = optimal_block_length(columns[:, active])["stationary"].to_numpy()
    return np.asarray(np.fmax(lengths, 1.0))


def long_run_variance(series: Floats, block: float) -> Floats:
    """Return the long-run variance (K,) of the columns of a series (T, K) at a mean block length.

    T times the variance that the mean has under the stationary bootstrap, in closed form: autocovariances
    weighted by (1 - k/T)(1 - p)^k + (k/T)(1 - p)^(T - k), p = 1 / block (Politis & Romano 1994, "The
    Stationary Bootstrap", JASA 89, lemma 1).
    """
    rows = len(series)
    centred = np.asarray(series, dtype=np.float64).reshape(rows, -1)
    centred = centred - centred.mean(axis=0)
    size = 1 << (2 * rows - 1).bit_length()
    power = np.abs(np.fft.rfft(centred, size, axis=0)) ** 2
    covariance = np.fft.irfft(power, size, axis=0)[:rows] / rows
    lag = np.arange(rows)
    stay = 1.0 - 1.0 / block
    weight = (1.0 - lag / rows) * stay**lag + lag / rows * stay ** (rows - lag)
    weight[0] = 0.5
    return np.asarray(np.maximum(2.0 * weight @ covariance, 0.0))


def resampled_days(days: int, block: int, replications: int, random: np.random.Generator) -> Iterator[Ints]:
    """Yield the day numbers (T,) of each replication of the stationary bootstrap (Politis & Romano 1994).

    Blocks of geometric length with mean `block`, from a uniform start, going round from the last day to the
    first.
    """
    from arch.bootstrap import StationaryBootstrap

    sampler = StationaryBootstrap(block, np.arange(days), seed=random)
    for _ in range(replications):
        yield np.asarray(sampler.update_indices())
