"""Conditions at one close, each plain part with its number, its bound, and how far it is from turning."""

from __future__ import annotations

import math
from collections.abc import Callable, Iterator
from dataclasses import dataclass
from typing import Any

import numpy as np

from hedgerow.kernels.layout import Floats
from hedgerow.rules.base import Bounds
from hedgerow.rules.condition import DaysLeftTest, HeldTest, HoldsSharesTest
from hedgerow.rules.phrases import condition_phrase
from hedgerow.rules.program import about_position
from hedgerow.rules.schema import AllOf, AnyOf, Condition, NotOf, SignalTest
from hedgerow.rules.truth import WEEKDAYS, Asked, truths_of
from hedgerow.signals import named_signal
from hedgerow.study.one import Bench
from hedgerow.units import MISSING, number_text, percent_text

__all__ = [
    "Sight",
    "Test",
    "failing",
    "how_joined",
    "nearest_end",
    "number_of",
    "position_tests",
    "tests_of",
]


@dataclass(frozen=True, slots=True)
class Test:
    """One plain condition at one close.

    `holds`: whether it does; `value` and `bound`: the number now and the end of its range that is nearest,
    NaN where there is none; `unit`: "fraction", "points", "sessions", "days", "day", "ratio", "price",
    or "" for yes or no.
    """

    text: str
    holds: bool
    value: float = math.nan
    bound: float = math.nan
    unit: str = ""

    @property
    def distance(self) -> float:
        """How far the number is from its bound, never negative; NaN where there is none."""
        return abs(self.value - self.bound)

    def now(self) -> str:
        """The number now, or yes and no."""
        if self.unit == "":
            return "yes" if self.holds else "no"
        return number_of(self.value, self.unit)

    def gap(self) -> str:
        """How far the number is from its bound, in words; nothing where there is none."""
        if self.unit in ("", "day") or math.isnan(self.distance):
            return ""
        return number_of(self.distance, self.unit)

    def told(self) -> str:
        """The condition with what it is now: `... is at least 5%: now 3.2%, off by 1.8%`."""
        if self.unit == "":
            return f"{self.text}: {self.now()}"
        if math.isnan(self.value):
            return f"{self.text}: not known"
        gap = self.gap()
        room = f", {gap} to spare" if self.holds else f", off by {gap}"
        return f"{self.text}: now {self.now()}{room if gap else ''}"


def number_of(value: float, unit: str) -> str:
    """A number in its unit as a person writes it."""
    if math.isnan(value):
        return MISSING
    if unit == "fraction":
        places = 1 if abs(value) >= 0.00095 or value == 0.0 else 2
        return percent_text(value, 2 if abs(value) < 0.1 and places == 1 else places)
    if unit == "day":
        return WEEKDAYS[int(value)].capitalize()
    if unit in ("sessions", "days"):
        return f"{value:,.0f} {unit[:-1] if round(value) == 1 else unit}"
    if unit == "points":
        return f"{number_text(value, 2)} points"
    return number_text(value, 2)


@dataclass(frozen=True, eq=False)
class Sight:
    """The last close of a bench, as conditions about the market see it."""

    bench: Bench

    def value(self, test: SignalTest, symbol: int) -> float:
        """What a signal says of a column at the last close: a number, or 1 and 0; NaN unknown."""
        return float(self.bench.values(test)[-1, symbol])

    def truth(self, condition: Condition, symbol: int) -> bool:
        """Whether a condition about the market alone holds of a column."""
        return bool(truths_of(condition, Asked(self._last, self._known))[0][0, symbol])

    def _known(self, wanted: Any) -> Any:
        return self.bench.known(wanted)[-1:]

    def _last(self, wanted: Any) -> Any:
        return self.bench.values(wanted)[-1:]


def tests_of(condition: Condition, sight: Sight, symbol: int) -> list[Test]:
    """Every plain part of a condition about the market, in the order of the file.

    What stands under `not` is told whole, with the number inside where there is just one.
    """
    if isinstance(condition, AllOf | AnyOf):
        return [test for part in condition.conditions for test in tests_of(part, sight, symbol)]
    if isinstance(condition, NotOf):
        inner = tests_of(condition.condition, sight, symbol)
        holds = sight.truth(condition, symbol)
        one = inner[0] if len(inner) == 1 else Test("", holds)
        return [Test(condition_phrase(condition), holds, one.value, one.bound, one.unit)]
    assert isinstance(condition, SignalTest)
    return [_signal_test(condition, sight, symbol)]


