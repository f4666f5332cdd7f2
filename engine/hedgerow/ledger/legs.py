"""One row for each life of each leg: opened, closed, how it ended, what it earned at mid and what it cost."""

from __future__ import annotations

from typing import Any

import numpy as np
import pandas as pd
from numpy.typing import NDArray

from hedgerow.events.log import EventLog, dates_of, frame_of, words_by_code
from hedgerow.kernels import layout as at
from hedgerow.ledger.lives import SLOTS, Holdings, hold
from hedgerow.ledger.marks import last_values
from hedgerow.ledger.postings import COSTS, LEG, QUANTITY_TOLERANCE, Postings, intrinsic, is_delivery
from hedgerow.units import CENTS, to_cents

__all__ = ["LEG_COLUMNS", "legs_frame"]

Ints = NDArray[np.int64]
Floats = NDArray[np.float64]

LEG_COLUMNS = [
    "variant",
    "symbol",
    "position",
    "leg",
    "life",
    "side",
    "right",
    "strike",
    "expiry",
    "opened",
    "closed",
    "sessions",
    "quantity",
    "price_in",
    "price_out",
    "ended",
    "mid_pnl",
    "costs",
    "pnl",
]


def legs_frame(postings: Postings, holdings: Holdings | None = None) -> pd.DataFrame:
    """Return one row a leg life, in the order of opening, with the columns LEG_COLUMNS.

    life counts from 1 within a leg of a position. quantity is in shares, negative when written; strike,
    prices and quantity are in units of the day the life began, so a split leaves them comparable. price_in
    and price_out are average fills per share; price_out is the intrinsic value for exercise and assignment,
    the mark (mid) while open, NaN when there is no mark. mid_pnl is before costs; pnl = mid_pnl - costs,
    money.
    """
    held = holdings or hold(postings)
    own = np.flatnonzero(held.slot % SLOTS > 0)
    life = held.life[own]
    starts = np.searchsorted(life, np.unique(life), side="left")
    ends = np.searchsorted(life, life[starts], side="right") - 1
    group = np.repeat(np.arange(starts.size), ends - starts + 1)
    frame = _rows(postings, held, own, (starts, ends, group))
    return frame.sort_values(["_first", "position", "leg"], ignore_index=True)[LEG_COLUMNS]


def _rows(postings: Postings, held: Holdings, own: Ints, lives: tuple[Ints, Ints, Ints]) -> pd.DataFrame:
    log, (starts, ends, group) = postings.log, lives
    event, slot = held.event[own], held.slot[own]
    first, last = log.events[event[starts]], log.events[event[ends]]
    row, leg = slot[starts] // SLOTS, slot[starts] % SLOTS - 1
    open_now = np.abs(held.after[own][ends]) >= QUANTITY_TOLERANCE
    opening = _fills(postings, event, group, starts)
    value = np.where(open_now, last_values(log)[row, leg + 1], 0.0)
    closing_price = np.where(
        open_now, value / _held_now(postings, held.after[own][ends], starts, event), opening[2]
    )
    gross, cost = _money(postings, event, group, starts.size)
    mid_pnl = (gross + np.where(open_now, to_cents(np.nan_to_num(value)), 0)) / CENTS
    mid_pnl = np.where(open_now & np.isnan(value), np.nan, mid_pnl)
    session_out = np.where(open_now, log.days["session"][-1] if log.days.size else 0, last["session"])
    dates = log.meta.dates.astype("datetime64[s]")
    closed = dates[last["session"]]
    closed[open_now] = np.datetime64("NaT")
    return frame_of(
        {
            "variant": np.full(starts.size, log.meta.variant, dtype=object),
            "symbol": words_by_code(log.meta.symbols, first["symbol"], 0),
            "position": log.terms["position"][row].astype(np.int64),
            "leg": words_by_code(log.meta.leg_names, leg, 0),
            "life": _numbers(slot[starts]),
            "side": np.where(first["quantity"] < 0, "sold", "bought").astype(object),
            "right": words_by_code([one.right for one in log.meta.legs], leg, 0),
            "strike": np.array(first["strike"]),
            "expiry": dates_of(first["expiry"]),
            "opened": dates[first["session"]],
            "closed": closed,
            "sessions": (session_out - first["session"]).astype(np.int64),
            "quantity": opening[0],
            "price_in": opening[1],
            "price_out": closing_price,
            "ended": np.where(open_now, "open", _endings(log, last)).astype(object),
            "mid_pnl": mid_pnl,
            "costs": cost / CENTS,
            "pnl": mid_pnl - cost / CENTS,
            "_first": event[starts],
        }
    )


