"""Grids: which values a study tries for which parameters of its strategy, and which combinations of them.

A combination is a row of picks, one number an axis: the place of the value in the axis. The whole grid is
counted with the last axis running fastest, as an odometer does.
"""

from __future__ import annotations

import json
import math
from collections.abc import Mapping
from dataclasses import dataclass
from decimal import Decimal
from typing import Any

import numpy as np
from numpy.typing import NDArray

from hedgerow.evidence.seeds import generator_of

__all__ = ["Axis", "Grid", "latin_hypercube", "random_picks", "short_names"]

Ints = NDArray[np.int64]
Floats = NDArray[np.float64]


@dataclass(frozen=True)
class Axis:
    """One parameter: the dotted path of what is changed, and the values tried, as a file would hold them."""

    path: str
    values: tuple[Any, ...]

    @property
    def texts(self) -> tuple[str, ...]:
        """The values as text; a mapping or a list as one line."""
        return tuple(_text(value) for value in self.values)

    @property
    def numbers(self) -> Floats | None:
        """The values as numbers (V,), percents as fractions; None when any of them is no number."""
        found = [_number(value) for value in self.values]
        known = [number for number in found if number is not None]
        return np.array(known) if len(known) == len(found) else None

    @property
    def ranks(self) -> Ints | None:
        """The place of each value when they are put in order of size; None when they have no order."""
        numbers = self.numbers
        return None if numbers is None else np.asarray(np.argsort(np.argsort(numbers, kind="stable")))


@dataclass(frozen=True)
class Grid:
    """Axes, and which of their combinations are tried: `design` is whole, random or latin_hypercube.

    `draws` is how many are drawn, 0 for the whole grid.
    """

    axes: tuple[Axis, ...]
    design: str = "whole"
    draws: int = 0

    @property
    def size(self) -> int:
        """How many combinations the whole grid has."""
        return math.prod(len(axis.values) for axis in self.axes)

    def picks(self, seed: int) -> Ints:
        """The combinations tried, shape (variants, axes), in the order of the whole grid, each once."""
        sizes = [len(axis.values) for axis in self.axes]
        if self.design == "whole":
            return _unravelled(np.arange(self.size), sizes)
        if self.design == "random":
            return _unravelled(random_picks(self.size, self.draws, seed), sizes)
        points = latin_hypercube(self.draws, len(sizes), seed)
        drawn = np.floor(points * np.array(sizes)).astype(np.int64)
        return np.asarray(np.unique(drawn, axis=0))

    def changes(self, picks: Ints) -> dict[str, Any]:
        """The dotted paths and values of one row of picks."""
        return {axis.path: axis.values[int(pick)] for axis, pick in zip(self.axes, picks, strict=True)}

    def told(self, picks: Ints) -> str:
        """One combination in a line, each path as short as it can be: `days 7, put from_spot -4%`."""
        names = short_names([axis.path for axis in self.axes])
        pairs = zip(names, self.axes, picks, strict=True)
        return ", ".join(f"{name} {axis.texts[int(pick)]}" for name, axis, pick in pairs)

    def plain(self) -> dict[str, Any]:
        """The words of the grid, values written out, and those of its sample."""
        words: dict[str, Any] = {"grid": {axis.path: list(axis.values) for axis in self.axes}}
        if self.design != "whole":
            words["sample"] = {self.design: self.draws}
        return words


def latin_hypercube(points: int, dimensions: int, seed: int) -> Floats:
    """Points (P, D) in the unit cube: cut any side into P strata, and each stratum holds one point.

    McKay, Beckman & Conover 1979, "A Comparison of Three Methods for Selecting Values of Input Variables",
    Technometrics 21.
    """
    rng = generator_of(seed, "latin hypercube", str(points), str(dimensions))
    strata = np.argsort(rng.random((points, dimensions)), axis=0)
    inside = np.minimum(rng.random((points, dimensions)), 1.0 - 2.0**-20)  # never rounds into the next one
    return np.asarray((strata + inside) / points)


def random_picks(size: int, draws: int, seed: int) -> Ints:
    """`draws` different numbers below `size`, every set of them as likely, in order."""
    rng = generator_of(seed, "random subset", str(size), str(draws))
    return np.sort(rng.choice(size, draws, replace=False))


def short_names(paths: list[str]) -> list[str]:
    """Dotted paths as short as they can be told apart: the last word, if need be with the first that differs.

    `legs.call.strike.from_spot` beside `legs.put.strike.from_spot` is `call from_spot`.
    """
    parts = [path.split(".") for path in paths]
    names = []
    for own in parts:
        same = [other for other in parts if other is not own and other[-1] == own[-1]]
        apart = [
            word for at, word in enumerate(own[:-1]) if all(other[at : at + 1] != [word] for other in same)
        ]
        if not same:
            names.append(own[-1])
        else:
            names.append(f"{apart[0]} {own[-1]}" if apart else ".".join(own))
    return names


def _unravelled(numbers: Ints, sizes: list[int]) -> Ints:
    return np.asarray(np.stack(np.unravel_index(numbers, sizes), axis=1), np.int64)


def _text(value: Any) -> str:
    if isinstance(value, Mapping | list | tuple):
        return json.dumps(value, ensure_ascii=False)
    return str(value)


def _number(value: Any) -> float | None:
    """A number or percent as a float; None for anything else."""
    if not isinstance(value, str):
        return None
    text = value.removesuffix("%").rstrip()
    try:
        number = Decimal(text)
    except ArithmeticError:
        return None
    if not number.is_finite():
        return None
    return float(number / 100) if value.endswith("%") else float(number)
