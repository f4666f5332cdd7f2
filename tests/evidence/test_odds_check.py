"""Forecast odds against fact: Murphy's parts, reliability, and the way from a ledger."""

from __future__ import annotations

import json
import math

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as some

from hedgerow.events import kinds
from hedgerow.evidence.odds_check import Forecasts, check_odds, forecasts_of
from hedgerow.kernels import layout as at
from hedgerow.ledger import Ledger
from random_logs import random_log_builder


def forecasts(odds: list[float], happened: list[bool]) -> Forecasts:
    """Forecasts of one position a week."""
    count = len(odds)
    return Forecasts(np.array(odds, float), np.array(happened, bool), np.arange(count), np.full(count, 5))


ODDS = some.lists(some.tuples(some.floats(0.0, 1.0), some.booleans()), min_size=1, max_size=80)


@given(ODDS)
def test_parts_add_up(pairs: list[tuple[float, bool]]) -> None:
    """Compares the score with the sum of its four parts, and the rows with the whole."""
    found = check_odds(forecasts([odds for odds, _ in pairs], [hit for _, hit in pairs]))
    total = found.reliability - found.resolution + found.uncertainty + found.grouping
    assert total == pytest.approx(found.brier, abs=1e-12)
    assert sum(row.forecasts for row in found.rows) == len(pairs)
    assert min(found.reliability, found.resolution, found.uncertainty) >= 0.0
    assert all(row.least - 1e-9 <= row.forecast <= row.most + 1e-9 for row in found.rows)


@given(some.lists(some.tuples(some.integers(0, 9), some.booleans()), min_size=1, max_size=60))
def test_equal_odds_in_a_bin_leave_nothing_to_grouping(pairs: list[tuple[int, bool]]) -> None:
    """Compares odds that take one value a bin with Murphy 1973: the three parts are the whole score."""
    found = check_odds(forecasts([(place + 0.5) / 10 for place, _ in pairs], [hit for _, hit in pairs]))
    assert found.grouping == pytest.approx(0.0, abs=1e-12)


def test_a_table_by_hand() -> None:
    """Compares ten forecasts with pencil and paper.

    Five at .8, four of which happened; five at .3, one of which did: reliability (0 + 5 x .1^2) / 10 = .005,
    resolution 5 x .3^2 x 2 / 10 = .09, uncertainty .25; score (4 x .04 + .64 + 4 x .09 + .49) / 10 = .165.
    """
    found = check_odds(forecasts([0.8] * 5 + [0.3] * 5, [True] * 4 + [False] + [True] + [False] * 4))
    assert found.brier == pytest.approx(0.165)
    assert found.reliability == pytest.approx(0.005)
    assert found.resolution == pytest.approx(0.09)
    assert found.uncertainty == pytest.approx(0.25)
    assert found.skill == pytest.approx(1 - 0.165 / 0.25)
    assert [(row.least, row.forecasts, row.observed) for row in found.rows] == [(0.3, 5, 0.2), (0.8, 5, 0.8)]


def test_honest_odds_are_held_and_bold_ones_are_not() -> None:
    """Compares 3,000 events with the odds they were drawn from, and with odds .15 higher.

    True odds lie in 90 % intervals of the bins most of the time, at least 6 of 10; bold ones in none of the
    well-filled bins, and their reliability is about .15^2.
    """
    random = np.random.default_rng(1)
    odds = random.random(3000) * 0.8
    happened = (random.random(3000) < odds).tolist()
    honest = check_odds(forecasts(odds.tolist(), happened))
    bold = check_odds(forecasts((odds + 0.15).tolist(), happened))
    assert sum(bool(row.held) for row in honest.rows) >= 6
    assert not any(row.held for row in bold.rows if row.forecasts > 200)
    assert honest.low <= honest.forecast <= honest.high
    assert bold.high < bold.forecast
    assert bold.reliability == pytest.approx(0.0225, abs=0.006)
    assert honest.brier < bold.brier
    assert honest.resolution == pytest.approx(0.8**2 / 12, rel=0.2)


def test_positions_of_a_week_count_together() -> None:
    """Compares 30 weeks of ten equal fates with 300 of their own: a wider interval."""
    random = np.random.default_rng(2)
    fate = np.repeat(random.random(30) < 0.5, 10)
    odds = np.full(300, 0.5)
    together = check_odds(Forecasts(odds, fate, np.repeat(np.arange(30), 10), np.full(300, 5)))
    apart = check_odds(Forecasts(odds, fate, np.arange(300), np.full(300, 5)))
    assert together.high - together.low > 2.0 * (apart.high - apart.low)


def test_no_forecasts_and_odds_that_are_none() -> None:
    """Compares an empty table with: not known; odds beyond 1 are refused; the edges have their bins."""
    empty = check_odds(forecasts([], []))
    assert empty.rows == ()
    assert math.isnan(empty.brier)
    assert json.loads(json.dumps(empty.as_dict(), allow_nan=False))["brier"]["value"] is None
    with pytest.raises(ValueError, match="fractions from 0 to 1"):
        check_odds(forecasts([55.0], [True]))
    edges = check_odds(forecasts([0.0, 0.3, 0.7, 1.0], [False, True, False, True]))
    assert [row.least for row in edges.rows] == [0.0, 0.3, 0.7, 0.9]
    assert edges.rows[0].held is None


def test_forecasts_of_a_ledger() -> None:
    """Compares what a ledger's forecasts hold with its trades: those that ran out without a roll."""
    ledger = Ledger(random_log_builder(5, sessions=60).log())
    found = forecasts_of(ledger)
    ran_out = ledger.trades["outcome"].isin([kinds.BEST_GAIN, kinds.BETWEEN, kinds.FLOOR])
    events = ledger.log.events
    rolled = np.unique(events["position"][events["reason"] == at.WHY_ROLL])
    kept = ran_out & ~ledger.trades["position"].isin(rolled)
    assert 0 < found.odds.size == kept.sum() < ran_out.sum()
    weeks = ledger.trades["opened"][kept].dt.to_period("W-SUN")
    assert np.unique(found.weeks).size == weeks.nunique()
    assert (found.odds == 0.5).all()
    checked = check_odds(found)
    assert checked.brier == pytest.approx(0.25)
    assert checked.forecasts == found.odds.size
    assert found.happened.sum() <= (ledger.trades["outcome"] == kinds.BEST_GAIN).sum()