def _fills(postings: Postings, event: Ints, group: Ints, starts: Ints) -> tuple[Floats, Floats, Floats]:
    """Return quantity opened, average price of opening and of closing, in units of the life's first day."""
    log = postings.log
    units = postings.scale[event] / postings.scale[event[starts]][group]
    quantity = log.events["quantity"][event] / units
    price = log.events["price"][event] * units
    delivered = is_delivery(log)[event]
    price[delivered] = intrinsic(log, event[delivered]) * units[delivered]
    adds = np.sign(quantity) == np.sign(quantity[starts])[group]
    size, count = np.abs(quantity), starts.size

    def average(chosen: NDArray[np.bool_]) -> Floats:
        weight = np.bincount(group, weights=np.where(chosen, size, 0.0), minlength=count)
        total = np.bincount(group, weights=np.where(chosen, size * price, 0.0), minlength=count)
        return np.asarray(np.divide(total, weight, out=np.full(count, np.nan), where=weight > 0))

    opened = np.bincount(group, weights=np.where(adds, quantity, 0.0), minlength=count)
    return np.asarray(opened, dtype=np.float64), average(adds), average(~adds)


def _held_now(postings: Postings, after: Floats, starts: Ints, event: Ints) -> Floats:
    quantity = after * postings.scale[event[starts]]
    return np.where(np.abs(quantity) < QUANTITY_TOLERANCE, np.nan, quantity)


def _money(postings: Postings, event: Ints, group: Ints, count: int) -> tuple[Floats, Floats]:
    """Return cents (lives,) at mid, and cents of costs as a positive number."""
    life = np.full(postings.log.events.size, -1, dtype=np.int64)
    life[event] = group
    where = life[postings.event]
    on_leg = (postings.heading >= LEG) & (postings.heading < LEG + at.MAX_LEGS) & (where >= 0)
    cost = (postings.heading == COSTS) & (where >= 0)
    gross = np.bincount(where[on_leg], weights=postings.cents[on_leg], minlength=count)
    return np.asarray(gross), np.asarray(
        -np.bincount(where[cost], weights=postings.cents[cost], minlength=count)
    )


def _numbers(slot: Ints) -> Ints:
    """Count the lives of each slot from 1; the slots are sorted."""
    first = np.searchsorted(slot, slot, side="left")
    return np.arange(slot.size) - first + 1


def _endings(log: EventLog, last: Any) -> NDArray[np.object_]:
    kind, early = last["kind"], last["reason"] == at.WHY_ASSIGNED_EARLY
    delivered = (last["price"] == 0.0) & (last["mid"] == 0.0)
    ended = np.where(last["reason"] == at.WHY_ROLL, "rolled", "closed").astype(object)
    ended[kind == at.KIND_EXPIRED] = "expired worthless"
    ended[kind == at.KIND_EXERCISED] = "exercised"
    ended[kind == at.KIND_ASSIGNED] = "assigned"
    ended[(kind == at.KIND_ASSIGNED) & early] = "assigned early"
    taken = (kind == at.KIND_EXERCISED) | (kind == at.KIND_ASSIGNED)
    ended[taken & ~delivered] = "settled in cash"
    return ended
