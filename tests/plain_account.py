"""An account worked out again from the event frame alone, in plain Python: cash, shares and legs."""

from __future__ import annotations

from collections import defaultdict
from collections.abc import Iterator
from dataclasses import dataclass, field
from typing import Any

import numpy as np
import pandas as pd

from hedgerow.market.table import Market

ENDINGS = ("expired", "exercised", "assigned")


@dataclass
class PlainLeg:
    """An option held (quantity above 0) or owed, in shares; its strike and expiry as they stand today."""

    quantity: float
    strike: float
    expiry: pd.Timestamp


@dataclass
class PlainPosition:
    """What is held under one number."""

    symbol: str
    shares: float = 0.0
    legs: dict[str, PlainLeg] = field(default_factory=dict)

    def lower_strikes(self, special: float) -> None:
        """Take a special dividend off the strikes."""
        for leg in self.legs.values():
            leg.strike -= special

    def change(self, row: Any) -> None:
        """Let one event of the frame change what is held."""
        if row.kind == "shares":
            self.shares += row.quantity
        elif row.kind == "leg":
            leg = self.legs.setdefault(row.leg, PlainLeg(0.0, row.strike, row.expiry))
            if leg.quantity == 0.0:
                leg.strike, leg.expiry = row.strike, row.expiry
            leg.quantity += row.quantity
        elif row.kind in ENDINGS:
            self.legs[row.leg].quantity += row.quantity
        elif row.kind == "split":
            self.shares *= row.quantity
            for leg in self.legs.values():
                leg.quantity, leg.strike = leg.quantity * row.quantity, leg.strike / row.quantity


@dataclass
class PlainClose:
    """The account at one close."""

    session: int
    cash: float
    positions: dict[int, PlainPosition]
    marks: dict[int, dict[str, Any]]  # what the log says each position's legs are worth

    def stock(self, market: Market) -> float:
        """What the shares held are worth at this close, money."""
        price = dict(zip(market.symbols, market.close[self.session], strict=True))
        return sum(one.shares * price[one.symbol] for one in self.positions.values() if one.shares != 0.0)


def by_session(marks: pd.DataFrame | None, market: Market) -> dict[int, dict[int, dict[str, Any]]]:
    """A ledger's marks by session and position."""
    out: dict[int, dict[int, dict[str, Any]]] = defaultdict(dict)
    if marks is not None:
        sessions = np.searchsorted(market.dates, marks["date"].to_numpy().astype("datetime64[D]"))
        for now, mark in zip(sessions.tolist(), marks.to_dict("records"), strict=True):
            out[now][mark["position"]] = mark
    return out


def plain_closes(
    events: pd.DataFrame, market: Market, marks: pd.DataFrame | None = None
) -> Iterator[PlainClose]:
    """The account at every close from the first event's on; a position is there until its `closed`.

    A special dividend is taken off the strikes in full, which is what is done with large ones; the log has no
    event of its own for that.
    """
    session = np.searchsorted(market.dates, events["date"].to_numpy().astype("datetime64[D]"))
    rows = list(zip(session.tolist(), events.itertuples(), strict=True))
    marked = by_session(marks, market)
    place, cash, held = 0, 0.0, dict[int, PlainPosition]()
    for now in range(rows[0][0], len(market.dates)):
        for position in held.values():
            position.lower_strikes(market.special[now, market.symbols.index(position.symbol)])
        while place < len(rows) and rows[place][0] == now:
            row = rows[place][1]
            cash = round(cash + row.cash, 2)
            if row.kind == "opened":
                held[row.position] = PlainPosition(row.symbol)
            elif row.position in held:
                held[row.position].change(row)
                if row.kind == "closed":
                    del held[row.position]
            place += 1
        yield PlainClose(now, cash, held, marked.get(now, {}))
