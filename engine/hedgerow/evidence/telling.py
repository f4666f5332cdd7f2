"""Sentences whose numbers are looked up: each that is told is remembered with the place it stands at."""

from __future__ import annotations

import math
from collections.abc import Mapping
from typing import Any

from hedgerow.units import number_text, percent_text

__all__ = ["Step", "Teller", "listed_names"]

Step = str | int

ROUNDING = 1e-9
FIGURE = {"value", "unit", "meaning"}
"""What a figure in plain evidence consists of."""


class Teller:
    """Looks values up in plain evidence and writes them; `numbers` is what was told and where it stands."""

    def __init__(self, plain: Mapping[str, Any]) -> None:
        self._plain = plain
        self.numbers: list[dict[str, Any]] = []

    def at(self, *path: Step) -> Any:
        """Return what stands at a path: a figure's value, or a plain value."""
        found = self._plain_at(*path)
        return found["value"] if isinstance(found, Mapping) and found.keys() >= FIGURE else found

    def known(self, *path: Step) -> bool:
        """Whether a finite number stands at a path."""
        value = self.at(*path)
        return isinstance(value, int | float) and math.isfinite(value)

    def percent(self, *path: Step, places: int = 1, signed: bool = False) -> str:
        """Write a fraction as a percentage."""
        return self._told(percent_text(float(self.at(*path)), places, signed), path)

    def number(self, *path: Step, places: int = 2, signed: bool = False) -> str:
        """Write a number."""
        return self._told(number_text(float(self.at(*path)), places, signed), path)

    def flip(self, *path: Step, end: str = "value") -> str:
        """Write a flip's value, or one end of its interval; an end beyond the range says so."""
        if end in ("low", "high") and self.at(*path, f"{end}_beyond_range"):
            side = "most" if end == "high" else "least"
            return f"{'above' if end == 'high' else 'below'} {self._flip(*path, side)}"
        return self._flip(*path, end)

    def _flip(self, *path: Step) -> str:
        if self._plain_at(*path)["unit"] == "ratio":
            return self.number(*path)
        whole = abs(self.at(*path) * 100.0 - round(self.at(*path) * 100.0)) < ROUNDING
        return self.percent(*path, places=0 if whole else 1)

    def _plain_at(self, *path: Step) -> Any:
        found: Any = self._plain
        for step in path:
            found = found[step]
        return found

    def _told(self, text: str, path: tuple[Step, ...]) -> str:
        self.numbers.append({"text": text, "value": self.at(*path), "at": list(path)})
        return text


def listed_names(names: list[str]) -> str:
    """Return names as one phrase: `a`, `a and b`, `a, b and c`."""
    if len(names) < 2:
        return "".join(names)
    return f"{', '.join(names[:-1])} and {names[-1]}"
