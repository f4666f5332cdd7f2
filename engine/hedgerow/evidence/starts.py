"""Timing luck: how much of a result is owed to the session on which a rule happened to begin.

A rule with a fixed cycle could have begun on any session of it. Each start is walked, all are measured over
the same days, and the laddered mean is what an account divided equally among all starts would have made.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, field
from typing import Any

import numpy as np
from numpy.typing import NDArray

from hedgerow.evidence.described import described, says
from hedgerow.evidence.ratios import growth_a_year

__all__ = ["StartGap", "Starts", "start_gap", "starts_of"]

Floats = NDArray[np.float64]
Dates = NDArray[np.datetime64]


@dataclass(frozen=True, slots=True)
class Starts:
    """One variant begun on different sessions of its cycle; growth over the days that all starts share."""

    variant: str = field(metadata=says("name", "the variant"))
    cycle_sessions: int = field(metadata=says("sessions", "length of its longest regular cycle"))
    starts: int = field(metadata=says("starts", "starts walked, evenly spread over the cycle"))
    as_run: float = field(metadata=says("fraction a year", "growth of the first start, the study's own"))
    lowest: float = field(metadata=says("fraction a year", "growth of the start that did worst"))
    highest: float = field(metadata=says("fraction a year", "growth of the start that did best"))
    spread: float = field(metadata=says("fraction a year", "highest less lowest growth"))
    deviation: float = field(
        metadata=says("fraction a year", "standard deviation of growth between the starts")
    )
    laddered: float = field(
        metadata=says("fraction a year", "growth of an account divided equally among all starts")
    )
    first_date: str = field(metadata=says("date", "close from which all starts are measured"))
    offsets: tuple[int, ...] = field(metadata=says("sessions", "by how many sessions each start waited"))
    growths: tuple[float, ...] = field(metadata=says("fraction a year", "growth of each start"))

    def as_dict(self) -> dict[str, Any]:
        """Return every figure as {value, unit, meaning}, ready for JSON."""
        return described(self)


@dataclass(frozen=True, slots=True)
class StartGap:
    """What timing does to the difference of two variants, first less second."""

    laddered: float = field(
        metadata=says("fraction a year", "laddered growth of the first less that of the second")
    )
    lowest: float = field(
        metadata=says("fraction a year", "worst start of the first less best start of the second")
    )
    highest: float = field(
        metadata=says("fraction a year", "best start of the first less worst start of the second")
    )

    @property
    def can_turn(self) -> bool:
        """Whether some pair of starts turns the order of the two."""
        return self.lowest < 0.0 < self.highest

    def as_dict(self) -> dict[str, Any]:
        """Return every figure as {value, unit, meaning}, ready for JSON."""
        return described(self)


def starts_of(
    variant: str, cycle_sessions: int, offsets: Sequence[int], equity: Floats, dates: Dates
) -> Starts:
    """Return what the starts of a variant make of it; equity (K, T) at dates (T,) that all starts share.

    The first row is the study's own start. The laddered account gives each start the same money at the first
    date and never moves any between them.
    """
    days = int((dates[-1] - dates[0]).astype("timedelta64[D]").astype(np.int64))
    growths = [growth_a_year(float(one[0]), float(one[-1]), days) for one in equity]
    whole = (equity / equity[:, :1]).mean(axis=0)
    return Starts(
        variant=variant,
        cycle_sessions=cycle_sessions,
        starts=len(growths),
        as_run=growths[0],
        lowest=min(growths),
        highest=max(growths),
        spread=max(growths) - min(growths),
        deviation=float(np.std(growths, ddof=1)) if len(growths) > 1 else 0.0,
        laddered=growth_a_year(1.0, float(whole[-1]), days),
        first_date=str(dates[0]),
        offsets=tuple(int(one) for one in offsets),
        growths=tuple(growths),
    )


def start_gap(first: Starts, second: Starts) -> StartGap:
    """Return what timing does to the difference of two variants measured over the same days."""
    return StartGap(
        first.laddered - second.laddered, first.lowest - second.highest, first.highest - second.lowest
    )
