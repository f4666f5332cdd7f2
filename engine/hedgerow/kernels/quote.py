"""What an option is worth at one moment of the walk: surface, projected dividends and value in one place."""

from __future__ import annotations

import math
from typing import Any

from hedgerow.kernels.american import american_or_european
from hedgerow.kernels.cash import american_cash
from hedgerow.kernels.jit import step
from hedgerow.kernels.layout import DAYS_A_YEAR
from hedgerow.kernels.lognormal import european, intrinsic
from hedgerow.kernels.smile import at_the_money, volatility_at
from hedgerow.kernels.state import Clock

__all__ = ["at_the_money_for", "escrow", "forward_of", "next_dividend", "quote"]

EXERCISE_TICK = 0.01  # an early exercise premium under half of this is left out


@step
def escrow(bar: Any, expiry: int, clock: Clock) -> float:
    """Present value per share of the projected dividends after the clock's day and on or before `expiry`."""
    due = bar.pay_ordinal
    if due == 0 or due > expiry:
        return 0.0
    held = 0.0
    while due <= expiry:
        if due > clock.ordinal:
            held += bar.pay_cash / clock.split * math.exp(-clock.rate * (due - clock.ordinal) / DAYS_A_YEAR)
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
def next_dividend(bar: Any, clock: Clock) -> int:
    """Ordinal of the first projected dividend after the clock's day; 0 when none is projected."""
    due = bar.pay_ordinal
    while 0 < due <= clock.ordinal:
        if bar.pay_gap <= 0:
            return 0
        due += bar.pay_gap
    return due


@step
def _american(
    right: int,
    spot: float,
    strike: float,
    years: float,
    bar: Any,
    clock: Clock,
    volatility: float,
    held: float,
) -> float:
    """Value of an American option whose life holds projected dividends of present value `held`, or none."""
    if held == 0.0:
        return american_or_european(right, spot, strike, years, clock.rate, 0.0, volatility, EXERCISE_TICK)
    years_to_ex = (next_dividend(bar, clock) - clock.ordinal + clock.extra_days) / DAYS_A_YEAR
    amount = held * math.exp(clock.rate * years_to_ex)
    return american_cash(right, spot, strike, years, clock.rate, volatility, years_to_ex, amount)


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
    return _american(right, spot, strike, years, bar, clock, volatility, held), volatility, deviations
