"""What is done to a position as a whole: leaving it, settling its legs, moving them, measuring it again."""

from __future__ import annotations

from typing import Any

from hedgerow.kernels.entry import take_stock
from hedgerow.kernels.jit import step
from hedgerow.kernels.layout import (
    KIND_DECLINED,
    LOT_SHARES,
    MARGIN_CASH,
    WHY_ADDED,
    WHY_EXPIRY,
    WHY_LEFT_OVER,
    WHY_NO_BID,
    WHY_ROLL,
)
from hedgerow.kernels.listing import fill_price
from hedgerow.kernels.payoff import first_expiry, measure
from hedgerow.kernels.quote import quote
from hedgerow.kernels.state import ADDING, LIVE, MOVING, NONE, WANTED, Clock, Desk, Scene
from hedgerow.kernels.structure import price_leg
from hedgerow.kernels.trades import close_position, settle_leg, trade_leg, trade_shares, write

__all__ = [
    "after_delivery",
    "close_clock",
    "decline_leg",
    "leave",
    "move_legs",
    "open_clock",
    "restate",
    "settle_expired",
]

OPEN_TO_CLOSE_DAYS = 6.5 / 24.0


@step
def open_clock(scene: Scene) -> Clock:
    """The open of today: yesterday's rate, six and a half hours still to go."""
    today = scene.today
    rate = scene.yesterday.rate
    ticks, split = (today.low_tick, today.high_tick), scene.bar.split
    return Clock(today.ordinal, OPEN_TO_CLOSE_DAYS, rate, scene.american, ticks[0], ticks[1], split)


@step
def close_clock(scene: Scene) -> Clock:
    """The close of today."""
    today = scene.today
    return Clock(today.ordinal, 0.0, today.rate, scene.american, today.low_tick, today.high_tick, 1.0)


@step
def leave(desk: Desk, position: Any, session: int, reason: int, price: float, bar: Any, clock: Clock) -> None:
    """Close every leg at its value for the stock at `price`, then the shares, and end the position."""
    for k in range(desk.plan.legs):
        leg = position.legs[k]
        if leg.quantity != 0.0:
            price_leg(leg, price, bar, clock, desk.smile)
            trade_leg(desk, position, k, session, reason, -leg.quantity, clock, price)
        leg.status = NONE
    if position.shares != 0.0:
        trade_shares(desk, position, session, reason, -position.shares, price)
    close_position(desk, position, session, reason)


@step
def after_delivery(desk: Desk, position: Any, session: int, reason: int) -> None:
    """The shares are gone: end the position, or order what is left of it to be closed."""
    left = 0
    for k in range(desk.plan.legs):
        leg = position.legs[k]
        if leg.quantity != 0.0:
            left += 1
        else:
            leg.status = NONE
    position.orders = 0
    if left == 0:
        close_position(desk, position, session, reason)
    elif position.closing == 0:
        position.closing = WHY_LEFT_OVER


@step
def restate(desk: Desk, position: Any, spot: float, bar: Any, clock: Clock) -> None:
    """Work out best gain, worst loss, reserve and nearest expiry again after legs have changed."""
    count = desk.plan.legs
    horizon = first_expiry(position.legs, count)
    moment = (spot, bar, clock, desk.smile)
    figures = measure(position.legs, count, position.shares, position.outlay, horizon, moment, desk.scratch)
    position.best_gain = figures[0]
    position.worst_loss = figures[1]
    if desk.plan.margin == MARGIN_CASH:
        desk.totals.reserved += figures[5] - position.reserve
        position.reserve = figures[5]
    take_stock(position, count)


