"""Every cent of a log put under its heading, and quantities in the units of the day a position was opened.

The headings of a position are its stock, each leg, dividends, interest and costs. Stock and legs are
counted at mid; what a fill was worse than mid, and every fee, is a cost. Where options are delivered,
shares change hands at the strike: the intrinsic value (spot - strike for a call, strike - spot for a put)
is moved from the stock to the leg, as if the leg had been sold at intrinsic value and the shares had moved
at spot. All amounts are whole cents in int64 and a cost is what remains of the cash, so sums are exact by
construction.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from hedgerow.events.log import EventLog
from hedgerow.kernels import layout as at
from hedgerow.ledger.marks import rows_of
from hedgerow.units import to_cents

__all__ = [
    "ACCOUNT",
    "COSTS",
    "DIVIDENDS",
    "HEADINGS",
    "INTEREST",
    "LEG",
    "QUANTITY_TOLERANCE",
    "STOCK",
    "Postings",
    "post",
]

Ints = NDArray[np.int64]
Floats = NDArray[np.float64]

STOCK, LEG, DIVIDENDS, INTEREST, COSTS, ACCOUNT = 0, 1, 5, 6, 7, 8
"""Headings: stock, legs 1 to 4, dividends, interest (borrow cost too), costs, and deposits."""
HEADINGS = 9

QUANTITY_TOLERANCE = 1e-6
"""Shares below which a quantity counts as nothing (it only meets rounding of fractional splits)."""

_NO_HEADING = -1


@dataclass(frozen=True, eq=False)
class Postings:
    """The amounts of a log; E events, P positions (rows of the table of terms), A amounts.

    row (E,): the event's position as a row of terms, -1 of the account. scale (E,): shares at the event for
    one share when the position was opened. event, heading, cents (A,): amounts in cents, positive earns.
    opened, closed (P,): index of the event, -1 none.
    """

    log: EventLog
    row: Ints
    scale: Floats
    event: Ints
    heading: Ints
    cents: Ints
    opened: Ints
    closed: Ints

    def by_position(self) -> Ints:
        """Return cents (P, HEADINGS) of every position under every heading."""
        rows = self.row[self.event]
        held = rows >= 0
        cells = rows[held] * HEADINGS + self.heading[held]
        return _sums(cells, self.cents[held], self.log.terms.size * HEADINGS).reshape(-1, HEADINGS)

    def by_day(self) -> Ints:
        """Return cents (T, HEADINGS) posted in every session of the table of days, the account's too."""
        sessions = self.log.days["session"].astype(np.int64)
        rank = np.searchsorted(sessions, self.log.events["session"][self.event])
        cells = np.minimum(rank, max(sessions.size - 1, 0)) * HEADINGS + self.heading
        return _sums(cells, self.cents, sessions.size * HEADINGS).reshape(-1, HEADINGS)

    def entry_spread(self) -> Ints:
        """Return cents (P,) by which the fills at entry were worse than mid, fees left out."""
        events = self.log.events
        entry = np.flatnonzero((events["reason"] == at.WHY_ENTRY) & (self.row >= 0) & is_trade(self.log))
        some = events[entry]
        worse = to_cents(some["quantity"] * (some["price"] - some["mid"]))
        return _sums(self.row[entry], worse, self.log.terms.size)

    def first_units(self) -> Floats:
        """Return the quantity (E,) of every event in shares of the day the position was opened."""
        return np.asarray(self.log.events["quantity"] / self.scale)


def post(log: EventLog) -> Postings:
    """Return the postings of a log. Events of a position without terms are left to `reconcile` to name."""
    row = rows_of(log.terms["position"], log.events["position"])
    cash = to_cents(log.events["cash"])
    heading = _headings(log)
    gross = np.where(is_trade(log), to_cents(-log.events["quantity"] * log.events["mid"]), cash)
    cost = cash - gross
    moved, legs, stock = _deliveries(log, row)
    parts = [
        (np.flatnonzero(heading >= 0), heading, gross),
        (np.flatnonzero(cost), np.full(cash.size, COSTS), cost),
    ]
    event = np.concatenate([index for index, _, _ in parts] + [moved, moved])
    return Postings(
        log=log,
        row=row,
        scale=_scales(log, row),
        event=event,
        heading=np.concatenate(
            [where[index] for index, where, _ in parts] + [legs, np.full(moved.size, STOCK)]
        ),
        cents=np.concatenate([amount[index] for index, _, amount in parts] + [stock, -stock]),
        opened=_index_of(log, row, at.KIND_OPENED),
        closed=_index_of(log, row, at.KIND_CLOSED),
    )


