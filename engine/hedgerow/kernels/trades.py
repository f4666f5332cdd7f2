"""Money and quantities: the only functions that change cash, shares and legs, each with its event."""

from __future__ import annotations

import math
from typing import Any

from hedgerow.kernels.jit import step
from hedgerow.kernels.layout import (
    CALL,
    KIND_ASSIGNED,
    KIND_CLOSED,
    KIND_EXERCISED,
    KIND_EXPIRED,
    KIND_LEG,
    KIND_SHARES,
    LOT_SHARES,
    NO_ROW,
    SHARES_ROW,
)
from hedgerow.kernels.listing import fill_price
from hedgerow.kernels.lognormal import intrinsic
from hedgerow.kernels.state import FLAT, LIVE, NONE, Clock, Desk

__all__ = [
    "cents",
    "close_position",
    "deliver",
    "post",
    "settle_leg",
    "share_price",
    "trade_leg",
    "trade_shares",
    "write",
]


@step
def cents(money: float) -> float:
    """Money in whole cents, halves away from zero."""
    size = math.floor(abs(money) * 100.0 + 0.5) / 100.0
    return size if money >= 0.0 else -size


@step
def write(desk: Desk, session: int, symbol: int, position: int, kind: int, reason: int) -> Any:
    """A fresh event of no quantity and no money, about neither shares nor a leg."""
    row = desk.events[desk.totals.events]
    desk.totals.events += 1
    row.session = session
    row.symbol = symbol
    row.position = position
    row.kind = kind
    row.leg = NO_ROW
    row.reason = reason
    row.expiry = 0
    row.quantity = 0.0
    row.price = 0.0
    row.mid = 0.0
    row.fee = 0.0
    row.cash = 0.0
    row.strike = 0.0
    row.spot = 0.0
    row.volatility = 0.0
    return row


@step
def post(desk: Desk, row: Any, cash: float) -> float:
    """Give the account whole cents and write them on the event; return them."""
    money = cents(cash)
    row.cash = money
    desk.totals.cash = cents(desk.totals.cash + money)
    return money


@step
def share_price(quantity: float, mid: float, costs: Any) -> float:
    """What a share costs (quantity > 0) or brings after slippage."""
    return mid * (1.0 + costs.slippage) if quantity > 0.0 else mid * (1.0 - costs.slippage)


@step
def _move(desk: Desk, position: Any, row: Any, quantity: float) -> None:
    """Let shares change hands at the price and fee written on the event."""
    row.leg = SHARES_ROW
    row.quantity = quantity
    position.flows += post(desk, row, -quantity * row.price - row.fee)
    position.outlay += quantity * row.price
    position.shares += quantity


@step
def trade_shares(desk: Desk, position: Any, session: int, reason: int, quantity: float, mid: float) -> None:
    """Buy (quantity > 0) or sell shares around `mid`, with slippage and commission."""
    row = write(desk, session, position.symbol, position.position, KIND_SHARES, reason)
    row.mid = mid
    row.spot = mid
    row.price = share_price(quantity, mid, desk.costs)
    row.fee = desk.costs.share_fee * abs(quantity) + desk.costs.trade_fee
    _move(desk, position, row, quantity)


@step
def deliver(desk: Desk, position: Any, session: int, reason: int, quantity: float, price: float) -> None:
    """Move shares at `price` itself: delivery at a strike, or at the last price of a history that ended."""
    row = write(desk, session, position.symbol, position.position, KIND_SHARES, reason)
    row.mid = price
    row.spot = price
    row.price = price
    _move(desk, position, row, quantity)


@step
def trade_leg(
    desk: Desk,
    position: Any,
    number: int,
    session: int,
    reason: int,
    quantity: float,
    clock: Clock,
    spot: float,
) -> None:
    """Buy or sell `quantity` shares' worth of leg `number` around its own mid; the stock is at `spot`."""
    leg = position.legs[number]
    row = write(desk, session, position.symbol, position.position, KIND_LEG, reason)
    row.leg = number
    row.expiry = leg.expiry
    row.strike = leg.strike
    row.spot = spot
    row.volatility = leg.volatility
    row.quantity = quantity
    row.mid = leg.mid
    row.price = fill_price(quantity, leg.mid, leg.moneyness, clock.low_tick, clock.high_tick, desk.costs)
    if row.price > 0.0:  # a leg without a bid is left to lapse, which costs nothing
        row.fee = desk.costs.contract_fee * abs(quantity) / LOT_SHARES
    position.flows += post(desk, row, -quantity * row.price - row.fee)
    position.outlay += quantity * row.price
    leg.quantity += quantity
    leg.status = LIVE if leg.quantity != 0.0 else NONE


@step
def settle_leg(
    desk: Desk,
    position: Any,
    number: int,
    session: int,
    reason: int,
    spot: float,
    least: float,
    delivers: bool,
) -> None:
    """End a leg at expiry or by early exercise: worthless, delivered at its strike, or paid in cash.

    In the money by `least` or more, at the stock price `spot`, is exercised.
    """
    leg = position.legs[number]
    worth = intrinsic(leg.right, spot, leg.strike)
    taken = worth > 0.0 and worth >= least - 1e-9
    kind = KIND_EXPIRED
    if taken:
        kind = KIND_EXERCISED if leg.quantity > 0.0 else KIND_ASSIGNED
    row = write(desk, session, position.symbol, position.position, kind, reason)
    row.leg = number
    row.expiry = leg.expiry
    row.strike = leg.strike
    row.spot = spot
    row.quantity = -leg.quantity
    if taken:
        row.fee = desk.costs.assignment_fee
        if not delivers:
            row.price = worth
            row.mid = worth
            position.outlay -= leg.quantity * worth
        position.flows += post(desk, row, leg.quantity * row.price - row.fee)
    if taken and delivers:
        moved = leg.quantity if leg.right == CALL else -leg.quantity
        deliver(desk, position, session, reason, moved, leg.strike)
    leg.quantity = 0.0
    leg.status = NONE


@step
def close_position(desk: Desk, position: Any, session: int, reason: int) -> None:
    """Write that a position is over, with its whole result, and free its slot."""
    row = write(desk, session, position.symbol, position.position, KIND_CLOSED, reason)
    row.price = cents(position.flows)
    row.spot = position.last_close
    desk.totals.reserved -= position.reserve
    desk.totals.open -= 1
    position.status = FLAT
    position.closing = 0
    position.orders = 0
    position.reserve = 0.0
    position.shares = 0.0
    position.left = session
    position.lost = 1 if row.price < 0.0 else 0  # in whole cents: dust of sums is no loss
