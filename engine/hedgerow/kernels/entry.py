"""Entries: an order decided at a close, and its fill."""

from __future__ import annotations

import math
from typing import Any

from hedgerow.kernels.jit import step
from hedgerow.kernels.layout import (
    FRESH,
    KIND_DECLINED,
    KIND_OPENED,
    LOT_SHARES,
    MARGIN_CASH,
    RANK_BEST,
    RANK_BEST_OVER_WORST,
    RANK_CREDIT,
    RANK_ODDS,
    WHY_ENTRY,
    WHY_GONE_ORDER,
    WHY_NO_BID,
    WHY_NO_CASH,
    WHY_NO_LOT,
    WHY_NO_VOLATILITY,
    WHY_NONE,
)
from hedgerow.kernels.margin import requirement
from hedgerow.kernels.payoff import first_expiry, measure
from hedgerow.kernels.quote import at_the_money_for
from hedgerow.kernels.state import FLAT, OPEN, ORDERED, WANTED, Clock, Desk, Scene
from hedgerow.kernels.structure import (
    capital_of,
    choose_legs,
    has_bids,
    judge,
    lot_cost,
    price_leg,
    spread_share,
    stake_of,
)
from hedgerow.kernels.trades import share_price, trade_leg, trade_shares, write

__all__ = ["consider", "decline", "drop_order", "figure_of", "fill_entry", "take_stock"]


@step
def decline(desk: Desk, session: int, symbol: int, reason: int, quantity: float, spot: float) -> None:
    """Write that an entry was not made; `symbol` -1 stands for several."""
    row = write(desk, session, symbol, -1, KIND_DECLINED, reason)
    row.quantity = quantity
    row.spot = spot


@step
def _free_cash(desk: Desk) -> float:
    """What may still be tied up: cash not set aside, or on margin equity beyond the initial requirements."""
    totals = desk.totals
    if desk.plan.margin == MARGIN_CASH:
        return totals.cash - totals.reserved
    return totals.equity - totals.required


@step
def _capital(desk: Desk, position: Any, debit: float, owed: float, fees: float, spot: float) -> float:
    """What one lot of wanted legs and shares ties up: cash, or on margin its initial requirement and fees."""
    shares = desk.plan.shares * LOT_SHARES
    if desk.plan.margin == MARGIN_CASH:
        return capital_of(debit, owed, fees, shares, spot)
    initial, _ = requirement(position, desk.plan.legs, shares, spot)
    return max(initial + fees, spot)


@step
def figure_of(desk: Desk, position: Any, scene: Scene, clock: Clock) -> float:
    """The figure of its own structure by which a candidate is ranked at this close; NaN when it has none."""
    plan, spot = desk.plan, scene.bar.close
    if scene.bar.signs & FRESH == 0:
        return math.nan
    if choose_legs(desk, position, scene.today, spot, scene.bar, clock) != WHY_NONE:
        return math.nan
    debit, credit, _ = lot_cost(desk, position, spot, clock)
    horizon, moment = first_expiry(position.legs, plan.legs), (spot, scene.bar, clock, desk.smile)
    shares = plan.shares * LOT_SHARES
    figures = measure(position.legs, plan.legs, shares, debit, horizon, moment, desk.scratch)
    best, worst, stake = figures[0], figures[1], stake_of(debit, figures[5], shares, spot)
    value = figures[3]
    if plan.rank_figure == RANK_BEST_OVER_WORST:
        value = best / worst if worst > 0.0 else math.inf
    elif plan.rank_figure == RANK_CREDIT:
        value = credit / (LOT_SHARES * spot)
    elif plan.rank_figure != RANK_ODDS:
        value = (best if plan.rank_figure == RANK_BEST else worst) / stake
    return -value if plan.rank_low == 1 else value


