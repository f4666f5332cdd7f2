"""The daily records of two variants as columns whose means give growth, Sharpe ratio and tail loss.

A measure that is a smooth function of means has a standard error that follows from its slopes, on the record
itself and on every resampled one.
"""

from __future__ import annotations

import math
from dataclasses import dataclass
from functools import cached_property

import numpy as np
from numpy.typing import NDArray

from hedgerow.evidence import ratios
from hedgerow.evidence.difference import GROWTH, SHARPE, TAIL_LOSS
from hedgerow.units import SESSIONS_A_YEAR

__all__ = ["SMOOTH", "TAIL_FRACTION", "Pair", "Replication", "expected_shortfall", "gaps_of", "tail_column"]

Floats = NDArray[np.float64]
Ints = NDArray[np.int64]

TAIL_FRACTION = 0.05
SMOOTH = (GROWTH, SHARPE, TAIL_LOSS)
"""The measures that are smooth functions of means, in the order of their columns below."""

_ROUNDING = 1e-11  # of the largest amount; what two variants that do the same differ by
_RELATIVE = np.array([measure.relative for measure in SMOOTH])
_LOG, _EXCESS, _SQUARE, _TAIL, _WIDTH = range(5)


@dataclass(frozen=True, slots=True)
class Replication:
    """One resampled record: gaps (3,) of SMOOTH, their standard errors (3,), and the gap of drawdowns."""

    gaps: Floats
    errors: Floats
    drawdown: float


@dataclass(frozen=True, eq=False)
class Pair:
    """Columns (T, 8) of two variants, four each, a row a session, and the years they cover.

    The four are log return, simple return above interest, its square, and the tail column.
    """

    columns: Floats
    years: float

    @classmethod
    def of(cls, first: Floats, second: Floats, years: float, rate: Floats | None = None) -> Pair:
        """Return the pair of two curves (T + 1,) of account values; rate (T + 1,) is annual interest."""
        return cls(np.column_stack([*_columns(first, rate), *_columns(second, rate)]), years)

    @cached_property
    def means(self) -> Floats:
        """Means (8,) of the columns."""
        return np.asarray(self.columns.mean(axis=0))

    @property
    def gaps(self) -> Floats:
        """Log returns (T,) of the first less those of the second."""
        return np.asarray(self.columns[:, _LOG] - self.columns[:, _WIDTH + _LOG])

    @cached_property
    def influence(self) -> Floats:
        """What each session adds (T, 3) to the gaps of SMOOTH, to first order; rounding is 0."""
        slopes = self.slopes(self.means)
        first = self.columns[:, :_WIDTH] @ slopes[:_WIDTH]
        both = first + self.columns[:, _WIDTH:] @ slopes[_WIDTH:]
        return np.asarray(np.where(np.abs(both) > _ROUNDING * np.abs(first).max(axis=0), both, 0.0))

    def values(self, means: Floats) -> Floats:
        """Return SMOOTH (2, 3) of both variants at means (8,); a Sharpe ratio of a still record is NaN."""
        return np.array([self._values(half) for half in (means[:_WIDTH], means[_WIDTH:])])

    def slopes(self, means: Floats) -> Floats:
        """Return the slopes (8, 3) of the gaps of SMOOTH at means (8,)."""
        return np.vstack([self._slopes(means[:_WIDTH]), -self._slopes(means[_WIDTH:])])

    def replicate(self, days: Ints) -> Replication:
        """Return the record of resampled days (T,); its standard errors are those of its blocks.

        The variance of a mean is the sum over blocks of (sum of the block - its length x mean)^2 / T^2
        (Goetze & Kuensch 1996, "Second-order correctness of the blockwise bootstrap", Annals of Statistics
        24).
        """
        rows, count = self.columns[days], len(days)
        starts = np.flatnonzero(np.diff(days, prepend=-2) != 1)
        blocks = np.add.reduceat(rows, starts, axis=0)
        means = blocks.sum(axis=0) / count
        lengths = np.diff(starts, append=count)
        apart = (blocks - lengths[:, None] * means) @ self.slopes(means)
        gaps = gaps_of(self.values(means))
        falls = [_depth(rows[:, at]) for at in (_LOG, _WIDTH + _LOG)]
        return Replication(gaps, np.sqrt((apart**2).sum(axis=0)) / count, falls[0] - falls[1])

    def _values(self, half: Floats) -> Floats:
        spread = self._spread(half)
        scale = math.sqrt(SESSIONS_A_YEAR * (1.0 - 1.0 / len(self.columns)))
        sharpe = scale * half[_EXCESS] / spread if spread > 0.0 else math.nan
        return np.array([math.expm1(self._a_year * half[_LOG]), sharpe, half[_TAIL]])

    def _slopes(self, half: Floats) -> Floats:
        """Slopes (4, 3). With s^2 = m2 - m1^2, m1 / s has the slopes m2 / s^3 and -m1 / (2 s^3)."""
        slopes = np.zeros((_WIDTH, len(SMOOTH)))
        spread = self._spread(half)
        scale = math.sqrt(SESSIONS_A_YEAR) / spread**3 if spread > 0.0 else math.nan
        slopes[_LOG, 0] = self._a_year * math.exp(self._a_year * half[_LOG])
        slopes[_EXCESS, 1] = scale * half[_SQUARE]
        slopes[_SQUARE, 1] = -0.5 * scale * half[_EXCESS]
        slopes[_TAIL, 2] = 1.0 / half[_TAIL] if half[_TAIL] > 0.0 else math.nan
        return slopes

    @property
    def _a_year(self) -> float:
        return len(self.columns) / self.years

    @staticmethod
    def _spread(half: Floats) -> float:
        spread = math.sqrt(max(half[_SQUARE] - half[_EXCESS] ** 2, 0.0))
        return spread if spread > ratios.LEAST_DEVIATION else 0.0


