"""Conditions: what a rule may ask at a close, as nested words. Never a formula.

A condition is one mapping: `all`, `any` or `not` of others, a signal of the market, or a word about the
position that is held (`gain`, `loss`, `days_left`, `held`, `stock_up`, `stock_down`, `leg_lost`,
`holds_shares`).
"""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from typing import Annotated, Any, Self, TypeAlias

from pydantic import BaseModel, BeforeValidator, Discriminator, Field, Tag

from hedgerow.rules.base import Words
from hedgerow.rules.figures import Percent, Whole
from hedgerow.rules.signalwords import SignalTest
from hedgerow.rules.words import (
    UNKNOWN_WORD,
    Choice,
    Flag,
    Loose,
    Name,
    Path,
    listed,
    refuse,
    refuse_all,
    shown,
    unknown_word,
)

__all__ = [
    "CONDITION_WORDS",
    "POSITION_WORDS",
    "AllOf",
    "AnyOf",
    "Condition",
    "DaysLeft",
    "DaysLeftTest",
    "GainTest",
    "HeldTest",
    "HoldsSharesTest",
    "LegLost",
    "LegLostTest",
    "LossTest",
    "Moved",
    "NotOf",
    "PositionTest",
    "StockDownTest",
    "StockUpTest",
    "walked",
]

POSITION_WORDS = (
    "gain",
    "loss",
    "days_left",
    "held",
    "stock_up",
    "stock_down",
    "leg_lost",
    "holds_shares",
)
CONDITION_WORDS = ("all", "any", "not", "signal", *POSITION_WORDS)

_SHARE = Percent(0.0001, 10.0)


class GainOf(Words):
    """A gain so far: of the net debit paid at entry (`debit`), or of the best gain at entry (`best`)."""

    at_least: Annotated[float, _SHARE]
    of: Annotated[str, Choice(("debit", "best"))] = "debit"


class LossOf(Words):
    """A loss so far, positive: of the net debit paid at entry (`debit`), or of the worst loss (`worst`)."""

    at_least: Annotated[float, _SHARE]
    of: Annotated[str, Choice(("debit", "worst"))] = "debit"


class DaysLeft(Words):
    """Calendar days to the nearest expiry of the legs held, or of one leg."""

    at_most: Annotated[int, Whole(0, 1100, "calendar days")]
    leg: Annotated[str, Name()] | None = None


class Sessions(Words):
    """Sessions since the entry was filled."""

    at_least: Annotated[int, Whole(1, 5000, "sessions")]


class Moved(Words):
    """A move of the stock since entry, as a fraction of its price at entry, positive either way."""

    at_least: Annotated[float, Percent(0.0001, 10.0)]


class Fallen(Words):
    """A fall of the stock since entry, as a fraction of its price at entry, positive."""

    at_least: Annotated[float, Percent(0.0001, 1.0)]


class LegLost(Words):
    """Share of its price at entry that one leg's option has lost (good for who wrote it)."""

    leg: Annotated[str, Name()]
    at_least: Annotated[float, Percent(0.01, 1.0)]


class _Test(Words):
    """A condition of one word."""

    @classmethod
    def stranger(cls, key: object) -> Loose:
        """A second condition in one mapping is told how to stand beside the first."""
        if key not in CONDITION_WORDS:
            return super().stranger(key)
        found = f"stands beside `{cls.words()[0]}`, and a condition is one word"
        return Loose((str(key),), UNKNOWN_WORD, found, "", "put both under `all: [...]` or `any: [...]`")


class GainTest(_Test):
    """The position has gained at least so much."""

    gain: GainOf


class LossTest(_Test):
    """The position has lost at least so much."""

    loss: LossOf


class DaysLeftTest(_Test):
    """At most so many days are left."""

    days_left: DaysLeft


class HeldTest(_Test):
    """The position has been held for at least so many sessions."""

    held: Sessions


class StockUpTest(_Test):
    """The stock has risen by at least so much since entry."""

    stock_up: Moved


class StockDownTest(_Test):
    """The stock has fallen by at least so much since entry."""

    stock_down: Fallen


class LegLostTest(_Test):
    """One leg has lost at least such a share of its price at entry."""

    leg_lost: LegLost