@step
def consider(desk: Desk, position: Any, scene: Scene, clock: Clock) -> int:
    """Choose strikes and lots for one candidate at this close; return why not, or 0 when it is ordered."""
    plan, totals, bar = desk.plan, desk.totals, scene.bar
    if bar.signs & FRESH == 0 and plan.legs > 0:
        return WHY_NO_VOLATILITY
    spot = bar.close
    why = choose_legs(desk, position, scene.today, spot, bar, clock)
    if why != WHY_NONE:
        return why
    debit, credit, fees = lot_cost(desk, position, spot, clock)
    figures = (0.0, 0.0, 0.0, 0.0, 0.0, 0.0)
    if plan.judged == 1:
        horizon, moment = first_expiry(position.legs, plan.legs), (spot, bar, clock, desk.smile)
        shares = plan.shares * LOT_SHARES
        figures = measure(position.legs, plan.legs, shares, debit, horizon, moment, desk.scratch)
    owed = figures[5]
    wide = spread_share(desk, position, clock) if plan.spread_most < math.inf else 0.0
    stake = stake_of(debit, owed, plan.shares * LOT_SHARES, spot)
    why = judge(plan, stake, credit, LOT_SHARES * spot, figures, wide)
    if why != WHY_NONE:
        return why
    capital = _capital(desk, position, debit, owed, fees, spot)
    budget = plan.per_position * totals.equity
    free = _free_cash(desk) - totals.promised
    lots = math.floor(min(budget, free - desk.costs.trade_fee) / capital + 1e-9)
    if lots < 1.0:
        return WHY_NO_LOT if budget < capital else WHY_NO_CASH
    position.lots = lots
    position.status = ORDERED
    position.decided = scene.session
    position.promised = lots * capital
    totals.promised += position.promised
    totals.ordered += 1
    totals.new_today += 1
    return WHY_NONE


@step
def _take_back(desk: Desk, position: Any) -> None:
    """Free the cash that an order had been promised."""
    desk.totals.promised -= position.promised
    desk.totals.ordered -= 1
    position.promised = 0.0


@step
def drop_order(desk: Desk, position: Any, session: int) -> None:
    """Take back an ordered entry whose symbol did not trade."""
    _take_back(desk, position)
    position.status = FLAT
    decline(desk, session, position.symbol, WHY_GONE_ORDER, 1.0, 0.0)


@step
def _begin(desk: Desk, position: Any, session: int, lots: float) -> None:
    """Give a slot its next position number and clear what the last one left."""
    totals = desk.totals
    position.position = totals.next_position
    totals.next_position += 1
    totals.open += 1
    position.status = OPEN
    position.lots = lots
    position.entered = session
    position.shares = 0.0
    position.flows = 0.0
    position.outlay = 0.0
    position.gain = 0.0
    position.closing = 0
    position.orders = 0
    position.silent = 0


@step
def _write_terms(desk: Desk, position: Any, session: int, lot: Any, figures: Any, volatility: float) -> Any:
    """Write a position's terms; `lot` is (debit, credit, stock price), money and price of one lot."""
    terms = desk.terms[desk.totals.terms]
    desk.totals.terms += 1
    debit, credit, price = lot
    best, worst, even, odds, gain, owed = figures
    lots = position.lots
    terms.session = session
    terms.symbol = position.symbol
    terms.position = position.position
    terms.decided = position.decided
    terms.first_expiry = first_expiry(position.legs, desk.plan.legs)
    terms.pad = 0
    terms.lots = lots
    terms.shares = desk.plan.shares * LOT_SHARES * lots
    terms.stock_price = price
    terms.net_debit = debit * lots
    terms.option_credit = credit * lots
    terms.best_gain = best * lots
    terms.worst_loss = worst * lots
    terms.break_even = even
    terms.odds_of_best = odds
    terms.odds_of_gain = gain
    terms.reserve = owed * lots
    terms.volatility = volatility
    return terms


