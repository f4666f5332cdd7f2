"""The assumption at which two rules are equal: where their difference crosses nothing, with an interval.

The same resampled days serve every value of the assumption, so that each replication has a crossing of its
own; the interval holds the middle of those.
"""

from __future__ import annotations

import math
from dataclasses import dataclass, field
from typing import Any

import numpy as np
from numpy.typing import NDArray

from hedgerow.evidence.described import described, says
from hedgerow.units import number_text, percent_text

__all__ = ["HALF_SPREAD", "RATIO", "Flip", "Versus", "flip_of"]

Floats = NDArray[np.float64]

STILL = 1e-10
"""Change of yearly log growth over the whole range below which an assumption is taken to change nothing."""

RATIO, HALF_SPREAD = "ratio of implied over realized volatility", "half-spread"


@dataclass(frozen=True, slots=True)
class Versus:
    """Who is compared, what is changed, the value assumed, and the confidence of the interval."""

    first_name: str
    second_name: str
    quantity: str
    assumed: float
    confidence: float


@dataclass(frozen=True, slots=True)
class Flip:
    """The value of an assumption at which the growth of two rules is equal, NaN where the range holds none.

    `low` to `high` is the interval at `confidence`; an end that lies beyond the range is infinite.
    """

    first_name: str = field(metadata=says("name", "the variant that is judged"))
    second_name: str = field(metadata=says("name", "the variant it is judged against"))
    quantity: str = field(metadata=says("name", "the assumption that is changed"))
    value: float = field(metadata=says("", "where the two are equal; none where the range holds no such"))
    low: float = field(metadata=says("", "lower end of its interval; none beyond the range"))
    high: float = field(metadata=says("", "upper end of its interval; none beyond the range"))
    least: float = field(metadata=says("", "least value tried"))
    most: float = field(metadata=says("", "largest value tried"))
    assumed: float = field(metadata=says("", "value assumed in the study"))
    confidence: float = field(metadata=says("fraction", "how often such an interval holds the true crossing"))
    share_inside: float = field(
        metadata=says("fraction", "resampled records in which the two are equal somewhere in the range")
    )
    crossings: int = field(
        metadata=says("crossings", "how often the difference changes sign over the range; the nearest counts")
    )
    ahead_above: str = field(
        metadata=says("name", "which of the two is ahead above the flip, or over the range without one")
    )

    @property
    def found(self) -> bool:
        """Whether the range holds a value at which the two are equal."""
        return not math.isnan(self.value)

    @property
    def holds_assumed(self) -> bool | None:
        """Whether the interval holds the value assumed in the study; None where there is no interval."""
        if math.isnan(self.low) or math.isnan(self.high):
            return None
        return self.low <= self.assumed <= self.high

    @property
    def unit(self) -> str:
        """The unit of the assumption."""
        return "fraction of the premium" if self.quantity == HALF_SPREAD else "ratio"

    def text(self, value: float) -> str:
        """Return a value of the assumption as a person writes it; an end beyond the range says so."""
        if math.isinf(value):
            return f"above {self.text(self.most)}" if value > 0 else f"below {self.text(self.least)}"
        return percent_text(value, 1) if self.quantity == HALF_SPREAD else number_text(value, 2)

    def as_dict(self) -> dict[str, Any]:
        """Return every figure as {value, unit, meaning}, ready for JSON; `ends` says which lie beyond."""
        figures = {
            name: figure | {"unit": figure["unit"] or self.unit} for name, figure in described(self).items()
        }
        beyond = {"low_beyond_range": math.isinf(self.low), "high_beyond_range": math.isinf(self.high)}
        return figures | beyond


def flip_of(versus: Versus, values: Floats, gaps: Floats, drawn: Floats) -> Flip:
    """Return the flip of yearly log growth gaps (R,), first less second, at increasing values (R,).

    drawn (B, R) are the gaps of resampled records. Between values the gap is taken as straight; of several
    crossings the one nearest to the value assumed counts.
    """
    value, count = _nearest(values, gaps, versus.assumed)
    anchor = versus.assumed if math.isnan(value) else value
    places = _places(values, drawn, anchor)
    known = places[~np.isnan(places)]
    low = high = math.nan
    if known.size > len(places) / 2.0:
        tail = 0.5 - versus.confidence / 2.0
        low, high = (float(np.quantile(known, share, method="inverted_cdf")) for share in (tail, 1.0 - tail))
    return Flip(
        versus.first_name,
        versus.second_name,
        versus.quantity,
        value,
        low,
        high,
        float(values[0]),
        float(values[-1]),
        versus.assumed,
        versus.confidence,
        float(np.mean(np.isfinite(places))) if len(places) else math.nan,
        count,
        _ahead(versus, values, gaps, value),
    )


def _crossings(values: Floats, gaps: Floats) -> Floats:
    """Return where straight lines between gaps cross nothing; a stretch that stays there does not."""
    here, after = gaps[:-1], gaps[1:]
    change = (np.sign(here) * np.sign(after) < 0) | ((here == 0.0) != (after == 0.0))
    at = np.flatnonzero(change)
    share = here[at] / (here[at] - after[at])
    return np.unique(values[at] + share * (values[at + 1] - values[at]))


def _still(gaps: Floats) -> bool:
    return bool(np.ptp(gaps) <= STILL)


def _nearest(values: Floats, gaps: Floats, anchor: float) -> tuple[float, int]:
    """Return the crossing nearest to an anchor, NaN without one, and how many there are."""
    found = np.empty(0) if _still(gaps) else _crossings(values, gaps)
    if not found.size:
        return math.nan, 0
    return float(found[np.argmin(np.abs(found - anchor))]), int(found.size)


def _places(values: Floats, drawn: Floats, anchor: float) -> Floats:
    """Return each record's crossing nearest to an anchor, drawn (B, R).

    Infinite on the side to which the gap shrinks where there is none, NaN where the record is still.
    """
    here, after = drawn[:, :-1], drawn[:, 1:]
    change = (np.sign(here) * np.sign(after) < 0) | ((here == 0.0) != (after == 0.0))
    share = np.divide(here, here - after, out=np.zeros(here.shape), where=change)
    found = values[:-1] + share * np.diff(values)
    nearest = np.argmin(np.where(change, np.abs(found - anchor), np.inf), axis=1)
    places = np.take_along_axis(found, nearest[:, np.newaxis], axis=1)[:, 0]
    beyond = np.where(np.abs(drawn[:, -1]) < np.abs(drawn[:, 0]), np.inf, -np.inf)
    places = np.where(change.any(axis=1), places, beyond)
    return np.where(np.ptp(drawn, axis=1) <= STILL, np.nan, places)


def _ahead(versus: Versus, values: Floats, gaps: Floats, value: float) -> str:
    """Return who is ahead just above the flip; without one, who is ahead at the value assumed."""
    if math.isnan(value):
        gap = float(np.interp(versus.assumed, values, gaps))
    else:
        gap = float(gaps[min(int(np.searchsorted(values, value, "right")), len(values) - 1)])
    if gap == 0.0:
        return ""
    return versus.first_name if gap > 0.0 else versus.second_name
