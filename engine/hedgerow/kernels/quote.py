"""What an option is worth at one moment of the walk: surface, projected dividends and value in one place."""

from __future__ import annotations

import math
from typing import Any

from hedgerow.kernels.american import american_or_european
from hedgerow.kernels.jit import step
from hedgerow.kernels.layout import CALL, DAYS_A_YEAR
from hedgerow.kernels.lognormal import european
from hedgerow.kernels.smile import at_the_money, volatility_at
from hedgerow.kernels.state import Clock

__all__ = ["at_the_money_for", "escrow", "forward_of", "intrinsic", "quote"]

EXERCISE_TICK = 0.01  # an early exercise premium under half of this is left out


@step
def intrinsic(right: int, spot: float, strike: float) -> float:
    """What exercise at once brings, per share; never below zero."""
    gap = spot - strike if right == CALL else strike - spot
    return gap if gap > 0.0 else 0.0


@step
def escrow(bar: Any, expiry: int, clock: Clock) -> float:
    """Present value per share of the projected dividends after the clock's day and on or before `expiry`."""
    due = bar.pay_ordinal
    if due == 0 or due > expiry:
        return 0.0
    held = 0.0
    while due <= expiry:
        if due > clock.ordinal:
            held += bar.pay_cash * math.exp(-clock.rate * (due - clock.ordinal) / DAYS_A_YEAR)
        if bar.pay_gap <= 0:
            break
        due += bar.pay_gap
    return held


@step
def forward_of(spot: float, bar: Any, expiry: int, clock: Clock) -> float:
    """Forward price per share for delivery at `expiry`."""
    years = (expiry - clock.ordinal + clock.extra_days) / DAYS_A_YEAR
    return (spot - escrow(bar, expiry, clock)) * math.exp(clock.rate * years)


@step
def at_the_money_for(bar: Any, expiry: int, clock: Clock, smile: Any) -> float:
    """At-the-money volatility (annual fraction) to `expiry` as `bar` knows it."""
    inside = clock.ordinal < bar.report and bar.report <= expiry
    return at_the_money(bar.level, bar.anchor, expiry - clock.ordinal + clock.extra_days, inside, smile)


@step
def _before_dividend(spot: float, strike: float, bar: Any, clock: Clock, volatility: float) -> float:
    """A call's value when exercised just before the next projected dividend; zero when none is ahead."""
    ahead = bar.pay_ordinal - clock.ordinal + clock.extra_days
    if bar.pay_ordinal <= clock.ordinal:
        return 0.0
    return european(CALL, spot, strike, ahead / DAYS_A_YEAR, clock.rate, 0.0, volatility)


@step
def quote(
    right: int, strike: float, expiry: int, spot: float, bar: Any, clock: Clock, smile: Any
) -> tuple[float, float, float]:
    """Mid value per share, volatility used, and absolute standardized moneyness.

    Volatility, projected dividends and the next report are taken from `bar`; the price from `spot`. With no
    time left the value is intrinsic and volatility and moneyness are zero.
    """
    days = expiry - clock.ordinal + clock.extra_days
    if days <= 0.0:
        return intrinsic(right, spot, strike), 0.0, 0.0
    years = days / DAYS_A_YEAR
    held = escrow(bar, expiry, clock)
    base = spot - held
    if base <= 0.0:
        return intrinsic(right, base, strike), 0.0, 0.0
    atm = at_the_money_for(bar, expiry, clock, smile)
    away = math.log(strike / base) - clock.rate * years
    volatility = volatility_at(atm, away, years, days, smile)
    deviations = abs(away) / (atm * math.sqrt(years))
    if clock.american == 0:
        return european(right, base, strike, years, clock.rate, 0.0, volatility), volatility, deviations
    mid = american_or_european(right, base, strike, years, clock.rate, 0.0, volatility, EXERCISE_TICK)
    if right == CALL and held > 0.0:
        mid = max(mid, _before_dividend(spot, strike, bar, clock, volatility))
    return mid, volatility, deviations
