"""Grids: values from lists and ranges, whole or drawn; what may not stand there."""

from __future__ import annotations

import itertools
from pathlib import Path
from typing import Any

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from hedgerow.errors import StudyError
from hedgerow.study.compare import run_study
from hedgerow.study.declare import load_study
from hedgerow.study.grid import Axis, Grid, latin_hypercube, short_names
from hedgerow.study.trials import trials_of
from large_runs import large_study, small_market

DAYS = {"from": 1, "to": 1000, "step": 1}
CALL, PUT = "legs.call.expiry.days", "legs.put.strike.from_spot"


def test_a_range_holds_both_ends_and_stays_a_percent(tmp_path: Path) -> None:
    """-10% to -2% by 1% are nine values, written as a person does; 7 to 28 by 7 are four plain numbers."""
    grid = {PUT: {"from": "-10%", "to": "-2%", "step": "1%"}, CALL: {"from": 7, "to": 28, "step": 7}}
    axes = large_study(tmp_path, grid=grid).grid.axes
    assert axes[0].values == ("-10%", "-9%", "-8%", "-7%", "-6%", "-5%", "-4%", "-3%", "-2%")
    assert axes[1].values == ("7", "14", "21", "28")
    np.testing.assert_array_equal(axes[0].numbers, np.arange(-10, -1) / 100)


def test_decimal_steps_do_not_drift(tmp_path: Path) -> None:
    """Thirty steps of a tenth of a percent end on the end; sums of binary fractions would not."""
    grid = {PUT: {"from": "-3%", "to": "0%", "step": "0.1%"}}
    values = large_study(tmp_path, grid=grid).grid.axes[0].values
    assert (len(values), values[0], values[1], values[-1]) == (31, "-3%", "-2.9%", "0%")


def test_the_whole_grid_is_every_combination_once(tmp_path: Path) -> None:
    """Three lengths times four strikes, the last axis fastest; each strategy has its values."""
    trials = trials_of(large_study(tmp_path))
    expected = list(itertools.product((7, 14, 21), (-0.08, -0.06, -0.04, -0.02)))
    found = []
    for number in range(len(trials)):
        call, put = trials.strategy(number).legs
        found.append((call.expiry.days, put.strike.from_spot))
    assert found == expected
    assert trials.name(5) == "days 14, from_spot -6%"
    assert trials.columns()[PUT] == [-0.08, -0.06, -0.04, -0.02] * 3


def test_any_value_may_be_tried(tmp_path: Path) -> None:
    """Whole mappings, `none` and words; they have no order, and stand as text in the table."""
    grid: dict[str, Any] = {
        "enter.when": ["none", {"signal": "close_over_mean", "sessions": 10}],
        "legs.call.strike": [{"from_spot": "0%", "snap": "up"}, {"delta": 0.3}],
    }
    study = large_study(tmp_path, grid=grid)
    trials = trials_of(study)
    assert [axis.ranks for axis in study.grid.axes] == [None, None]
    assert trials.strategy(0).enter is None
    assert trials.strategy(2).enter is not None
    assert trials.strategy(3).legs[0].strike.delta == 0.3
    assert trials.columns()["legs.call.strike"][1] == '{"delta": 0.3}'


@given(points=st.integers(1, 200), dimensions=st.integers(1, 5), seed=st.integers(0, 2**31 - 1))
def test_each_stratum_of_a_latin_hypercube_is_hit_once(points: int, dimensions: int, seed: int) -> None:
    """Its definition (McKay, Beckman & Conover 1979): P strata on each side, one point in each."""
    design = latin_hypercube(points, dimensions, seed)
    strata = np.sort(np.floor(design * points), axis=0)
    np.testing.assert_array_equal(strata, np.tile(np.arange(points)[:, None], dimensions))


def test_random_points_are_no_latin_hypercube() -> None:
    """Negative control: plain random points leave strata empty, which the property above would see."""
    strata = np.floor(np.random.default_rng(1).random((50, 1)) * 50)
    assert len(np.unique(strata)) < 50


def test_a_latin_hypercube_spreads_over_every_value(tmp_path: Path) -> None:
    """Twelve points on axes of three and four values: each value four or three times."""
    study = large_study(tmp_path, sample={"latin_hypercube": 12})
    points = np.floor(latin_hypercube(12, 2, study.seed) * [3, 4]).astype(int)
    assert [np.bincount(column).tolist() for column in points.T] == [[4, 4, 4], [3, 3, 3, 3]]
    picks = {tuple(row) for row in study.grid.picks(study.seed).tolist()}
    assert picks == {tuple(row) for row in points.tolist()}


def test_a_random_subset_is_reproducible_by_its_seed(tmp_path: Path) -> None:
    """Seven of twelve, none twice: the same for one seed, another for another, and the words read back."""
    study = large_study(tmp_path, sample={"random": 7})
    picks = study.grid.picks(study.seed)
    assert len({tuple(row) for row in picks.tolist()}) == 7
    np.testing.assert_array_equal(picks, large_study(tmp_path, sample={"random": 7}).grid.picks(study.seed))
    others = [study.grid.picks(seed).tolist() for seed in range(2, 6)]
    assert any(other != picks.tolist() for other in others)


