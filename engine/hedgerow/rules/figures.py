"""Scalars of the rule and study languages that are figures: percents, counts, numbers, parts.

A percent carries its sign and becomes a fraction; a bare number where a percent is wanted is refused, and so
is a percent where a plain number is wanted.
"""

from __future__ import annotations

import math
import re
from dataclasses import dataclass
from decimal import Decimal
from typing import Any

from hedgerow.rules.words import Scalar, refuse, shown

__all__ = ["Number", "Percent", "Share", "Whole", "percent_text"]

_PERCENT = re.compile(r"([+-]?(?:\d+(?:\.\d*)?|\.\d+)) ?%")
_NUMBER = re.compile(r"[+-]?(?:\d+(?:\.\d*)?|\.\d+)(?:[eE][+-]?\d{1,3})?")
_WHOLE = re.compile(r"[+-]?\d{1,18}")
_RATIO = re.compile(r"(\d{1,6}) ?/ ?(\d{1,6})")


def _decimal_text(value: float) -> str:
    text = format(Decimal(repr(value)).normalize(), "f")
    return text if text != "-0" else "0"


def percent_text(fraction: float) -> str:
    """A fraction as a percent, every digit kept."""
    text = format((Decimal(repr(fraction)) * 100).normalize(), "f")
    return ("0" if text == "-0" else text) + "%"


def _bare_number(value: object) -> bool:
    if isinstance(value, bool):
        return False
    return isinstance(value, int | float) or (isinstance(value, str) and bool(_NUMBER.fullmatch(value)))


@dataclass(frozen=True, slots=True)
class Percent(Scalar):
    """A percent with its sign, read as a fraction; `open_ends` leaves the ends `least` and `most` out."""

    least: float
    most: float
    open_ends: bool = False

    @property
    def allowed(self) -> str:
        """The range in words."""
        low, high = percent_text(self.least), percent_text(self.most)
        ends = f"above {low} and below {high}" if self.open_ends else f"from {low} to {high}"
        return f"allowed: a percent {ends}, written with its % sign"

    def read(self, value: object) -> float:
        """The fraction. Raises WordsError for anything but a percent within the range."""
        if _bare_number(value):
            refuse("percent", f"is {shown(value)}, a bare number", self.allowed, f"write {value}%")
        match = _PERCENT.fullmatch(value) if isinstance(value, str) else None
        if match is None:
            refuse("percent", f"is {shown(value)}, which is no percent", self.allowed)
        fraction = float(Decimal(match[1]) / 100) + 0.0
        inside = self.least < fraction < self.most if self.open_ends else self.least <= fraction <= self.most
        if not inside:
            refuse("range", f"is {shown(value)}", self.allowed)
        return fraction

    def write(self, value: float) -> str:
        """The percent as a person writes it; reads back to the same fraction."""
        return percent_text(value)

    def json_schema(self) -> dict[str, Any]:
        """A string with a percent sign."""
        return {
            "type": "string",
            "pattern": r"^[+-]?([0-9]+(\.[0-9]*)?|\.[0-9]+) ?%$",
            "description": self.allowed.removeprefix("allowed: "),
        }


@dataclass(frozen=True, slots=True)
class Whole(Scalar):
    """A whole number between `least` and `most`, both allowed; `unit` names what is counted."""

    least: int
    most: int
    unit: str = ""

    @property
    def allowed(self) -> str:
        """The range in words."""
        unit = f" ({self.unit})" if self.unit else ""
        return f"allowed: a whole number from {self.least} to {self.most}{unit}"

    def read(self, value: object) -> int:
        """The number. Raises WordsError for anything but a whole number within the range."""
        number: int | None = None
        if isinstance(value, int) and not isinstance(value, bool):
            number = value
        elif isinstance(value, str) and _WHOLE.fullmatch(value):
            number = int(value)
        if number is None:
            refuse("whole", f"is {shown(value)}, which is no whole number", self.allowed)
        if not self.least <= number <= self.most:
            refuse("range", f"is {shown(value)}", self.allowed)
        return number

    def json_schema(self) -> dict[str, Any]:
        """An integer with its range."""
        return {
            "type": "integer",
            "minimum": self.least,
            "maximum": self.most,
            "description": self.allowed.removeprefix("allowed: "),
        }


@dataclass(frozen=True, slots=True)
class Number(Scalar):
    """A finite number between `least` and `most`; `open_ends` leaves the ends out."""

    least: float
    most: float
    unit: str = ""
    open_ends: bool = False

    @property
    def allowed(self) -> str:
        """The range in words."""
        low, high = _decimal_text(self.least), _decimal_text(self.most)
        ends = f"above {low} and below {high}" if self.open_ends else f"from {low} to {high}"
        return f"allowed: a number {ends}" + (f" ({self.unit})" if self.unit else "")

    def read(self, value: object) -> float:
        """The number. Raises WordsError for anything but a finite number within the range."""
        if not _bare_number(value):
            sign = isinstance(value, str) and _PERCENT.fullmatch(value) is not None
            remedy = "leave the % sign out" if sign else ""
            refuse("number", f"is {shown(value)}, which is no plain number", self.allowed, remedy)
        number = float(str(value)) + 0.0
        inside = self.least < number < self.most if self.open_ends else self.least <= number <= self.most
        if not (math.isfinite(number) and inside):
            refuse("range", f"is {shown(value)}", self.allowed)
        return number

    def write(self, value: float) -> float | int:
        """The number, without a needless `.0`."""
        return int(value) if value.is_integer() and abs(value) < 2**53 else value

    def json_schema(self) -> dict[str, Any]:
        """A number with its range."""
        ends = ("exclusiveMinimum", "exclusiveMaximum") if self.open_ends else ("minimum", "maximum")
        return {
            "type": "number",
            ends[0]: self.least,
            ends[1]: self.most,
            "description": self.allowed.removeprefix("allowed: "),
        }


@dataclass(frozen=True, slots=True)
class Share(Scalar):
    """A part of a whole: a fraction such as 1/3, or a percent; above nothing, up to all of it."""

    allowed = "allowed: a fraction such as 1/3, or a percent such as 25%, above 0 and up to 100%"

    def read(self, value: object) -> float:
        """The fraction. Raises WordsError for anything but a part of a whole."""
        ratio = _RATIO.fullmatch(value) if isinstance(value, str) else None
        percent = _PERCENT.fullmatch(value) if isinstance(value, str) else None
        if ratio is not None:
            fraction = int(ratio[1]) / int(ratio[2]) if int(ratio[2]) else 0.0
        elif percent is not None:
            fraction = float(Decimal(percent[1]) / 100)
        else:
            refuse("share", f"is {shown(value)}, which is no part of a whole", self.allowed)
        if not 0.0 < fraction <= 1.0:
            refuse("range", f"is {shown(value)}", self.allowed)
        return fraction

    def write(self, value: float) -> str:
        """One over a whole number where it is one, else a percent."""
        parts = round(1.0 / value)
        return f"1/{parts}" if 1.0 / parts == value and parts < 1000 else percent_text(value)

    def json_schema(self) -> dict[str, Any]:
        """A string with a fraction bar or a percent sign."""
        return {
            "type": "string",
            "pattern": r"^([0-9]+ ?/ ?[0-9]+|[0-9]+(\.[0-9]*)? ?%)$",
            "description": self.allowed.removeprefix("allowed: "),
        }
