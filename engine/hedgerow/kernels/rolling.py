"""Trailing and exponentially weighted moments down the session axis of (T, N) arrays.

NaN is skipped, each symbol stands alone, and time runs one way: the value at session t is computed from
sessions up to t in an order that does not depend on what follows or on how far the array continues, so it is
the same to the last bit when the array is cut after t.

A trailing window of h sessions is joined from two parts that were never subtracted from: what the block of h
sessions that holds t has gathered so far, and the tail of the block before it. No running sum, so nothing
drifts, and a window of equal values has a deviation of exactly zero.
"""

from __future__ import annotations

import math

import numpy as np

from hedgerow.kernels.jit import compiled
from hedgerow.kernels.layout import Floats

__all__ = [
    "carried",
    "seeded_smooth",
    "trailing_extreme",
    "trailing_moments",
    "trailing_rank",
    "weighted_mean",
]


@compiled
def _with(count: float, mean: float, squares: float, value: float) -> tuple[float, float, float]:
    """Moments with one more value (Welford 1962)."""
    count += 1.0
    gap = value - mean
    mean += gap / count
    return count, mean, squares + gap * (value - mean)


@compiled
def _joined(
    count_a: float, mean_a: float, squares_a: float, count_b: float, mean_b: float, squares_b: float
) -> tuple[float, float, float]:
    """Moments of two groups together (Chan, Golub & LeVeque 1983, equation 2.1)."""
    if count_a == 0.0:
        return count_b, mean_b, squares_b
    if count_b == 0.0:
        return count_a, mean_a, squares_a
    count = count_a + count_b
    gap = mean_b - mean_a
    mean = mean_a + gap * (count_b / count)
    return count, mean, squares_a + squares_b + gap * gap * (count_a * (count_b / count))


@compiled
def _fill_tails(values: Floats, start: int, symbol: int, tails: Floats) -> None:
    """Moments of each tail of the block of len(tails) - 1 sessions from `start`; the last tail is empty."""
    window = tails.shape[0] - 1
    count, mean, squares = 0.0, 0.0, 0.0
    for offset in range(window - 1, -1, -1):
        value = values[start + offset, symbol]
        if not math.isnan(value):
            count, mean, squares = _with(count, mean, squares, value)
        tails[offset, 0] = count
        tails[offset, 1] = mean
        tails[offset, 2] = squares


@compiled
def trailing_moments(values: Floats, window: int) -> tuple[Floats, Floats, Floats]:
    """Count, mean and sum of squared deviations of the known values in each trailing `window` of sessions.

    Three arrays of the shape of `values` (T, N); the mean of an empty window is NaN.
    """
    sessions, symbols = values.shape
    counts = np.zeros((sessions, symbols))
    means = np.full((sessions, symbols), np.nan)
    squares = np.zeros((sessions, symbols))
    tails = np.zeros((window + 1, 3))
    for s in range(symbols):
        tails[:] = 0.0
        n, m, q = 0.0, 0.0, 0.0
        for t in range(sessions):
            offset = t % window
            if offset == 0 and t > 0:
                _fill_tails(values, t - window, s, tails)
                n, m, q = 0.0, 0.0, 0.0
            if not math.isnan(values[t, s]):
                n, m, q = _with(n, m, q, values[t, s])
            tail = tails[offset + 1]
            count, mean, square = _joined(tail[0], tail[1], tail[2], n, m, q)
            counts[t, s] = count
            squares[t, s] = square
            if count > 0.0:
                means[t, s] = mean
    return counts, means, squares


