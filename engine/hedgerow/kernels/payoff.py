"""What a position can come to at its nearest expiry: best, worst, break-even and the odds of each.

The payoff of shares and legs of one expiry is a broken line, so its ends and corners say everything. Legs
that live longer are worth their model value at that expiry; a grid of prices stands in for their curve.
"""

from __future__ import annotations

import math
from typing import Any

from hedgerow.kernels.jit import step
from hedgerow.kernels.layout import CALL, DAYS_A_YEAR, Floats
from hedgerow.kernels.lognormal import chance_above, european, intrinsic
from hedgerow.kernels.normal import cdf
from hedgerow.kernels.quote import at_the_money_for, escrow, tenor_of
from hedgerow.kernels.smile import bent
from hedgerow.kernels.state import Clock

__all__ = ["chance_beyond", "first_expiry", "measure", "payoff"]

GRID = (0.25, 0.5, 0.7, 0.8, 0.9, 0.95, 1.0, 1.05, 1.1, 1.2, 1.35, 1.6, 2.0)
_DUST = 1e-9


@step
def first_expiry(legs: Any, count: int) -> int:
    """Ordinal of the nearest expiry among legs with a quantity; 0 when there is none."""
    first = 0
    for k in range(count):
        if legs[k].quantity != 0.0 and (first == 0 or legs[k].expiry < first):
            first = legs[k].expiry
    return first


@step
def payoff(legs: Any, count: int, shares: float, price: float, horizon: int, rate: float) -> float:
    """Money that shares and legs are worth at `horizon` with the stock at `price`."""
    value = shares * price
    for k in range(count):
        leg = legs[k]
        if leg.quantity == 0.0:
            continue
        if leg.expiry <= horizon:
            value += leg.quantity * intrinsic(leg.right, price, leg.strike)
        else:
            years = (leg.expiry - horizon) / DAYS_A_YEAR
            value += leg.quantity * european(leg.right, price, leg.strike, years, rate, 0.0, leg.volatility)
    return value


@step
def _nodes(legs: Any, count: int, spot: float, horizon: int, nodes: Floats) -> int:
    """Write the prices at which the payoff can bend, in rising order; return how many."""
    nodes[0] = 0.0
    size = 1
    longer = False
    for k in range(count):
        if legs[k].quantity != 0.0:
            nodes[size] = legs[k].strike
            size += 1
            longer = longer or legs[k].expiry > horizon
    if longer or size == 1:
        for share in GRID:
            nodes[size] = share * spot
            size += 1
    for i in range(1, size):
        held = nodes[i]
        j = i - 1
        while j >= 0 and nodes[j] > held:
            nodes[j + 1] = nodes[j]
            j -= 1
        nodes[j + 1] = held
    return size


@step
def slope_above(legs: Any, count: int, shares: float) -> float:
    """Shares the position amounts to when the stock has risen beyond every strike."""
    slope = shares
    for k in range(count):
        if legs[k].right == CALL:
            slope += legs[k].quantity
    return slope


@step
def chance_beyond(price: float, horizon: int, moment: tuple[float, Any, Clock, Any]) -> float:
    """Chance (fraction, risk-neutral) that the stock stands above `price` at `horizon`."""
    spot, bar, clock, smile = moment
    if price <= 0.0:
        return 1.0
    tenor = tenor_of(horizon, clock, smile)
    base = spot - escrow(bar, horizon, clock)
    atm = at_the_money_for(bar, horizon, clock, smile)
    away = math.log(price / base) - clock.rate * tenor.years
    volatility = bent(atm, away / (atm * tenor.root), tenor.scale, smile)
    deviation = volatility * tenor.root
    if not deviation > 0.0:
        return chance_above(base, price, tenor.years, clock.rate, 0.0, volatility)
    return cdf(-away / deviation - 0.5 * deviation)


@step
def _odds_of_best(
    nodes: Floats,
    values: Floats,
    size: int,
    slope: float,
    horizon: int,
    moment: tuple[float, Any, Clock, Any],
) -> float:
    """Chance of ending where the payoff is greatest: in its flat parts, or beyond its peak without any."""
    best = values[0]
    for i in range(1, size):
        best = max(best, values[i])
    least = best - _DUST * max(1.0, abs(best))
    odds, peak, i = 0.0, -1, 0
    while i < size:
        j = i
        if values[i] >= least:
            while j + 1 < size and values[j + 1] >= least:
                j += 1
            if j == size - 1 and slope >= -_DUST:
                odds += chance_beyond(nodes[i], horizon, moment)
            elif j > i:
                odds += chance_beyond(nodes[i], horizon, moment) - chance_beyond(nodes[j], horizon, moment)
            elif peak < 0:
                peak = i
        i = j + 1
    if peak >= 0 and odds == 0.0:
        return chance_beyond(nodes[peak], horizon, moment)
    return odds


@step
def _odds_of_gain(
    nodes: Floats,
    values: Floats,
    size: int,
    slope: float,
    horizon: int,
    moment: tuple[float, Any, Clock, Any],
) -> tuple[float, float]:
    """First price at which gain turns to loss or back (NaN none), and the chance of ending with a gain."""
    crossing = math.nan
    odds = 1.0 if values[0] > 0.0 else 0.0
    for i in range(size):
        here = values[i]
        if i + 1 < size:
            there, width = values[i + 1], nodes[i + 1] - nodes[i]
        else:
            there, width = here + slope * max(nodes[i], 1.0) * 1e6, max(nodes[i], 1.0) * 1e6
        if (here > 0.0) == (there > 0.0):
            continue
        price = nodes[i] + width * here / (here - there)
        if math.isnan(crossing):
            crossing = price
        beyond = chance_beyond(price, horizon, moment)
        odds += beyond if there > 0.0 else -beyond
    return crossing, odds


@step
def measure(
    legs: Any, count: int, shares: float, outlay: float, horizon: int,
    moment: tuple[float, Any, Clock, Any], scratch: Floats,
) -> tuple[float, float, float, float, float, float]:  # fmt: skip
    """Best gain, worst loss, break-even, odds of best, odds of gain, and the most that could be owed.

    Money of the whole position at `horizon`, an ordinal, before costs and dividends, having paid `outlay`.
    A loss is positive. An unbounded best has odds NaN. Without legs nothing bounds the best of shares held or
    the worst of shares sold short, and the odds are NaN.
    """
    spot, _, clock, _ = moment
    nodes, values = scratch[0:24], scratch[24:48]
    size = _nodes(legs, count, spot, horizon, nodes)
    owed, best, worst = 0.0, -math.inf, math.inf
    for i in range(size):
        worth = payoff(legs, count, shares, nodes[i], horizon, clock.rate)
        owed = max(owed, -worth)
        values[i] = worth - outlay
        best, worst = max(best, values[i]), min(worst, values[i])
    slope = slope_above(legs, count, shares)
    if horizon == 0:
        even = outlay / shares if shares != 0.0 else math.nan
        if shares < 0.0:
            return best, math.inf, even, math.nan, math.nan, math.inf
        return math.inf, -worst, even, math.nan, math.nan, owed
    even, gain = _odds_of_gain(nodes, values, size, slope, horizon, moment)
    if slope > _DUST:
        return math.inf, -worst, even, math.nan, gain, owed
    if slope < -_DUST:
        worst, owed = -math.inf, math.inf
    odds = _odds_of_best(nodes, values, size, slope, horizon, moment)
    return best, -worst, even, odds, gain, owed