def gaps_of(values: Floats) -> Floats:
    """Return the gaps (3,) of SMOOTH (2, 3): differences, of a relative measure the difference of logs.

    NaN for the log of nothing or less.
    """
    known = np.where(_RELATIVE & ~(values > 0.0), np.nan, values)
    scaled = np.where(_RELATIVE, np.log(np.where(_RELATIVE, known, 1.0)), known)
    return np.asarray(scaled[0] - scaled[1])


def expected_shortfall(returns: Floats) -> float:
    """Return the mean loss of the worst twentieth of returns (T,), positive where it is a loss.

    Where a twentieth is no whole number of returns, the last counts in part: the minimum over q of
    -q + mean((q - return)+) / .05 (Rockafellar & Uryasev 2000, "Optimization of conditional value-at-risk",
    Journal of Risk 2).
    """
    return float(np.mean(tail_column(returns))) if len(returns) else math.nan


def tail_column(returns: Floats) -> Floats:
    """Return the numbers (T,) whose mean is the expected shortfall of returns (T,).

    -q + (q - return)+ / .05 at the twentieth's bound q; to first order the mean does not depend on q, so that
    resampled means may keep it.
    """
    rank = math.ceil(TAIL_FRACTION * len(returns) - 1e-9) - 1
    bound = np.partition(returns, rank)[rank]
    return np.asarray(-bound + np.maximum(bound - returns, 0.0) / TAIL_FRACTION)


def _columns(curve: Floats, rate: Floats | None) -> tuple[Floats, Floats, Floats, Floats]:
    returns = ratios.returns_of(curve)
    excess = ratios.excess_returns(returns, rate)
    return np.diff(np.log(curve)), excess, excess**2, tail_column(returns)


def _depth(logs: Floats) -> float:
    """Return the deepest fall of a curve that starts at 1 and has these log returns."""
    level = np.cumsum(logs)
    return -math.expm1(float(np.min(level - np.maximum(np.maximum.accumulate(level), 0.0))))
