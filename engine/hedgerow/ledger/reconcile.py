"""Does a log add up? Every check names the session, symbol, position and amounts of the first miss.

Checked on every run:
 order       sessions never go back; a position is opened once, closed at most once, its events in between
 money       cash of each event follows from quantity, price and fee, and sums to the account's at every close
 quantities  nothing is left when a position or a leg is over; deliveries move shares
 dividends   are paid on the shares held
 results     a closed position's result is the sum of its cash; the net debit is what its entry fills paid
 equity      cash + stock + options at every close; marks sum to stock and options, and hold the right shares
"""

from __future__ import annotations

from typing import Any

import numpy as np
from numpy.typing import NDArray

from hedgerow.events.log import EventLog
from hedgerow.kernels import layout as at
from hedgerow.ledger import faults
from hedgerow.ledger.lives import SLOTS, Holdings, hold
from hedgerow.ledger.marks import LEG_FIELDS, complete, position_rows
from hedgerow.ledger.postings import QUANTITY_TOLERANCE, Postings, is_delivery, is_trade, post
from hedgerow.units import CENTS, to_cents

__all__ = ["reconcile"]

Ints = NDArray[np.int64]
Mask = NDArray[np.bool_]

HALF_CENT = 0.005
RELATIVE = 1e-9
"""Rounding of a double over sums of many amounts, as a share of the amount."""


def reconcile(log: EventLog, postings: Postings | None = None, holdings: Holdings | None = None) -> None:
    """Check a whole log. Raises ReconcileError at the first thing that does not add up."""
    known = postings or post(log)
    _order(known)
    _event_cash(log)
    _account_cash(log)
    held = holdings or hold(known)
    _quantities(known, held)
    _deliveries(known)
    _dividends(known, held)
    _results(known)
    _net_debits(known)
    _equity(log)
    _marks(known, held)


def _order(postings: Postings) -> None:
    log, row = postings.log, postings.row
    session, position = log.events["session"], log.events["position"]
    faults.at_event(
        log, np.concatenate(([False], np.diff(session) < 0)), "the event stands before an earlier session"
    )
    faults.at_event(
        log, ~np.isin(session, log.days["session"]), "the account has no day for the session of this event"
    )
    faults.at_day(
        log, np.concatenate(([False], np.diff(log.days["session"]) <= 0)), "the days are not in order"
    )
    faults.at_event(log, (position >= 0) & (row < 0), "the event belongs to a position that has no terms")
    held = row >= 0
    other = held.copy()
    other[held] = log.events["symbol"][held] != log.terms["symbol"][row[held]]
    faults.at_event(log, other, "the event names another symbol than the terms of its position")
    for kind, least, word in ((at.KIND_OPENED, 1, "opened"), (at.KIND_CLOSED, 0, "closed")):
        times = np.bincount(row[held & (log.events["kind"] == kind)], minlength=log.terms.size)
        faults.at_term(
            log, (times < least) | (times > 1), f"the number of times the position was {word} is", times
        )
    index = np.arange(row.size)
    end = np.where(postings.closed >= 0, postings.closed, row.size)
    money = held & (is_trade(log) | (log.events["cash"] != 0.0))
    outside = money.copy()
    outside[money] = (index[money] < postings.opened[row[money]]) | (index[money] > end[row[money]])
    faults.at_event(log, outside, "the position trades before it is opened or after it is over")


def _event_cash(log: EventLog) -> None:
    events = log.events
    owed = -events["quantity"] * events["price"] - events["fee"]
    owed = np.where(events["kind"] == at.KIND_DIVIDEND, events["quantity"] * events["price"], owed)
    free = np.isin(events["kind"], (at.KIND_DEPOSIT, at.KIND_INTEREST, at.KIND_BORROW))
    owed = np.where(
        free, events["cash"], np.where(is_trade(log) | (events["kind"] == at.KIND_DIVIDEND), owed, 0.0)
    )
    off = _far(events["cash"], owed, HALF_CENT + 1e-7)
    faults.at_event(
        log, off, "the cash of the event is not what quantity, price and fee come to", events["cash"], owed
    )
    whole = np.abs(events["cash"] * CENTS - np.rint(events["cash"] * CENTS)) > 1e-3
    faults.at_event(log, whole, "the cash of the event is not in whole cents", events["cash"])
    # a cost below nothing would be money made by trading
    gain = is_trade(log) & (events["quantity"] * (events["mid"] - events["price"]) > HALF_CENT)
    faults.at_event(log, gain, "the fill is better than the middle price", events["price"], events["mid"])
    faults.at_event(log, events["fee"] < 0, "the fee of the event is below nothing", events["fee"])


