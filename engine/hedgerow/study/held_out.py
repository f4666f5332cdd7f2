"""The last part of the data, kept aside: a study may look at it once, and every look is written down.

A part that is looked at again and again is no longer kept aside: the best of many looks is chosen by it. The
record lies beside the run folders and counts the looks of every study at the same part of the same prices.
"""

from __future__ import annotations

import json
import os
from dataclasses import asdict, dataclass
from pathlib import Path
from typing import Any

import numpy as np

from hedgerow.errors import PlaceError, StudyError
from hedgerow.market.table import Market
from hedgerow.walk.run import Window

__all__ = ["LOOKS", "Look", "Looks", "parted"]

LOOKS = "held-out-looks.json"
FORMAT = 1


@dataclass(frozen=True, slots=True)
class Look:
    """One look: fingerprints of prices and study, the day the part begins, the study's name and the rule."""

    data: str
    first: str
    study: str
    name: str
    rule: str


@dataclass(frozen=True)
class Looks:
    """The record of looks in a folder of runs."""

    folder: Path

    def read(self) -> list[Look]:
        """Every look so far. Raises PlaceError when the record cannot be read."""
        path = self.folder / LOOKS
        if not path.is_file():
            return []
        try:
            plain: Any = json.loads(path.read_text(encoding="utf-8"))
            return [Look(**look) for look in plain["looks"]]
        except (OSError, ValueError, KeyError, TypeError):
            found = "this record of looks at held-out prices cannot be read"
            remedy = "put it back from a copy, or delete it and say that the count is lost"
            raise PlaceError.one(str(path), "looks", found, remedy=remedy) from None

    def at_part(self, data: str, first: str) -> list[Look]:
        """The looks of all studies at one part of the same prices. Raises PlaceError likewise."""
        return [look for look in self.read() if (look.data, look.first) == (data, first)]

    def may_look(self, study: str, data: str, first: str, again: bool) -> None:
        """Raise StudyError when this very study has looked there before, unless told to look `again`."""
        before = sum(look.study == study for look in self.at_part(data, first))
        if before and not again:
            times = "once" if before == 1 else f"{before} times"
            found = f"this study has looked at the part from {first} on {times} already"
            allowed = "a part that is kept aside says something only at the first look"
            raise StudyError.one(
                "held_out", "second-look", found, allowed, "to look all the same: --look-again"
            )

    def add(self, look: Look) -> None:
        """Write a look down, before it is taken, so that none is free. Raises PlaceError if it cannot be."""
        looks = [*self.read(), look]
        path = self.folder / LOOKS
        text = json.dumps(
            {"format": FORMAT, "looks": [asdict(one) for one in looks]}, indent=1, ensure_ascii=False
        )
        try:
            self.folder.mkdir(parents=True, exist_ok=True)
            part = path.with_name(f".{path.name}.part")
            part.write_text(text + "\n", encoding="utf-8")
            os.replace(part, path)
        except OSError as error:
            found = f"the look could not be written down: {error.strerror or error}"
            raise PlaceError.one(str(path), "looks", found, remedy="so it was not taken") from error


def parted(market: Market, window: Window, first: str) -> tuple[Window, Window]:
    """The window before a day, and the part kept aside from it on. Raises StudyError when either is empty."""
    cut = int(np.searchsorted(market.dates, np.datetime64(first, "D")))
    if not window.start < cut < window.stop:
        span = f"the window is {market.dates[window.start]} to {market.dates[window.stop - 1]}"
        found = f"begins on {first}, which leaves nothing before it or nothing after it"
        raise StudyError.one("held_out.from", "outside", found, span, "name a day inside the window")
    return Window(window.start, cut), Window(cut, window.stop)
