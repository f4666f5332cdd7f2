"""Looking at one close without deciding anything: structures and their figures, triggers and their numbers.

Made of the walk's own steps, so that what a person is shown is what the walk would find.
"""

from __future__ import annotations

import math
from typing import Any

import numpy as np

from hedgerow.kernels.day import _due_early
from hedgerow.kernels.entry import _capital
from hedgerow.kernels.holding import close_clock
from hedgerow.kernels.jit import compiled, step
from hedgerow.kernels.layout import (
    CALL,
    FRESH,
    HAS_BAR,
    LOT_SHARES,
    MAX_LEGS,
    OP_DAYS_LEFT,
    OP_HOLDS_SHARES,
    OP_SIGNAL,
    PUT,
    WHY_NO_VOLATILITY,
    WHY_NONE,
    Floats,
    Records,
)
from hedgerow.kernels.payoff import chance_beyond, first_expiry, measure
from hedgerow.kernels.quote import at_the_money_for, next_dividend
from hedgerow.kernels.state import WANTED, Clock, Desk, Scene, World
from hedgerow.kernels.structure import (
    choose_legs,
    judge,
    leg_price,
    lot_cost,
    price_leg,
    spread_share,
    stake_of,
)
from hedgerow.kernels.triggers import _figure, days_left

__all__ = ["CHOOSE", "HELD", "PRICE", "PROBED", "probe", "trigger_figures"]

CHOOSE, PRICE, HELD = 0, 1, 2
"""What is looked at: one lot whose legs are chosen, one lot whose legs are given, a whole position held."""

# what one close says of one structure; money of a lot, of a position held of all of it
PROBED = np.dtype(
    [
        ("debit", np.float64),  # paid for shares and legs before fees; of a position held its outlay so far
        ("credit", np.float64),  # net premium received (+) or paid (-)
        ("fees", np.float64),
        ("best", np.float64),
        ("worst", np.float64),
        ("even", np.float64),  # stock price per share
        ("odds", np.float64),  # of the best gain, fraction
        ("gain", np.float64),  # chance of any gain, fraction
        ("owed", np.float64),
        ("stake", np.float64),  # on which gains and losses are measured
        ("wide", np.float64),  # bid-ask spread over premium, fraction
        ("capital", np.float64),  # what it ties up
        ("volatility", np.float64),  # at the money to the first expiry, annual fraction
        ("leaving", np.float64),  # what closing the legs would bring (+) or cost (-), after the spread
        ("fills", np.float64, (MAX_LEGS,)),  # per share, at which each leg is traded; held: left
        ("chances", np.float64, (MAX_LEGS,)),  # of each leg's ending in the money
        ("reach", np.float64, (MAX_LEGS,)),  # of a written call's being in the money at the next ex-date
        ("early", np.int32, (MAX_LEGS,)),  # 1: its holder would exercise a written leg at this price
        ("why", np.int32),  # reason the walk would decline it, WHY_NONE when it would not
        ("horizon", np.int32),  # ordinal of the nearest expiry, 0 none
        ("due", np.int32),  # ordinal of the next expected ex-date, 0 none
        ("pad", np.int32),
    ],
    align=True,
)


@step
def _clear(found: Any) -> None:
    """Write that nothing is known."""
    found.debit = math.nan
    found.credit = math.nan
    found.fees = math.nan
    found.best = math.nan
    found.worst = math.nan
    found.even = math.nan
    found.odds = math.nan
    found.gain = math.nan
    found.owed = math.nan
    found.stake = math.nan
    found.wide = math.nan
    found.capital = math.nan
    found.volatility = math.nan
    found.leaving = math.nan
    found.horizon = 0
    found.due = 0
    found.pad = 0
    for k in range(MAX_LEGS):
        found.fills[k] = math.nan
        found.chances[k] = math.nan
        found.reach[k] = math.nan
        found.early[k] = 0


@step
def _leg(desk: Desk, leg: Any, number: int, scene: Scene, clock: Clock, found: Any, held: bool) -> None:
    """What one leg that has been valued is traded at, how it may end, and whether it is exercised early."""
    moment = (scene.bar.close, scene.bar, clock, desk.smile)
    found.fills[number] = leg_price(leg, -leg.quantity if held else leg.quantity, clock, desk.costs)
    if leg.expiry > clock.ordinal:
        above = chance_beyond(leg.strike, leg.expiry, moment)
        found.chances[number] = above if leg.right == CALL else 1.0 - above
    if not held or leg.quantity >= 0.0 or clock.american == 0:
        return
    due, paid = found.due, scene.bar.pay_cash
    if leg.right == CALL and 0 < due <= leg.expiry:
        found.reach[number] = chance_beyond(leg.strike, due, moment)
        found.early[number] = 1 if _due_early(leg, scene.bar, clock, paid, due, desk.smile) else 0
    if leg.right == PUT:
        found.early[number] = 1 if _due_early(leg, scene.bar, clock, 0.0, 0, desk.smile) else 0