def test_the_words_read_back(tmp_path: Path) -> None:
    """A study with every word of a large one is the same after being written out."""
    study = large_study(
        tmp_path,
        sample={"random": 7},
        walk_forward={"choose": "2 months", "judge": "3 weeks", "by": "growth", "gap": "5 sessions"},
        held_out={"from": "2015-06-01"},
    )
    assert load_study(study.plain()).plain() == study.plain()


def test_a_grid_is_not_run_as_if_it_were_one_rule(tmp_path: Path) -> None:
    """The function for variants by name says which one is meant."""
    with pytest.raises(StudyError, match="use run_large"):
        run_study(large_study(tmp_path), market=small_market())


def test_names_are_as_short_as_they_can_be_told_apart() -> None:
    """The last word, with the first word that differs where two end alike."""
    paths = ["legs.call.strike.from_spot", "legs.put.strike.from_spot", "legs.call.expiry.days"]
    assert short_names(paths) == ["call from_spot", "put from_spot", "days"]


@pytest.mark.parametrize(
    ("words", "told"),
    [
        ({"grid": {PUT: {"from": "-10%", "to": "-2%", "step": "3%"}}}, "write -4 or -1, or another step"),
        ({"grid": {PUT: {"from": "-2%", "to": "-10%", "step": "1%"}}}, "swap them"),
        ({"grid": {PUT: {"from": "-10%", "to": "-2%", "step": "0%"}}}, "a step above 0"),
        ({"grid": {PUT: {"from": "-10%", "to": -2, "step": "1%"}}}, "mixes percents with plain numbers"),
        ({"grid": {PUT: {"from": "-10%", "to": "-2%"}}}, "`grid.legs.put.strike.from_spot.step` is missing"),
        ({"grid": {PUT: []}}, "a list of values, or a range"),
        ({"grid": {CALL: [7, 7]}}, "a second time"),
        ({"grid": {"legs.cal.expiry.days": [7]}}, "did you mean `call`?"),
        ({"grid": {CALL: [7, 0]}}, "`grid.legs.call.expiry.days`, value 0:"),
        ({"grid": {CALL: [7, 0], PUT: ["-2%", "-3%"]}}, "a whole number from 1 to 1100"),
        ({"grid": {}}, "`grid` is empty"),
        ({"grid": {CALL: DAYS, PUT: {"from": "-50%", "to": "-1%", "step": "0.1%"}}}, "at most 200,000"),
        ({"sample": {"random": 13}}, "draws 13 of a grid of 12 combinations"),
        ({"sample": {"random": 3, "latin_hypercube": 3}}, "exactly one of"),
        ({"grid": None, "sample": {"random": 3}}, "write a `grid`"),
        ({"variants": {"a": {}}}, "stands beside `variants`"),
        ({"walk_forward": {"choose": "4 years", "judge": 1}}, "write `1 sessions`"),
        ({"walk_forward": {"choose": "4 years", "judge": "1 year", "by": "luck"}}, "`sortino`, `growth`"),
        ({"walk_forward": {"judge": "1 year"}}, "`walk_forward.choose` is missing"),
        ({"held_out": {"from": "soon"}}, "no such date"),
    ],
)  # fmt: skip
def test_faults_are_told_before_anything_is_read(tmp_path: Path, words: dict[str, Any], told: str) -> None:
    """Each with what is allowed or what to write."""
    with pytest.raises(StudyError) as caught:
        large_study(tmp_path, **words)
    assert told in str(caught.value)


def test_faults_of_combinations_are_told_together_with_their_parameters(tmp_path: Path) -> None:
    """A put whose expiry goes with a call that is not there, in each combination without it: told once."""
    call = {"sell": "call", "expiry": {"days": 7, "listed": "weekly"}, "strike": {"delta": 0.3}}
    own = {"days": 7, "listed": "weekly"}
    grid = {"legs.call": [call, "none"], "legs.put.expiry": [own, {"with": "call"}], PUT: ["-4%", "-6%"]}
    trials = trials_of(large_study(tmp_path, grid=grid))
    with pytest.raises(StudyError) as caught:
        trials.check("study.yaml")
    told = str(caught.value)
    assert "study.yaml: variant 7 (call none" in told
    assert "(and in 1 more)" in told
    assert told.count("\n") <= 1


def test_every_fault_of_the_file_has_its_line(tmp_path: Path) -> None:
    """A wrong value of a grid is told at the line of its path."""
    rule = "{sell: call, expiry: {days: 7, listed: weekly}, strike: {delta: 0.3}}"
    text = f"name: g\nmarket: .\nstrategy:\n  name: c\n  legs:\n    call: {rule}\ngrid:\n  {CALL}: [7, x]\n"
    (tmp_path / "study.yaml").write_text(text, encoding="utf-8")
    with pytest.raises(StudyError, match=r"study\.yaml:8:3: `grid\.legs\.call\.expiry\.days`, value x"):
        load_study(tmp_path / "study.yaml")


def test_ranks_follow_size_not_the_order_of_the_file() -> None:
    """Values out of order have the rank of their size."""
    grid = Grid((Axis("a", ("3", "1", "2")),))
    assert grid.axes[0].ranks.tolist() == [2, 0, 1]
