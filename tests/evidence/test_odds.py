"""Break-even rates, compounding and intervals."""

from __future__ import annotations

import math

import pytest
from hypothesis import given
from hypothesis import strategies as some
from scipy.stats import binomtest

from hedgerow.evidence import odds

SIZES = some.floats(0.001, 0.5)


@given(SIZES, SIZES)
def test_nothing_is_earned_at_break_even(win: float, loss: float) -> None:
    """Compares the expectancy at the break-even rate with nothing, and on both sides of it with its sign."""
    rate = odds.break_even_win_rate(win, loss)
    assert odds.expectancy(rate, win, loss) == pytest.approx(0.0, abs=1e-12)
    assert odds.expectancy(rate + 0.01, win, loss) > 0 > odds.expectancy(rate - 0.01, win, loss)


@given(some.integers(0, 400), some.integers(1, 400), some.sampled_from([0.8, 0.9, 0.95, 0.99]))
def test_interval_is_wilsons(times: int, trials: int, confidence: float) -> None:
    """Compares the interval with scipy's Wilson interval without correction."""
    times = min(times, trials)
    wilson = binomtest(times, trials).proportion_ci(confidence, method="wilson")
    assert odds.frequency_interval(times, trials, confidence) == pytest.approx(tuple(wilson), abs=1e-12)


def test_interval_without_trials() -> None:
    """Compares the interval of no trials with: not known."""
    assert all(math.isnan(end) for end in odds.frequency_interval(0, 0))


def test_edges() -> None:
    """Compares the edge cases with what their words mean."""
    assert math.isnan(odds.break_even_win_rate(0.0, 0.0))
    assert odds.break_even_win_rate(0.0, 0.1) == 1.0
    assert odds.profit_factor(300.0, 200.0) == 1.5
    assert odds.profit_factor(300.0, 0.0) == math.inf
    assert math.isnan(odds.profit_factor(0.0, 0.0))
    assert odds.after_trades(0, 0.5, 0.1, 0.1, 1.0) == 0.0


def test_a_loss_of_everything_is_refused() -> None:
    """Negative control: a loss of the whole account cannot be compounded."""
    with pytest.raises(ValueError, match="takes the whole account"):
        odds.after_trades(10, 0.5, 0.1, 0.5, 2.0)
