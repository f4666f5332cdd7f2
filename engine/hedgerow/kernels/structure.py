"""The structure of one lot at one moment: legs chosen and valued, what it costs, and why it is declined."""

from __future__ import annotations

import math
from typing import Any

from hedgerow.kernels.jit import step
from hedgerow.kernels.layout import (
    LOT_SHARES,
    WHY_BEST_GAIN,
    WHY_BEST_OVER_WORST,
    WHY_NET_CREDIT,
    WHY_NET_DEBIT,
    WHY_NO_BID,
    WHY_NO_EXPIRY,
    WHY_NO_STRIKE,
    WHY_NONE,
    WHY_ODDS,
    WHY_SPREAD,
    WHY_WORST_LOSS,
)
from hedgerow.kernels.listing import fill_price, grid_step
from hedgerow.kernels.quote import quote
from hedgerow.kernels.state import NONE, WANTED, Clock, Desk
from hedgerow.kernels.strikes import choose_strike
from hedgerow.kernels.trades import share_price

__all__ = [
    "capital_of",
    "choose_legs",
    "find_strike",
    "has_bids",
    "judge",
    "leg_price",
    "lot_cost",
    "price_leg",
    "spread_share",
    "stake_of",
]

_INFINITE = math.inf
_DUST = 1e-9


@step
def price_leg(leg: Any, spot: float, bar: Any, clock: Clock, smile: Any) -> None:
    """Write a leg's mid, volatility and standardized moneyness for this moment."""
    mid, volatility, away = quote(leg.right, leg.strike, leg.expiry, spot, bar, clock, smile)
    leg.mid = mid
    leg.volatility = volatility
    leg.moneyness = away


@step
def leg_price(leg: Any, side: float, clock: Clock, costs: Any) -> float:
    """Price per share at which a leg that has been valued is bought (side > 0) or sold."""
    return fill_price(side, leg.mid, leg.moneyness, clock.low_tick, clock.high_tick, costs)


@step
def find_strike(
    desk: Desk, position: Any, number: int, expiry: int, spot: float, bar: Any, clock: Clock
) -> float:
    """The listed strike for leg `number` at this moment; 0 if none. Legs it refers to are valued already."""
    spec = desk.plan.specs[number]
    reference, money, income = 0.0, 0.0, 0.0
    if spec.strike_leg >= 0:
        other, described = position.legs[spec.strike_leg], desk.plan.specs[spec.strike_leg]
        reference = other.strike
        money = leg_price(other, described.side, clock, desk.costs) * described.ratio / spec.ratio
    for k in range(desk.plan.legs):
        leg, described = position.legs[k], desk.plan.specs[k]
        if k != number and leg.status != NONE and leg.quantity != 0.0:
            income -= described.side * described.ratio * leg_price(leg, described.side, clock, desk.costs)
    pace = grid_step(spot, spec.cycle, 1 if clock.ordinal >= desk.plan.modern_from else 0)
    market = (spot, bar, clock, desk.smile, desk.costs)
    return choose_strike(spec, expiry, pace, market, (reference, money, income))


@step
def choose_legs(desk: Desk, position: Any, today: Any, spot: float, bar: Any, clock: Clock) -> int:
    """Choose expiry and strike of every leg that opens with the position, for one lot; say why not, or 0."""
    plan = desk.plan
    for k in range(plan.legs):
        leg = position.legs[k]
        leg.status = NONE
        leg.quantity = 0.0
        leg.strike = 0.0
        leg.wanted_strike = 0.0
    for place in range(plan.legs):
        k = plan.order[place]
        spec, leg = plan.specs[k], position.legs[k]
        if spec.add_length > 0:
            continue
        expiry = position.legs[spec.with_leg].expiry if spec.with_leg >= 0 else today.expiry[k]
        if expiry == 0:
            return WHY_NO_EXPIRY
        strike = find_strike(desk, position, k, expiry, spot, bar, clock)
        if strike <= 0.0:
            return WHY_NO_STRIKE
        leg.right = spec.right
        leg.strike = strike
        leg.expiry = expiry
        leg.quantity = spec.side * spec.ratio * LOT_SHARES
        leg.status = WANTED
        price_leg(leg, spot, bar, clock, desk.smile)
    return WHY_NONE if has_bids(desk, position, clock) else WHY_NO_BID


