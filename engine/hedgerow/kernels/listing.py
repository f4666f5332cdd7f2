"""What is listed and how it is quoted: strike grids, ticks, spreads and fills.

Prices and strikes are per share, as traded that day. A strike on the grid is an exact multiple of its step; a
premium on the tick is the nearest number to its decimal, so that 0.35 is the same 0.35 everywhere.
"""

from __future__ import annotations

import math

from hedgerow.kernels.jit import compiled
from hedgerow.kernels.layout import SNAP_DOWN, SNAP_UP, WEEKLY, Costs

__all__ = [
    "fill_price",
    "grid_step",
    "half_spread",
    "is_listed",
    "snap",
    "steps_from",
    "tick_ceil",
    "tick_floor",
]

DUST = 1e-9  # relative; what floating arithmetic may leave beside a listed price
LOWEST_OF_SPOT = 0.4  # strikes listed lie between these shares of the stock's price: common practice
HIGHEST_OF_SPOT = 2.5
TICK_CHANGES_AT = 3.0  # premium per share from which the wider tick holds
DECIMALS = 1e4  # a tick is a whole number of these parts of a currency unit


@compiled
def grid_step(price: float, cycle: int, modern: int) -> float:
    """Distance between listed strikes near `price` on an expiry cycle.

    Old classes (`modern` 0): 2.50 below 25, 5 to 200, 10 above, on every cycle (70 FR 73488). Today's liquid
    ones: daily and weekly series 0.50 below 100 (80 FR 1559), 1 to 150, 2.50 to 500, 5 above (from memory);
    monthly and longer series 0.50 below 5, 1 to 150 (the dollar programme) and 5 above (common practice).
    """
    if modern == 0:
        return 2.5 if price < 25.0 else (5.0 if price < 200.0 else 10.0)
    if cycle > WEEKLY:
        return 0.5 if price < 5.0 else (1.0 if price < 150.0 else 5.0)
    if price < 150.0:
        return 0.5 if price < 100.0 else 1.0
    return 2.5 if price < 500.0 else 5.0


@compiled
def _units(amount: float, unit: float, direction: int) -> float:
    """How many whole `unit`s make `amount`, rounded by a SNAP_* code; whole but for dust stays as it is."""
    units = amount / unit
    nearest = math.floor(units + 0.5)
    if abs(units - nearest) <= DUST * max(1.0, abs(nearest)) or direction not in (SNAP_UP, SNAP_DOWN):
        return float(nearest)
    return float(math.ceil(units) if direction == SNAP_UP else math.floor(units))


@compiled
def snap(target: float, step: float, direction: int) -> float:
    """The listed strike at a wanted price: the nearest one (of two as near the higher), the next up or down.

    `direction` is SNAP_NEAREST, SNAP_UP or SNAP_DOWN. A target on the grid within 1e-9 of itself stays there.
    """
    return _units(target, step, direction) * step


@compiled
def is_listed(strike: float, spot: float) -> bool:
    """Whether a strike is positive and lies within 0.4 to 2.5 times the stock's price."""
    above = strike >= LOWEST_OF_SPOT * spot * (1.0 - DUST)
    return strike > 0.0 and above and strike <= HIGHEST_OF_SPOT * spot * (1.0 + DUST)


@compiled
def steps_from(spot: float, steps: float, step: float, direction: int) -> float:
    """The strike `steps` listed steps above (below when negative) the one that `snap` puts at the money."""
    return snap(spot, step, direction) + steps * step


@compiled
def _on_tick(premium: float, low: float, high: float, direction: int) -> float:
    """A premium moved to its tick; unchanged where the tick is not positive."""
    tick = low if premium < TICK_CHANGES_AT * (1.0 - DUST) else high
    if tick <= 0.0:
        return premium
    return math.floor(_units(premium, tick, direction) * tick * DECIMALS + 0.5) / DECIMALS


@compiled
def tick_floor(premium: float, low: float, high: float) -> float:
    """The highest premium on the tick not above `premium`; ticks are `low` below 3.00, `high` from there."""
    return _on_tick(premium, low, high, SNAP_DOWN)


@compiled
def tick_ceil(premium: float, low: float, high: float) -> float:
    """The lowest premium on the tick not below `premium`; ticks are `low` below 3.00, `high` from there."""
    return _on_tick(premium, low, high, SNAP_UP)


@compiled
def half_spread(mid: float, abs_z: float, tick: float, costs: Costs) -> float:
    """Half of the quoted spread, money a share: a share of the premium that grows away from the money.

    `abs_z` is the absolute standardized moneyness. Never less than `floor_ticks` ticks.
    """
    share = costs.half_spread * (1.0 + costs.spread_rise * abs_z)
    return max(share * mid, costs.floor_ticks * tick)


@compiled
def fill_price(side: float, mid: float, abs_z: float, low: float, high: float, costs: Costs) -> float:
    """Premium a share at which a market order fills: the ask when bought (`side` > 0), the bid when sold.

    With `use_ticks` the ask is rounded up to its tick and the bid down. A bid is never below zero. `low` and
    `high` are the ticks below and from 3.00.
    """
    half = half_spread(mid, abs_z, low if mid < TICK_CHANGES_AT else high, costs)
    price = mid + half if side > 0.0 else max(0.0, mid - half)
    if costs.use_ticks == 0.0:
        return price
    return _on_tick(price, low, high, SNAP_UP if side > 0.0 else SNAP_DOWN)