def _account_cash(log: EventLog) -> None:
    posted = np.cumsum(to_cents(log.events["cash"]))
    until = np.searchsorted(log.events["session"], log.days["session"], side="right")
    total = np.concatenate(([0], posted))[until] / CENTS
    off = ~(np.abs(log.days["cash"] - total) < HALF_CENT)  # both are whole cents, however much there is
    faults.at_day(log, off, "the cash of the account is not the sum of its postings", log.days["cash"], total)


def _quantities(postings: Postings, held: Holdings) -> None:
    log, left = postings.log, np.abs(held.after) > QUANTITY_TOLERANCE
    closed = postings.closed[held.slot // SLOTS] >= 0
    _held_fault(
        postings, held, held.last_of_slot & closed & left, "a quantity is left when the position is over:"
    )
    ends = np.isin(log.events["kind"][held.event], (at.KIND_EXPIRED, at.KIND_EXERCISED, at.KIND_ASSIGNED))
    _held_fault(postings, held, ends & left, "a quantity of the leg is left after it ended:")
    split = (log.events["kind"] == at.KIND_SPLIT) & ~(log.events["quantity"] > 0)
    faults.at_event(
        log, split, "the ratio of a split must be above nothing, but it is", log.events["quantity"]
    )


def _held_fault(postings: Postings, held: Holdings, wrong: Mask, text: str) -> None:
    if wrong.any():
        mask = np.zeros(postings.log.events.size, dtype=bool)
        amount = np.zeros(postings.log.events.size)
        mask[held.event[wrong]] = True
        amount[held.event[wrong]] = held.after[wrong]
        faults.at_event(postings.log, mask, text, amount)


def _deliveries(postings: Postings) -> None:
    log, events = postings.log, postings.log.events
    index = np.flatnonzero(is_delivery(log))
    if not index.size:
        return
    order = np.argsort(postings.row, kind="stable")
    place = np.empty(order.size, dtype=np.int64)
    place[order] = np.arange(order.size)
    follower = order[np.minimum(place[index] + 1, order.size - 1)]
    puts = np.array([leg.right == "put" for leg in log.meta.legs], dtype=bool)[events["leg"][index]]
    due = np.where(puts, events["quantity"][index], -events["quantity"][index])
    after = events[follower]
    right = (
        (after["kind"] == at.KIND_SHARES)
        & (postings.row[follower] == postings.row[index])
        & (follower > index)
    )
    right &= ~_far(after["quantity"], due, QUANTITY_TOLERANCE)
    right &= ~_far(after["price"], events["strike"][index], 1e-9) & ~_far(after["mid"], after["price"], 1e-9)
    mask = np.zeros(events.size, dtype=bool)
    mask[index[~right]] = True
    faults.at_event(log, mask, "the delivery is not followed by its shares at the strike", events["quantity"])


def _dividends(postings: Postings, held: Holdings) -> None:
    log = postings.log
    index = np.flatnonzero((log.events["kind"] == at.KIND_DIVIDEND) & (postings.row >= 0))
    if index.size:
        shares = np.zeros(log.events.size)
        shares[index] = held.before(postings, index) * postings.scale[index]
        off = np.zeros(log.events.size, dtype=bool)
        off[index] = _far(log.events["quantity"][index], shares[index], QUANTITY_TOLERANCE)
        faults.at_event(log, off, "the dividend is not on the shares held", log.events["quantity"], shares)


def _results(postings: Postings) -> None:
    log = postings.log
    over = np.flatnonzero(postings.closed >= 0)
    held = postings.row >= 0
    cents = np.bincount(
        postings.row[held],
        weights=to_cents(log.events["cash"][held]).astype(np.float64),
        minlength=log.terms.size,
    )
    result = np.full(log.events.size, 0.0)
    result[postings.closed[over]] = cents[over] / CENTS
    said = log.events["price"]
    off = np.zeros(log.events.size, dtype=bool)
    closed = postings.closed[over]
    off[closed] = _far(said[closed], result[closed], HALF_CENT)
    faults.at_event(log, off, "the result of the position is not the sum of its cash", said, result)


def _net_debits(postings: Postings) -> None:
    log = postings.log
    entry = is_trade(log) & (log.events["reason"] == at.WHY_ENTRY) & (postings.row >= 0)
    some, row = log.events[entry], postings.row[entry]
    paid = np.bincount(row, weights=some["quantity"] * some["price"], minlength=log.terms.size)
    trades = np.bincount(row, minlength=log.terms.size)
    said = log.terms["net_debit"]
    off = _far(said, paid, HALF_CENT * (trades + 1))
    faults.at_term(log, off, "the net debit is not what the fills at entry paid before fees:", said, paid)


def _equity(log: EventLog) -> None:
    days = log.days
    total = days["cash"] + days["stock"] + days["options"]
    off = _far(days["equity"], total, HALF_CENT)
    faults.at_day(log, off, "equity is not cash and stock and options", days["equity"], total)


def _marks(postings: Postings, held: Holdings) -> None:
    log = postings.log
    opened = log.events["session"][postings.opened]
    closed = log.events["session"][postings.closed[postings.closed >= 0]]
    sessions = log.days["session"]
    count = np.searchsorted(np.sort(opened), sessions, side="right") - np.searchsorted(
        np.sort(closed), sessions, side="right"
    )
    said = log.days["positions"]
    faults.at_day(log, count != said, "the number of open positions is not opened less closed", said, count)
    rows = position_rows(log)
    faults.at_mark(log, rows < 0, "the mark belongs to a position that has no terms")
    shares = _shares_at(postings, held, rows, log.marks["session"])
    off = _far(log.marks["shares"], shares, QUANTITY_TOLERANCE)
    faults.at_mark(log, off, "the shares marked are not the shares held", log.marks["shares"], shares)
    if complete(log):
        rank = np.searchsorted(sessions, log.marks["session"])
        values = {"stock": log.marks["shares"] * log.marks["spot"]}
        values["options"] = np.sum([log.marks[field] for field in LEG_FIELDS], axis=0)
        for name, value in values.items():
            total = np.bincount(rank, weights=value, minlength=sessions.size)
            off = _far(log.days[name], total, HALF_CENT)
            faults.at_day(
                log, off, f"the marks do not sum to the {name} of the account", log.days[name], total
            )


def _shares_at(
    postings: Postings, held: Holdings, rows: Ints, sessions: NDArray[np.int32]
) -> NDArray[np.float64]:
    """Return the shares (M,) of positions after the last event of sessions, as traded then."""
    log = postings.log
    if not rows.size:
        return np.zeros(0)
    last = np.searchsorted(log.events["session"], sessions, side="right") - 1
    keys = rows * (log.events.size + 1) + last
    shares = np.flatnonzero(held.slot % SLOTS == 0)
    known = (held.slot[shares] // SLOTS) * (log.events.size + 1) + held.event[shares]
    place = np.searchsorted(known, keys, side="right") - 1
    if not known.size:
        return np.zeros(rows.size)
    index = shares[np.maximum(place, 0)]
    right = (place >= 0) & (held.slot[index] // SLOTS == rows)
    return np.where(right, held.after[index] * _scale_at(postings, rows, last), 0.0)


def _scale_at(postings: Postings, rows: Ints, last: Ints) -> NDArray[np.float64]:
    """Return shares now for one share at opening, of positions after given events."""
    size = postings.log.events.size + 1
    order = np.argsort(postings.row, kind="stable")
    keys = postings.row[order] * size + order
    event = order[np.searchsorted(keys, rows * size + last, side="right") - 1]
    split = postings.log.events["kind"][event] == at.KIND_SPLIT
    ratio = np.where(split, postings.log.events["quantity"][event], 1.0)
    return np.asarray(postings.scale[event] * ratio)


def _far(one: NDArray[Any], other: NDArray[Any], tolerance: float | NDArray[Any]) -> Mask:
    """Whether amounts differ by more than the tolerance and rounding; what is not a number is always far."""
    gap = np.abs(one - other)
    return np.asarray(~(gap <= tolerance + RELATIVE * np.maximum(np.abs(one), np.abs(other))))