@step
def _measured(
    desk: Desk, position: Any, shares: float, price: float, scene: Scene, clock: Clock, found: Any
) -> None:
    """What shares, traded at `price`, and legs can come to, having paid `found.debit`."""
    legs, count = position.legs, desk.plan.legs
    horizon, moment = first_expiry(legs, count), (scene.bar.close, scene.bar, clock, desk.smile)
    figures = measure(legs, count, shares, found.debit, horizon, moment, desk.scratch)
    found.best = figures[0]
    found.worst = figures[1]
    found.even = figures[2]
    found.odds = figures[3]
    found.gain = figures[4]
    found.owed = figures[5]
    found.stake = stake_of(found.debit, found.owed, shares, price)
    found.horizon = horizon
    if horizon > clock.ordinal:
        found.volatility = at_the_money_for(scene.bar, horizon, clock, desk.smile)


@step
def _one_lot(desk: Desk, position: Any, scene: Scene, clock: Clock, found: Any, choose: bool) -> None:
    """Choose or value the legs of one lot, measure and judge it, as an entry at this close would."""
    plan, bar = desk.plan, scene.bar
    if bar.signs & FRESH == 0 and plan.legs > 0:
        found.why = WHY_NO_VOLATILITY
        return
    if choose:
        found.why = choose_legs(desk, position, scene.today, bar.close, bar, clock)
        if found.why != WHY_NONE:
            return
    else:
        for k in range(plan.legs):
            if position.legs[k].status == WANTED:
                price_leg(position.legs[k], bar.close, bar, clock, desk.smile)
    found.debit, found.credit, found.fees = lot_cost(desk, position, bar.close, clock)
    shares = plan.shares * LOT_SHARES
    _measured(desk, position, shares, bar.close, scene, clock, found)
    found.wide = spread_share(desk, position, clock)
    found.capital = _capital(desk, position, found.debit, found.owed, found.fees, bar.close)
    figures = (found.best, found.worst, found.even, found.odds, found.gain, found.owed)
    found.why = judge(plan, found.stake, found.credit, LOT_SHARES * bar.close, figures, found.wide)
    for k in range(plan.legs):
        if position.legs[k].status == WANTED:
            _leg(desk, position.legs[k], k, scene, clock, found, False)


@step
def _whole(desk: Desk, position: Any, scene: Scene, clock: Clock, found: Any) -> None:
    """Value the legs of a position held; its gain so far and its last close are written on it."""
    bar, gain, leaving = scene.bar, position.flows + position.shares * scene.bar.close, 0.0
    position.last_close = bar.close
    found.debit = position.outlay
    for k in range(desk.plan.legs):
        leg = position.legs[k]
        if leg.quantity != 0.0:
            price_leg(leg, bar.close, bar, clock, desk.smile)
            gain += leg.quantity * leg.mid
            _leg(desk, leg, k, scene, clock, found, True)
            leaving += leg.quantity * found.fills[k]
    position.gain = gain
    found.leaving = leaving
    _measured(desk, position, position.shares, position.stock_price, scene, clock, found)


@compiled
def probe(world: World, session: int, positions: Records, out: Records, task: int) -> int:
    """Write what the close of `session` says of each of `positions` (P,) into `out` (P,), PROBED; return P.

    `task` is CHOOSE, PRICE or HELD. Only `symbol` is read of a position whose legs are to be chosen; the legs
    are written on it. A symbol without a bar has every figure NaN.
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
    before = max(session - 1, 0)
    for n in range(positions.shape[0]):
        position, found = positions[n], out[n]
        symbol = position.symbol
        scene = Scene(
            session,
            world.american[symbol],
            world.bars[before, symbol],
            world.sessions[before],
            world.bars[session, symbol],
            world.sessions[session],
        )
        _clear(found)
        found.why = WHY_NONE
        if scene.bar.signs & HAS_BAR == 0:
            continue
        clock = close_clock(scene)
        found.due = next_dividend(scene.bar, clock)
        if task == HELD:
            _whole(desk, position, scene, clock, found)
        else:
            _one_lot(desk, position, scene, clock, found, task == CHOOSE)
    return positions.shape[0]


@compiled
def trigger_figures(world: World, session: int, positions: Records, out: Floats) -> int:
    """Write the number that each operation of the rule compares, for positions (P,), into `out` (P, ops).

    The positions have been probed. Signals and shares held are 1 or 0, days left count in days; what joins
    operations, or cannot be reached, is NaN or -inf. Returns P.
    """
    plan, ordinal, signals = world.plan[0], world.sessions[session].ordinal, world.words.shape[0] > 1
    for n in range(positions.shape[0]):
        position = positions[n]
        for i in range(world.ops.shape[0]):
            op = world.ops[i]
            if op.code == OP_SIGNAL:
                word = world.words[session, position.symbol] if signals else 0
                out[n, i] = float((word >> op.arg) & 1)
            elif op.code == OP_DAYS_LEFT:
                out[n, i] = float(days_left(position.legs, plan.legs, op.arg, ordinal))
            elif op.code == OP_HOLDS_SHARES:
                out[n, i] = 1.0 if position.shares > 0.0 else 0.0
            else:
                out[n, i] = _figure(op, position, position.legs, plan.legs, (session, ordinal))
    return positions.shape[0]
