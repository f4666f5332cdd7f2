"""One leg of a structure: what is bought or sold, when it expires, where its strike lies, how it rolls."""

from __future__ import annotations

from collections.abc import Mapping
from typing import Annotated, Any, ClassVar, Self

from pydantic import Field

from hedgerow.rules.base import Words
from hedgerow.rules.condition import Condition
from hedgerow.rules.figures import Number, Percent, Whole
from hedgerow.rules.words import Choice, Loose, Name

__all__ = ["CYCLES", "ROLL_WAYS", "STRIKE_RULES", "Expiry", "Leg", "Roll", "Spend", "Strike"]


LEAST_DAYS = {"daily": 1, "weekly": 4, "monthly": 15, "quarterly": 46}
"""The fewest days a cycle can serve: below half of its step the nearest expiry is often far from the wish."""

CYCLES = tuple(LEAST_DAYS)

STRIKE_RULES = (
    "from_spot",
    "steps",
    "delta",
    "odds",
    "deviations",
    "same_as",
    "spend",
    "zero_cost_with",
    "worst_loss_within",
)


ROLL_WAYS = ("any", "up", "down", "out", "up and out", "down and out")


class Expiry(Words):
    """When a leg expires: about `days` calendar days away on a listed cycle, or `with_leg` another leg."""

    one_of: ClassVar[tuple[str, ...]] = ("days", "with")

    days: Annotated[int, Whole(1, 1100, "calendar days")] | None = None
    with_leg: Annotated[str, Name()] | None = Field(default=None, alias="with")
    listed: Annotated[str, Choice(CYCLES)] = "monthly"
    choose: Annotated[str, Choice(("nearest", "at_least"))] = "nearest"

    @classmethod
    def judge(cls, raw: Mapping[Any, Any], made: Self | None) -> list[Loose]:
        """Words that mean nothing beside `with`, and days that the cycle cannot serve."""
        if raw.get("with") is not None and raw.get("days") is None:
            told = ("means nothing beside `with`", "", "leave it out")
            return [Loose((word,), "idle", *told) for word in ("listed", "choose") if word in raw]
        if made is None or made.days is None:
            return []
        least = LEAST_DAYS[made.listed]
        if made.days >= least:
            return []
        fitting = [name for name, days in LEAST_DAYS.items() if made.days >= days]
        found = f"is {made.days}, which the {made.listed} cycle cannot serve"
        allowed = f"allowed: {least} or more with `listed: {made.listed}`"
        return [Loose(("days",), "cycle", found, allowed, f"or write `listed: {fitting[-1]}`")]


class Spend(Words):
    """A leg bought for at most a share of what another leg brings in."""

    share: Annotated[float, Percent(0.01, 10.0)]
    of: Annotated[str, Name()]


class Strike(Words):
    """Where the strike lies: exactly one rule, then `snap` to the listed grid."""

    one_of: ClassVar[tuple[str, ...]] = STRIKE_RULES

    from_spot: Annotated[float, Percent(-0.9, 5.0)] | None = None
    steps: Annotated[int, Whole(-50, 50, "listed steps from the money")] | None = None
    delta: Annotated[float, Number(0.0, 1.0, "absolute delta", open_ends=True)] | None = None
    odds: Annotated[float, Percent(0.0, 1.0, open_ends=True)] | None = None
    deviations: Annotated[float, Number(-6.0, 6.0, "standard deviations")] | None = None
    same_as: Annotated[str, Name()] | None = None
    spend: Spend | None = None
    zero_cost_with: Annotated[str, Name()] | None = None
    worst_loss_within: Annotated[float, Percent(0.0, 1.0, open_ends=True)] | None = None
    snap: Annotated[str, Choice(("nearest", "up", "down"))] = "nearest"

    @property
    def rule(self) -> str:
        """The one word among STRIKE_RULES that stands."""
        return next(word for word in STRIKE_RULES if getattr(self, word) is not None)

    @property
    def partner(self) -> str | None:
        """The leg this strike is reckoned from, if any."""
        spent = None if self.spend is None else self.spend.of
        return self.same_as or spent or self.zero_cost_with


class Roll(Words):
    """When a leg is written or bought again by its own rules: at expiry, on a condition, or both.

    `direction` and `only_for` are asked of a leg that still lives: which way it may go, and for what.
    """

    at: Annotated[str, Choice(("expiry",))] | None = None
    condition: Condition | None = Field(default=None, alias="if")
    direction: Annotated[str, Choice(ROLL_WAYS)] = "any"
    only_for: Annotated[str, Choice(("credit",))] | None = None

    @classmethod
    def judge(cls, raw: Mapping[Any, Any], made: Self | None) -> list[Loose]:
        """A roll that says not when, or which way where nothing lives that could go it."""
        if raw.get("at") is None and raw.get("if") is None:
            return [
                Loose((), "one-of", "does not say when", "allowed: `at: expiry`, `if: CONDITION`, or both")
            ]
        if raw.get("if") is None and raw.get("direction", "any") != "any":
            found = (
                "says which way a leg that lives may go, and this one is made again only when it has ended"
            )
            return [Loose(("direction",), "idle", found, "", "leave it out, or add `if: CONDITION`")]
        return []

    @property
    def at_expiry(self) -> bool:
        """Whether the leg is made again when it ends."""
        return self.at == "expiry"


class Leg(Words):
    """One option of the structure, per lot of 100 shares."""

    one_of: ClassVar[tuple[str, ...]] = ("sell", "buy")

    name: Annotated[str, Name()] = Field(alias="<name>", exclude=True)
    sell: Annotated[str, Choice(("call", "put"))] | None = None
    buy: Annotated[str, Choice(("call", "put"))] | None = None
    expiry: Expiry
    strike: Strike
    ratio: Annotated[float, Number(0.25, 4.0, "contracts a lot of 100 shares")] = 1.0
    roll: Roll | None = None
    add_when: Condition | None = None

    @property
    def right(self) -> str:
        """`call` or `put`."""
        return self.sell or self.buy or ""

    @property
    def sold(self) -> bool:
        """Whether the leg is written; else it is bought."""
        return self.sell is not None

    @property
    def sign(self) -> int:
        """-1 for a leg that is sold, +1 for one that is bought."""
        return -1 if self.sold else 1
