"""Many tries joined: p-values against Student's test, the lists, and the count."""

from __future__ import annotations

import numpy as np
import pytest
from scipy import stats

from hedgerow.evidence.many import Records, tries_of
from hedgerow.evidence.seeds import Resampling

DAYS = 1500
KNOWN = Resampling(1, 300, 0.9)
NAMES = ("good", "plain", "plain too", "bad")


def records(yardstick: bool = True) -> Records:
    """Four rules around one yardstick: one .0008 a day better, two alike but for noise, one as much worse."""
    rng = np.random.default_rng(8)
    market = rng.normal(0.0003, 0.01, DAYS)
    extra = np.array([0.0008, 0.0, 0.0, -0.0008])
    logs = market[:, None] + rng.normal(0.0, 0.004, (DAYS, 4)) + extra
    return Records(NAMES, logs, np.expm1(logs), market if yardstick else None)


def test_p_values_are_those_of_students_test_for_independent_days() -> None:
    """The one-sample t-test of scipy; the long-run error adds what chance correlation adds."""
    made = records()
    assert made.yardstick is not None
    for column, found in enumerate(tries_of(made, 4, KNOWN).found):
        gaps = made.logs[:, column] - made.yardstick
        assert found.growth_difference == pytest.approx(gaps.mean())
        expected = stats.ttest_1samp(gaps, 0.0).pvalue
        assert found.p_value == pytest.approx(expected, abs=0.1)
        assert (found.p_value < 1e-4) == (expected < 1e-4)


def test_the_lists_hold_what_was_planted() -> None:
    """The good rule is better, the bad one worse, two are in neither list; the good one is the best set."""
    tries = tries_of(records(), 4, KNOWN)
    assert tries.better == ("good",)
    assert tries.worse == ("bad",)
    assert tries.best_set.members == ("good",)
    assert tries.superiority is not None
    assert tries.superiority.better == ("good",)
    assert tries.best is not None
    assert tries.best.best == "good"
    plain = tries.as_dict()
    assert plain["false_discovery"]["better"] == ["good"]
    assert plain["cannot_be_told_from_best"]["members"] == ["good"]


def test_tries_elsewhere_count_against_the_best() -> None:
    """The chance that the best is more than luck falls with the number of tries; never below those here."""
    chances = []
    for tried in (2, 40, 4000):
        tries = tries_of(records(), tried, KNOWN)
        assert tries.best is not None
        assert tries.count.in_study == 4
        assert tries.count.in_all == max(tried, 4) == tries.best.trials
        chances.append(tries.best.chance_above_luck)
    assert chances[0] > chances[1] > chances[2]


def test_without_a_yardstick_nothing_is_tested_against_it() -> None:
    """No superiority and no lists; the best set is there."""
    tries = tries_of(records(yardstick=False), 4, KNOWN)
    assert (tries.superiority, tries.found, tries.better) == (None, (), ())
    assert tries.as_dict()["superior_to_yardstick"] is None
    assert "good" in tries.best_set.members


def test_variants_that_never_move() -> None:
    """Cash alone: no best Sharpe ratio, and no false finding."""
    still = np.zeros((DAYS, 2))
    tries = tries_of(Records(("a", "b"), still, still, np.zeros(DAYS)), 2, KNOWN)
    assert tries.best is None
    assert (tries.better, tries.worse) == ((), ())
    assert tries.as_dict()["best_of_many"] is None
