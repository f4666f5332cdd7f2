"""Sessions in, events out: the one loop over the calendar and the account's symbols."""

from __future__ import annotations

import math
from typing import Any

from hedgerow.kernels.candidates import list_candidates, sector_is_full
from hedgerow.kernels.closing import at_close
from hedgerow.kernels.day import at_open, off_strikes, overnight, resting_stop, silence
from hedgerow.kernels.entry import consider, decline, drop_order, fill_entry
from hedgerow.kernels.holding import close_clock, open_clock
from hedgerow.kernels.jit import compiled, step
from hedgerow.kernels.layout import (
    DAYS_A_YEAR,
    HAS_BAR,
    KIND_BORROW,
    KIND_INTEREST,
    KIND_MARGIN_CALL,
    KIND_SIGNALLED,
    MARGIN_REGULATION,
    PAYS,
    SPLITS,
    WHY_ENTRY,
    WHY_FULL,
    WHY_LIMIT,
    WHY_MARGIN,
    WHY_NONE,
    Floats,
)
from hedgerow.kernels.margin import requirement
from hedgerow.kernels.state import OPEN, Desk, Scene, World
from hedgerow.kernels.trades import cents, post, write

__all__ = ["EVENTS_A_SLOT", "walk"]

LOAN_SPREAD = 0.015  # a year, over the rate that cash earns: common practice
EVENTS_A_SLOT = 40  # more than one slot can write in one session


@step
def _earn(world: World, desk: Desk, session: int) -> None:
    """Interest on yesterday's cash; the part set aside for a position is that position's."""
    totals, yesterday = desk.totals, world.sessions[session - 1]
    days = world.sessions[session].ordinal - yesterday.ordinal
    growth = math.expm1(yesterday.rate * days / DAYS_A_YEAR)
    free = totals.cash - totals.reserved
    factor = growth
    if free < 0.0:  # a loan on margin
        factor = math.expm1((yesterday.rate + LOAN_SPREAD) * days / DAYS_A_YEAR)
    if cents(free * factor) != 0.0:
        row = write(desk, session, -1, -1, KIND_INTEREST, WHY_NONE)
        row.price = factor
        row.quantity = free
        post(desk, row, free * factor)
    if totals.reserved <= 0.0 or growth == 0.0:
        return
    for slot in range(world.positions.shape[0]):
        position = world.positions[slot]
        if position.status == OPEN and position.reserve > 0.0:
            row = write(desk, session, position.symbol, position.position, KIND_INTEREST, WHY_NONE)
            row.price = growth
            row.quantity = position.reserve
            position.flows += post(desk, row, position.reserve * growth)


@step
def _borrow(world: World, desk: Desk, session: int) -> None:
    """What shares sold short cost to borrow since yesterday's close."""
    days = world.sessions[session].ordinal - world.sessions[session - 1].ordinal
    share = desk.costs.borrow * days / DAYS_A_YEAR
    for slot in range(world.positions.shape[0]):
        position = world.positions[slot]
        if position.status == OPEN and position.shares < 0.0 and share > 0.0:
            row = write(desk, session, position.symbol, position.position, KIND_BORROW, WHY_NONE)
            row.quantity = position.shares
            row.price = share * position.last_close
            row.mid = row.price
            row.spot = position.last_close
            position.flows += post(desk, row, position.shares * row.price)


@step
def _require(world: World, desk: Desk) -> None:
    """Add up the margin that what is held asks for at this close."""
    totals = desk.totals
    totals.required, totals.kept = 0.0, 0.0
    for slot in range(world.positions.shape[0]):
        position = world.positions[slot]
        if position.status == OPEN:
            initial, kept = requirement(position, desk.plan.legs, position.shares, position.last_close)
            totals.required += initial
            totals.kept += kept


@step
def _call(world: World, desk: Desk, session: int) -> None:
    """A maintenance call: the newest positions are ordered closed, until those left are covered by equity.

    What is to be closed anyway counts first. An account that owes more than it has and holds nothing is in
    debt; nobody calls it.
    """
    totals = desk.totals
    short = totals.kept - totals.equity
    if short <= 0.0 or totals.open == 0:
        return
    row = write(desk, session, -1, -1, KIND_MARGIN_CALL, WHY_MARGIN)
    row.price = short
    for slot in range(world.positions.shape[0]):
        position = world.positions[slot]
        if position.status == OPEN and position.closing != 0:
            short -= requirement(position, desk.plan.legs, position.shares, position.last_close)[1]
    while short > 0.0:
        newest = -1
        for slot in range(world.positions.shape[0]):
            position = world.positions[slot]
            newer = newest < 0 or position.position > world.positions[newest].position
            if position.status == OPEN and position.closing == 0 and newer:
                newest = slot
        if newest < 0:
            return
        position = world.positions[newest]
        position.closing = WHY_MARGIN
        short -= requirement(position, desk.plan.legs, position.shares, position.last_close)[1]


