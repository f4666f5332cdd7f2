"""Many rules at once: whether any is better than the yardstick, and which cannot be told from the best.

All tests compare means of daily log returns, so a rule is better when it grows faster. The resampling and the
tests are those of the package arch; it takes losses, so what goes in is the negative of a return.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np
from numpy.typing import NDArray

from hedgerow.evidence.longrun import block_lengths, long_run_variance, moving
from hedgerow.evidence.seeds import Resampling, generator_of

if TYPE_CHECKING:
    from arch.bootstrap import SPA

__all__ = [
    "BestSet",
    "Superiority",
    "adjusted_p_values",
    "indistinguishable_from_best",
    "superior_to_yardstick",
]

Floats = NDArray[np.float64]
Ints = NDArray[np.int64]

MOST_PAIRED = 100
"""Rules up to which every pair is compared. Beyond it each is compared with the mean of all, which takes room
for their number, not its square, but throws out fewer: the set is then larger than it could be."""
GROUP, LEAST_GROUPS = 5, 200
"""Sessions that are added up before they are drawn, and how many such groups a record must hold for it."""
MOST_MEASURED = 100
"""Columns whose block lengths are worked out at most, spread evenly; the rest count as like them."""


@dataclass(frozen=True, slots=True)
class Superiority:
    """Whether the best of many rules beats a yardstick by more than the luck of the best of many.

    p_lower <= p_consistent <= p_upper are the three p-values of the test (fraction); `p_consistent` is the
    one to read. `better` names the rules shown to be better, with a chance of at most `level` that any
    of them is not. `rules` were tested; one that never differs from the yardstick counts as not better.
    """

    p_lower: float
    p_consistent: float
    p_upper: float
    better: tuple[str, ...]
    level: float
    rules: int
    block_sessions: int


@dataclass(frozen=True, slots=True)
class BestSet:
    """The rules that cannot be told from the best: they hold the best one with a chance of `confidence`.

    `p_values` (N,) say how surprising each rule's lag is: it is in the set when above 1 - confidence.
    """

    names: tuple[str, ...]
    p_values: tuple[float, ...]
    confidence: float
    block_sessions: int

    @property
    def members(self) -> tuple[str, ...]:
        """The names in the set, in the order of the study."""
        pairs = zip(self.names, self.p_values, strict=True)
        return tuple(name for name, p in pairs if p > 1.0 - self.confidence)


def superior_to_yardstick(
    returns: Floats,
    yardstick: Floats,
    names: Sequence[str],
    resampling: Resampling | None = None,
    level: float = 0.1,
) -> Superiority:
    """Return whether any rule's log returns (T, N) beat the yardstick's (T,), all tries counted.

    Hansen 2005, "A Test for Superior Predictive Ability", Journal of Business & Economic Statistics 23; the
    rules shown to be better by the steps of Romano & Wolf 2005, "Stepwise Multiple Testing as Formalized Data
    Snooping", Econometrica 73. Differences are divided by their long-run standard deviation first, so that a
    restless rule does not hide a steady one. Raises ValueError when names and columns do not match.
    """
    _check(returns, names)
    known = resampling or Resampling()
    gaps, size = _grouped(returns - np.asarray(yardstick)[:, None])
    block = _typical_block(gaps)
    apart = np.flatnonzero(moving(gaps))
    if not apart.size:
        return Superiority(1.0, 1.0, 1.0, (), level, len(names), block * size)
    spread = np.sqrt(long_run_variance(gaps[:, apart], block))
    test = _superiority_test(gaps[:, apart] / spread, block, known, names)
    lower, consistent, upper = (float(test.pvalues[name]) for name in ("lower", "consistent", "upper"))
    found = apart[_steps(test, apart.size, level)]
    better = tuple(names[int(place)] for place in found)
    return Superiority(lower, consistent, upper, better, level, len(names), block * size)


def indistinguishable_from_best(
    returns: Floats,
    names: Sequence[str],
    resampling: Resampling | None = None,
    confidence: float = 0.9,
) -> BestSet:
    """Return the rules whose log returns (T, N) cannot be told from those of the best.

    The model confidence set: Hansen, Lunde & Nason 2011, "The Model Confidence Set", Econometrica 79. Rules
    that did exactly the same every day are tested once and share the answer. With few replications it throws
    out more than it should; 800 are enough. Raises ValueError when names and columns do not match.
    """
    from arch.bootstrap import MCS

    _check(returns, names)
    known = resampling or Resampling()
    grouped, size = _grouped(returns)
    distinct, place = np.unique(grouped, axis=1, return_inverse=True)
    block = _typical_block(distinct - distinct.mean(axis=1, keepdims=True))
    if distinct.shape[1] == 1:
        return BestSet(tuple(names), (1.0,) * len(names), confidence, block * size)
    test = MCS(
        -distinct,
        size=1.0 - confidence,
        reps=known.replications,
        block_size=block,
        method="R" if distinct.shape[1] <= MOST_PAIRED else "max",
        seed=generator_of(known.seed, "best set", *names),
    )
    test.compute()
    answer = test.pvalues["Pvalue"].sort_index().to_numpy()
    values = tuple(float(p) for p in answer[np.asarray(place).ravel()])
    return BestSet(tuple(names), values, confidence, block * size)


def adjusted_p_values(p_values: Floats, any_dependence: bool = False) -> Floats:
    """Return p-values (N,) adjusted so that those at or below a rate hold at most that rate of false ones.

    Benjamini & Hochberg 1995, "Controlling the False Discovery Rate", JRSS B 57, for tests that are
    independent or move together; with `any_dependence` the stricter rule of Benjamini & Yekutieli 2001,
    Annals of Statistics 29. A p-value that is not known (NaN) counts as a test and stays NaN.
    """
    given = np.asarray(p_values, dtype=np.float64)
    known = np.where(np.isnan(given), 1.0, given)
    count = len(known)
    order = np.argsort(known, kind="stable")
    rank = np.arange(1, count + 1)
    factor = float(np.sum(1.0 / rank)) if any_dependence else 1.0
    raw = known[order] * count * factor / rank
    adjusted = np.empty(count)
    adjusted[order] = np.minimum(np.minimum.accumulate(raw[::-1])[::-1], 1.0)
    return np.where(np.isnan(given), np.nan, adjusted)


def _check(returns: Floats, names: Sequence[str]) -> None:
    """Raise ValueError when there is not one name a column."""
    if returns.ndim != 2 or returns.shape[1] != len(names) or not len(names):
        raise ValueError(
            f"returns of shape {returns.shape} do not hold one column for each of {len(names)} rules"
        )


def _grouped(columns: Floats) -> tuple[Floats, int]:
    """Return sums over groups of sessions, and the sessions of a group; the oldest left over are dropped.

    The tests are of means, which adding up does not change, and a fifth of the rows takes a fifth of the time
    and less. Short records are left as they are.
    """
    groups = len(columns) // GROUP
    if groups < LEAST_GROUPS:
        return columns, 1
    return columns[len(columns) - groups * GROUP :].reshape(groups, GROUP, -1).sum(axis=1), GROUP


def _typical_block(columns: Floats) -> int:
    """Return the median of the columns' automatic block lengths, rounded up."""
    step = max(1, -(-columns.shape[1] // MOST_MEASURED))
    return int(np.ceil(np.median(block_lengths(columns[:, ::step]))))


def _superiority_test(scaled: Floats, block: int, known: Resampling, names: Sequence[str]) -> SPA:
    """Run the test on differences (T, N) to the yardstick: its losses are 0, a rule's are what it lags."""
    from arch.bootstrap import SPA

    test = SPA(
        np.zeros(len(scaled)),
        -scaled,
        block_size=block,
        reps=known.replications,
        seed=generator_of(known.seed, "superior", *names),
    )
    test.compute()
    return test


def _steps(test: SPA, rules: int, level: float) -> Ints:
    """Return the columns shown to be better: test, set those found aside, test the rest, until none is."""
    left = np.ones(rules, dtype=bool)
    while left.any():
        test.subset(left.copy())
        test.compute()
        found = np.asarray(test.better_models(level), dtype=np.int64)
        if not found.size:
            break
        left[found] = False
    return np.flatnonzero(~left)
