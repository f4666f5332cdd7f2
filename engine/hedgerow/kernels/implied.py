"""The volatility at which a European option is worth a given price; one option at a time."""

from __future__ import annotations

import math

from hedgerow.kernels.jit import compiled
from hedgerow.kernels.layout import CALL
from hedgerow.kernels.lognormal import discount
from hedgerow.kernels.normal import ONE_OVER_ROOT_TWO_PI, cdf

__all__ = ["IMPLIED_ABOVE", "IMPLIED_BELOW", "IMPLIED_OK", "IMPLIED_UNDEFINED", "implied_european"]

IMPLIED_OK, IMPLIED_BELOW, IMPLIED_ABOVE, IMPLIED_UNDEFINED = 0, 1, 2, 3

_MOST_STEPS = 120


@compiled
def _normalized(x: float, deviation: float) -> float:
    """Value a call over sqrt(forward x strike), undiscounted, for x = ln(forward / strike) <= 0."""
    d1 = x / deviation + 0.5 * deviation
    return math.exp(0.5 * x) * cdf(d1) - math.exp(-0.5 * x) * cdf(d1 - deviation)


@compiled
def _slope(x: float, deviation: float) -> float:
    """Differentiate the normalized value by the deviation."""
    ratio = x / deviation
    return ONE_OVER_ROOT_TWO_PI * math.exp(-0.5 * (ratio * ratio + 0.25 * deviation * deviation))


@compiled
def _solve(x: float, price: float) -> float:
    """Find the deviation at which the normalized value is `price`, by Newton steps in a bracket.

    Starts at the point of inflection sqrt(2|x|), from which Newton is known to converge (Manaster & Koehler
    1982, "The calculation of implied variances from the Black-Scholes model", Journal of Finance 37). Below
    that point the logarithm of the price is matched, which keeps the steps long for prices near zero.
    """
    low, high = 0.0, 100.0
    turn = math.sqrt(2.0 * abs(x))
    tail = turn > 0.0 and price < _normalized(x, turn)
    deviation = turn if turn > 1e-3 else 1e-3
    if turn == 0.0 or not tail:
        deviation = max(deviation, price / ONE_OVER_ROOT_TWO_PI * 0.5)
    for _ in range(_MOST_STEPS):
        value = _normalized(x, deviation)
        if value > price:
            high = deviation
        else:
            low = deviation
        slope = _slope(x, deviation)
        step = deviation
        if slope > 0.0 and value > 0.0:
            miss = value * math.log(value / price) if tail else value - price
            step = miss / slope
        best = deviation - step
        if not low < best < high:
            best = 0.5 * (low + high)
        if abs(best - deviation) <= 2e-16 * deviation:
            return best
        deviation = best
    return deviation


@compiled
def implied_european(
    right: int,
    price: float,
    spot: float,
    strike: float,
    years: float,
    rate: float,
    dividend_yield: float,
) -> tuple[float, int]:
    """Find the volatility (annual fraction) at which a European option is worth `price`, and a status.

    Status IMPLIED_OK; IMPLIED_BELOW: the price is under the least possible value, the discounted forward's
    intrinsic value (volatility NaN; exactly at it: 0 with IMPLIED_OK); IMPLIED_ABOVE: at or over the most a
    European option can be worth, the discounted forward for a call, the discounted strike for a put (NaN);
    IMPLIED_UNDEFINED: no time left, or a price or strike that is not positive (NaN).
    """
    if not (years > 0.0 and spot > 0.0 and strike > 0.0 and math.isfinite(price)):
        return math.nan, IMPLIED_UNDEFINED
    forward = spot * discount(dividend_yield, years)
    owed = strike * discount(rate, years)
    least = forward - owed if right == CALL else owed - forward
    least = max(least, 0.0)
    if price < least:
        return math.nan, IMPLIED_BELOW
    if price >= (forward if right == CALL else owed):
        return math.nan, IMPLIED_ABOVE
    time_value = (price - least) / math.sqrt(forward * owed)
    if time_value <= 0.0:
        return 0.0, IMPLIED_OK
    return _solve(-abs(math.log(forward / owed)), time_value) / math.sqrt(years), IMPLIED_OK
