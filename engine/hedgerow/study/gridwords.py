"""The words of large studies: `grid`, `sample`, `walk_forward`, `held_out`."""

from __future__ import annotations

import math
import re
from collections.abc import Mapping
from dataclasses import dataclass
from decimal import Decimal
from typing import Annotated, Any, ClassVar

from pydantic import Field

from hedgerow.rules.base import Words
from hedgerow.rules.figures import Whole
from hedgerow.rules.words import Choice, Flag, Loose, Scalar, WordsError, refuse, shown
from hedgerow.study.grid import Axis, Grid

__all__ = [
    "MOST_VARIANTS",
    "SampleWords",
    "Span",
    "WalkForwardWords",
    "grid_faults",
    "grid_of",
    "grid_schema",
]

MOST_VARIANTS = 200_000
MOST_VALUES = 10_000
MEASURES = ("sharpe", "sortino", "growth")
SESSIONS = {"session": 1, "week": 5, "month": 21, "quarter": 63, "year": 252}
RANGE_WORDS = ("from", "to", "step")
_DECIMAL = re.compile(r"^([+-]?(?:[0-9]+(?:\.[0-9]*)?|\.[0-9]+)) ?(%?)$")
_SPAN = re.compile(r"(\d{1,5}) (session|week|month|quarter|year)s?")


@dataclass(frozen=True, slots=True)
class Span(Scalar):
    """A length of time such as `4 years`, in sessions: 252 a year, 63 a quarter, 21 a month, 5 a week."""

    least: int = 1
    most: int = 25_200

    allowed: ClassVar[str] = (
        "allowed: a whole number of sessions, weeks, months, quarters or years: `4 years`"
    )

    def read(self, value: object) -> int:
        """The sessions. Raises WordsError for anything but a length of time within the range."""
        if isinstance(value, int) and not isinstance(value, bool):
            refuse("span", f"is {shown(value)}, a bare number", self.allowed, f"write `{value} sessions`")
        match = _SPAN.fullmatch(value) if isinstance(value, str) else None
        if match is None:
            refuse("span", f"is {shown(value)}, which is no length of time", self.allowed)
        sessions = int(match[1]) * SESSIONS[match[2]]
        if not self.least <= sessions <= self.most:
            refuse("range", f"is {shown(value)}", f"allowed: {self.least} to {self.most} sessions")
        return sessions

    def write(self, value: int) -> str:
        """The sessions in words; read back to the same number."""
        return f"{value} sessions"

    def json_schema(self) -> dict[str, Any]:
        """A string with a number and a unit."""
        return {"type": "string", "pattern": "^[0-9]+ (session|week|month|quarter|year)s?$"}


class SampleWords(Words):
    """How many combinations of a grid are drawn, and how."""

    one_of: ClassVar[tuple[str, ...]] = ("random", "latin_hypercube")

    random: Annotated[int, Whole(1, MOST_VARIANTS, "variants")] | None = None
    latin_hypercube: Annotated[int, Whole(1, MOST_VARIANTS, "variants")] | None = None


class WalkForwardWords(Words):
    """Choosing on one window and judging on the next; lengths in sessions once read."""

    choose_sessions: Annotated[int, Span(least=21)] = Field(alias="choose")
    judge_sessions: Annotated[int, Span(least=5)] = Field(alias="judge")
    anchored: Annotated[bool, Flag()] = False
    by: Annotated[str, Choice(MEASURES)] = "sharpe"
    gap_sessions: Annotated[int, Span(least=0)] | None = Field(default=None, alias="gap")


def grid_schema() -> dict[str, Any]:
    """The JSON Schema of the word `grid`: dotted paths, each with a list of values or a range."""
    number = {"anyOf": [{"type": "number"}, {"type": "string", "pattern": _DECIMAL.pattern}]}
    span = {
        "type": "object",
        "properties": dict.fromkeys(RANGE_WORDS, number),
        "required": list(RANGE_WORDS),
        "additionalProperties": False,
    }
    values = {"anyOf": [{"type": "array", "minItems": 1, "uniqueItems": True}, span]}
    return {"type": "object", "additionalProperties": values, "minProperties": 1}


def grid_of(raw: Mapping[str, Any], sample: SampleWords | None) -> Grid:
    """The grid of words that `grid_faults` finds nothing wrong with."""
    axes = tuple(Axis(str(path), _values(given, [])) for path, given in raw.items())
    if sample is None:
        return Grid(axes)
    if sample.random is not None:
        return Grid(axes, "random", sample.random)
    return Grid(axes, "latin_hypercube", sample.latin_hypercube or 0)