@step
def _remember(desk: Desk, position: Any, terms: Any, session: int) -> None:
    """Keep the terms that exits and stops look at."""
    plan = desk.plan
    position.stock_price = terms.stock_price
    position.stop_price = terms.stock_price * (1.0 - plan.shares * plan.stop) if plan.stop > 0.0 else 0.0
    position.stop_from = session + plan.fill_close
    position.stake = stake_of(terms.net_debit, terms.reserve, terms.shares, terms.stock_price)
    position.best_gain = terms.best_gain
    position.worst_loss = terms.worst_loss
    position.reserve = terms.reserve if plan.margin == MARGIN_CASH else 0.0
    desk.totals.reserved += position.reserve
    if plan.margin != MARGIN_CASH:
        initial, _ = requirement(position, plan.legs, plan.shares * LOT_SHARES, terms.stock_price)
        desk.totals.required += initial * position.lots


@step
def take_stock(position: Any, count: int) -> None:
    """Note the nearest expiry held and whether a put is owed, so that quiet sessions need not look."""
    position.soonest = first_expiry(position.legs, count)
    position.written_put = 0
    for k in range(count):
        if position.legs[k].quantity < 0.0 and position.legs[k].right == 1:
            position.written_put = 1


@step
def _buy(desk: Desk, position: Any, session: int, spot: float, clock: Clock) -> None:
    """Trade the shares and the wanted legs of a position that begins."""
    shares = desk.plan.shares * LOT_SHARES * position.lots
    if shares != 0.0:
        trade_shares(desk, position, session, WHY_ENTRY, shares, spot)
    for k in range(desk.plan.legs):
        leg = position.legs[k]
        if leg.status == WANTED:
            wanted = leg.quantity * position.lots
            leg.quantity = 0.0
            trade_leg(desk, position, k, session, WHY_ENTRY, wanted, clock, spot)
            leg.entry_price = leg.mid
    take_stock(position, desk.plan.legs)


@step
def _value_wanted(desk: Desk, position: Any, spot: float, bar: Any, clock: Clock) -> None:
    """Price every wanted leg at this moment."""
    for k in range(desk.plan.legs):
        leg = position.legs[k]
        if leg.status == WANTED:
            price_leg(leg, spot, bar, clock, desk.smile)


@step
def fill_entry(desk: Desk, position: Any, session: int, spot: float, bar: Any, clock: Clock) -> None:
    """Fill an ordered position at `spot`, with as many of its lots as cash allows; `bar` knows volatility."""
    plan = desk.plan
    _take_back(desk, position)
    if plan.fill_close == 0:  # else all was valued a moment ago
        _value_wanted(desk, position, spot, bar, clock)
    debit, credit, fees = lot_cost(desk, position, spot, clock)
    shares = plan.shares * LOT_SHARES
    horizon = first_expiry(position.legs, plan.legs)
    moment = (spot, bar, clock, desk.smile)
    figures = measure(position.legs, plan.legs, shares, debit, horizon, moment, desk.scratch)
    capital = _capital(desk, position, debit, figures[5], fees, spot)
    free = _free_cash(desk) - desk.costs.trade_fee
    lots = min(position.lots, math.floor(free / capital + 1e-9))
    bid = has_bids(desk, position, clock)
    if lots < 1.0 or not bid:
        position.status = FLAT
        decline(desk, session, position.symbol, WHY_NO_CASH if bid else WHY_NO_BID, 1.0, spot)
        return
    _begin(desk, position, session, lots)
    volatility = at_the_money_for(bar, horizon, clock, desk.smile) if horizon > 0 else 0.0
    price = share_price(shares, spot, desk.costs) if shares != 0.0 else spot
    terms = _write_terms(desk, position, session, (debit, credit, price), figures, volatility)
    _remember(desk, position, terms, session)
    row = write(desk, session, position.symbol, position.position, KIND_OPENED, WHY_ENTRY)
    row.quantity = lots
    row.spot = spot
    position.last_close = spot
    _buy(desk, position, session, spot, clock)
