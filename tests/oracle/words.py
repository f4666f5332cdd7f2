"""A strategy and its account as plain mappings, read into plain objects; conditions become functions.

Only the words the replay knows are read; any other is an error of the test, not of a user.
"""

from __future__ import annotations

import datetime as dt
import math
from collections.abc import Callable
from dataclasses import dataclass, field
from typing import Any

from oracle import listed, past

# Asked of (the replay's view of a position or symbol, session); None is not known.
Condition = Callable[[Any, int], bool | None]
WEEKDAYS = ("monday", "tuesday", "wednesday", "thursday", "friday")


def number(word: Any) -> float:
    """A number, a percent as a fraction, or a share such as 1/3."""
    if isinstance(word, str) and word.strip().endswith("%"):
        return float(word.strip()[:-1]) / 100.0
    if isinstance(word, str) and "/" in word:
        top, bottom = word.split("/")
        return float(top) / float(bottom)
    return float(word)


def turned(truth: bool | None) -> bool | None:
    """The opposite; of what is not known it is not known either."""
    return None if truth is None else not truth


def every(truths: list[bool | None]) -> bool | None:
    """Whether all hold: no as soon as one does not, not known when one is not known."""
    if any(truth is False for truth in truths):
        return False
    return None if any(truth is None for truth in truths) else True


def judged(value: float, low: float, high: float) -> bool | None:
    """Whether a number lies within bounds."""
    return low <= value <= high if past.known(value) else None


@dataclass(frozen=True)
class LegRule:
    """How one leg is chosen."""

    name: str
    row: int
    sign: int  # +1 bought, -1 written
    right: int
    ratio: float
    expiry: dict[str, Any]
    strike: dict[str, Any]
    again_at_expiry: bool
    roll_if: Condition | None
    roll_for_credit: bool
    direction: str
    add_when: Condition | None


@dataclass(frozen=True)
class Pace:
    """When and how often a symbol may be entered."""

    on: dict[str, Any]
    cooling: int  # sessions after a position has lost money
    ladder: int  # positions of one symbol at once
    spacing: int  # sessions between their entries

    @classmethod
    def read(cls, enter: dict[str, Any]) -> Pace:
        """Read it from the words of entry."""
        ladder = enter.get("ladder", {})
        return cls(
            on=enter.get("on", {}),
            cooling=int(enter.get("cool_down", {}).get("sessions", 0)),
            ladder=int(ladder.get("positions", 1)),
            spacing=int(ladder.get("spacing", 0)),
        )

    def names(self, ordinals: list[int], t: int) -> bool:
        """Whether positions may be opened at the close of this session."""
        if not self.on:
            return True
        ((word, what),) = self.on.items()
        today = ordinals[t]
        if word == "weekday":
            return WEEKDAYS[(today + 6) % 7] in what if (today + 6) % 7 < 5 else False
        if word == "expiry_of":
            return today in listed.series_of(what, today - 1)
        before = ordinals[t - 1] if t > 0 else listed.moved_back(today - 1)
        return period(what, today) != period(what, before)


