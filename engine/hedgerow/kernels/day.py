"""One open position from the night to the last trade before the close, step by step in order."""

from __future__ import annotations

import math
from typing import Any

from hedgerow.kernels.american import call_exercise_is_due_before_dividend, put_exercise_is_due
from hedgerow.kernels.entry import take_stock
from hedgerow.kernels.holding import after_delivery, leave, move_legs, open_clock, settle_expired
from hedgerow.kernels.jit import step
from hedgerow.kernels.layout import (
    CALL,
    DAYS_A_YEAR,
    KIND_DIVIDEND,
    KIND_GONE,
    KIND_SPLIT,
    PAYS,
    PUT,
    SPLITS,
    WHY_ASSIGNED_EARLY,
    WHY_GONE,
    WHY_LEFT_OVER,
    WHY_NONE,
    WHY_STOP,
    WHY_STOP_GAP,
)
from hedgerow.kernels.quote import next_dividend, quote
from hedgerow.kernels.state import NONE, OPEN, Clock, Desk, Scene
from hedgerow.kernels.trades import close_position, deliver, post, settle_leg, write

__all__ = ["at_open", "off_strikes", "overnight", "resting_stop", "silence"]

LONGEST_SILENCE = 5  # sessions without a bar after which a history is taken as ended
SPECIAL_RULE_FROM = 733439  # 2009-02-01: from here specials of 0.125 a share or more adjust strikes
SPECIAL_LEAST = 0.125
SPECIAL_LEAST_SHARE = 0.10  # before that day: over a tenth of the price


@step
def silence(desk: Desk, position: Any, session: int) -> None:
    """A session without a bar: carry the position, or close it at its last price when the history is over."""
    position.silent += 1
    if position.silent < LONGEST_SILENCE:
        return
    price = position.last_close
    row = write(desk, session, position.symbol, position.position, KIND_GONE, WHY_GONE)
    row.spot = price
    for k in range(desk.plan.legs):
        if position.legs[k].quantity != 0.0:
            settle_leg(desk, position, k, session, WHY_GONE, price, 0.0, False)
        position.legs[k].status = NONE
    if position.shares != 0.0:
        deliver(desk, position, session, WHY_GONE, -position.shares, price)
    close_position(desk, position, session, WHY_GONE)


@step
def off_strikes(special: float, close: float, ordinal: int) -> float:
    """The part of a special dividend, per share, that comes off the strikes: all of it, or nothing."""
    least = SPECIAL_LEAST if ordinal >= SPECIAL_RULE_FROM else SPECIAL_LEAST_SHARE * close
    return special if special >= least else 0.0


@step
def _gains_by_waiting(leg: Any, bar: Any, clock: Clock, paid: float, today: int) -> bool:
    """Whether the next dividend is more than interest on a put's strike, so that its holder waits for it.

    Exercised on the ex-date `due` the put brings K - (S - D), now K - S; waiting costs K (e^(r t) - 1).
    """
    due, cash = today, paid
    if paid <= 0.0:
        due, cash = next_dividend(bar, clock), bar.pay_cash
        if due == 0 or due > leg.expiry:
            return False
    return cash > leg.strike * math.expm1(clock.rate * (due - clock.ordinal) / DAYS_A_YEAR)


@step
def _due_early(leg: Any, bar: Any, clock: Clock, paid: float, today: int, smile: Any) -> bool:
    """Whether the holder of a leg we wrote exercises it after yesterday's close (`bar`, `clock`).

    `paid` is the dividend a share of `today` that comes off no strike.
    """
    if leg.status == NONE or leg.quantity >= 0.0 or leg.expiry <= clock.ordinal:
        return False
    years = (leg.expiry - clock.ordinal) / DAYS_A_YEAR
    if leg.right == CALL and (paid <= 0.0 or bar.close <= leg.strike):
        return False
    if leg.right == PUT and (bar.close >= leg.strike or _gains_by_waiting(leg, bar, clock, paid, today)):
        return False
    _, volatility, _ = quote(leg.right, leg.strike, leg.expiry, bar.close, bar, clock, smile)
    if leg.right == CALL:
        return call_exercise_is_due_before_dividend(
            bar.close, leg.strike, years, clock.rate, paid, volatility
        )
    return put_exercise_is_due(bar.close, leg.strike, years, clock.rate, 0.0, volatility)