@compiled
def trailing_extreme(values: Floats, window: int, sign: float) -> tuple[Floats, Floats]:
    """Count and greatest (sign +1) or least (sign -1) known value of each trailing `window`; NaN if empty."""
    sessions, symbols = values.shape
    counts = np.zeros((sessions, symbols))
    best = np.full((sessions, symbols), np.nan)
    queue = np.zeros(sessions, dtype=np.int64)
    for s in range(symbols):
        head, tail, known = 0, 0, 0.0
        for t in range(sessions):
            if t >= window and not math.isnan(values[t - window, s]):
                known -= 1.0
            if head < tail and queue[head] <= t - window:
                head += 1
            value = values[t, s]
            if not math.isnan(value):
                known += 1.0
                while head < tail and sign * values[queue[tail - 1], s] <= sign * value:
                    tail -= 1
                queue[tail] = t
                tail += 1
            counts[t, s] = known
            if head < tail:
                best[t, s] = values[queue[head], s]
    return counts, best


@compiled
def _below(values: Floats, today: float) -> float:
    """How many values lie below today's, ties counted half; NaN neither lies below nor ties."""
    lower, equal = 0, 0
    for i in range(values.shape[0]):
        lower += values[i] < today
        equal += values[i] == today
    return lower + 0.5 * equal


@compiled
def trailing_rank(values: Floats, window: int) -> tuple[Floats, Floats]:
    """Count of known values in each trailing `window`, and the share of the others that lie below today's.

    The share is of the values before today's in the window, ties counted half; NaN without today's or others.
    """
    sessions, symbols = values.shape
    counts = np.zeros((sessions, symbols))
    ranks = np.full((sessions, symbols), np.nan)
    for s in range(symbols):
        column = values[:, s].copy()
        known = 0.0
        for t in range(sessions):
            if t >= window and not math.isnan(column[t - window]):
                known -= 1.0
            if not math.isnan(column[t]):
                known += 1.0
                if known > 1.0:
                    ranks[t, s] = _below(column[max(0, t - window + 1) : t], column[t]) / (known - 1.0)
            counts[t, s] = known
    return counts, ranks


@compiled
def weighted_mean(values: Floats, decay: float) -> tuple[Floats, Floats]:
    """Count so far, and the exponentially weighted mean of the known values, weights adding up to one.

    mean = sum(decay**age * value) / sum(decay**age), age counted in known values: for a long history the
    recursion mean = decay * mean + (1 - decay) * value, without the memory of a starting value.
    """
    sessions, symbols = values.shape
    counts = np.zeros((sessions, symbols))
    means = np.full((sessions, symbols), np.nan)
    for s in range(symbols):
        count, total, weight = 0.0, 0.0, 0.0
        for t in range(sessions):
            value = values[t, s]
            if not math.isnan(value):
                count += 1.0
                total = decay * total + (1.0 - decay) * value
                weight = decay * weight + (1.0 - decay)
            counts[t, s] = count
            if count > 0.0:
                means[t, s] = total / weight
    return counts, means


@compiled
def seeded_smooth(values: Floats, gain: float, seed: int, skip: int) -> Floats:
    """Exponential smoothing (T, N) seeded with the plain mean of `seed` values after `skip` known ones.

    mean += gain * (value - mean). NaN until the seed is complete and where the value is NaN.
    """
    sessions, symbols = values.shape
    out = np.full((sessions, symbols), np.nan)
    for s in range(symbols):
        seen, mean = 0, 0.0
        for t in range(sessions):
            value = values[t, s]
            if math.isnan(value):
                continue
            seen += 1
            if seen <= skip:
                continue
            if seen <= skip + seed:
                mean += value
                if seen < skip + seed:
                    continue
                mean /= seed
            else:
                mean += gain * (value - mean)
            out[t, s] = mean
    return out


@compiled
def carried(values: Floats, longest: int) -> Floats:
    """Carry the latest known value of (T, N) forward while it is at most `longest` sessions old, else NaN."""
    sessions, symbols = values.shape
    out = np.full((sessions, symbols), np.nan)
    for s in range(symbols):
        last = -1
        for t in range(sessions):
            if not math.isnan(values[t, s]):
                last = t
            if last >= 0 and t - last <= longest:
                out[t, s] = values[last, s]
    return out