def is_trade(log: EventLog) -> NDArray[np.bool_]:
    """Whether each event (E,) changes a quantity of shares or of a leg."""
    kind = log.events["kind"]
    return np.asarray(
        (kind == at.KIND_SHARES)
        | (kind == at.KIND_LEG)
        | (kind == at.KIND_EXPIRED)
        | (kind == at.KIND_EXERCISED)
        | (kind == at.KIND_ASSIGNED)
    )


def is_delivery(log: EventLog) -> NDArray[np.bool_]:
    """Whether each event (E,) is an exercise or assignment whose shares change hands at the strike."""
    events = log.events
    ends = (events["kind"] == at.KIND_EXERCISED) | (events["kind"] == at.KIND_ASSIGNED)
    return np.asarray(ends & (events["price"] == 0.0) & (events["mid"] == 0.0))


def intrinsic(log: EventLog, index: Ints) -> Floats:
    """Return the intrinsic value per share at events of legs; negative when exercised out of the money."""
    some = log.events[index]
    puts = np.array([leg.right == "put" for leg in log.meta.legs], dtype=bool)
    above = some["spot"] - some["strike"]
    return np.asarray(np.where(puts[some["leg"]], -above, above))


def _sums(cells: Ints, cents: Ints, size: int) -> Ints:
    """Sum cents by cell; floats carry whole cents exactly up to 2^53."""
    return np.asarray(np.bincount(cells, weights=cents.astype(np.float64), minlength=size)).astype(np.int64)


def _headings(log: EventLog) -> Ints:
    kind, leg = log.events["kind"], log.events["leg"].astype(np.int64)
    heading = np.full(kind.size, _NO_HEADING, dtype=np.int64)
    heading[is_trade(log)] = STOCK
    on_leg = is_trade(log) & (kind != at.KIND_SHARES) & (leg >= 0)
    heading[on_leg] = LEG + leg[on_leg]
    for code, where in (
        (at.KIND_DIVIDEND, DIVIDENDS),
        (at.KIND_INTEREST, INTEREST),
        (at.KIND_BORROW, INTEREST),
        (at.KIND_DEPOSIT, ACCOUNT),
    ):
        heading[kind == code] = where
    return heading


def _deliveries(log: EventLog, row: Ints) -> tuple[Ints, Ints, Ints]:
    """Return events of delivery, the heading of their leg and the cents that move to it from the stock."""
    moved = np.flatnonzero(is_delivery(log) & (row >= 0) & (log.events["leg"] >= 0))
    some = log.events[moved]
    return moved, LEG + some["leg"].astype(np.int64), to_cents(-some["quantity"] * intrinsic(log, moved))


def _scales(log: EventLog, row: Ints) -> Floats:
    scale = np.ones(row.size)
    splits = np.flatnonzero((log.events["kind"] == at.KIND_SPLIT) & (row >= 0))
    if splits.size:
        order = np.argsort(row, kind="stable")
        ends = np.searchsorted(row[order], row[splits], side="right")
        starts = np.searchsorted(row[order], row[splits], side="left")
        for split, start, end in zip(splits, starts, ends, strict=True):
            own = order[start:end]
            scale[own[own > split]] *= log.events["quantity"][split]
    return scale


def _index_of(log: EventLog, row: Ints, kind: int) -> Ints:
    index = np.full(log.terms.size, -1, dtype=np.int64)
    found = np.flatnonzero((log.events["kind"] == kind) & (row >= 0))
    index[row[found]] = found
    return index
