"""When a position may be opened and who comes first: conditions, days, ranking, cool-down, ladder."""

from __future__ import annotations

from collections.abc import Mapping
from typing import Annotated, Any, ClassVar, TypeAlias

from pydantic import BeforeValidator, Discriminator, Tag

from hedgerow.rules.base import Words
from hedgerow.rules.condition import Condition
from hedgerow.rules.figures import Whole
from hedgerow.rules.signalwords import SignalValue
from hedgerow.rules.words import Choice, Choices, listed, refuse

__all__ = [
    "CYCLES_ENDED",
    "PERIODS",
    "RANK_FIGURES",
    "CoolDown",
    "Enter",
    "FigureValue",
    "Ladder",
    "On",
    "Rank",
]

WEEKDAYS = ("monday", "tuesday", "wednesday", "thursday", "friday")
PERIODS = ("week", "month", "quarter")
CYCLES_ENDED = ("weekly", "monthly", "quarterly")
RANK_FIGURES = ("odds_of_best", "best_over_worst", "net_credit", "best_gain", "worst_loss")


class On(Words):
    """The sessions at whose close a position may be opened: weekdays, first sessions, or expiries."""

    one_of: ClassVar[tuple[str, ...]] = ("weekday", "first_session_of", "expiry_of")

    weekday: Annotated[tuple[str, ...], Choices(WEEKDAYS)] | None = None
    first_session_of: Annotated[str, Choice(PERIODS)] | None = None
    expiry_of: Annotated[str, Choice(CYCLES_ENDED)] | None = None


class CoolDown(Words):
    """Sessions after a losing position in which none is opened in the same symbol."""

    sessions: Annotated[int, Whole(1, 1000, "sessions")]


class Ladder(Words):
    """Several positions of one symbol at once, opened at least `spacing` sessions apart."""

    positions: Annotated[int, Whole(2, 12, "positions of one symbol")]
    spacing: Annotated[int, Whole(1, 250, "sessions")]


class FigureValue(Words):
    """A figure of the candidate's own structure, as `accept` knows it."""

    figure: Annotated[str, Choice(RANK_FIGURES)]


def _tag(value: Any) -> str:
    """The tag of what ranks: a figure of the structure, or else a signal."""
    figure = "figure" in value and "signal" not in value if isinstance(value, Mapping) else False
    return "<figure>" if figure or isinstance(value, FigureValue) else "<signal>"


def _known(value: Any) -> Any:
    """The value again. Raises WordsError for a mapping that names neither a signal nor a figure."""
    if isinstance(value, Mapping) and not {"signal", "figure", "params"} & set(value):
        refuse(
            "missing", "has neither `signal` nor `figure`", f"allowed: one of {listed(('signal', 'figure'))}"
        )
    return value


RankedBy: TypeAlias = Annotated[
    Annotated[SignalValue, Tag("<signal>")] | Annotated[FigureValue, Tag("<figure>")],
    Discriminator(_tag),
    BeforeValidator(_known),
]


class Rank(Words):
    """Which candidates come first when capital is short: by a signal or a figure, `high` or `low` first."""

    by: RankedBy
    order: Annotated[str, Choice(("high", "low"))] = "high"


class Enter(Words):
    """When a position may be opened; nothing said means at every close at which none is held."""

    when: Condition | None = None
    on: On | None = None
    rank: Rank | None = None
    cool_down: CoolDown | None = None
    ladder: Ladder | None = None
