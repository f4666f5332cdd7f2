"""A ledger in plain Python: one event after the other, exact decimals, written from the conventions alone.

Money rules: what a fill is worth at mid belongs to stock or leg, the rest of its cash is cost; a delivery
moves the intrinsic value from the stock to the leg. Quantities are as traded; a split multiplies them.
"""

from __future__ import annotations

from dataclasses import dataclass, field
from decimal import ROUND_HALF_UP, Decimal
from typing import Any

from hedgerow.events.log import EventLog
from hedgerow.kernels import layout as at

ENDINGS = (at.KIND_EXPIRED, at.KIND_EXERCISED, at.KIND_ASSIGNED)


def cents(amount: Decimal) -> Decimal:
    """To the cent, halves away from zero."""
    return amount.quantize(Decimal("0.01"), ROUND_HALF_UP)


def exact(number: Any) -> Decimal:
    """A float as its shortest decimal."""
    return Decimal(repr(float(number)))


@dataclass
class SlowLife:
    """One life of one leg."""

    leg: int
    opened: int
    quantity: float = 0.0
    mid_pnl: Decimal = Decimal(0)
    costs: Decimal = Decimal(0)
    closed: int | None = None
    ended: int | None = None


@dataclass
class SlowPosition:
    """What one position came to."""

    symbol: int
    opened: int
    closed: int | None = None
    stock: Decimal = Decimal(0)
    options: Decimal = Decimal(0)
    dividends: Decimal = Decimal(0)
    interest: Decimal = Decimal(0)
    costs: Decimal = Decimal(0)
    cash: Decimal = Decimal(0)
    shares: float = 0.0
    lives: list[SlowLife] = field(default_factory=list)

    def live(self, leg: int) -> SlowLife:
        """The life of a leg that is going on, a new one when there is none."""
        for life in self.lives:
            if life.leg == leg and life.closed is None:
                return life
        self.lives.append(SlowLife(leg, opened=-1))
        return self.lives[-1]


def slow_ledger(log: EventLog) -> dict[int, SlowPosition]:
    """Every position of a log, by number."""
    book: dict[int, SlowPosition] = {}
    for event in log.events:
        number, kind = int(event["position"]), int(event["kind"])
        if number < 0:
            continue
        if kind == at.KIND_OPENED:
            book[number] = SlowPosition(int(event["symbol"]), int(event["session"]))
            continue
        position = book[number]
        position.cash += exact(event["cash"])
        if kind in (at.KIND_SHARES, at.KIND_LEG, *ENDINGS):
            _trade(log, position, event)
        elif kind == at.KIND_DIVIDEND:
            position.dividends += exact(event["cash"])
        elif kind in (at.KIND_INTEREST, at.KIND_BORROW):
            position.interest += exact(event["cash"])
        elif kind == at.KIND_SPLIT:
            position.shares *= float(event["quantity"])
            for life in position.lives:
                life.quantity *= float(event["quantity"])
        elif kind == at.KIND_CLOSED:
            position.closed = int(event["session"])
    return book


def _trade(log: EventLog, position: SlowPosition, event: Any) -> None:
    quantity = exact(event["quantity"])
    at_mid = cents(-quantity * exact(event["mid"]))
    cost = at_mid - exact(event["cash"])
    position.costs += cost
    if event["kind"] == at.KIND_SHARES:
        position.stock += at_mid
        position.shares += float(quantity)
        return
    life = position.live(int(event["leg"]))
    if life.opened < 0:
        life.opened = int(event["session"])
    position.options += at_mid
    life.mid_pnl += at_mid
    life.costs += cost
    life.quantity += float(quantity)
    if event["kind"] in (at.KIND_EXERCISED, at.KIND_ASSIGNED) and event["price"] == 0:
        worth = exact(event["spot"]) - exact(event["strike"])
        if log.meta.legs[int(event["leg"])].right == "put":
            worth = -worth
        moved = cents(-quantity * worth)
        position.options += moved
        life.mid_pnl += moved
        position.stock -= moved
    if abs(life.quantity) < 1e-6:
        life.closed, life.ended = int(event["session"]), int(event["kind"])
