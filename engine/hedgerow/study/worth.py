"""What the best of a grid is worth: its place among its neighbours, and what is left after every try."""

from __future__ import annotations

import math
from dataclasses import dataclass, field

import numpy as np
from numpy.typing import NDArray

from hedgerow.evidence.deflated import (
    BestOfMany,
    deflated_sharpe,
    expected_maximum,
    independent_trials,
    minimum_track_record,
    probabilistic_sharpe,
    shape_of,
)
from hedgerow.evidence.described import says
from hedgerow.study.brief import STILL
from hedgerow.study.grid import Grid
from hedgerow.units import SESSIONS_A_YEAR

__all__ = ["MOST_TESTED", "Neighbourhood", "Tally", "neighbourhood", "spread_evenly"]

Floats = NDArray[np.float64]
Ints = NDArray[np.int64]

LEAST_KEPT = 0.5
"""Share of the best variant's lead over the typical one that its neighbours must keep, or it stands alone."""
MOST_TESTED = 200
"""Variants of a grid whose daily record is tested against the yardstick; of more, so many spread evenly."""


@dataclass(frozen=True, slots=True)
class Neighbourhood:
    """The best variant of a grid and those next to it, by one figure.

    `count` neighbours are one step away along one parameter; in a sample of a grid they are the nearest that
    were tried, on average `steps` away. `typical` is the median of all variants, `kept` the share of the best
    one's lead over it that the mean of the neighbours keeps. `alone` marks a peak that keeps less than half.
    `edges` names the parameters whose best value is the first or the last that was tried.
    """

    best: float = field(metadata=says("ratio a year", "Sharpe ratio of the best variant"))
    typical: float = field(metadata=says("ratio a year", "median Sharpe ratio of all variants"))
    count: int = field(metadata=says("variants", "neighbours: one step away, or the nearest that were tried"))
    steps: float = field(metadata=says("steps", "mean steps from the best one to its neighbours"))
    lowest: float = field(metadata=says("ratio a year", "lowest Sharpe ratio of the neighbours"))
    mean: float = field(metadata=says("ratio a year", "mean Sharpe ratio of the neighbours"))
    highest: float = field(metadata=says("ratio a year", "highest Sharpe ratio of the neighbours"))
    kept: float = field(metadata=says("fraction", "share of its lead over the typical that neighbours keep"))
    alone: bool = field(metadata=says("yes or no", "whether they keep less than half: a peak in a trough"))
    edges: tuple[str, ...] = field(
        metadata=says("parameters", "those whose best value is the first or last tried")
    )


def neighbourhood(grid: Grid, picks: Ints, values: Floats, best: int) -> Neighbourhood:
    """The neighbourhood of one variant by a figure of all (V,), NaN unknown. Higher is better."""
    ordered = [at for at, axis in enumerate(grid.axes) if axis.ranks is not None]
    others = [at for at in range(len(grid.axes)) if at not in ordered]
    ranks = np.stack(
        [_ranks(grid, at)[picks[:, at]] for at in ordered] or [np.zeros(len(picks), np.int64)], axis=1
    )
    steps = np.abs(ranks - ranks[best]).sum(axis=1)
    same = (picks[:, others] == picks[best, others]).all(axis=1)
    near = np.flatnonzero(same & (steps > 0) & ~np.isnan(values))
    if grid.design == "whole":
        near = near[steps[near] == 1]
    else:
        near = near[np.argsort(steps[near], kind="stable")][: 2 * len(ordered)]
    around, typical, own = values[near], float(np.nanmedian(values)), float(values[best])
    lead = own - typical
    kept = (float(around.mean()) - typical) / lead if near.size and lead > 0 else math.nan
    edges = tuple(
        grid.axes[at].path
        for at in ordered
        if len(grid.axes[at].values) > 2
        and _ranks(grid, at)[picks[best, at]] in (0, len(grid.axes[at].values) - 1)
    )
    return Neighbourhood(
        best=own,
        typical=typical,
        count=int(near.size),
        steps=float(steps[near].mean()) if near.size else math.nan,
        lowest=float(around.min()) if near.size else math.nan,
        mean=float(around.mean()) if near.size else math.nan,
        highest=float(around.max()) if near.size else math.nan,
        kept=kept,
        alone=bool(kept < LEAST_KEPT),
        edges=edges,
    )


def _ranks(grid: Grid, at: int) -> Ints:
    ranks = grid.axes[at].ranks
    assert ranks is not None
    return ranks


def spread_evenly(variants: int, most: int = MOST_TESTED) -> Ints:
    """At most so many numbers of variants, spread evenly over all."""
    if variants <= most:
        return np.arange(variants)
    return np.unique(np.linspace(0, variants - 1, most).round().astype(np.int64))


@dataclass
class Tally:
    """The Sharpe ratios of many variants added up batch by batch, so that memory does not grow with them."""

    ratios: list[Floats] = field(default_factory=list)
    _together: Floats | None = None
    _moved: int = 0

    def add(self, excess: Floats) -> None:
        """Count a batch of excess returns a session (V, T)."""
        mean, deviation = excess.mean(axis=1), excess.std(axis=1, ddof=1)
        moved = deviation > STILL
        self.ratios.append(np.divide(mean, deviation, out=np.full(len(mean), math.nan), where=moved))
        if moved.any():
            scaled = (excess[moved] - mean[moved, None]) / excess[moved].std(axis=1)[:, None]
            here = scaled.sum(axis=0)
            self._together = here if self._together is None else self._together + here
            self._moved += int(moved.sum())

    @property
    def sharpe(self) -> Floats:
        """The yearly Sharpe ratio of every variant (V,), NaN of one that never moved."""
        return np.concatenate(self.ratios) * math.sqrt(SESSIONS_A_YEAR)

    @property
    def mean_correlation(self) -> float:
        """The mean correlation of different variants, from the variance of the sum of standardised ones."""
        if self._together is None or self._moved < 2:
            return 0.0
        return (float(np.var(self._together)) - self._moved) / (self._moved * (self._moved - 1))

    def judge(self, name: str, excess: Floats, trials: int) -> BestOfMany:
        """What is left of the best variant, called `name`, with excess returns (T,), after so many trials.

        As `evidence.deflated.best_of_many` has it; `trials` is at least the number of variants counted.
        """
        ratio = np.concatenate(self.ratios)
        known = ratio[~np.isnan(ratio)]
        best, shape, count = float(known.max()), shape_of(excess), len(excess)
        tried = max(trials, ratio.size)
        alike = independent_trials(tried, self.mean_correlation)
        variance = float(np.var(known, ddof=1)) if known.size > 1 else 0.0
        year = math.sqrt(SESSIONS_A_YEAR)
        return BestOfMany(
            best=name,
            trials=tried,
            trials_independent=alike,
            sharpe=best * year,
            sharpe_of_luck=math.sqrt(variance) * expected_maximum(tried) * year,
            chance_above_nothing=probabilistic_sharpe(best, count, shape),
            chance_above_luck=deflated_sharpe(best, count, shape, tried, variance),
            chance_above_luck_independent=deflated_sharpe(best, count, shape, alike, variance),
            sessions_needed=minimum_track_record(best, shape),
        )
