"""Trailing and weighted moments: against numpy window by window, and one-way in time to the last bit."""

from __future__ import annotations

from collections.abc import Callable

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from hedgerow.kernels import rolling
from hedgerow.kernels.layout import Floats

KERNELS: dict[str, Callable[[Floats], tuple[Floats, ...]]] = {
    "moments": lambda x: rolling.trailing_moments(x, 7),
    "highest": lambda x: rolling.trailing_extreme(x, 7, 1.0),
    "lowest": lambda x: rolling.trailing_extreme(x, 7, -1.0),
    "rank": lambda x: rolling.trailing_rank(x, 7),
    "weighted": lambda x: rolling.weighted_mean(x, 0.94),
    "smooth": lambda x: (rolling.seeded_smooth(x, 0.3, 5, 2),),
    "carried": lambda x: (rolling.carried(x, 3),),
}


def random_values(seed: int, sessions: int = 60, symbols: int = 3, holes: float = 0.15) -> Floats:
    """Draw a random (T, N) array with holes."""
    rng = np.random.default_rng(seed)
    values = rng.normal(5.0, 2.0, (sessions, symbols))
    values[rng.random(values.shape) < holes] = np.nan
    return values


def windows(values: Floats, window: int, symbol: int) -> list[Floats]:
    """Cut the known values of each trailing window of one symbol out, plainly."""
    column = values[:, symbol]
    cuts = [column[max(0, t - window + 1) : t + 1] for t in range(len(column))]
    return [cut[~np.isnan(cut)] for cut in cuts]


@pytest.mark.parametrize("window", [1, 2, 7, 59, 60, 200])
def test_moments_agree_with_numpy_window_by_window(window: int) -> None:
    """Against numpy's mean and variance of each window; 1e-12 allows for another order of adding."""
    values = random_values(1)
    counts, means, squares = rolling.trailing_moments(values, window)
    for symbol in range(values.shape[1]):
        for t, known in enumerate(windows(values, window, symbol)):
            assert counts[t, symbol] == len(known)
            if len(known):
                assert means[t, symbol] == pytest.approx(known.mean(), rel=1e-12)
                assert squares[t, symbol] == pytest.approx(((known - known.mean()) ** 2).sum(), abs=1e-11)
            else:
                assert np.isnan(means[t, symbol])


def test_equal_values_deviate_by_exactly_nothing() -> None:
    """An identity a running sum of squares breaks: equal values after wild ones have no deviation at all."""
    values = np.full((200, 1), 1234.56789)
    values[:50, 0] = np.random.default_rng(2).normal(1e6, 1e5, 50)
    _, means, squares = rolling.trailing_moments(values, 20)
    assert (squares[70:] == 0.0).all()
    assert (means[70:] == 1234.56789).all()


def test_a_small_deviation_on_a_large_level_is_kept() -> None:
    """Against the closed form: alternating level +-1 has variance 1, at a level of a hundred million."""
    values = (1e8 + np.where(np.arange(100) % 2 == 0, 1.0, -1.0)).reshape(-1, 1)
    counts, _, squares = rolling.trailing_moments(values, 10)
    assert squares[9:, 0] / counts[9:, 0] == pytest.approx(1.0, rel=1e-9)


@pytest.mark.parametrize("sign", [1.0, -1.0])
def test_extremes_agree_with_numpy_window_by_window(sign: float) -> None:
    """Exactly numpy's maximum or minimum of each window."""
    values = random_values(3)
    counts, best = rolling.trailing_extreme(values, 9, sign)
    for symbol in range(values.shape[1]):
        for t, known in enumerate(windows(values, 9, symbol)):
            assert counts[t, symbol] == len(known)
            want = (known.max() if sign > 0 else known.min()) if len(known) else np.nan
            np.testing.assert_equal(best[t, symbol], want)


