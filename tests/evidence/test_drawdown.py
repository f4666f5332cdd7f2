"""Falls of a curve."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as some

from builders import weekdays
from hedgerow.evidence.drawdown import Fall, deepest, drawdowns, longest

CURVES = some.lists(some.floats(1.0, 1000.0), min_size=1, max_size=40)


def test_deepest_and_longest_differ() -> None:
    """Compares a curve with a deep short fall (100 to 60) and a shallow long one, worked out by hand."""
    curve = np.array([100.0, 60.0, 100.0, 120.0, 119.0, 118.0, 119.0, 119.5, 121.0, 121.0])
    dates = weekdays(10)
    assert deepest(curve) == Fall(pytest.approx(0.4), 0, 1, 2)
    fall, days = longest(curve, dates)
    assert (fall.peak, fall.trough, fall.recovered) == (3, 5, 8)
    assert days == int((dates[8] - dates[3]).astype(int)) == 7


def test_a_fall_that_is_not_over() -> None:
    """Compares a fall that never ends with the days until the last close."""
    curve = np.array([100.0, 90.0, 95.0])
    fall, days = longest(curve, weekdays(3))
    assert (fall.recovered, fall.end(3), days) == (-1, 2, 2)
    assert deepest(curve).end(3) == 2
    assert Fall(0.1, 0, 1, 2).end(9) == 2


def test_a_curve_that_never_falls() -> None:
    """Compares a rising curve, and no curve at all, with no fall."""
    assert deepest(np.array([1.0, 2.0])) == Fall(0.0, 0, 0, 0)
    assert longest(np.array([1.0, 2.0]), weekdays(2))[1] == 0
    assert deepest(np.array([])).depth == 0.0
    assert longest(np.array([]), weekdays(0))[1] == 0


@given(CURVES)
def test_against_a_slow_search(values: list[float]) -> None:
    """Compares depth and length with every pair of a peak and what follows it."""
    curve = np.array(values)
    pairs = [(i, j) for i in range(len(values)) for j in range(i, len(values))]
    assert deepest(curve).depth == pytest.approx(max(1 - values[j] / values[i] for i, j in pairs), abs=1e-12)
    dates = weekdays(len(values))
    spans = [0]
    for i in range(len(values)):
        if max(values[: i + 1]) == values[i] and i + 1 < len(values) and values[i + 1] < values[i]:
            back = [j for j in range(i + 1, len(values)) if values[j] >= values[i]]
            spans.append(int((dates[back[0] if back else -1] - dates[i]).astype(int)))
    assert longest(curve, dates)[1] == max(spans)
    assert (drawdowns(curve) >= 0).all()