@step
def has_bids(desk: Desk, position: Any, clock: Clock) -> bool:
    """Whether every wanted leg that is to be sold finds somebody who pays for it."""
    for k in range(desk.plan.legs):
        leg = position.legs[k]
        if leg.status == WANTED and leg.quantity < 0.0 and leg_price(leg, -1.0, clock, desk.costs) <= 0.0:
            return False
    return True


@step
def lot_cost(desk: Desk, position: Any, spot: float, clock: Clock) -> tuple[float, float, float]:
    """Net debit, option credit and fees (money) of the shares and wanted legs of one lot at this moment."""
    plan, costs = desk.plan, desk.costs
    shares = plan.shares * LOT_SHARES
    debit, credit, fees = 0.0, 0.0, 0.0
    if shares != 0.0:
        debit = shares * share_price(shares, spot, costs)
        fees = costs.share_fee * abs(shares)
    for k in range(plan.legs):
        leg = position.legs[k]
        if leg.status == WANTED:
            credit -= leg.quantity * leg_price(leg, leg.quantity, clock, costs)
            fees += costs.contract_fee * abs(leg.quantity) / LOT_SHARES
    return debit - credit, credit, fees


@step
def spread_share(desk: Desk, position: Any, clock: Clock) -> float:
    """Full bid-ask spread of the wanted legs over their premium."""
    wide, whole = 0.0, 0.0
    for k in range(desk.plan.legs):
        leg = position.legs[k]
        if leg.status == WANTED:
            size = abs(leg.quantity)
            wide += size * (leg_price(leg, 1.0, clock, desk.costs) - leg_price(leg, -1.0, clock, desk.costs))
            whole += size * leg.mid
    return wide / whole if whole > 0.0 else 0.0


@step
def judge(plan: Any, base: float, credit: float, notional: float, figures: Any, wide: float) -> int:
    """Why the structure's own conditions decline it, or 0.

    Money of a lot: `base` ties it up, `credit` is the options', `notional` the stock's price. `figures` are
    those of `payoff.measure`; `wide` is the spread over the premium.
    """
    best, worst, odds = figures[0], figures[1], figures[3]
    base = max(base, _DUST)  # nothing or less is paid for a gain that is locked in
    if plan.net_credit > 0.0 and credit <= 0.0:
        return WHY_NET_CREDIT
    if -credit > plan.net_debit_most * notional:
        return WHY_NET_DEBIT
    if worst < plan.worst_least * base or worst > plan.worst_most * base:
        return WHY_WORST_LOSS
    if best < plan.best_least * base or best > plan.best_most * base:
        return WHY_BEST_GAIN
    bounded = plan.odds_least > -_INFINITE or plan.odds_most < _INFINITE
    if bounded and not plan.odds_least <= odds <= plan.odds_most:
        return WHY_ODDS
    if plan.ratio_least > -_INFINITE and not best >= plan.ratio_least * worst:
        return WHY_BEST_OVER_WORST
    return WHY_SPREAD if wide > plan.spread_most else WHY_NONE


@step
def stake_of(debit: float, owed: float, shares: float, price: float) -> float:
    """Money on which gains and losses are measured: what was paid and what could be owed.

    Of shares sold short it is at least their price: what their sale brought in is no capital of one's own,
    and less it the debit is near nothing.
    """
    return max(debit + owed, -shares * price) if shares < 0.0 else debit + owed


@step
def capital_of(debit: float, owed: float, fees: float, shares: float, spot: float) -> float:
    """Cash one lot ties up: what is paid, and all that could be owed; never under 1 % of a lot's stock price.

    Shares sold short tie up their whole price: the proceeds are no capital of one's own.
    """
    capital = debit + owed + fees
    if shares < 0.0:
        capital = max(capital, LOT_SHARES * spot)
    return max(capital, spot)