@step
def _assigned_overnight(desk: Desk, position: Any, scene: Scene, action: Any) -> None:
    """Hand over shares for every leg that is exercised against us before the open."""
    yesterday, bar = scene.yesterday, scene.before
    clock = Clock(yesterday.ordinal, 0.0, yesterday.rate, scene.american, 0.0, 0.0, 1.0)
    held = position.shares
    kept = off_strikes(action.special, bar.close / action.split, scene.today.ordinal)
    paid = (action.dividend - kept) * action.split
    for k in range(desk.plan.legs):
        if _due_early(position.legs[k], bar, clock, paid, scene.today.ordinal, desk.smile):
            settle_leg(desk, position, k, scene.session, WHY_ASSIGNED_EARLY, bar.close, 0.0, True)
    if position.shares == held:
        return
    if position.shares == 0.0:
        after_delivery(desk, position, scene.session, WHY_ASSIGNED_EARLY)
        return
    take_stock(position, desk.plan.legs)
    if desk.plan.shares == 0.0 and desk.plan.keep_shares == 0 and position.soonest != 0:
        position.orders = 0
        if position.closing == 0:  # shares nobody wanted are not carried for the sake of another leg
            position.closing = WHY_LEFT_OVER
    position.soonest = scene.today.ordinal  # the close sells shares that no leg keeps, and restates the rest


@step
def _split(desk: Desk, position: Any, session: int, ratio: float) -> None:
    """Restate shares, strikes and prices in the new shares."""
    row = write(desk, session, position.symbol, position.position, KIND_SPLIT, WHY_NONE)
    row.quantity = ratio
    position.shares *= ratio
    position.lots *= ratio
    position.stock_price /= ratio
    position.stop_price /= ratio
    position.last_close /= ratio
    for k in range(desk.plan.legs):
        leg = position.legs[k]
        leg.quantity *= ratio
        leg.strike /= ratio
        leg.wanted_strike /= ratio
        leg.entry_price /= ratio
        leg.mid /= ratio


@step
def _special(desk: Desk, position: Any, special: float, ordinal: int) -> None:
    """Lower strikes by a special dividend large enough to adjust the contracts."""
    special = off_strikes(special, position.last_close, ordinal)
    if special == 0.0:
        return
    for k in range(desk.plan.legs):
        leg = position.legs[k]
        if leg.status != NONE:
            leg.strike -= special
            leg.wanted_strike -= special if leg.wanted_strike > 0.0 else 0.0


@step
def _pay(desk: Desk, position: Any, session: int, amount: float) -> None:
    """Give the shares held overnight their dividend, or charge it to shares sold short."""
    row = write(desk, session, position.symbol, position.position, KIND_DIVIDEND, WHY_NONE)
    row.quantity = position.shares
    row.price = amount
    row.mid = amount
    row.spot = position.last_close
    position.flows += post(desk, row, position.shares * amount)


@step
def overnight(desk: Desk, position: Any, scene: Scene, action: Any) -> None:
    """What happens between yesterday's close and today's open: early exercise, split, dividend."""
    flags = scene.bar.signs
    if position.soonest != 0 and position.soonest < scene.today.ordinal:
        settle_expired(desk, position, scene, position.last_close, scene.today.ordinal - 1)
    asked = flags & PAYS != 0 or position.written_put == 1
    if asked and position.status == OPEN and scene.american == 1 and not math.isnan(scene.before.close):
        _assigned_overnight(desk, position, scene, action)
    if position.status != OPEN:
        return
    if flags & SPLITS:
        _split(desk, position, scene.session, action.split)
    if flags & PAYS:
        if position.shares != 0.0:
            _pay(desk, position, scene.session, action.dividend)
        if action.special > 0.0:
            _special(desk, position, action.special, scene.today.ordinal)


@step
def at_open(desk: Desk, position: Any, scene: Scene) -> None:
    """Fill the closing order of a position, or its leg orders, at the open."""
    spot, clock = scene.bar.open, open_clock(scene)
    if position.closing != 0:
        leave(desk, position, scene.session, position.closing, spot, scene.before, clock)
    else:
        move_legs(desk, position, scene.session, spot, scene.before, clock)


@step
def resting_stop(desk: Desk, position: Any, scene: Scene) -> None:
    """Trade a resting stock stop that the session reached; a gap through it fills at the open."""
    bar, level = scene.bar, position.stop_price
    if desk.plan.shares > 0.0:
        gap, hit = bar.open <= level, bar.low <= level
    else:
        gap, hit = bar.open >= level, bar.high >= level
    if gap or hit:
        price = bar.open if gap else level
        reason = WHY_STOP_GAP if gap else WHY_STOP
        leave(desk, position, scene.session, reason, price, scene.before, open_clock(scene))