def period(word: str, ordinal: int) -> tuple[int, ...]:
    """The week, month or quarter of a day."""
    day = dt.date.fromordinal(ordinal)
    if word == "week":
        return tuple(day.isocalendar()[:2])
    return (day.year, day.month if word == "month" else (day.month - 1) // 3)


@dataclass(frozen=True)
class Rules:
    """A strategy as the replay follows it."""

    shares: int
    legs: tuple[LegRule, ...]
    accept: dict[str, Any]
    enter: Condition
    rank: Callable[[Any, int], float] | None
    figure: tuple[str, float] | None  # the figure of its own structure that ranks a candidate, and its sign
    pace: Pace
    exits: tuple[Condition, ...]
    stop: float
    at_close: bool
    keep: bool  # shares that an assignment brings

    @classmethod
    def read(cls, strategy: dict[str, Any]) -> Rules:
        """Read the mapping of the rule language."""
        names = list(strategy.get("legs", {}))
        reader = Reader(names)
        legs = tuple(reader.leg(row, name, strategy["legs"][name]) for row, name in enumerate(names))
        shares = {"long": 1, "short": -1, "none": 0}[strategy.get("shares", "long")]
        enter = strategy.get("enter", {})
        stop = strategy.get("stop", {})
        by = enter.get("rank", {}).get("by", {})
        sign = -1.0 if enter.get("rank", {}).get("order", "high") == "low" else 1.0
        return cls(
            shares=shares,
            legs=legs,
            accept=strategy.get("accept", {}),
            enter=reader.condition(enter["when"]) if "when" in enter else lambda view, t: True,
            rank=reader.rank(enter.get("rank")) if "signal" in by else None,
            figure=(by["figure"], sign) if "figure" in by else None,
            pace=Pace.read(enter),
            exits=tuple(reader.condition(rule["if"]) for rule in strategy.get("exit", [])),
            stop=number(stop.get("below_entry", stop.get("above_entry", 0.0))),
            at_close=strategy.get("fill", "open") == "close",
            keep=strategy.get("after_assignment", "sell") == "keep",
        )


SIGNALS: dict[str, Callable[..., list[Any]]] = {
    "close_over_mean": past.close_over_mean,
    "close_under_mean": past.close_under_mean,
    "momentum": past.momentum,
}


@dataclass
class Reader:
    """Reads legs and conditions; `names` are the legs in their order."""

    names: list[str]

    def leg(self, row: int, name: str, words: dict[str, Any]) -> LegRule:
        """One leg."""
        sign = 1 if "buy" in words else -1
        right = 0 if words.get("buy", words.get("sell")) == "call" else 1
        roll = words.get("roll", {})
        return LegRule(
            name=name,
            row=row,
            sign=sign,
            right=right,
            ratio=number(words.get("ratio", 1)),
            expiry=words["expiry"],
            strike=words["strike"],
            again_at_expiry=roll.get("at") == "expiry",
            roll_if=self.condition(roll["if"]) if "if" in roll else None,
            roll_for_credit=roll.get("only_for") == "credit",
            direction=roll.get("direction", "any"),
            add_when=self.condition(words["add_when"]) if "add_when" in words else None,
        )

    def signal_values(self, words: dict[str, Any]) -> Callable[[Any, int], Any]:
        """The value of a signal at a session, worked out once for each symbol."""
        name, kept = words["signal"], {}
        params = {k: v for k, v in words.items() if k not in ("signal", "at_least", "at_most", "between")}

        def value(view: Any, t: int) -> Any:
            history = view.history
            if history.symbol not in kept:
                kept[history.symbol] = SIGNALS[name](history, **params)
            return kept[history.symbol][t]

        return value

    def rank(self, words: dict[str, Any] | None) -> Callable[[Any, int], float] | None:
        """The score by which candidates are ordered, high first."""
        if words is None:
            return None
        value, sign = self.signal_values(words["by"]), 1.0 if words.get("order", "high") == "high" else -1.0
        return lambda view, t: sign * value(view, t)

    def condition(self, words: dict[str, Any]) -> Condition:
        """A condition as a function."""
        if "all" in words:
            parts = [self.condition(part) for part in words["all"]]
            return lambda view, t: every([part(view, t) for part in parts])
        if "any" in words:
            parts = [self.condition(part) for part in words["any"]]
            return lambda view, t: turned(every([turned(part(view, t)) for part in parts]))
        if "not" in words:
            inner = self.condition(words["not"])
            return lambda view, t: turned(inner(view, t))
        if "signal" in words:
            return self.signal(words)
        return self.of_position(words)

    def signal(self, words: dict[str, Any]) -> Condition:
        """A signal, with its bound if it is a number."""
        if words["signal"] == "weekday":
            days = {WEEKDAYS.index(day) for day in words["is"]}
            return lambda view, t: (view.history.ordinals[t] + 6) % 7 in days
        value = self.signal_values(words)
        if "between" in words:
            low, high = (number(bound) for bound in words["between"])
            return lambda view, t: judged(value(view, t), low, high)
        if "at_least" in words:
            least = number(words["at_least"])
            return lambda view, t: judged(value(view, t), least, math.inf)
        if "at_most" in words:
            most = number(words["at_most"])
            return lambda view, t: judged(value(view, t), -math.inf, most)
        return value

    def of_position(self, words: dict[str, Any]) -> Condition:
        """A word about the position held; the view answers `figure(word, of or leg, session)`."""
        ((word, bound),) = words.items()
        if word == "holds_shares":
            return lambda view, t: view.position.shares > 0.0
        of = bound.get("of", "debit")
        if "leg" in bound:
            of = self.names.index(bound["leg"])
        if word == "days_left":
            most = number(bound["at_most"])
            which = of if "leg" in bound else None
            return lambda view, t: view.days_left(which, t) <= most
        least = number(bound["at_least"])
        return lambda view, t: view.figure(word, of, t) >= least


@dataclass
class Setting:
    """Account, costs and surface as plain numbers; the defaults are those of the package."""

    cash: float = 100000.0
    per_position: float = 1.0
    most_positions: int = 1 << 30
    most_new_a_day: int = 1 << 30
    most_per_sector: int = 1 << 30
    interest: bool = True
    costs: dict[str, float] = field(default_factory=dict)
    surface: dict[str, Any] = field(default_factory=dict)

    def cost(self, name: str) -> float:
        """One number of the costs; nothing unless given."""
        return float(self.costs.get(name, 0.0))
