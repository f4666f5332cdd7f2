"""What many tries make of a result: the best one deflated, who beats the yardstick, who may be the best."""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass, field
from typing import Any

import numpy as np
from numpy.typing import NDArray

from hedgerow.evidence.deflated import BestOfMany, best_of_many
from hedgerow.evidence.described import described, says
from hedgerow.evidence.figures import Figure
from hedgerow.evidence.longrun import block_lengths, long_run_variance, moving
from hedgerow.evidence.ratios import LEAST_DEVIATION
from hedgerow.evidence.seeds import Resampling
from hedgerow.evidence.selection import (
    BestSet,
    Superiority,
    adjusted_p_values,
    indistinguishable_from_best,
    superior_to_yardstick,
)

__all__ = ["Count", "Found", "Records", "Tries", "tries_of"]

Floats = NDArray[np.float64]


@dataclass(frozen=True, slots=True)
class Count:
    """How many variants were evaluated."""

    in_study: int = field(metadata=says("variants", "variants of this study"))
    in_all: int = field(
        metadata=says("variants", "different variants ever evaluated on these prices, these included")
    )

    def as_dict(self) -> dict[str, Any]:
        """Return both as {value, unit, meaning}, ready for JSON."""
        return described(self)


@dataclass(frozen=True, eq=False)
class Records:
    """Daily records of all variants: names (N,), log returns and simple excess returns (T, N).

    `yardstick` are its log returns (T,), None without one.
    """

    names: tuple[str, ...]
    logs: Floats
    excess: Floats
    yardstick: Floats | None = None


@dataclass(frozen=True, slots=True)
class Found:
    """One variant against the yardstick, with its p-value and the one adjusted for all of them."""

    name: str = field(metadata=says("name", "the variant"))
    growth_difference: float = field(
        metadata=says("log return a session", "mean of its daily log returns less the yardstick's")
    )
    p_value: float = field(metadata=says("fraction", "two-sided, of that mean over its long-run error"))
    p_adjusted: float = field(
        metadata=says("fraction", "the same, adjusted for the rate of false findings among all variants")
    )

    def as_dict(self) -> dict[str, Any]:
        """Return every figure as {value, unit, meaning}, ready for JSON."""
        return described(self)


@dataclass(frozen=True, slots=True)
class Tries:
    """The best of all variants and what the number of tries leaves of it.

    `best` is None where no variant moved, `superiority` and `found` are empty without a yardstick. `rate` is
    the share of false findings that `better` and `worse` are allowed to hold.
    """

    count: Count
    best: BestOfMany | None
    superiority: Superiority | None
    best_set: BestSet
    found: tuple[Found, ...]
    rate: float

    @property
    def better(self) -> tuple[str, ...]:
        """The variants better than the yardstick at the rate of false findings."""
        return tuple(one.name for one in self._told() if one.growth_difference > 0.0)

    @property
    def worse(self) -> tuple[str, ...]:
        """The variants worse than the yardstick at the rate of false findings."""
        return tuple(one.name for one in self._told() if one.growth_difference < 0.0)

    def _told(self) -> list[Found]:
        return [one for one in self.found if one.p_adjusted <= self.rate]

    def as_dict(self) -> dict[str, Any]:
        """Return everything as plain values, ready for JSON."""
        listed = {"variants": [one.as_dict() for one in self.found]}
        names = {"better": list(self.better), "worse": list(self.worse)}
        rate = Figure(self.rate, "fraction", "share of false findings that the lists may hold").as_dict()
        return {
            "count": self.count.as_dict(),
            "best_of_many": self.best.as_dict() if self.best else None,
            "superior_to_yardstick": _superiority(self.superiority),
            "cannot_be_told_from_best": _best_set(self.best_set),
            "false_discovery": {"rate": rate, **names, **listed},
        }


def tries_of(records: Records, tried: int, resampling: Resampling | None = None) -> Tries:
    """Return what the tries make of the records; `tried` counts every variant evaluated on these prices."""
    known = resampling or Resampling()
    level = 1.0 - known.confidence
    count = Count(len(records.names), max(tried, len(records.names)))
    moved = bool((records.excess.std(axis=0, ddof=1) > LEAST_DEVIATION).any())
    superiority: Superiority | None = None
    found: tuple[Found, ...] = ()
    if records.yardstick is not None:
        superiority = superior_to_yardstick(records.logs, records.yardstick, records.names, known, level)
        found = _found(records.logs - records.yardstick[:, None], records.names)
    return Tries(
        count,
        best_of_many(records.excess, records.names, count.in_all) if moved else None,
        superiority,
        indistinguishable_from_best(records.logs, records.names, known, known.confidence),
        found,
        level,
    )


def _found(gaps: Floats, names: Sequence[str]) -> tuple[Found, ...]:
    """Return each variant's mean daily gap (T, N) to the yardstick with its p-values.

    The gap over its long-run error is Student's with one degree of freedom fewer than the record holds
    blocks. Unlike resampled p-values these may be far below one in the number of replications, which a list
    of many variants needs.
    """
    from scipy.stats import t

    days = len(gaps)
    means, raw = gaps.mean(axis=0), np.ones(len(names))
    for column in np.flatnonzero(moving(gaps)):
        block = float(block_lengths(gaps[:, [column]])[0])
        error = math.sqrt(float(long_run_variance(gaps[:, [column]], block)[0]) / days)
        freedom = max(days / block - 1.0, 1.0)
        raw[column] = 2.0 * t.sf(abs(means[column]) / error, freedom) if error > 0.0 else 1.0
    adjusted = adjusted_p_values(raw)
    return tuple(
        Found(name, float(mean), float(p), float(q))
        for name, mean, p, q in zip(names, means, raw, adjusted, strict=True)
    )


def _superiority(test: Superiority | None) -> dict[str, Any] | None:
    if test is None:
        return None
    meaning = "chance that the best of so many beats the yardstick by as much when none is better"
    return {
        "p_value": Figure(test.p_consistent, "fraction", meaning).as_dict(),
        "p_lower": Figure(test.p_lower, "fraction", f"{meaning}, liberal").as_dict(),
        "p_upper": Figure(test.p_upper, "fraction", f"{meaning}, conservative").as_dict(),
        "level": Figure(test.level, "fraction", "chance that any of `better` is not").as_dict(),
        "rules": Figure(test.rules, "variants", "variants tested").as_dict(),
        "block_sessions": Figure(test.block_sessions, "sessions", "mean block of resampling").as_dict(),
        "better": list(test.better),
    }


def _best_set(test: BestSet) -> dict[str, Any]:
    meaning = "how often such a set holds the best"
    return {
        "members": list(test.members),
        "p_values": dict(zip(test.names, test.p_values, strict=True)),
        "confidence": Figure(test.confidence, "fraction", meaning).as_dict(),
        "block_sessions": Figure(test.block_sessions, "sessions", "mean block of resampling").as_dict(),
    }
