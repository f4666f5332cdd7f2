"""Strike rules: from what a rule wants to the listed strike that comes nearest to it."""

from __future__ import annotations

import math
from typing import Any

from hedgerow.kernels.jit import step
from hedgerow.kernels.layout import (
    CALL,
    DELTA,
    DEVIATIONS,
    FROM_SPOT,
    PUT,
    SAME_AS,
    SPEND,
    STEPS,
    WORST_WITHIN,
)
from hedgerow.kernels.listing import fill_price, is_listed, snap, steps_from
from hedgerow.kernels.normal import quantile
from hedgerow.kernels.quote import at_the_money_for, forward_of, quote, tenor_of
from hedgerow.kernels.smile import bent
from hedgerow.kernels.state import Clock
from hedgerow.kernels.trades import share_price

__all__ = ["choose_strike", "premium", "wanted_strike"]

SCAN_STEPS = 120  # listed strikes looked at on either side of the money
FIXED_POINT_ROUNDS = 24  # leave less than a tenth of a cent of strike, even at a delta of 0.03


@step
def premium(
    side: float,
    terms: tuple[int, float, int],
    spot: float,
    bar: Any,
    clock: Clock,
    smile: Any,
    costs: Any,
) -> float:
    """Price per share paid (side > 0) or received for the option `terms` = (right, strike, expiry)."""
    right, strike, expiry = terms
    mid, _, away = quote(right, strike, expiry, spot, bar, clock, smile)
    return fill_price(side, mid, away, clock.low_tick, clock.high_tick, costs)


@step
def _beyond(spec: Any, expiry: int, spot: float, bar: Any, clock: Clock, smile: Any) -> float:
    """The strike of a wanted delta, chance of finishing beyond, or number of standard deviations.

    The volatility depends on the strike, so that a few rounds of fixed-point iteration are made; what is
    left is far below a listed step.
    """
    tenor = tenor_of(expiry, clock, smile)
    forward = forward_of(spot, bar, expiry, clock)
    atm = at_the_money_for(bar, expiry, clock, smile)
    if spec.strike_rule == DEVIATIONS:
        return forward * math.exp(spec.strike_value * atm * tenor.root)
    sign = 1.0 if spec.right == CALL else -1.0
    distance = quantile(spec.strike_value) * sign
    tilt = 0.5 if spec.strike_rule == DELTA else -0.5
    away = 0.0
    for _ in range(FIXED_POINT_ROUNDS):
        deviation = bent(atm, away / (atm * tenor.root), tenor.scale, smile) * tenor.root
        away = tilt * deviation * deviation - distance * deviation
    return forward * math.exp(away)


@step
def wanted_strike(spec: Any, expiry: int, spot: float, bar: Any, clock: Clock, smile: Any) -> float:
    """The strike a rule of the first kind wants, before it is moved to the grid."""
    if spec.strike_rule == FROM_SPOT:
        return spot * (1.0 + spec.strike_value)
    return _beyond(spec, expiry, spot, bar, clock, smile)


@step
def _fits(side: float, price: float, budget: float) -> bool:
    """Whether a premium is paid out of the budget, or brings in at least that much."""
    return price <= budget + 1e-9 if side > 0.0 else price >= budget - 1e-9


@step
def scan_for_budget(
    spec: Any,
    expiry: int,
    start: float,
    step: float,
    market: tuple[float, Any, Clock, Any, Any],
    budget: float,
) -> float:
    """The best listed strike a budget allows; 0 when none.

    A bought leg: the dearest (highest put, lowest call) that costs at most the budget. A written one: the
    farthest out of the money that still brings in the budget.
    """
    spot, bar, clock, smile, costs = market
    toward = 1.0 if spec.right == CALL else -1.0
    best = 0.0
    for k in range(-SCAN_STEPS, SCAN_STEPS + 1):
        strike = start + toward * k * step
        if not is_listed(strike, spot):
            continue
        price = premium(spec.side, (spec.right, strike, expiry), spot, bar, clock, smile, costs)
        if spec.side > 0.0 and price <= budget + 1e-9:
            return strike if price > 0.0 else 0.0
        if spec.side < 0.0 and price >= budget - 1e-9:
            best = strike
        elif spec.side < 0.0 and best > 0.0:
            break
    return best


@step
def scan_for_worst(
    spec: Any,
    expiry: int,
    start: float,
    step: float,
    market: tuple[float, Any, Clock, Any, Any],
    income: float,
) -> float:
    """The lowest listed put strike whose worst loss stays within the wanted share of the debit; 0 if none.

    `income` is the net premium a share of the other legs. Meant for a bought put under shares.
    """
    spot, bar, clock, smile, costs = market
    for k in range(-SCAN_STEPS, SCAN_STEPS + 1):
        strike = start + k * step
        if not is_listed(strike, spot):
            continue
        price = premium(spec.side, (spec.right, strike, expiry), spot, bar, clock, smile, costs)
        debit = share_price(1.0, spot, costs) - income + price
        if debit - strike <= spec.strike_value * debit:
            return strike
    return 0.0


@step
def choose_strike(
    spec: Any,
    expiry: int,
    step: float,
    market: tuple[float, Any, Clock, Any, Any],
    others: tuple[float, float, float],
) -> float:
    """The listed strike a leg's rule leads to; 0 when none is listed.

    `market` is (spot, bar, clock, smile, costs); `others` is (strike of the leg referred to, premium of the
    leg referred to times its ratio over this leg's, net premium a share of the legs chosen so far).
    """
    spot, bar, clock, smile, _ = market
    reference, money, income = others
    rule = spec.strike_rule
    if rule == SAME_AS:
        strike = reference
    elif rule == STEPS:
        strike = steps_from(spot, spec.strike_value, step, spec.snap)
    elif rule == WORST_WITHIN and spec.right == PUT:
        strike = scan_for_worst(spec, expiry, snap(spot, step, 0), step, market, income)
    elif rule >= SPEND:
        budget = money * spec.strike_value if rule == SPEND else money
        strike = scan_for_budget(spec, expiry, snap(spot, step, 0), step, market, budget)
    else:
        strike = snap(wanted_strike(spec, expiry, spot, bar, clock, smile), step, spec.snap)
    return strike if is_listed(strike, spot) else 0.0