@step
def _morning(world: World, desk: Desk, session: int) -> None:
    """Overnight events and closing or leg orders of every open position that has any."""
    ordinal, before = world.sessions[session].ordinal, session - 1
    for slot in range(world.positions.shape[0]):
        position = world.positions[slot]
        if position.status != OPEN:
            continue
        flags = world.bars[session, position.symbol].signs
        if flags & HAS_BAR == 0:
            continue
        passed = position.soonest != 0 and position.soonest < ordinal
        if passed or position.written_put == 1 or flags & (PAYS | SPLITS) != 0:
            scene = Scene(
                session,
                world.american[position.symbol],
                world.bars[before, position.symbol],
                world.sessions[before],
                world.bars[session, position.symbol],
                world.sessions[session],
            )
            overnight(desk, position, scene, world.actions[session, position.symbol])
        if position.status == OPEN and (position.closing != 0 or position.orders != 0):
            at_open(
                desk,
                position,
                Scene(
                    session,
                    world.american[position.symbol],
                    world.bars[before, position.symbol],
                    world.sessions[before],
                    world.bars[session, position.symbol],
                    world.sessions[session],
                ),
            )


@step
def _fill_orders(world: World, desk: Desk, session: int, queue: Floats) -> None:
    """Fill the entries ordered at yesterday's close, in their order."""
    before = session - 1
    for n in range(desk.totals.waiting):
        position = world.positions[int(queue[n])]
        bar = world.bars[session, position.symbol]
        if bar.signs & HAS_BAR == 0:
            drop_order(desk, position, session)
            continue
        if bar.signs & (PAYS | SPLITS):
            close, ordinal = world.bars[before, position.symbol].close, world.sessions[session].ordinal
            _restrike(desk, position, world.actions[session, position.symbol], close, ordinal)
        scene = Scene(
            session,
            world.american[position.symbol],
            world.bars[before, position.symbol],
            world.sessions[before],
            world.bars[session, position.symbol],
            world.sessions[session],
        )
        fill_entry(desk, position, session, bar.open, scene.before, open_clock(scene))
    desk.totals.waiting = 0


@step
def _restrike(desk: Desk, position: Any, action: Any, close: float, ordinal: int) -> None:
    """Restate an order's strikes in the new shares of a split, less what a special dividend takes off."""
    off = off_strikes(action.special, close / action.split, ordinal)
    for k in range(desk.plan.legs):
        position.legs[k].strike = position.legs[k].strike / action.split - off


@step
def _evening(world: World, desk: Desk, session: int) -> None:
    """Stops during the session, then the close, of every open position."""
    signals, before = world.words.shape[0] > 1, session - 1
    for slot in range(world.positions.shape[0]):
        position = world.positions[slot]
        if position.status != OPEN:
            continue
        symbol = position.symbol
        if world.bars[session, symbol].signs & HAS_BAR == 0:
            silence(desk, position, session)
            continue
        scene = Scene(
            session,
            world.american[symbol],
            world.bars[before, symbol],
            world.sessions[before],
            world.bars[session, symbol],
            world.sessions[session],
        )
        if position.stop_price > 0.0 and session >= position.stop_from:
            resting_stop(desk, position, scene)
        if position.status == OPEN:
            at_close(desk, position, scene, world.words[session, symbol] if signals else 0)


