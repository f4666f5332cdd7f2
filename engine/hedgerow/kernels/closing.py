"""The close of one open position: expiries, exit rules, rolls, legs added later."""

from __future__ import annotations

from typing import Any

from hedgerow.kernels.holding import close_clock, decline_leg, leave, move_legs, settle_expired
from hedgerow.kernels.jit import step
from hedgerow.kernels.layout import (
    KIND_SIGNALLED,
    ROLL_DOWN,
    ROLL_DOWN_AND_OUT,
    ROLL_OUT,
    ROLL_UP,
    ROLL_UP_AND_OUT,
    WHY_ADDED,
    WHY_EXIT_RULE,
    WHY_ROLL,
)
from hedgerow.kernels.state import ADDING, LIVE, MOVING, NONE, OPEN, WANTED, Clock, Desk, Scene
from hedgerow.kernels.structure import find_strike, leg_price, price_leg
from hedgerow.kernels.trades import write
from hedgerow.kernels.triggers import holds

__all__ = ["at_close"]


@step
def _value(desk: Desk, position: Any, bar: Any, clock: Clock) -> float:
    """Price every leg held at this close; return the position's gain so far."""
    gain = position.flows + position.shares * bar.close
    for k in range(desk.plan.legs):
        leg = position.legs[k]
        if leg.quantity != 0.0:
            price_leg(leg, bar.close, bar, clock, desk.smile)
            gain += leg.quantity * leg.mid
    return gain


@step
def exit_reason(desk: Desk, position: Any, scene: Scene, word: int) -> int:
    """The code of the first exit rule that holds, in the order of the file; 0 when none does."""
    plan = desk.plan
    moment = (scene.session, scene.today.ordinal)
    for rule in range(plan.exits):
        start = plan.exit_start[rule]
        stop = start + plan.exit_length[rule]
        if holds(desk.ops[start:stop], position, position.legs, plan.legs, moment, word):
            return WHY_EXIT_RULE + rule
    return 0


@step
def _new_terms(desk: Desk, position: Any, scene: Scene, number: int, clock: Clock) -> bool:
    """Choose expiry and strike for a leg to be written or bought again; whether they are listed."""
    spec, leg, bar = desk.plan.specs[number], position.legs[number], scene.bar
    expiry = scene.today.expiry[number]
    if spec.with_leg >= 0 and position.legs[spec.with_leg].quantity != 0.0:
        expiry = position.legs[spec.with_leg].expiry
    leg.wanted_strike = 0.0
    if expiry <= clock.ordinal:
        return False
    leg.wanted_strike = find_strike(desk, position, number, expiry, bar.close, bar, clock)
    leg.wanted_expiry = expiry
    return leg.wanted_strike > 0.0


@step
def _brings_money(desk: Desk, position: Any, number: int, bar: Any, clock: Clock) -> bool:
    """Whether rolling a leg brings in more than leaving it costs; the leg itself is left as it was."""
    leg = position.legs[number]
    strike, expiry = leg.strike, leg.expiry
    leaving = -leg.quantity * leg_price(leg, -leg.quantity, clock, desk.costs)
    leg.strike, leg.expiry = leg.wanted_strike, leg.wanted_expiry
    price_leg(leg, bar.close, bar, clock, desk.smile)
    entering = leg.quantity * leg_price(leg, leg.quantity, clock, desk.costs)
    leg.strike, leg.expiry = strike, expiry
    price_leg(leg, bar.close, bar, clock, desk.smile)
    return leaving + entering < 0.0


@step
def _wants_move(desk: Desk, position: Any, scene: Scene, number: int, word: int) -> bool:
    """Whether a leg's own roll condition holds, or its condition for being added."""
    spec = desk.plan.specs[number]
    start, length = spec.roll_start, spec.roll_length
    if position.legs[number].status == NONE:
        start, length = spec.add_start, spec.add_length
    if length == 0:
        return False
    moment = (scene.session, scene.today.ordinal)
    return holds(desk.ops[start : start + length], position, position.legs, desk.plan.legs, moment, word)


@step
def _wrong_way(leg: Any, way: int) -> bool:
    """Whether the terms wanted for a live leg lie another way than its rule allows it to be rolled."""
    up, out = leg.wanted_strike > leg.strike, leg.wanted_expiry > leg.expiry
    down = leg.wanted_strike < leg.strike
    if way in (ROLL_UP, ROLL_UP_AND_OUT):
        return not up or (way == ROLL_UP_AND_OUT and not out)
    if way in (ROLL_DOWN, ROLL_DOWN_AND_OUT):
        return not down or (way == ROLL_DOWN_AND_OUT and not out)
    return way == ROLL_OUT and not out