def test_rank_by_hand() -> None:
    """Hand-worked: among 3, 1, 2 before it, 2 has one below and one tie: 1.5 of 3."""
    values = np.array([[3.0], [1.0], [2.0], [2.0], [np.nan], [9.0]])
    counts, ranks = rolling.trailing_rank(values, 5)
    assert ranks[3, 0] == 0.5
    assert np.isnan(ranks[0, 0])
    assert np.isnan(ranks[4, 0])
    assert ranks[5, 0] == 1.0
    assert counts[:, 0].tolist() == [1.0, 2.0, 3.0, 4.0, 4.0, 4.0]


def test_weighted_mean_is_the_weighted_sum() -> None:
    """Against the sum of decay ** age written out; and its recursion once the start is forgotten."""
    values = random_values(4, sessions=700, symbols=1, holes=0.0)
    _, means = rolling.weighted_mean(values, 0.94)
    for t in (0, 5, 100):
        weights = 0.94 ** np.arange(t, -1, -1.0)
        assert means[t, 0] == pytest.approx((weights * values[: t + 1, 0]).sum() / weights.sum(), rel=1e-12)
    stepped = 0.94 * means[-2, 0] + 0.06 * values[-1, 0]
    assert means[-1, 0] == pytest.approx(stepped, rel=1e-12)


def test_weighted_mean_waits_through_a_hole() -> None:
    """A hole neither ages nor moves the mean: the known values alone decide."""
    values = random_values(5, symbols=1)
    known = values[~np.isnan(values[:, 0])]
    _, with_holes = rolling.weighted_mean(values, 0.9)
    _, without = rolling.weighted_mean(known, 0.9)
    assert with_holes[-1, 0] == without[-1, 0]


def test_seeded_smoothing_by_hand() -> None:
    """Hand-worked: the first value left out, seed (2 + 4) / 2 = 3, then a third of the gap each session."""
    values = np.array([[99.0], [2.0], [4.0], [np.nan], [6.0], [4.0]])
    out = rolling.seeded_smooth(values, 1.0 / 3.0, 2, 1)[:, 0]
    np.testing.assert_allclose(out, [np.nan, np.nan, 3.0, np.nan, 4.0, 4.0], rtol=1e-15)


def test_a_value_is_carried_only_so_far() -> None:
    """Hand-worked: a value stands for two more sessions, then it is unknown."""
    values = np.array([[np.nan], [5.0], [np.nan], [np.nan], [np.nan], [6.0]])
    out = rolling.carried(values, 2)[:, 0]
    np.testing.assert_array_equal(out, [np.nan, 5.0, 5.0, 5.0, np.nan, 6.0])


@pytest.mark.parametrize("name", sorted(KERNELS))
@settings(max_examples=25, deadline=None)
@given(seed=st.integers(0, 10**6), cut=st.integers(0, 59))
def test_time_runs_one_way(name: str, seed: int, cut: int) -> None:
    """Bit for bit the same up to `cut` when all after it is changed, and when it is not there at all."""
    kernel = KERNELS[name]
    values = random_values(seed)
    changed = values.copy()
    changed[cut + 1 :] = random_values(seed + 1)[cut + 1 :] * 1e6
    for whole, other, short in zip(
        kernel(values), kernel(changed), kernel(values[: cut + 1].copy()), strict=True
    ):
        assert whole[: cut + 1].tobytes() == other[: cut + 1].tobytes() == short.tobytes()


@pytest.mark.parametrize("name", sorted(KERNELS))
def test_each_symbol_stands_alone(name: str) -> None:
    """Bit for bit the same for a symbol alone and among others."""
    values = random_values(6)
    for symbol in range(values.shape[1]):
        together = KERNELS[name](values)
        alone = KERNELS[name](values[:, symbol : symbol + 1].copy())
        for a, b in zip(together, alone, strict=True):
            assert a[:, symbol].tobytes() == b[:, 0].tobytes()


def test_a_centred_mean_would_be_caught() -> None:
    """Negative control: a mean that looks one session ahead fails the very comparison used above."""

    def peeking(values: Floats) -> Floats:
        return np.vstack([(values[:-1] + values[1:]) / 2, values[-1:]])

    values = random_values(7, holes=0.0)
    assert peeking(values)[:30].tobytes() != peeking(values[:30].copy()).tobytes()