@step
def _decide(world: World, desk: Desk, session: int, queue: Floats) -> None:
    """Order (fill: open) or fill (fill: close) new positions at this close.

    The ordered slots then stand first in `queue`, in the order in which they are to be filled.
    """
    plan, totals, before = desk.plan, desk.totals, max(session - 1, 0)
    totals.new_today = 0
    totals.waiting = 0
    if plan.margin == MARGIN_REGULATION and totals.equity < totals.kept:
        return
    size = list_candidates(world, desk, session, queue)
    kept = 0
    for n in range(size):
        if totals.open + totals.ordered >= plan.most_positions or totals.new_today >= plan.most_new:
            decline(desk, session, -1, WHY_FULL, float(size - n), 0.0)
            break
        slot = int(queue[n])
        position = world.positions[slot]
        scene = Scene(
            session,
            world.american[position.symbol],
            world.bars[before, position.symbol],
            world.sessions[before],
            world.bars[session, position.symbol],
            world.sessions[session],
        )
        clock = close_clock(scene)
        why = WHY_LIMIT
        if not sector_is_full(world, plan, position.symbol):
            why = consider(desk, position, scene, clock)
        if why != WHY_NONE:
            decline(desk, session, position.symbol, why, 1.0, scene.bar.close)
        elif plan.fill_close == 1:
            fill_entry(desk, position, session, scene.bar.close, scene.bar, clock)
        else:
            row = write(desk, session, position.symbol, -1, KIND_SIGNALLED, WHY_ENTRY)
            row.quantity = position.lots
            row.spot = scene.bar.close
            queue[kept] = slot
            kept += 1
    totals.waiting = kept


@step
def _mark(world: World, desk: Desk, session: int, keep: bool) -> tuple[float, float]:
    """Value of shares and of legs at this close, money; keep one mark a position when asked to."""
    stock, options = 0.0, 0.0
    totals, count = desk.totals, desk.plan.legs
    for slot in range(world.positions.shape[0]):
        position = world.positions[slot]
        if position.status != OPEN:
            continue
        held, written = position.shares * position.last_close, 0.0
        for k in range(count):
            written += position.legs[k].quantity * position.legs[k].mid
        stock += held
        options += written
        if keep:
            row = world.marks[totals.marks]
            totals.marks += 1
            row.session = session
            row.position = position.position
            row.shares = position.shares
            row.spot = position.last_close
            row.gain = position.flows + held + written
            legs = position.legs
            row.leg0 = legs[0].quantity * legs[0].mid
            row.leg1 = legs[1].quantity * legs[1].mid
            row.leg2 = legs[2].quantity * legs[2].mid
            row.leg3 = legs[3].quantity * legs[3].mid
    totals.equity = totals.cash + stock + options
    return stock, options


@step
def _night(world: World, desk: Desk, session: int, queue: Floats) -> None:
    """Entries at this close and the day's record."""
    plan, totals = desk.plan, desk.totals
    later = plan.fill_close == 1
    stock, options = _mark(world, desk, session, plan.marks == 1 and not later)
    if plan.margin == MARGIN_REGULATION:
        _require(world, desk)
        _call(world, desk, session)
    _decide(world, desk, session, queue)
    if later:
        stock, options = _mark(world, desk, session, plan.marks == 1)
    day = world.days[totals.days]
    totals.days += 1
    day.session = session
    day.positions = totals.open
    day.cash = totals.cash
    day.stock = stock
    day.options = options
    day.reserved = totals.reserved
    day.equity = totals.equity


@step
def _has_room(world: World, desk: Desk) -> bool:
    """Whether every buffer can take the most that one session can write."""
    totals, slots = desk.totals, world.positions.shape[0]
    if totals.events + slots * EVENTS_A_SLOT + 64 > world.events.shape[0]:
        return False
    if totals.days >= world.days.shape[0] or totals.terms + slots > world.terms.shape[0]:
        return False
    return desk.plan.marks == 0 or totals.marks + slots <= world.marks.shape[0]


@compiled
def walk(world: World, start: int, stop: int, first: int, queue: Floats) -> int:
    """Walk sessions `start` to `stop` (excluded) of a walk that began at `first`; return where it halted.

    It halts before a session for which the buffers might not suffice; the caller empties them and goes on.
    `queue` has one place a slot and keeps the order of entries between calls.
    """
    desk = Desk(
        world.plan[0],
        world.costs[0],
        world.smile[0],
        world.totals[0],
        world.events,
        world.terms,
        world.ops,
        world.scratch,
    )
    for session in range(start, stop):
        if not _has_room(world, desk):
            return session
        if session > first:
            if desk.plan.interest == 1:
                _earn(world, desk, session)
            if desk.plan.shares < 0.0:
                _borrow(world, desk, session)
            _morning(world, desk, session)
            _fill_orders(world, desk, session, queue)
            _evening(world, desk, session)
        _night(world, desk, session, queue)
    return stop
