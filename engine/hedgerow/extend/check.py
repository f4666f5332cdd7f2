"""The conformance suite of extensions: every rule of the house, asked of every item of a file."""

from __future__ import annotations

import inspect
from collections.abc import Callable, Mapping
from dataclasses import dataclass
from typing import Any

from hedgerow.errors import ExtensionError, Fault
from hedgerow.extend.check_cost import COST_CHECKS
from hedgerow.extend.check_estimator import ESTIMATOR_CHECKS
from hedgerow.extend.check_signal import SIGNAL_CHECKS
from hedgerow.extend.told import ToldInFile

__all__ = ["CHECKS", "Item", "faults_of"]

CHECKS: dict[str, Mapping[str, Callable[[Any], str]]] = {
    "signal": SIGNAL_CHECKS,
    "estimator": ESTIMATOR_CHECKS,
    "cost": COST_CHECKS,
}
"""What is asked of each kind: the rule in words, and the function that asks it."""


@dataclass(frozen=True)
class Item:
    """One thing that a file of extensions registers: its `kind`, what was registered, and where it stands."""

    kind: str  # "signal", "estimator" or "cost"
    made: Any
    path: str
    line: int

    @property
    def name(self) -> str:
        """Its name."""
        return str(self.made.name)

    @property
    def title(self) -> str:
        """Its kind and name as they stand in a message."""
        kind = {"estimator": "estimator of volatility", "cost": "model of costs"}.get(self.kind, self.kind)
        return f"{kind} `{self.name}`"


def line_of(function: Callable[..., Any]) -> int:
    """The line at which a function stands, its decorators left out; 0 when it is not known."""
    code = getattr(inspect.unwrap(function), "__code__", None)
    return 0 if code is None else int(code.co_firstlineno)


def faults_of(item: Item) -> list[Fault]:
    """Every rule of the house that an item breaks, at its place; the first failure within ends the asking.

    A rule that rests on another is not asked once that one is broken: the first kind of answer decides.
    """
    faults: list[Fault] = []
    for number, (rule, ask) in enumerate(CHECKS[item.kind].items()):
        try:
            with ToldInFile(item.path, f"while {item.title} was tried", item.line):
                told = ask(item.made)
        except ExtensionError as error:
            return [*faults, *error.faults]
        if told:
            found = f"{item.title} is refused: {told}"
            faults.append(
                Fault(item.path, item.line, 0, "extension-rule", found, "", f"every {_kind(item)} {rule}")
            )
            if number == 0:
                break
    return faults


def _kind(item: Item) -> str:
    return item.title.partition(" `")[0]
