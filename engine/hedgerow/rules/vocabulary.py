"""The signals as words of the language: what each is called, its parameters, and how its value is bounded."""

from __future__ import annotations

from dataclasses import dataclass
from functools import cache

from hedgerow.rules.figures import Number, Percent, Whole
from hedgerow.rules.words import Scalar
from hedgerow.signals import SIGNALS, Parameter, Signal

__all__ = ["ParameterWords", "SignalWords", "signal_names", "signal_words"]


@dataclass(frozen=True, slots=True)
class ParameterWords:
    """One parameter of a signal: its reader, and the default when it may be left out."""

    name: str
    scalar: Scalar
    default: int | float | None = None
    allowed: str = ""


@dataclass(frozen=True, slots=True)
class SignalWords:
    """One signal: `unit` reads a bound of its value (None: it is yes or no), `values` names its days."""

    signal: Signal
    parameters: tuple[ParameterWords, ...]
    unit: Scalar | None
    values: tuple[str, ...]

    @property
    def name(self) -> str:
        """The signal's name."""
        return self.signal.name

    def takes(self, word: str) -> bool:
        """Whether the signal is bounded by this word."""
        if word == "is":
            return bool(self.values)
        return self.unit is not None and not self.values


def signal_names() -> tuple[str, ...]:
    """The names of all signals, sorted."""
    return tuple(sorted(SIGNALS))


def signal_words(name: str) -> SignalWords | None:
    """The words of a signal, or None for a name that is not known."""
    signal = SIGNALS.get(name)
    return None if signal is None else _words(signal)


@cache
def _words(signal: Signal) -> SignalWords:
    parameters = tuple(_parameter(item) for item in signal.parameters)
    values = () if signal.number is None else signal.number.values
    return SignalWords(signal, parameters, _unit(signal), values)


def _parameter(item: Parameter) -> ParameterWords:
    scalar: Scalar = Number(item.least, item.most, item.unit)
    default = item.default
    if item.whole:
        scalar = Whole(int(item.least), int(item.most), item.unit)
        default = None if default is None else int(default)
    return ParameterWords(item.name, scalar, default, item.allowed)


def _unit(signal: Signal) -> Scalar | None:
    number = signal.number
    if number is None or number.values:
        return None
    if number.unit == "fraction":
        return Percent(number.least, number.most)
    return Number(number.least, number.most, number.unit)