def grid_faults(raw: Mapping[Any, Any]) -> list[Loose]:
    """What is wrong with the words of a grid and its sample, in a study's mapping."""
    if raw.get("grid") is None:
        sample = Loose(("sample",), "idle", "draws from a grid, and there is none", "", "write a `grid`")
        return [sample] if raw.get("sample") is not None else []
    grid = raw["grid"]
    if not isinstance(grid, Mapping) or not grid:
        allowed = "allowed: a mapping of dotted paths to lists of values or ranges {from, to, step}"
        return [Loose(("grid",), "shape", f"is {shown(grid or None)}", allowed)]
    faults: list[Loose] = []
    if raw.get("variants") is not None:
        found = "stands beside `variants`"
        faults.append(Loose(("grid",), "two", found, "allowed: one of them", "take the other out"))
    sizes = []
    for path, given in grid.items():
        own: list[Loose] = []
        sizes.append(len(_values(given, own)))
        faults += [fault.under("grid", str(path)) for fault in own]
    return faults or _size_faults(math.prod(sizes), raw.get("sample"))


def _size_faults(size: int, sample: Any) -> list[Loose]:
    """A grid that is too large to run whole, or a sample larger than its grid."""
    draws = 0
    if isinstance(sample, Mapping) and len(sample) == 1:
        try:
            draws = Whole(1, MOST_VARIANTS).read(next(iter(sample.values())))
        except WordsError:
            return []  # told with the words of the sample
    if not draws and size > MOST_VARIANTS:
        found, allowed = f"has {size:,} combinations", f"allowed: at most {MOST_VARIANTS:,} at once"
        return [Loose(("grid",), "range", found, allowed, "draw some: sample: {latin_hypercube: 500}")]
    if draws > size:
        found = f"draws {draws:,} of a grid of {size:,} combinations"
        return [
            Loose(("sample",), "range", found, f"allowed: up to {size:,}", "leave it out to run them all")
        ]
    return []


def _values(given: Any, faults: list[Loose]) -> tuple[Any, ...]:
    """The values of one axis; what is wrong with them goes to `faults`."""
    if isinstance(given, Mapping):
        return _range(given, faults)
    if not isinstance(given, list | tuple) or not given:
        allowed = "allowed: a list of values, or a range such as {from: -10%, to: -2%, step: 1%}"
        faults.append(Loose((), "shape", f"is {shown(given)}", allowed))
        return ()
    values = tuple(_as_written(value) for value in given)
    if values == ("none",):
        faults.append(Loose((), "one", "tries `none` alone", "allowed: other values beside it"))
    for at, value in enumerate(values):
        if value in values[:at]:
            faults.append(Loose((at,), "repeated", f"is {shown(value)} a second time", "", "take it out"))
    return values


def _as_written(value: Any) -> Any:
    """A value as a file would hold it: scalars are text."""
    if isinstance(value, bool):
        return str(value).lower()
    return str(value) if isinstance(value, int | float) else value


def _range(given: Mapping[Any, Any], faults: list[Loose]) -> tuple[str, ...]:
    """The values from one end to the other, both included, a percent staying a percent."""
    before = len(faults)
    allowed = "allowed: a mapping of `from`, `to` and `step`"
    faults += [
        Loose((str(word),), "unknown-word", "is no word of a range", allowed)
        for word in given
        if word not in RANGE_WORDS
    ]
    read: dict[str, tuple[Decimal, str]] = {}
    for word in RANGE_WORDS:
        match = _DECIMAL.fullmatch(str(_as_written(given.get(word, ""))))
        if match is None:
            found = (
                f"is {shown(given[word])}, which is no number or percent" if word in given else "is missing"
            )
            faults.append(
                Loose((word,), "number", found, "allowed: a number such as 7, or a percent such as 2%")
            )
        else:
            read[word] = Decimal(match[1]), match[2]
    if len(faults) > before:
        return ()
    if len({sign for _, sign in read.values()}) > 1:
        faults.append(Loose((), "units", "mixes percents with plain numbers", "allowed: three of one kind"))
        return ()
    first, last, step = (read[word][0] for word in RANGE_WORDS)
    faults += _range_faults(first, last, step)
    if len(faults) > before:
        return ()
    return tuple(_decimal(first + at * step, read["from"][1]) for at in range(int((last - first) / step) + 1))


def _range_faults(first: Decimal, last: Decimal, step: Decimal) -> list[Loose]:
    if step <= 0:
        return [Loose(("step",), "range", f"is `{step}`", "allowed: a step above 0")]
    if last <= first:
        found = f"is `{last}`, not above `from`, which is `{first}`"
        return [Loose(("to",), "reversed", found, "allowed: the lower end first", "swap them")]
    if (last - first) / step >= MOST_VALUES:
        return [Loose(("step",), "range", f"makes over {MOST_VALUES:,} values", "", "take a larger step")]
    over = (last - first) % step
    if over:
        found = f"is `{last}`, which steps of {step} from {first} do not meet"
        near = last - over
        return [Loose(("to",), "uneven", found, "", f"write {near} or {near + step}, or another step")]
    return []


def _decimal(value: Decimal, sign: str) -> str:
    text = format(value.normalize(), "f")
    return ("0" if text == "-0" else text) + sign
