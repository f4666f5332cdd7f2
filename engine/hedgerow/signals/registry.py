"""The signals: one decorator, typed parameters, and a phrase in plain English.

A signal is a function of a panel and its parameters. Registering it is one decorator:

    @signal("momentum", phrase="the change of price over {sessions} sessions",
            parameters=(Parameter("sessions", 1, 1000),), lookback=lambda p: p["sessions"] + 1,
            number=Number("fraction", -1.0, 10.0))
    def momentum(panel: Panel, sessions: int) -> Floats: ...

and the conformance suite then holds it to the rules of the house: it looks only backward, is blind to the
unit of price and to splits, keeps symbols apart, and says nothing where it knows nothing.
"""

from __future__ import annotations

import re
from collections.abc import Callable, Iterable, Mapping
from dataclasses import dataclass
from typing import TYPE_CHECKING, Any

import numpy as np
from numpy.typing import NDArray

from hedgerow.errors import Fault, RulesError, nearest_word
from hedgerow.kernels.layout import Floats

if TYPE_CHECKING:
    from hedgerow.signals.panel import Panel

__all__ = ["SIGNALS", "Number", "Parameter", "Signal", "Values", "named_signal", "signal"]

Values = NDArray[np.bool_] | Floats
Parameters = Mapping[str, float]


@dataclass(frozen=True)
class Parameter:
    """A number a signal takes: its range, its default (None: it must be given), and what it counts."""

    name: str
    least: float
    most: float
    default: float | None = None
    unit: str = "sessions"
    whole: bool = True

    @property
    def allowed(self) -> str:
        """The range in words."""
        kind = "a whole number" if self.whole else "a number"
        return f"allowed: {kind} from {self.least:g} to {self.most:g} ({self.unit})"


@dataclass(frozen=True)
class Number:
    """What a number is in ("fraction", "points", "sessions" or "day"), and where its bounds may lie.

    `values` names the numbers 0, 1, ... of a unit "day".
    """

    unit: str
    least: float
    most: float
    values: tuple[str, ...] = ()


@dataclass(frozen=True)
class Signal:
    """A registered signal.

    `number` is None for yes or no. `phrase` holds the parameters in braces: a whole statement for yes or no,
    a noun for a number. `by_bars`: the function sees the sessions in which a symbol traded, one after
    another; else every session of the market.
    """

    name: str
    function: Callable[..., Values]
    phrase: str
    parameters: tuple[Parameter, ...]
    lookback: Callable[[Parameters], float]
    number: Number | None
    by_bars: bool

    @property
    def kind(self) -> str:
        """Either "bool" or "number"."""
        return "bool" if self.number is None else "number"

    def words(self, params: Parameters | None = None) -> str:
        """The phrase with its parameters filled in; of one session, not of 1 sessions."""
        text = self.phrase.format(**{name: f"{value:g}" for name, value in self.checked(params).items()})
        return re.sub(r"\b1 (session|day|bar)s\b", r"1 \1", text)

    def lookback_sessions(self, params: Parameters | None = None) -> int:
        """Sessions with a bar, today's among them, that must be there before the signal knows anything."""
        return int(self.lookback(self.checked(params)))

    def checked(self, params: Parameters | None = None) -> dict[str, Any]:
        """Return all parameters, defaults filled in; raises RulesError with every fault of them."""
        given, known = dict(params or {}), {item.name: item for item in self.parameters}
        faults = [
            self._fault(name, "is no parameter of this signal", _listed(known), nearest_word(name, known))
            for name in given
            if name not in known
        ]
        read = {}
        for item in self.parameters:
            value = given.get(item.name, item.default)
            wrong = value is None or isinstance(value, bool) or not item.least <= value <= item.most
            if value is None or wrong or (item.whole and value != int(value)):
                found = "is missing" if value is None else f"is {value}"
                faults.append(self._fault(item.name, found, item.allowed))
            else:
                read[item.name] = int(value) if item.whole else float(value)
        if not faults and read.get("fast", 0) >= read.get("slow", 1):
            found = f"is {read['fast']}, and slow is {read['slow']}"
            faults.append(self._fault("fast", found, "fast counts fewer sessions than slow"))
        if faults:
            raise RulesError(faults)
        return read

    def _fault(self, name: str, found: str, allowed: str, remedy: str = "") -> Fault:
        return Fault(f"signal {self.name}", 0, 0, "parameter", f"`{name}` {found}", allowed, remedy)


SIGNALS: dict[str, Signal] = {}


def _listed(words: Iterable[str]) -> str:
    text = ", ".join(f"`{word}`" for word in words)
    return f"allowed: {text}" if text else "it takes none"


def signal(
    name: str,
    *,
    phrase: str,
    parameters: tuple[Parameter, ...] = (),
    lookback: Callable[[Parameters], float] = lambda params: 1,
    number: Number | None = None,
    by_bars: bool = True,
) -> Callable[[Callable[..., Values]], Callable[..., Values]]:
    """Register a signal under `name`; raises ValueError when the name is taken. See Signal for the words."""

    def register(function: Callable[..., Values]) -> Callable[..., Values]:
        if name in SIGNALS:
            raise ValueError(f"a signal is already registered under the name `{name}`; choose another")
        SIGNALS[name] = Signal(name, function, phrase, parameters, lookback, number, by_bars)
        return function

    return register


def named_signal(name: str) -> Signal:
    """Return the signal of that name; raises RulesError with the nearest right word when there is none."""
    if name not in SIGNALS:
        found = f"`{name}` is no signal"
        raise RulesError.one(
            "signal", "unknown", found, _listed(sorted(SIGNALS)), nearest_word(name, SIGNALS)
        )
    return SIGNALS[name]


def evaluated(chosen: Signal, panel: Panel, params: Parameters | None) -> Values:
    """What a signal says on a panel, (T, N): unknown, and a session without a bar, is NaN or False."""
    found = chosen.function(panel, **chosen.checked(params))
    return panel.spread(found) if chosen.by_bars else panel.where_traded(found)
