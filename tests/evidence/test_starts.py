"""Timing luck of curves worked by hand."""

from __future__ import annotations

import numpy as np
import pytest

from hedgerow.evidence.starts import start_gap, starts_of

DATES = np.array(["2011-01-01", "2013-01-01", "2015-01-01"], dtype="datetime64[D]")
YEARS = 1461 / 365.25
"""Of DATES: exactly four."""


def test_growths_spread_and_ladder_by_hand() -> None:
    """Three accounts of different size that grow 1.1, 1.0 and .9 fold in four years; the ladder 1.0 fold."""
    equity = np.array([[100.0, 105.0, 110.0], [50.0, 50.0, 50.0], [10.0, 9.5, 9.0]])
    starts = starts_of("collar", 15, (0, 5, 10), equity, DATES)
    growths = [fold ** (1.0 / YEARS) - 1.0 for fold in (1.1, 1.0, 0.9)]
    assert starts.growths == pytest.approx(growths)
    assert (starts.as_run, starts.highest) == (starts.growths[0], starts.growths[0])
    assert starts.lowest == pytest.approx(growths[2])
    assert starts.spread == pytest.approx(growths[0] - growths[2])
    assert starts.deviation == pytest.approx(np.std(growths, ddof=1))
    assert starts.laddered == pytest.approx(0.0, abs=1e-12)
    assert (starts.first_date, starts.starts, starts.offsets) == ("2011-01-01", 3, (0, 5, 10))


def test_one_start_has_no_spread() -> None:
    """A rule without a cycle."""
    starts = starts_of("shares", 1, (0,), np.array([[1.0, 1.1, 1.21]]), DATES)
    assert (starts.spread, starts.deviation) == (0.0, 0.0)
    assert starts.laddered == pytest.approx(starts.as_run)


def test_what_timing_does_to_a_difference() -> None:
    """By hand: worst against best both ways; swapped, the signs and the ends change."""
    one = starts_of("one", 2, (0, 1), np.array([[1.0, 1.0, 1.2], [1.0, 1.0, 1.1]]), DATES)
    other = starts_of("other", 2, (0, 1), np.array([[1.0, 1.0, 1.15], [1.0, 1.0, 1.0]]), DATES)
    there, back = start_gap(one, other), start_gap(other, one)
    assert there.laddered == pytest.approx(one.laddered - other.laddered)
    assert there.lowest == pytest.approx(one.lowest - other.highest)
    assert there.highest == pytest.approx(one.highest - other.lowest)
    assert there.can_turn
    assert (back.laddered, back.lowest) == pytest.approx((-there.laddered, -there.highest))
