"""The win rate that is needed, and the one achieved."""

from __future__ import annotations

import json
import math

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as some

from hedgerow.evidence.clusters import Positions
from hedgerow.evidence.odds import after_trades, break_even_win_rate
from hedgerow.evidence.winrate import WinRate, win_rate_needed, win_rate_of


@given(some.floats(0.005, 0.1), some.floats(0.005, 0.1), some.floats(0.05, 1.0), some.floats(-0.3, 0.5))
def test_needed_rate_reaches_the_target(win: float, loss: float, share: float, target: float) -> None:
    """Compares the rate with its inverse: 150 trades at that rate compound to the target."""
    rate = win_rate_needed(target, 150.0, win, loss, share)
    if 0.0 < rate <= 1.0:
        assert after_trades(150, rate, win, loss, share) == pytest.approx(target, abs=1e-9)


def test_needed_rates_of_common_practice() -> None:
    """Compares 100 trades of a third of the account, +2.1 % or -3.3 %, with 67 % winners for 10 %.

    Source: common practice. The end at 67 % is +10.78 %, so that .10 needs a little less: .6662.
    """
    assert win_rate_needed(0.10, 100, 0.021, 0.033, 1 / 3) == pytest.approx(0.666, abs=0.0005)
    assert win_rate_needed(0.0, 100, 0.021, 0.033, 1e-6) == pytest.approx(break_even_win_rate(0.021, 0.033))


@pytest.mark.parametrize(
    ("target", "pace", "win", "loss", "share"),
    [
        (5.0, 10, 0.02, 0.03, 0.3),
        (0.1, 0.0, 0.02, 0.03, 0.3),
        (0.1, 10, 0.0, 0.0, 0.3),
        (0.1, 9, 0.1, 2.0, 0.5),
    ],
)
def test_no_rate_would_do(target: float, pace: float, win: float, loss: float, share: float) -> None:
    """Compares a target out of reach, no positions, none that win or lose, and ruin with: not known."""
    assert math.isnan(win_rate_needed(target, pace, win, loss, share))


def test_a_target_below_any_result_needs_no_wins() -> None:
    """Compares a target of losing half with what all losing comes to: no winner is needed."""
    assert win_rate_needed(-0.5, 10, 0.02, 0.01, 0.3) == 0.0


def positions(wins: int, trials: int, win: float = 0.03, loss: float = -0.01) -> Positions:
    """One position a week, the winners spread among them."""
    won = np.isin(np.arange(trials), np.linspace(0, trials - 1, wins).round())
    opened = np.datetime64("2015-01-05") + 7 * np.arange(trials).astype("timedelta64[D]")
    return Positions("p", np.where(won, win, loss), opened, np.full(trials, 5))


def test_achieved_rate() -> None:
    """Compares the counts, the means, and both intervals: with one position a week they are next to equal."""
    found = win_rate_of(positions(312, 520), 10.0, 0.2, 0.15)
    assert (found.positions, found.wins, found.achieved) == (520, 312, 0.6)
    assert found.positions_a_year == 52.0
    assert (found.average_win, found.average_loss) == (pytest.approx(0.03), pytest.approx(0.01))
    assert found.break_even == pytest.approx(0.25)
    assert found.needed == pytest.approx(win_rate_needed(0.15, 52.0, 0.03, 0.01, 0.2))
    assert (found.low, found.high) == pytest.approx((found.exact_low, found.exact_high), abs=0.002)
    assert found.exact_low < 0.6 < found.exact_high
    plain = found.as_dict()
    assert json.loads(json.dumps(plain, allow_nan=False)) == plain


def enough(found: WinRate, low: float, high: float, needed: float) -> bool | None:
    """What a win rate with another interval would say."""
    values = {name: getattr(found, name) for name in WinRate.__dataclass_fields__}
    return WinRate(**values | {"low": low, "high": high, "needed": needed}).enough


def test_enough() -> None:
    """Compares where the interval lies with what is said of the target."""
    found = win_rate_of(positions(50, 100), 2.0, 0.2, 0.1)
    assert enough(found, 0.6, 0.7, 0.5) is True
    assert enough(found, 0.3, 0.4, 0.5) is False
    assert enough(found, 0.4, 0.6, 0.5) is None
    assert enough(found, 0.4, 0.6, math.nan) is False
    assert enough(found, math.nan, math.nan, 0.5) is None


@pytest.mark.parametrize("wins", [0, 60])
def test_only_losers_and_only_winners(wins: int) -> None:
    """Compares all and none with the counts; what does not exist has a mean of nothing."""
    found = win_rate_of(positions(wins, 60), 1.0, 0.2, 0.1)
    assert found.achieved == wins / 60
    assert (found.average_loss if wins else found.average_win) == 0.0
    assert 0.0 <= found.low <= found.high <= 1.0


def test_no_positions() -> None:
    """Compares an empty record with: nothing known."""
    found = win_rate_of(positions(0, 0), 1.0, 0.2, 0.1)
    assert found.positions == 0
    assert math.isnan(found.achieved)
    assert math.isnan(found.low)
    assert found.enough is None