@step
def settle_expired(desk: Desk, position: Any, scene: Scene, close: float, last: int) -> None:
    """Settle every leg that expires on or before the ordinal `last`, and end what ends with it."""
    plan, session = desk.plan, scene.session
    held = position.shares
    again, live = 0, 0
    for k in range(plan.legs):
        leg = position.legs[k]
        if leg.quantity != 0.0 and leg.expiry <= last:
            least, before = scene.today.exercise_threshold, position.shares
            settle_leg(desk, position, k, session, WHY_EXPIRY, close, least, scene.american == 1)
            if plan.specs[k].roll_at_expiry == 1 and position.shares == before:  # nothing was delivered
                leg.status = WANTED
                leg.wanted_strike = 0.0
        again += 1 if leg.status in (WANTED, ADDING) else 0
        live += 1 if leg.quantity != 0.0 else 0
    take_stock(position, plan.legs)
    if held != 0.0 and position.shares == 0.0:
        after_delivery(desk, position, session, WHY_EXPIRY)
    elif live == 0 and again == 0 and not (plan.keep_shares == 1 and position.shares > 0.0):
        if position.shares != 0.0:
            trade_shares(desk, position, session, WHY_EXPIRY, -position.shares, close)
        close_position(desk, position, session, WHY_EXPIRY)
    else:
        bar = scene.before if last < scene.today.ordinal else scene.bar
        restate(desk, position, close, bar, close_clock(scene))


@step
def units(position: Any, plan: Any) -> float:
    """Shares' worth of one contract per 100 shares: the shares held, or the lots where there are none."""
    return abs(position.shares) if plan.shares != 0.0 or position.shares > 0.0 else position.lots * LOT_SHARES


@step
def decline_leg(desk: Desk, position: Any, session: int, number: int, spot: float) -> None:
    """Write that a leg was not rolled or added, since nobody would pay for it; what is held is left."""
    leg = position.legs[number]
    row = write(desk, session, position.symbol, position.position, KIND_DECLINED, WHY_NO_BID)
    row.leg = number
    row.quantity = 1.0
    row.strike = leg.wanted_strike
    row.expiry = leg.wanted_expiry
    row.spot = spot


@step
def _lost_its_bid(
    desk: Desk, position: Any, session: int, number: int, spot: float, bar: Any, clock: Clock
) -> bool:
    """Whether a leg that is to be sold finds no bid at this moment; its order is then taken back."""
    leg, spec = position.legs[number], desk.plan.specs[number]
    if spec.side > 0.0:
        return False
    mid, _, away = quote(spec.right, leg.wanted_strike, leg.wanted_expiry, spot, bar, clock, desk.smile)
    if fill_price(-1.0, mid, away, clock.low_tick, clock.high_tick, desk.costs) > 0.0:
        return False
    decline_leg(desk, position, session, number, spot)
    leg.wanted_strike = 0.0
    if leg.status == MOVING:
        leg.status = LIVE
    elif leg.status == ADDING:
        leg.status = NONE
    return True


@step
def move_legs(desk: Desk, position: Any, session: int, spot: float, bar: Any, clock: Clock) -> None:
    """Fill the leg orders of a position: buy back what is rolled, then write or buy what is wanted."""
    for k in range(desk.plan.legs):
        leg, spec = position.legs[k], desk.plan.specs[k]
        if leg.wanted_strike <= 0.0 or leg.status not in (WANTED, ADDING, MOVING):
            continue
        if _lost_its_bid(desk, position, session, k, spot, bar, clock):
            continue
        reason = WHY_ADDED if leg.status == ADDING else WHY_ROLL
        if leg.quantity != 0.0:
            price_leg(leg, spot, bar, clock, desk.smile)
            trade_leg(desk, position, k, session, reason, -leg.quantity, clock, spot)
        leg.right = spec.right
        leg.strike = leg.wanted_strike
        leg.expiry = leg.wanted_expiry
        price_leg(leg, spot, bar, clock, desk.smile)
        wanted = spec.side * spec.ratio * units(position, desk.plan)
        trade_leg(desk, position, k, session, reason, wanted, clock, spot)
        leg.entry_price = leg.mid
        leg.wanted_strike = 0.0
    position.orders = 0
    restate(desk, position, spot, bar, clock)
