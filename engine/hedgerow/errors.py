"""Every exception of the package.

    HedgerowError            anything that ends a run, with an exit code
      InputError             the input or its words are wrong (exit code 2)
        DataError            prices, dividends, splits, reports, rates, dataset.yaml
        RulesError           a strategy file
        StudyError           a study file, its account, pricing or costs
        ExtensionError       a file of signals, estimators or costs of the user's own
        DeskError            a user's own positions, trades or quotes
        PlaceError           a folder or file that cannot be read or written
      RunError               the run itself failed (exit code 1)
        ReconcileError       money or quantities of a log do not add up

An error is a sentence with evidence: where, what was found, what is allowed, what to do.
An input error carries every fault of the input, not only the first.
"""

from __future__ import annotations

import difflib
from collections.abc import Iterable
from dataclasses import dataclass
from typing import Self

__all__ = [
    "DataError",
    "DeskError",
    "ExtensionError",
    "Fault",
    "HedgerowError",
    "InputError",
    "PlaceError",
    "ReconcileError",
    "RulesError",
    "RunError",
    "StudyError",
    "nearest_word",
]


@dataclass(frozen=True, slots=True, order=True)
class Fault:
    """One thing that is wrong: where it stands, what was found, what is allowed, what to do.

    `line` and `column` count from 1; 0 means not known. `code` is a stable word for programs.
    """

    where: str
    line: int
    column: int
    code: str
    found: str
    allowed: str = ""
    remedy: str = ""

    @property
    def place(self) -> str:
        """The file with its line and column as far as they are known."""
        parts = [self.where] + [str(n) for n in (self.line, self.column) if n > 0]
        return ":".join(parts)

    def __str__(self) -> str:
        """The whole fault as one sentence."""
        text = f"{self.place}: {self.found}"
        if self.allowed:
            text += f"; {self.allowed}"
        if self.remedy:
            text += f"; {self.remedy}"
        return text


class HedgerowError(Exception):
    """Anything that ends a run; `exit_code` is what the command returns."""

    exit_code = 1


class InputError(HedgerowError):
    """The input is wrong; `faults` holds every fault found, in the order of the file."""

    exit_code = 2

    def __init__(self, faults: Iterable[Fault]) -> None:
        self.faults: tuple[Fault, ...] = tuple(faults)
        super().__init__("\n".join(str(fault) for fault in self.faults))

    def __reduce__(self) -> tuple[type[Self], tuple[tuple[Fault, ...]]]:
        """How it travels between processes: as its faults, not as its text."""
        return type(self), (self.faults,)

    @classmethod
    def one(cls, where: str, code: str, found: str, allowed: str = "", remedy: str = "") -> Self:
        """An error of one fault whose line is not known."""
        return cls([Fault(where, 0, 0, code, found, allowed, remedy)])


class DataError(InputError):
    """Prices, dividends, splits, reports, rates or dataset.yaml are wrong."""


class RulesError(InputError):
    """A strategy file is wrong."""


class StudyError(InputError):
    """A study file, its account, pricing or costs are wrong."""


class ExtensionError(InputError):
    """A user's own signal, estimator or model of costs is wrong."""


class DeskError(InputError):
    """A user's own positions, trades or quotes are wrong."""


class PlaceError(InputError):
    """A file or folder cannot be read or written."""


class RunError(HedgerowError):
    """The run itself failed."""


class ReconcileError(RunError):
    """Money or quantities of a log do not add up."""


def nearest_word(word: str, allowed: Iterable[str]) -> str:
    """Return ", did you mean `x`?" for the nearest allowed word, or nothing when none is near."""
    near = difflib.get_close_matches(word, list(allowed), n=1, cutoff=0.6)
    return f"did you mean `{near[0]}`?" if near else ""
