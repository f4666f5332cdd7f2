"""A strategy as frozen models: shares, legs, what is accepted, when to enter and to leave.

A model that exists is valid. Making one from wrong words raises pydantic's ValidationError; `load_strategy`
turns it into RulesError with every fault and its place.
"""

from __future__ import annotations

from collections.abc import Mapping
from typing import Annotated, Any, ClassVar, Self

from pydantic import Field, GetCoreSchemaHandler, GetJsonSchemaHandler, ValidationError, field_serializer
from pydantic_core import CoreSchema, core_schema

from hedgerow.rules.base import Between, Bounds, Words, gathered, loosened
from hedgerow.rules.checks import SHARE_WORDS, faults_across
from hedgerow.rules.condition import (
    AllOf,
    AnyOf,
    Condition,
    DaysLeftTest,
    GainTest,
    HeldTest,
    HoldsSharesTest,
    LegLostTest,
    LossTest,
    NotOf,
    StockDownTest,
    StockUpTest,
)
from hedgerow.rules.entering import CoolDown, Enter, FigureValue, Ladder, On, Rank
from hedgerow.rules.figures import Number, Percent
from hedgerow.rules.legs import Expiry, Leg, Roll, Spend, Strike
from hedgerow.rules.signalwords import SignalTest, SignalValue
from hedgerow.rules.words import Choice, Flag, Loose, Text, refuse, shown

__all__ = [
    "Accept",
    "AllOf",
    "AnyOf",
    "Bounds",
    "Condition",
    "CoolDown",
    "DaysLeftTest",
    "Enter",
    "ExitRule",
    "Expiry",
    "FigureValue",
    "GainTest",
    "HeldTest",
    "HoldsSharesTest",
    "Ladder",
    "Leg",
    "LegLostTest",
    "LossTest",
    "NotOf",
    "On",
    "Rank",
    "Roll",
    "SignalTest",
    "SignalValue",
    "Spend",
    "StockDownTest",
    "StockUpTest",
    "Stop",
    "Strategy",
    "Strike",
]


AT_LEAST, AT_MOST = ("at_least",), ("at_most",)


class Accept(Words):
    """What the structure must be at entry, else the entry is declined; each bound is of the named figure."""

    net_credit: Annotated[bool, Flag(only_true=True)] | None = None
    net_debit: Annotated[Bounds, Between(Percent(-1.0, 1.0), AT_MOST)] | None = None
    worst_loss: Annotated[Bounds, Between(Percent(0.0, 10.0))] | None = None
    best_gain: Annotated[Bounds, Between(Percent(0.0, 10.0))] | None = None
    odds_of_best: Annotated[Bounds, Between(Percent(0.0, 1.0))] | None = None
    best_over_worst: Annotated[Bounds, Between(Number(0.0, 1000.0), AT_LEAST)] | None = None
    spread_to_premium: Annotated[Bounds, Between(Percent(0.0, 2.0), AT_MOST)] | None = None


class ExitRule(Words):
    """One reason to leave; `name` is what the ledger calls it."""

    name: Annotated[str, Text(40)]
    condition: Condition = Field(alias="if")


class Stop(Words):
    """A resting order in the stock: below entry for shares held, above entry for shares sold short."""

    one_of: ClassVar[tuple[str, ...]] = ("below_entry", "above_entry")

    below_entry: Annotated[float, Percent(0.0, 1.0, open_ends=True)] | None = None
    above_entry: Annotated[float, Percent(0.0, 5.0, open_ends=True)] | None = None

    @property
    def distance(self) -> float:
        """How far from the price at entry the order rests, as a positive fraction of it."""
        return self.below_entry or self.above_entry or 0.0


class _Named:
    """Reads a mapping of name to leg as a tuple of legs that know their name."""

    def __get_pydantic_core_schema__(self, source: Any, handler: GetCoreSchemaHandler) -> CoreSchema:
        return core_schema.no_info_wrap_validator_function(_legs, handler(source))

    def __get_pydantic_json_schema__(
        self, schema: CoreSchema, handler: GetJsonSchemaHandler
    ) -> dict[str, Any]:
        items = handler(schema)["items"]
        return {"type": "object", "additionalProperties": items, "maxProperties": MOST_LEGS}


MOST_LEGS = 4


def _legs(value: Any, handler: Any) -> Any:
    if isinstance(value, tuple):
        return handler(value)
    if not isinstance(value, Mapping):
        refuse("shape", f"is {shown(value)}", "allowed: a mapping of a name to each leg")
    legs, faults = read_legs(value)
    if len(value) > MOST_LEGS:
        found, allowed = f"has {len(value)} legs", f"allowed: at most {MOST_LEGS}"
        faults.append(Loose((), "legs", found, allowed))
    gathered(faults)
    return tuple(legs.values())


def read_legs(value: Mapping[Any, Any]) -> tuple[dict[str, Leg], list[Loose]]:
    """The legs of a mapping that are valid by themselves, and the faults of the others."""
    legs: dict[str, Leg] = {}
    faults: list[Loose] = []
    for name, raw in value.items():
        try:
            given = {**raw, "<name>": name} if isinstance(raw, Mapping) else raw
            legs[str(name)] = Leg.model_validate(given)
        except ValidationError as error:
            faults += [_at_leg(str(name), fault) for fault in loosened(error)]
    return legs, faults


def _at_leg(name: str, fault: Loose) -> Loose:
    path = fault.path[1:] if fault.path[:1] == ("<name>",) else fault.path
    return Loose((name, *path), fault.code, fault.found, fault.allowed, fault.remedy)


class Strategy(Words):
    """A whole rule set. `legs` is a tuple in the order of the file; `leg(name)` finds one."""

    name: Annotated[str, Text(80)]
    about: Annotated[str, Text(2000)] | None = None
    shares: Annotated[str, Choice(SHARE_WORDS)] = "long"
    legs: Annotated[tuple[Leg, ...], _Named()] = ()
    after_assignment: Annotated[str, Choice(("sell", "keep"))] = "sell"
    accept: Accept | None = None
    enter: Enter | None = None
    exit: Annotated[tuple[ExitRule, ...], Field(strict=False)] = ()
    stop: Stop | None = None
    fill: Annotated[str, Choice(("open", "close"))] = "open"

    @classmethod
    def judge(cls, raw: Mapping[Any, Any], made: Self | None) -> list[Loose]:
        """Faults that need more than one part of the strategy to see."""
        plain = raw if made is None else made.plain()
        if made is not None and not made.legs and "legs" not in raw:
            plain = {word: value for word, value in plain.items() if word != "legs"}
        written = plain.get("legs")
        legs, _ = read_legs(written) if isinstance(written, Mapping) else ({}, [])
        return faults_across(plain, legs)

    @property
    def holds_nothing(self) -> bool:
        """Whether it is the yardstick of cash, which never opens a position."""
        return self.shares == "none" and not self.legs

    def plain(self) -> dict[str, Any]:
        """The words again; that cash holds no legs has to be said."""
        return super().plain() | ({"legs": {}} if self.holds_nothing else {})

    @field_serializer("legs", mode="wrap")
    def _write_legs(self, legs: tuple[Leg, ...], handler: Any) -> dict[str, Any]:
        return {leg.name: plain for leg, plain in zip(legs, handler(legs), strict=True)}

    def leg(self, name: str) -> Leg:
        """The leg of that name. Raises KeyError when there is none."""
        return {leg.name: leg for leg in self.legs}[name]
