"""A difference between two variants with its interval, and what it allows to be said in plain words."""

from __future__ import annotations

import math
from dataclasses import asdict, dataclass, field
from statistics import NormalDist
from typing import Any, Self

from hedgerow.evidence.described import described, says
from hedgerow.units import number_text, percent_text

__all__ = [
    "BETTER",
    "CANNOT_TELL",
    "DRAWDOWN",
    "GROWTH",
    "POWER",
    "SHARPE",
    "TAIL_LOSS",
    "TRADE_RESULT",
    "WORSE",
    "Difference",
    "Measure",
    "Span",
    "years_to_tell",
]

BETTER, WORSE, CANNOT_TELL = "better", "worse", "cannot tell"
POWER = 0.8
"""Chance of telling a true difference that the years needed are worked out for."""

MOST_YEARS = 200.0  # beyond it a number of years says no more than "more than"


@dataclass(frozen=True, slots=True)
class Measure:
    """What is compared: its label in a sentence, its unit, its meaning, and which way is good.

    A `relative` measure is compared by ratio: the difference is first over second, less one.
    """

    label: str
    unit: str
    meaning: str
    more_is_better: bool
    relative: bool = False

    @property
    def gap_unit(self) -> str:
        """The unit of a difference."""
        return "fraction of the second" if self.relative else self.unit

    def gap(self, first: float, second: float) -> float:
        """Return the difference of two values; NaN for a ratio to nothing or less."""
        if not self.relative:
            return first - second
        return first / second - 1.0 if second > 0.0 else math.nan

    def text(self, value: float, signed: bool = False) -> str:
        """Return a value as a person writes it."""
        if self.gap_unit.startswith("fraction"):
            return percent_text(value, 2, signed)
        return number_text(value, 2, signed)


GROWTH = Measure("growth a year", "fraction a year", "constant yearly growth by calendar days", True)
SHARPE = Measure(
    "Sharpe ratio",
    "ratio a year",
    "mean session return above interest over its standard deviation, times root 252",
    True,
)
DRAWDOWN = Measure(
    "deepest drawdown", "fraction", "largest fall from a highest value so far, over the whole record", False
)
TAIL_LOSS = Measure(
    "tail loss a day",
    "fraction a session",
    "expected shortfall: mean loss of the worst 5 % of sessions",
    False,
    relative=True,
)
TRADE_RESULT = Measure(
    "result a position", "fraction of net debit", "mean result of a position on what it tied up", True
)


@dataclass(frozen=True, slots=True)
class Span:
    """Which two variants are compared, over how many years, and at what confidence."""

    first_name: str
    second_name: str
    years: float
    confidence: float


@dataclass(frozen=True, slots=True)
class Difference:
    """First variant less second (a relative measure: over second, less one) on the same days.

    `first` and `second` are in the unit of `measure`, `difference`, `low` and `high` in its `gap_unit`. `low`
    to `high` is the interval at `confidence`; `p_value` is two-sided; NaN where the record is too short.
    `years_needed` is NaN where no record would do.
    """

    measure: Measure = field(metadata=says("", "what is compared"))
    first_name: str = field(metadata=says("name", "the variant that is judged"))
    second_name: str = field(metadata=says("name", "the variant it is judged against"))
    first: float = field(metadata=says("", "the measure of the first variant"))
    second: float = field(metadata=says("", "the measure of the second variant"))
    difference: float = field(metadata=says("gap", "first less second, or first over second less one"))
    low: float = field(metadata=says("gap", "lower end of the interval of the difference"))
    high: float = field(metadata=says("gap", "upper end of the interval of the difference"))
    confidence: float = field(
        metadata=says("fraction", "how often such an interval holds the true difference")
    )
    p_value: float = field(
        metadata=says(
            "fraction", "chance of a difference this far from nothing, either way, when there is none"
        )
    )
    years: float = field(metadata=says("years", "length of the record that both variants share"))
    years_needed: float = field(
        metadata=says("years", "record that tells a true difference of this size with a chance of 80 %")
    )

    @classmethod
    def unknown(cls, measure: Measure, span: Span, first: float, second: float) -> Self:
        """Return the difference of two values of which it is not known what chance makes of them."""
        nan = math.nan
        return cls(
            measure,
            span.first_name,
            span.second_name,
            float(first),
            float(second),
            measure.gap(float(first), float(second)),
            nan,
            nan,
            span.confidence,
            nan,
            span.years,
            nan,
        )

    @property
    def verdict(self) -> str:
        """`better` or `worse`, the first against the second, or `cannot tell` where the interval holds 0."""
        if self.low > 0.0 or self.high < 0.0:
            return BETTER if (self.low > 0.0) == self.measure.more_is_better else WORSE
        return CANNOT_TELL

    @property
    def sentence(self) -> str:
        """The verdict in one plain sentence with its evidence."""
        measure, gap = self.measure, self.measure.text(self.difference, signed=True)
        between = f"{measure.text(self.low, signed=True)} to {measure.text(self.high, signed=True)}"
        interval = f"{percent_text(self.confidence, 0)} interval {between}"
        span = f"{number_text(self.years, 1)} years"
        if self.verdict != CANNOT_TELL:
            return (
                f"{self.first_name} is {self.verdict} than {self.second_name} in {measure.label}: "
                f"{gap} ({interval}) over {span}."
            )
        start = (
            f"Cannot tell from {span} whether {self.first_name} or {self.second_name} is better in "
            f"{measure.label}"
        )
        if math.isnan(self.low):
            return f"{start}: the record is too short or too still."
        if self.low == self.high == 0.0:
            return f"{start}: they did the same."
        return f"{start}: the difference is {gap}, and {between} fits the record{self._needed}."

    @property
    def _needed(self) -> str:
        if math.isnan(self.years_needed):
            return ""
        size = "more than 200" if self.years_needed > MOST_YEARS else f"about {self.years_needed:.0f}"
        return f"; to tell a difference of this size {size} years would be needed"

    def as_dict(self) -> dict[str, Any]:
        """Return every figure as {value, unit, meaning}, the verdict and its sentence, ready for JSON."""
        units = {"": self.measure.unit, "gap": self.measure.gap_unit}
        figures = {
            name: figure | {"unit": units.get(figure["unit"], figure["unit"])}
            for name, figure in described(self).items()
            if name != "measure"
        }
        words = {"verdict": self.verdict, "sentence": self.sentence}
        return {"measure": asdict(self.measure), **figures, **words}


def years_to_tell(difference: float, error: float, years: float, confidence: float) -> float:
    """Return the years of record that tell a difference with a chance of 80 %, or NaN when none do.

    `error` is the standard error over `years`; it shrinks with the root of time, so the two-sided test at
    1 - confidence needs years x ((z(1 - (1 - confidence)/2) + z(.8)) x error / difference)^2.
    """
    if not abs(difference) > 0.0 or not error > 0.0:
        return math.nan
    normal = NormalDist()
    reach = normal.inv_cdf(0.5 + confidence / 2.0) + normal.inv_cdf(POWER)
    return years * (reach * error / difference) ** 2
