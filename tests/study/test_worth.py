"""The best of a grid: its neighbourhood on planted surfaces, its deflated value beside the matrix form."""

from __future__ import annotations

import numpy as np
import pytest

from hedgerow.evidence.deflated import best_of_many
from hedgerow.study.grid import Axis, Grid
from hedgerow.study.worth import Tally, neighbourhood, spread_evenly

SIZE = 9
AXES = (
    Axis("days", tuple(str(n) for n in range(SIZE))),
    Axis("put", tuple(f"-{SIZE - n}%" for n in range(SIZE))),
    Axis("when", ("none", "trend")),
)
GRID = Grid(AXES)
PICKS = GRID.picks(1)


def surface(height: float, width: float) -> np.ndarray:
    """A hill over days and put in the middle of the grid, one kind of entry a little better, some waves."""
    away = ((PICKS[:, 0] - 4.0) ** 2 + (PICKS[:, 1] - 4.0) ** 2) / width**2
    return height * np.exp(-away) + 0.05 * np.sin(PICKS[:, 0] * 3.0) + 0.02 * PICKS[:, 2]


def test_a_peak_alone_in_a_trough_is_marked() -> None:
    """A spike one variant wide: its four neighbours are as low as everything else."""
    values = surface(1.0, 0.3)
    found = neighbourhood(GRID, PICKS, values, int(np.argmax(values)))
    assert (found.alone, found.count, found.steps) == (True, 4, 1.0)
    assert found.kept < 0.2
    assert found.edges == ()


def test_a_plateau_is_not_marked() -> None:
    """The same height over half the grid: the neighbours keep nearly all of the lead."""
    values = surface(1.0, 3.0)
    found = neighbourhood(GRID, PICKS, values, int(np.argmax(values)))
    assert not found.alone
    assert found.kept > 0.75


def test_a_flat_surface_has_no_peak() -> None:
    """All variants alike: nothing leads, nothing is alone."""
    found = neighbourhood(GRID, PICKS, np.ones(len(PICKS)), 0)
    assert not found.alone
    assert np.isnan(found.kept)


def test_neighbours_keep_the_kind_that_has_no_order() -> None:
    """Other words of a parameter without order are not beside it; worked by hand for a corner."""
    found = neighbourhood(GRID, PICKS, np.arange(float(len(PICKS))), 0)
    assert found.count == 2  # one day longer: number 18; one put nearer: number 2
    assert (found.lowest, found.highest) == (2.0, 18.0)
    assert found.edges == ("days", "put")


def test_in_a_sample_the_nearest_that_were_tried_are_the_neighbours() -> None:
    """Four of a random subset, the nearest by steps; more than a step away on average."""
    drawn = Grid(AXES, "random", 30)
    picks = drawn.picks(3)
    found = neighbourhood(drawn, picks, np.arange(30.0), 12)
    steps = np.abs(picks[:, :2] - picks[12, :2]).sum(axis=1)
    same = (picks[:, 2] == picks[12, 2]) & (steps > 0)
    assert found.count == 4
    assert found.steps == np.sort(steps[same])[:4].mean()


def test_variants_that_never_moved_are_no_neighbours() -> None:
    """Unknown figures are left out, not counted as nothing."""
    values = surface(1.0, 3.0)
    best = int(np.argmax(values))
    values[best + 2] = np.nan
    assert neighbourhood(GRID, PICKS, values, best).count == 3


def test_counted_batch_by_batch_it_is_the_deflated_ratio_of_the_whole() -> None:
    """Every figure beside `best_of_many` on the full matrix, one of the variants never moving."""
    rng = np.random.default_rng(4)
    common = rng.normal(0.0, 0.01, 700)
    returns = 0.6 * common[:, None] + rng.normal(0.0003, 0.008, (700, 40))
    returns[:, 7] = 0.0
    names = tuple(f"v{n}" for n in range(40))
    expected = best_of_many(returns, names, trials=55)
    tally = Tally()
    for start in range(0, 40, 6):
        tally.add(np.ascontiguousarray(returns[:, start : start + 6].T))
    best = int(np.nanargmax(tally.sharpe))
    found = tally.judge(names[best], returns[:, best], 55)
    for name in ("best", "trials"):
        assert getattr(found, name) == getattr(expected, name)
    for name in found.__slots__[2:]:
        assert getattr(found, name) == pytest.approx(getattr(expected, name), rel=1e-9), name


def test_cash_is_never_the_best() -> None:
    """An account that only earns interest, rounded to cents, has a huge ratio that says nothing."""
    cents = np.rint(100.0 * 1e5 * 1.0001 ** np.arange(300)) / 100.0
    still = cents[1:] / cents[:-1] - 1.0
    moving = np.random.default_rng(1).normal(0.0001, 0.01, 299)
    assert still.mean() / still.std() > 1000
    tally = Tally()
    tally.add(np.stack([still, moving]))
    assert np.isnan(tally.sharpe).tolist() == [True, False]


def test_a_subset_is_spread_evenly() -> None:
    """All of few; of many the first, the last, and gaps that differ by one at most."""
    assert spread_evenly(5, 10).tolist() == [0, 1, 2, 3, 4]
    some = spread_evenly(1003, 200)
    assert (len(some), some[0], some[-1]) == (200, 0, 1002)
    assert set(np.diff(some)) <= {5, 6}
