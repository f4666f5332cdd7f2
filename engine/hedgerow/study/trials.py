"""Everything a large study tries: its variants by number, each made when it is wanted, and their faults."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass
from functools import cached_property
from typing import TYPE_CHECKING, Any

import numpy as np
from numpy.typing import NDArray

from hedgerow.errors import Fault, StudyError
from hedgerow.rules.document import Tree, tree_of_mapping
from hedgerow.rules.load import read_strategy
from hedgerow.rules.overrides import changed
from hedgerow.rules.schema import Strategy
from hedgerow.study.grid import Grid
from hedgerow.textfile import capped

if TYPE_CHECKING:
    from hedgerow.study.declare import Study

__all__ = ["Trials", "trials_of", "value_faults"]

Ints = NDArray[np.int64]


@dataclass(frozen=True, eq=False)
class Trials:
    """The variants of a study: a strategy and combinations of a grid, or strategies by name.

    `picks` (variants, axes) are the rows of the grid tried, None without a grid.
    """

    listed: tuple[tuple[str, Strategy], ...]
    grid: Grid | None = None
    picks: Ints | None = None

    def __len__(self) -> int:
        """How many variants there are."""
        return len(self.listed) if self.picks is None else len(self.picks)

    @cached_property
    def base(self) -> dict[str, Any]:
        """The words of the strategy that a grid changes."""
        return self.listed[0][1].plain()

    def name(self, number: int) -> str:
        """What a variant is called: its name, or its parameters in a line."""
        if self.grid is None or self.picks is None:
            return self.listed[number][0]
        return self.grid.told(self.picks[number])

    def strategy(self, number: int) -> Strategy:
        """The strategy of a variant. Raises StudyError when its words do not fit together."""
        if self.grid is None or self.picks is None:
            return self.listed[number][1]
        strategy, faults = _made(self.base, self.grid.changes(self.picks[number]))
        if strategy is None:
            raise StudyError(capped(faults))
        return strategy

    def columns(self) -> dict[str, list[Any]]:
        """Every variant's name, and a column for each axis: numbers where all are, percents as fractions."""
        columns: dict[str, list[Any]] = {"name": [self.name(number) for number in range(len(self))]}
        if self.grid is None or self.picks is None:
            return columns
        for axis, picks in zip(self.grid.axes, self.picks.T, strict=True):
            numbers = axis.numbers
            values: Any = axis.texts if numbers is None else numbers.tolist()
            columns[axis.path] = [values[pick] for pick in picks]
        return columns

    def check(self, where: str = "the grid") -> None:
        """Make every variant once. Raises StudyError with each kind of fault and the first variant it is in.

        Faults that are the same in many combinations are told once.
        """
        first: dict[tuple[str, str, str], int] = {}
        count: dict[tuple[str, str, str], int] = {}
        for number, fault in self._faults():
            kind = (fault.found, fault.allowed, fault.remedy)
            first.setdefault(kind, number)
            count[kind] = count.get(kind, 0) + 1
        faults = [
            Fault(
                where,
                0,
                0,
                "variant",
                f"variant {number + 1:,} ({self.name(number)}): {kind[0]}{more}",
                *kind[1:],
            )
            for kind, number in first.items()
            for more in [f" (and in {count[kind] - 1:,} more)" if count[kind] > 1 else ""]
        ]
        if faults:
            raise StudyError(capped(faults))

    def _faults(self) -> Iterator[tuple[int, Fault]]:
        if self.grid is None or self.picks is None or len(self.grid.axes) == 1:
            return  # single values are told when the study is read
        for number, picks in enumerate(self.picks):
            _, faults = _made(self.base, self.grid.changes(picks))
            yield from ((number, fault) for fault in faults)


def trials_of(study: Study) -> Trials:
    """What a study tries."""
    if study.grid is None:
        return Trials(study.variants)
    return Trials(study.variants, study.grid, study.grid.picks(study.seed))


def value_faults(tree: Tree, grid: Grid, strategy: Strategy) -> list[Fault]:
    """What is wrong with single values of a grid, each tried alone on the strategy, at its place in the file.

    A value that is wrong beside the strategy's own but right beside others of the grid is left to `check`.
    """
    base = strategy.plain()
    faults: list[Fault] = []
    for axis in grid.axes:
        told = [_made(base, {axis.path: value})[1] for value in axis.values]
        sure = all(told) or len(grid.axes) == 1
        faults += [
            _at_axis(tree, axis.path, f"value {text}", fault)
            for text, own in zip(axis.texts, told, strict=True)
            for fault in own
            if sure or fault.found.startswith(f"`{axis.path}`")
        ]
    return sorted(set(faults))


def _at_axis(tree: Tree, path: str, what: str, fault: Fault) -> Fault:
    place = tree.place(("grid", path), key=True)
    found = f"`grid.{path}`, {what}: {fault.found}"
    return Fault(place.where, place.line, place.column, fault.code, found, fault.allowed, fault.remedy)


def _made(base: dict[str, Any], changes: dict[str, Any]) -> tuple[Strategy | None, list[Fault]]:
    """The strategy with its changes and no faults, or None and every fault.

    `none` takes away what stands there, and changes nothing where nothing does: the other values of its axis
    put something there.
    """
    real = {path: value for path, value in changes.items() if value != "none" or _stands(base, path)}
    return read_strategy(changed(tree_of_mapping(base), tree_of_mapping(real, "changes")))


def _stands(base: Any, path: str) -> bool:
    """Whether anything stands at a dotted path; where it leads through a list, that is left to the path."""
    for word in path.split("."):
        if not isinstance(base, dict):
            return True
        if word not in base:
            return False
        base = base[word]
    return True