def _signal_test(test: SignalTest, sight: Sight, symbol: int) -> Test:
    text, holds = condition_phrase(test), sight.truth(test, symbol)
    number = named_signal(test.signal).number
    if number is None:
        return Test(text, holds)
    value = sight.value(test, symbol)
    bound = math.nan if test.bounds is None else nearest_end(value, test.bounds)
    return Test(text, holds, value, bound, "day" if test.days else number.unit)


def nearest_end(value: float, bounds: Bounds) -> float:
    """The end of a range that a number misses, or would leave first; NaN where the range has no end."""
    ends = [end for end in (bounds.low, bounds.high) if math.isfinite(end)]
    return min(ends, key=lambda end: abs(end - value), default=math.nan)


def failing(condition: Condition, sight: Sight, symbol: int) -> list[Test]:
    """The plain parts for which a condition does not hold: of `all` those that fail, of `any` every one."""
    if sight.truth(condition, symbol):
        return []
    if isinstance(condition, AllOf):
        return [test for part in condition.conditions for test in failing(part, sight, symbol)]
    return tests_of(condition, sight, symbol)


def position_tests(
    condition: Condition, figures: Floats, sight: Sight, symbol: int, start: int
) -> tuple[list[Test], bool]:
    """Every plain part of a condition about a position, and whether the whole of it holds.

    `figures` (operations,) are what the kernel compares (`kernels.probe.trigger_figures`); the operations of
    a condition stand from `start` on in postfix order, a part about the market alone being one of them.
    """
    found: list[Test] = []
    stack: list[bool] = []
    for at, (part, joint) in enumerate(_postfix(condition), start):
        if joint is NotOf:
            stack.append(not stack.pop())
        elif joint is not None:
            last, before = stack.pop(), stack.pop()
            stack.append((before and last) if joint is AllOf else (before or last))
        elif about_position(part):
            found.append(_position_test(part, float(figures[at])))
            stack.append(found[-1].holds)
        else:
            found += tests_of(part, sight, symbol)
            stack.append(bool(figures[at]))
    return found, stack[-1]


def how_joined(condition: Condition) -> str:
    """How the plain parts of a condition make the whole; nothing where there is but one."""
    if isinstance(condition, NotOf) and about_position(condition):
        return f"{condition_phrase(condition)}:"
    if not isinstance(condition, AllOf | AnyOf) or len(condition.conditions) < 2:
        return ""
    if any(isinstance(part, AllOf | AnyOf | NotOf) for part in condition.conditions):
        return f"{condition_phrase(condition)}:"
    return "all of these:" if isinstance(condition, AllOf) else "one of these is enough:"


def _postfix(condition: Condition) -> Iterator[tuple[Condition, type | None]]:
    """The operations of a condition as `rules.program` writes them: a part, or what joins those before."""
    if not about_position(condition):
        yield condition, None
    elif isinstance(condition, NotOf):
        yield from _postfix(condition.condition)
        yield condition, NotOf
    elif isinstance(condition, AllOf | AnyOf):
        for number, part in enumerate(condition.conditions):
            yield from _postfix(part)
            if number > 0:
                yield condition, type(condition)
    else:
        yield condition, None


_ENDS: dict[str, tuple[Callable[[Any], float], str]] = {
    "GainTest": (lambda test: test.gain.at_least, "fraction"),
    "LossTest": (lambda test: test.loss.at_least, "fraction"),
    "StockUpTest": (lambda test: test.stock_up.at_least, "fraction"),
    "StockDownTest": (lambda test: test.stock_down.at_least, "fraction"),
    "LegLostTest": (lambda test: test.leg_lost.at_least, "fraction"),
    "HeldTest": (lambda test: test.held.at_least, "sessions"),
    "DaysLeftTest": (lambda test: test.days_left.at_most, "days"),
}
_NEVER_DAYS = 100_000.0


def _position_test(test: Condition, figure: float) -> Test:
    """One word about a position beside the number the walk compares."""
    text = condition_phrase(test)
    if isinstance(test, HoldsSharesTest):
        return Test(text, figure == 1.0)
    read, unit = _ENDS[type(test).__name__]
    bound = float(read(test))
    if isinstance(test, DaysLeftTest):
        known = figure < _NEVER_DAYS
        return Test(text, figure <= bound, figure if known else math.nan, bound, unit)
    holds = bool(np.isfinite(figure)) and figure >= bound - 1e-12
    value = figure if math.isfinite(figure) else math.nan
    return Test(text, holds, value, bound, "sessions" if isinstance(test, HeldTest) else unit)