class HoldsSharesTest(_Test):
    """The position holds shares now: its own, or what an assignment or exercise brought."""

    holds_shares: Annotated[bool, Flag(only_true=True)]


_SOME: dict[str, Any] = {"minItems": 1}


def _nothing_joined(word: str, raw: Mapping[Any, Any]) -> list[Loose]:
    if raw.get(word) not in ([], ()):
        return []
    return [Loose((word,), "empty", "holds no condition", "allowed: a list of one condition or more")]


class AllOf(_Test):
    """Every one of the conditions holds."""

    conditions: Annotated[tuple[Condition, ...], Field(alias="all", strict=False, json_schema_extra=_SOME)]

    @classmethod
    def judge(cls, raw: Mapping[Any, Any], made: Self | None) -> list[Loose]:
        """A list with nothing in it."""
        return _nothing_joined("all", raw)


class AnyOf(_Test):
    """At least one of the conditions holds."""

    conditions: Annotated[tuple[Condition, ...], Field(alias="any", strict=False, json_schema_extra=_SOME)]

    @classmethod
    def judge(cls, raw: Mapping[Any, Any], made: Self | None) -> list[Loose]:
        """A list with nothing in it."""
        return _nothing_joined("any", raw)


class NotOf(_Test):
    """The condition does not hold."""

    condition: Annotated[Condition, Field(alias="not")]


PositionTest: TypeAlias = (
    GainTest
    | LossTest
    | DaysLeftTest
    | HeldTest
    | StockUpTest
    | StockDownTest
    | LegLostTest
    | HoldsSharesTest
)

_CLASSES: dict[str, type[BaseModel]] = {
    "all": AllOf,
    "any": AnyOf,
    "not": NotOf,
    "signal": SignalTest,
    "gain": GainTest,
    "loss": LossTest,
    "days_left": DaysLeftTest,
    "held": HeldTest,
    "stock_up": StockUpTest,
    "stock_down": StockDownTest,
    "leg_lost": LegLostTest,
    "holds_shares": HoldsSharesTest,
}


def _tag(value: Any) -> str | None:
    """The tag of the condition's class, by the first of its words that is known."""
    if isinstance(value, Mapping):
        return next((f"<{word}>" for word in value if word in _CLASSES), None)
    return next((f"<{word}>" for word, kind in _CLASSES.items() if isinstance(value, kind)), None)


def _known(value: Any) -> Any:
    """The value again when its class can be told. Raises WordsError when no word of it is a condition."""
    if _tag(value) is None and isinstance(value, Mapping) and value:
        refuse_all([unknown_word((str(key),), key, CONDITION_WORDS, "a condition") for key in value])
    elif _tag(value) is None:
        refuse("shape", f"is {shown(value)}", f"allowed: a mapping of one of {listed(CONDITION_WORDS)}")
    return value


Condition: TypeAlias = Annotated[
    Annotated[AllOf, Tag("<all>")]
    | Annotated[AnyOf, Tag("<any>")]
    | Annotated[NotOf, Tag("<not>")]
    | Annotated[SignalTest, Tag("<signal>")]
    | Annotated[GainTest, Tag("<gain>")]
    | Annotated[LossTest, Tag("<loss>")]
    | Annotated[DaysLeftTest, Tag("<days_left>")]
    | Annotated[HeldTest, Tag("<held>")]
    | Annotated[StockUpTest, Tag("<stock_up>")]
    | Annotated[StockDownTest, Tag("<stock_down>")]
    | Annotated[LegLostTest, Tag("<leg_lost>")]
    | Annotated[HoldsSharesTest, Tag("<holds_shares>")],
    Discriminator(_tag),
    BeforeValidator(_known),
]

for _kind in (AllOf, AnyOf, NotOf):
    _kind.model_rebuild()


def walked(condition: Condition, path: Path = ()) -> Iterator[tuple[Path, Condition]]:
    """Every condition of the tree with its path, the outer before the inner."""
    yield path, condition
    if isinstance(condition, NotOf):
        yield from walked(condition.condition, (*path, "not"))
    elif isinstance(condition, AllOf | AnyOf):
        word = "all" if isinstance(condition, AllOf) else "any"
        for at, part in enumerate(condition.conditions):
            yield from walked(part, (*path, word, at))
