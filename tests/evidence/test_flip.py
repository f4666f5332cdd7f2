"""Where two rules are equal: against values worked by hand, and what is said where there is no such value."""

from __future__ import annotations

import math

import numpy as np
import pytest

from hedgerow.evidence.flip import HALF_SPREAD, RATIO, Flip, Versus, flip_of

VALUES = np.array([0.8, 1.0, 1.2, 1.4])


def flip(gaps: list[float], drawn: list[list[float]] | None = None, quantity: str = RATIO) -> Flip:
    """The flip of gaps at VALUES; without draws the record itself is drawn."""
    again = np.array([gaps] if drawn is None else drawn)
    return flip_of(Versus("one", "other", quantity, 1.0, 0.8), VALUES, np.array(gaps), again)


def test_a_crossing_between_two_values() -> None:
    """By hand: from -.02 at .8 to +.01 at 1.0 a straight line is nothing at .8 + .2 x 2 / 3."""
    found = flip([-0.02, 0.01, 0.02, 0.05])
    assert found.value == pytest.approx(0.8 + 0.2 * 2.0 / 3.0)
    assert (found.crossings, found.ahead_above) == (1, "one")
    assert (found.least, found.most) == (0.8, 1.4)


def test_a_crossing_on_a_value_counts_once() -> None:
    """By hand: the gap is nothing just at 1.2."""
    found = flip([0.02, 0.01, 0.0, -0.01])
    assert found.value == 1.2
    assert (found.crossings, found.ahead_above) == (1, "other")


def test_of_several_crossings_the_nearest_to_what_is_assumed() -> None:
    """By hand: crossings at .9, 1.1 and 1.3; 1.0 is assumed, and the first of two alike counts."""
    found = flip([-0.01, 0.01, -0.01, 0.01])
    assert found.crossings == 3
    assert found.value == pytest.approx(0.9)


def test_the_interval_holds_the_middle_of_the_draws() -> None:
    """By hand: gaps that cross at .82, .84 ... 1.20: the 80 % interval leaves out a tenth at each end."""
    places = 0.8 + 0.02 * np.arange(1, 21)
    found = flip([0.2, 0.0, -0.2, -0.4], [(place - VALUES).tolist() for place in places])
    assert found.low == pytest.approx(places[1])
    assert found.high == pytest.approx(places[17])
    assert found.share_inside == 1.0
    assert found.holds_assumed


def test_draws_that_cross_beyond_the_range_open_the_interval() -> None:
    """Half of the draws cross near 1.3, half only where the line would be far above 1.4."""
    near, far = (1.3 - VALUES).tolist(), (3.0 - VALUES).tolist()
    found = flip((1.3 - VALUES).tolist(), [near] * 5 + [far] * 5)
    assert found.low == pytest.approx(1.3)
    assert found.high == math.inf
    assert found.text(found.high) == "above 1.40"
    assert found.share_inside == 0.5
    assert found.as_dict()["high"]["value"] is None
    assert found.as_dict()["high_beyond_range"] is True
    low = flip([0.2, 0.1, 0.05, 0.01], [[-0.1, -0.2, -0.3, -0.4]])
    assert low.low == -math.inf
    assert low.text(low.low) == "below 0.80"


def test_no_crossing_in_the_range() -> None:
    """The first is ahead throughout: no value, and who is ahead is said."""
    found = flip([0.05, 0.04, 0.03, 0.02])
    assert not found.found
    assert found.value != found.value
    assert (found.crossings, found.ahead_above) == (0, "one")
    assert found.as_dict()["value"]["value"] is None


def test_an_assumption_that_changes_nothing_has_no_flip() -> None:
    """Gaps alike at every value, and gaps of nothing: neither a value nor an interval."""
    for gaps in ([0.03] * 4, [0.0] * 4):
        found = flip(gaps, [gaps] * 3)
        assert not found.found
        assert math.isnan(found.low)
        assert found.holds_assumed is None


def test_swapping_the_two_leaves_the_flip_where_it_is() -> None:
    """Gaps with the other sign: the same value and interval, the other ahead."""
    rng = np.random.default_rng(3)
    drawn = (1.1 + 0.1 * rng.normal(size=(50, 1)) - VALUES) * 0.1
    one = flip((1.1 - VALUES).tolist(), drawn.tolist())
    other = flip((VALUES - 1.1).tolist(), (-drawn).tolist())
    assert (one.value, one.low, one.high) == (other.value, other.low, other.high)
    assert {one.ahead_above, other.ahead_above} == {"one", "other"}


def test_half_spreads_are_written_as_percents() -> None:
    """The unit of a flip follows what is changed."""
    found = flip([-0.02, 0.01, 0.02, 0.05], quantity=HALF_SPREAD)
    assert found.text(0.031) == "3.1%"
    assert found.as_dict()["value"]["unit"] == "fraction of the premium"
    assert flip([-0.02, 0.01, 0.02, 0.05]).as_dict()["value"]["unit"] == "ratio"
