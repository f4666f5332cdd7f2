"""The four tables of a log while a walk writes them."""

from __future__ import annotations

from typing import Any

import numpy as np

from hedgerow.kernels.layout import DAY, EVENT, MARK, TERMS, Records
from hedgerow.kernels.state import World

__all__ = ["Tables"]

EVENTS_A_SLOT = 40  # as in `kernels.loop`, which is imported only when it is to run
EVENTS_A_SESSION = 3  # of one slot, more than most rules write
TERMS_A_SESSION = 0.3
GROWTH = 1.25
LAYOUTS = {"events": EVENT, "terms": TERMS, "days": DAY, "marks": MARK}


class Tables:
    """Events, terms, days and marks, each written where it stays, so that no record is copied.

    A table begins with more rows than most rules fill, which costs address space and no memory: a system
    gives memory to what is written. One that fills up grows.
    """

    def __init__(self, slots: int, sessions: int, marks: bool) -> None:
        self.room = {"events": slots * EVENTS_A_SLOT + 64, "terms": slots, "days": 1, "marks": slots}
        cells = slots * sessions
        begin = {
            "events": EVENTS_A_SESSION * cells,
            "terms": int(TERMS_A_SESSION * cells),
            "days": sessions,
            "marks": cells if marks else 0,
        }
        self._tables = {
            name: _table(begin[name] + 2 * self.room[name], self.room[name], layout)
            for name, layout in LAYOUTS.items()
        }

    def view(self, name: str) -> Records:
        """A table as the walk takes it: fields are attributes, which uncompiled kernels need."""
        return self._tables[name].view(np.recarray)

    def extend(self, world: World) -> World:
        """Make room in every table for what one session may write, and some more.

        Growing moves a table, so the world given must not be used any more.
        """
        for name, table in self._tables.items():
            least = int(world.totals[0][name]) + self.room[name]
            if table.size < least:
                table.resize(max(least, int(GROWTH * table.size)), refcheck=False)
        return world._replace(
            events=self.view("events"),
            terms=self.view("terms"),
            days=self.view("days"),
            marks=self.view("marks"),
        )

    def cut(self, totals: Any) -> dict[str, Records]:
        """The tables with the rows written and no more."""
        for name, table in self._tables.items():
            table.resize(int(totals[name]), refcheck=False)
        return self._tables


def _table(rows: int, least: int, layout: np.dtype[np.void]) -> Records:
    """A table of so many rows, or of the least that will do where the system does not give that much."""
    try:
        return np.zeros(rows, layout)
    except MemoryError:
        return np.zeros(least, layout)
