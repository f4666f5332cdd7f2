"""Two rules over a grid of assumptions: their difference in each cell, and where they are equal."""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass
from typing import Any, NamedTuple

import numpy as np
import pandas as pd
from numpy.typing import NDArray

from hedgerow.evidence.flip import HALF_SPREAD, RATIO, Flip, Versus, flip_of
from hedgerow.evidence.longrun import resampled_days
from hedgerow.evidence.seeds import Resampling, generator_of

__all__ = ["STRESS_COLUMNS", "Cell", "Stress", "Stressed", "stress_frame", "stress_of"]

Floats = NDArray[np.float64]

STRESS_COLUMNS = (
    "first",
    "second",
    "ratio",
    "skew",
    "half_spread",
    "first_growth",
    "second_growth",
    "difference",
    "low",
    "high",
)
"""Growth and differences are fractions a year, `half_spread` a fraction of the premium."""


class Cell(NamedTuple):
    """One set of assumptions: implied over realized, skew a standard deviation, half-spread (fraction)."""

    ratio: float
    skew: float
    half_spread: float


@dataclass(frozen=True, eq=False)
class Stressed:
    """One variant over the cells: equity (C, T) at the same closes, money. A yardstick has C equal rows."""

    name: str
    equity: Floats

    @property
    def logs(self) -> Floats:
        """Log returns (T - 1, C)."""
        return np.asarray(np.diff(np.log(self.equity), axis=1).T)


@dataclass(frozen=True, eq=False)
class Stress:
    """The difference of two rules over a grid: one row a cell, and where they are equal.

    `frame` has STRESS_COLUMNS. `premium` is the flip premium at the study's skew, `by_skew` that at every
    skew, `spread` the flip spread. A flip is None where its assumption was not changed.
    """

    frame: pd.DataFrame
    premium: Flip | None
    by_skew: tuple[tuple[float, Flip], ...]
    spread: Flip | None

    def as_dict(self) -> dict[str, Any]:
        """Return the flips as plain values, ready for JSON."""
        return {
            "flip_premium": self.premium.as_dict() if self.premium else None,
            "flip_premium_by_skew": [
                {"skew": {"value": skew, "unit": "a standard deviation", "meaning": "skew of premiums"}}
                | flip.as_dict()
                for skew, flip in self.by_skew
            ],
            "flip_spread": self.spread.as_dict() if self.spread else None,
        }


@dataclass(frozen=True, eq=False)
class _Drawn:
    """Yearly log growth of both over the cells (2, C), and of resampled records (2, B, C)."""

    real: Floats
    again: Floats


def stress_of(
    first: Stressed,
    second: Stressed,
    cells: Sequence[Cell],
    base: Cell,
    years: float,
    block: int,
    resampling: Resampling | None = None,
) -> Stress:
    """Return what a grid of assumptions does to the difference of two variants, first less second.

    `base` are the study's own assumptions, one of the cells; `block` the mean block in sessions. Every
    replication draws the same days for all cells and both variants. The draws depend on the seed and the two
    names only, and not on their order.
    """
    known = resampling or Resampling()
    drawn = _drawn(first, second, years, block, known)
    versus = (first.name, second.name)

    def flip(quantity: str, chosen: dict[float, int], assumed: float) -> Flip | None:
        values = np.array(sorted(chosen))
        if values.size < 2:
            return None
        at = [chosen[float(value)] for value in values]
        gaps, again = drawn.real[0] - drawn.real[1], drawn.again[0] - drawn.again[1]
        return flip_of(Versus(*versus, quantity, assumed, known.confidence), values, gaps[at], again[:, at])

    at_cost = {n: cell for n, cell in enumerate(cells) if cell.half_spread == base.half_spread}
    by_skew = []
    for skew in sorted({cell.skew for cell in at_cost.values()}, reverse=True):
        found = flip(RATIO, {c.ratio: n for n, c in at_cost.items() if c.skew == skew}, base.ratio)
        by_skew += [(skew, found)] if found else []
    spreads = {c.half_spread: n for n, c in enumerate(cells) if c[:2] == base[:2]}
    return Stress(
        _frame(versus, cells, drawn, known.confidence),
        dict(by_skew).get(base.skew),
        tuple(by_skew),
        flip(HALF_SPREAD, spreads, base.half_spread),
    )


def stress_frame(stresses: Sequence[Stress]) -> pd.DataFrame:
    """Return the cells of several comparisons as one frame of STRESS_COLUMNS."""
    if not stresses:
        return pd.DataFrame(columns=list(STRESS_COLUMNS))
    return pd.concat([one.frame for one in stresses], ignore_index=True)


def _drawn(first: Stressed, second: Stressed, years: float, block: int, known: Resampling) -> _Drawn:
    logs = (first.logs, second.logs)
    days = len(logs[0])
    random = generator_of(known.seed, "stress", *sorted((first.name, second.name)))
    times = np.zeros((known.replications, days))
    for row, drawn in enumerate(resampled_days(days, block, known.replications, random)):
        times[row] = np.bincount(drawn, minlength=days)
    return _Drawn(
        np.array([one.sum(axis=0) / years for one in logs]),
        np.array([times @ one / years for one in logs]),
    )


def _frame(names: tuple[str, str], cells: Sequence[Cell], drawn: _Drawn, confidence: float) -> pd.DataFrame:
    """One row a cell; the interval is that of the middle `confidence` of resampled records."""
    growth, again = np.expm1(drawn.real), np.expm1(drawn.again)
    tail = 0.5 - confidence / 2.0
    low, high = np.quantile(again[0] - again[1], (tail, 1.0 - tail), axis=0)
    ratio, skew, spread = (np.array(column) for column in zip(*cells, strict=True))
    columns = (ratio, skew, spread, growth[0], growth[1], growth[0] - growth[1], low, high)
    named = dict(zip(STRESS_COLUMNS[2:], columns, strict=True))
    return pd.DataFrame({"first": names[0], "second": names[1], **named})


def finite(equity: Floats) -> bool:
    """Whether an account stayed above nothing throughout, so that its growth is known."""
    return bool((equity > 0.0).all()) and math.isfinite(float(equity.sum()))
