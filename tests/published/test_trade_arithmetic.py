"""Arithmetic that is common practice in trading protected stock. Source of every figure: common practice.

The statements are rounded the way people say them ("near", "about"), so the tolerances are half of the last
place in which each was said, except where a docstring says more.
"""

from __future__ import annotations

import pytest

from hedgerow.evidence.odds import after_trades, break_even_win_rate, expectancy

THIRD = 1 / 3


def test_win_of_2_1_against_loss_of_3_3_breaks_even_at_61_1() -> None:
    """Compares 3.3 / (2.1 + 3.3) with the stated 61.1 %."""
    assert break_even_win_rate(0.021, 0.033) == pytest.approx(0.611, abs=0.0005)


@pytest.mark.parametrize(
    ("winners", "stated", "computed"), [(0.42, -0.30, -0.2943), (0.67, 0.10, 0.1078), (0.73, 0.24, 0.2344)]
)
def test_a_third_of_the_account_in_each_of_100_trades(winners: float, stated: float, computed: float) -> None:
    """Compares 100 compounded trades of +2.1 % or -3.3 % on a third of the account with the stated end.

    The pair of the first test reproduces all three statements: -29.4 % for "near -30 %", +10.8 % for "near
    +10 %", +23.4 % for "near +24 %". Within one point of each; the computed value is pinned more sharply.
    """
    growth = after_trades(100, winners, 0.021, 0.033, THIRD)
    assert growth == pytest.approx(stated, abs=0.01)
    assert growth == pytest.approx(computed, abs=0.00005)


def test_the_other_order_of_compounding_agrees() -> None:
    """Compares the closed form with an account multiplied trade by trade, 42 winners among 100."""
    account = 1.0
    for trade in range(100):
        account *= 1 + 0.021 / 3 if (trade * 42) % 100 < 42 else 1 - 0.033 / 3
    assert sum((trade * 42) % 100 < 42 for trade in range(100)) == 42
    assert after_trades(100, 0.42, 0.021, 0.033, THIRD) == pytest.approx(account - 1.0, abs=1e-12)


def test_small_wins_and_large_losses_at_60_percent() -> None:
    """Compares 100 trades winning 1.3 % or losing 4.2 %, 60 winners, with the stated end near -26 %."""
    assert after_trades(100, 0.60, 0.013, 0.042, THIRD) == pytest.approx(-0.26, abs=0.005)
    assert break_even_win_rate(0.013, 0.042) > 0.60


def test_half_of_the_gain_at_an_unchanged_loss() -> None:
    """Compares taking half of the gain early with the stated break-even of about 79 %.

    The pair 2.1 % / 3.3 % does not reproduce it: half of 2.1 % needs 75.9 %, and 1.3 % / 4.2 % needs 86.6 %.
    Solving loss / (gain / 2 + loss) = .79 gives a loss of 1.881 times the whole gain, which breaks even at
    65.3 % when the whole gain is taken: 2.1 % against 3.95 %, or 1.75 % against 3.3 %. So the statement holds
    for a position whose loss is a little under twice its gain, and is given here for that one.
    """
    assert break_even_win_rate(0.021 / 2, 0.033) == pytest.approx(0.7586, abs=0.0001)
    assert break_even_win_rate(0.013 / 2, 0.042) == pytest.approx(0.8660, abs=0.0001)
    loss_over_gain = 0.79 * 0.5 / (1 - 0.79)
    assert loss_over_gain == pytest.approx(1.881, abs=0.0005)
    for gain in (0.021, 0.0175):
        loss = loss_over_gain * gain
        assert break_even_win_rate(gain / 2, loss) == pytest.approx(0.79, abs=1e-12)
        assert break_even_win_rate(gain, loss) == pytest.approx(0.653, abs=0.0005)
    assert 0.021 * loss_over_gain == pytest.approx(0.0395, abs=0.00005)
    assert 0.033 / loss_over_gain == pytest.approx(0.01754, abs=0.00005)


def test_covered_call_with_a_stop() -> None:
    """Compares a gain of 3 % with a stop of 7 %: 7 / (3 + 7) = 70 % winners."""
    assert break_even_win_rate(0.03, 0.07) == pytest.approx(0.70, abs=1e-12)


def test_winners_of_6_4_and_losers_of_5_at_59_percent() -> None:
    """Compares .59 x 6.4 - .41 x 5.0 = 1.726 % with the stated +1.7 % a trade."""
    assert expectancy(0.59, 0.064, 0.05) == pytest.approx(0.017, abs=0.0005)
    assert expectancy(0.59, 0.064, 0.05) == pytest.approx(0.01726, abs=1e-12)
