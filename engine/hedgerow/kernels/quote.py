"""What an option is worth at one moment of the walk: surface, projected dividends and value in one place."""

from __future__ import annotations

import math
from typing import Any

from hedgerow.kernels.american import Span, on_forward
from hedgerow.kernels.cash import american_cash
from hedgerow.kernels.jit import step
from hedgerow.kernels.layout import DAYS_A_YEAR
from hedgerow.kernels.lognormal import discount, intrinsic
from hedgerow.kernels.smile import at_the_money_pulled, bent, pull_weight, skew_scale
from hedgerow.kernels.state import TENORS, Clock

__all__ = [
    "at_the_money_for",
    "escrow",
    "forward_of",
    "next_dividend",
    "quote",
    "tenor_of",
]

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
def tenor_of(expiry: int, clock: Clock, smile: Any) -> Any:
    """What the time to `expiry` and the rate decide for every strike and symbol, a TENOR kept in `smile`."""
    days = expiry - clock.ordinal + clock.extra_days
    tenor = smile.tenors[int(4.0 * days) % TENORS]
    if tenor.days != days or tenor.rate != clock.rate or tenor.scale == 0.0:
        years = max(days, 0.0) / DAYS_A_YEAR
        tenor.days = days
        tenor.rate = clock.rate
        tenor.discount = discount(clock.rate, years)
        tenor.years = years
        tenor.root = math.sqrt(years)
        tenor.weight = pull_weight(smile.kappa, years)
        tenor.scale = skew_scale(days, smile)
    return tenor


@step
def forward_of(spot: float, bar: Any, expiry: int, clock: Clock) -> float:
    """Forward price per share for delivery at `expiry`."""
    years = (expiry - clock.ordinal + clock.extra_days) / DAYS_A_YEAR
    return (spot - escrow(bar, expiry, clock)) * math.exp(clock.rate * years)


@step
def at_the_money_for(bar: Any, expiry: int, clock: Clock, smile: Any) -> float:
    """At-the-money volatility (annual fraction) to `expiry` as `bar` knows it."""
    inside = clock.ordinal < bar.report and bar.report <= expiry
    tenor = tenor_of(expiry, clock, smile)
    return at_the_money_pulled(bar.level, bar.anchor, tenor.weight, tenor.days, inside, smile)


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
def _paying(
    right: int,
    spot: float,
    strike: float,
    bar: Any,
    clock: Clock,
    years: float,
    volatility: float,
    held: float,
) -> float:
    """Value of an American option whose life holds projected dividends of present value `held`."""
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
    if expiry - clock.ordinal + clock.extra_days <= 0.0:
        return intrinsic(right, spot, strike), 0.0, 0.0
    tenor = tenor_of(expiry, clock, smile)
    held = 0.0 if bar.pay_ordinal == 0 else escrow(bar, expiry, clock)
    base = spot - held
    if base <= 0.0:
        return intrinsic(right, base, strike), 0.0, 0.0
    inside = clock.ordinal < bar.report and bar.report <= expiry
    atm = at_the_money_pulled(bar.level, bar.anchor, tenor.weight, tenor.days, inside, smile)
    away = math.log(strike / base) - clock.rate * tenor.years
    deviations = away / (atm * tenor.root)
    volatility = bent(atm, deviations, tenor.scale, smile)
    if held != 0.0 and clock.american == 1:
        mid = _paying(right, spot, strike, bar, clock, tenor.years, volatility, held)
    else:
        span = Span(tenor.years, tenor.root, clock.rate, tenor.discount)
        tick = EXERCISE_TICK if clock.american == 1 else math.inf
        mid = on_forward(right, base, strike, away, volatility, span, tick)
    return mid, volatility, abs(deviations)