@step
def _may_move(desk: Desk, position: Any, number: int, bar: Any, clock: Clock) -> bool:
    """Whether a live leg may be rolled to the terms wanted: other than its own, the right way, for money."""
    leg, spec = position.legs[number], desk.plan.specs[number]
    if leg.wanted_strike == leg.strike and leg.wanted_expiry == leg.expiry:
        return False
    if _wrong_way(leg, spec.roll_way):
        return False
    return spec.roll_credit == 0 or _brings_money(desk, position, number, bar, clock)


@step
def _finds_bid(desk: Desk, position: Any, scene: Scene, number: int, clock: Clock) -> bool:
    """Whether somebody pays for the leg wanted, if it is to be sold; the log says when nobody does."""
    leg, spec, bar = position.legs[number], desk.plan.specs[number], scene.bar
    if spec.side > 0.0:
        return True
    strike, expiry = leg.strike, leg.expiry
    leg.right, leg.strike, leg.expiry = spec.right, leg.wanted_strike, leg.wanted_expiry
    price_leg(leg, bar.close, bar, clock, desk.smile)
    bid = leg_price(leg, -1.0, clock, desk.costs) > 0.0
    leg.strike, leg.expiry = strike, expiry
    if leg.quantity != 0.0:
        price_leg(leg, bar.close, bar, clock, desk.smile)
    else:
        leg.mid = 0.0
    if not bid:
        decline_leg(desk, position, scene.session, number, bar.close)
    return bid


@step
def _note_order(desk: Desk, position: Any, scene: Scene, number: int, reason: int) -> None:
    """Write that a leg is to be rolled or added."""
    leg = position.legs[number]
    row = write(desk, scene.session, position.symbol, position.position, KIND_SIGNALLED, reason)
    row.leg = number
    row.strike = leg.wanted_strike
    row.expiry = leg.wanted_expiry
    row.spot = scene.bar.close
    position.orders += 1


@step
def order_legs(desk: Desk, position: Any, scene: Scene, clock: Clock, word: int) -> None:
    """Choose the legs to be rolled, written again after expiry, or added; they fill with the next orders."""
    for place in range(desk.plan.legs):
        k = desk.plan.order[place]
        leg = position.legs[k]
        again = leg.status == WANTED and leg.quantity == 0.0
        if not again and not _wants_move(desk, position, scene, k, word):
            continue
        if not _new_terms(desk, position, scene, k, clock):
            continue
        may = leg.status != LIVE or _may_move(desk, position, k, scene.bar, clock)
        if not may or not _finds_bid(desk, position, scene, k, clock):
            leg.wanted_strike = 0.0
            continue
        if leg.status == LIVE:
            leg.status = MOVING
        else:
            leg.status = WANTED if again else ADDING
        _note_order(desk, position, scene, k, WHY_ADDED if leg.status == ADDING else WHY_ROLL)


@step
def _ask_exits(desk: Desk, position: Any, scene: Scene, word: int) -> None:
    """Order the position to be closed when an exit rule holds."""
    reason = exit_reason(desk, position, scene, word)
    if reason != 0:
        row = write(desk, scene.session, position.symbol, position.position, KIND_SIGNALLED, reason)
        row.spot = scene.bar.close
        position.closing = reason


@step
def at_close(desk: Desk, position: Any, scene: Scene, word: int) -> None:
    """Everything that happens to one open position at the close of a session with a bar."""
    plan, bar = desk.plan, scene.bar
    position.last_close = bar.close
    position.silent = 0
    if position.soonest != 0 and position.soonest <= scene.today.ordinal:
        settle_expired(desk, position, scene, bar.close, scene.today.ordinal)
        if position.status != OPEN:
            return
    clock = close_clock(scene)
    position.gain = _value(desk, position, bar, clock)
    if position.closing == 0 and plan.exits > 0:
        _ask_exits(desk, position, scene, word)
    if position.closing == 0:
        if plan.moves == 1:
            order_legs(desk, position, scene, clock, word)
            if plan.fill_close == 1 and position.orders > 0:
                move_legs(desk, position, scene.session, bar.close, bar, clock)
    elif plan.fill_close == 1:
        leave(desk, position, scene.session, position.closing, bar.close, bar, clock)
