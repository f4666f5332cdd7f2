"""Positions held as the walk keeps them: records made from a person's words."""

from __future__ import annotations

import datetime as dt
from dataclasses import dataclass
from typing import Any

import numpy as np

from hedgerow.desk.close import Close, State, fresh, probed
from hedgerow.desk.positions import HeldWords, PositionsWords
from hedgerow.kernels.layout import CALL, LOT_SHARES, PUT, Records
from hedgerow.kernels.state import LIVE, NONE, WANTED
from hedgerow.kernels.state import OPEN as HELD_SLOT
from hedgerow.rules.legs import Leg
from hedgerow.rules.schema import Strategy

__all__ = ["Book", "book_of"]


@dataclass(frozen=True, eq=False)
class Book:
    """What an account holds: its words in the order of the day of opening, its state, what is found of it.

    `seen` (P,) are the positions valued at the close, nothing being decided, and `found` (P,) PROBED.
    """

    words: tuple[HeldWords, ...]
    state: State
    seen: Records
    found: Records
    equity: float


def book_of(words: PositionsWords, close: Close, strategy: Strategy) -> Book:
    """Put positions into the walk's records and value them at the close."""
    from hedgerow.kernels.probe import HELD

    held = tuple(sorted(words.positions, key=lambda one: (one.opened, one.symbol)))
    records = fresh(len(held))
    for record, one in zip(records, held, strict=True):
        _write(record, one, close, strategy)
    seen = records.copy().view(np.recarray)
    found = probed(close.world(), close.rows - 1, seen, HELD)
    for record, one, figures in zip(records, held, found, strict=True):
        _measure(record, one, figures)
    for name in ("best_gain", "worst_loss", "stake", "reserve"):
        seen[name] = records[name]
    worth = seen["shares"] * seen["last_close"] + (seen["legs"]["quantity"] * seen["legs"]["mid"]).sum(axis=1)
    state = State(words.cash, records, _lost(words, close))
    return Book(held, state, seen, found, words.cash + float(worth.sum()))


def _lost(words: PositionsWords, close: Close) -> dict[int, int]:
    """Sessions since the last losing position of each column ended."""
    market, found = close.bench.market, {}
    for one in sorted(words.lost, key=lambda lost: lost.closed):
        found[market.index_of(one.symbol)] = close.session - _session(one.closed, close)
    return found


def _session(day: str, close: Close) -> int:
    """The session of an ISO date that is one."""
    return int(np.searchsorted(close.bench.market.ordinals, dt.date.fromisoformat(day).toordinal()))


def _write(record: Any, held: HeldWords, close: Close, strategy: Strategy) -> None:
    """Fill one position's record: sessions are counted back from the one looked at, which is the last row."""
    market, last = close.bench.market, close.rows - 1
    symbol, plan = market.index_of(held.symbol), close.program.plan[0]
    sign = -1.0 if float(plan["shares"]) < 0.0 else 1.0
    record.symbol, record.status = symbol, HELD_SLOT
    record.shares = sign * held.shares
    record.lots = held.shares / LOT_SHARES if held.shares else _lots(held, strategy)
    record.stock_price = held.stock_price or float(market.close[_session(held.opened, close), symbol])
    record.entered = last - (close.session - _session(held.opened, close))
    record.decided = record.entered - int(strategy.fill == "open")
    record.stop_from = last + 1  # what rested today is held still
    record.last_close = float(market.close[int(market.last_bar[symbol]), symbol])
    record.silent = close.session - int(market.last_bar[symbol]) - 1
    record.silent = max(int(record.silent), 0)
    record.left = -1
    outlay = record.shares * record.stock_price if held.shares else 0.0
    for number, leg in enumerate(strategy.legs):
        outlay += _write_leg(record.legs[number], leg, held, record.lots)
    record.outlay = outlay - held.premiums
    record.flows = held.income - record.outlay
    live = [int(leg.expiry) for leg in record.legs if leg.quantity != 0.0]
    record.soonest = min(live, default=0)


def _lots(held: HeldWords, strategy: Strategy) -> float:
    """The lots of a position without shares: its contracts over the rule's ratio."""
    lots = [
        (one.contracts or 0.0) / strategy.leg(name).ratio for name, one in held.legs.items() if one.contracts
    ]
    return max(lots, default=1.0)


def _write_leg(record: Any, leg: Leg, held: HeldWords, lots: float) -> float:
    """Fill one leg's record; return the money paid for it. One that is left out is not held."""
    record.right = CALL if leg.right == "call" else PUT
    one = held.legs.get(leg.name)
    if one is None:
        again = leg.roll is not None and leg.roll.at_expiry and leg.add_when is None
        record.status = WANTED if again else NONE
        return 0.0
    contracts = one.contracts if one.contracts is not None else leg.ratio * lots
    record.quantity = leg.sign * contracts * LOT_SHARES
    record.strike, record.expiry = one.strike, dt.date.fromisoformat(one.expiry).toordinal()
    record.entry_price = record.mid = one.mid if one.mid is not None else one.price
    record.status = LIVE
    return float(record.quantity) * one.price


def _measure(record: Any, held: HeldWords, found: Any) -> None:
    """Write what exits are measured by: as given, or as it is from here."""

    def known(given: float | None, worked_out: float) -> float:
        if given is not None:
            return given
        return 0.0 if np.isnan(worked_out) else float(worked_out)

    record.reserve = 0.0 if np.isnan(found.owed) or np.isinf(found.owed) else found.owed
    record.best_gain = known(held.best_gain, float(found.best))
    record.worst_loss = known(held.worst_loss, float(found.worst))
    record.stake = known(held.tied_up, float(found.stake))
