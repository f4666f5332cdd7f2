"""American options on a stock with one known cash dividend ahead; one option at a time.

The price less the present value of the dividend is lognormal (escrowed dividend). For several dividends and
for checking there is the slower `hedgerow.kernels.lattice`.
"""

from __future__ import annotations

import math

from hedgerow.kernels.american import american
from hedgerow.kernels.boundary import Problem, exercise_depths, exercise_premium
from hedgerow.kernels.jit import compiled
from hedgerow.kernels.layout import CALL
from hedgerow.kernels.lognormal import delta, discount, european, intrinsic, is_certain
from hedgerow.kernels.normal import bivariate_cdf, cdf

__all__ = ["american_cash"]

_MOST_STEPS = 50


@compiled
def _critical_price(strike: float, years: float, rate: float, volatility: float, amount: float) -> float:
    """Find the price without dividend at which exercise just before the ex-date equals keeping the call.

    Newton on C(I) - (I + amount - strike), convex and falling, from a point on its left: no step overshoots.
    """
    price = strike
    if european(CALL, price, strike, years, rate, 0.0, volatility) < amount:
        price = strike - amount
    for _ in range(_MOST_STEPS):
        miss = european(CALL, price, strike, years, rate, 0.0, volatility) - (price + amount - strike)
        slope = delta(CALL, price, strike, years, rate, 0.0, volatility) - 1.0
        if not slope < 0.0:
            break
        step = miss / slope
        price -= step
        if abs(step) <= 1e-10 * price:
            break
    return price


@compiled
def _call(
    rest: float,
    strike: float,
    years: float,
    rate: float,
    volatility: float,
    years_to_ex: float,
    amount: float,
) -> float:
    """Value a call exercised at expiry or just before the ex-date, on the price less the dividend.

    Roll 1977, Geske 1979 and Whaley 1981, Journal of Financial Economics 4, 7 and 9, in the form of Hull,
    Options, Futures and Other Derivatives, technical note on the exact value of such calls.
    """
    left = years - years_to_ex
    if amount >= strike or left <= 0.0:
        early = european(CALL, rest, strike - amount, years_to_ex, rate, 0.0, volatility)
        return max(early, european(CALL, rest, strike, years, rate, 0.0, volatility))
    critical = _critical_price(strike, left, rate, volatility, amount)
    deviation, deviation_ex = volatility * math.sqrt(years), volatility * math.sqrt(years_to_ex)
    a1 = (math.log(rest / strike) + rate * years) / deviation + 0.5 * deviation
    b1 = (math.log(rest / critical) + rate * years_to_ex) / deviation_ex + 0.5 * deviation_ex
    a2, b2 = a1 - deviation, b1 - deviation_ex
    link = -math.sqrt(years_to_ex / years)
    stock = rest * (cdf(b1) + bivariate_cdf(a1, -b1, link))
    kept = strike * discount(rate, years) * bivariate_cdf(a2, -b2, link)
    return stock - kept - (strike - amount) * discount(rate, years_to_ex) * cdf(b2)


@compiled
def american_cash(
    right: int,
    spot: float,
    strike: float,
    years: float,
    rate: float,
    volatility: float,
    years_to_ex: float,
    amount: float,
) -> float:
    """Value an American option on a stock that goes ex `amount` a share in `years_to_ex`, money per share.

    `spot` is the price with the dividend. A call may be exercised just before the ex-date or at expiry, which
    is all that is ever rational at a rate of zero or more; with further dividends ahead `amount` is the value
    at the ex-date of all of them. A put may be exercised from the ex-date on, or now; exercise earlier than
    the ex-date but not now is left out, so a put is a little low where the rate is high for the dividend.
    Sources: Roll, Geske & Whaley for the call; `hedgerow.kernels.boundary` for the put.
    """
    if amount <= 0.0 or not 0.0 < years_to_ex <= years:
        return american(right, spot, strike, years, rate, 0.0, volatility)
    rest = max(spot - amount * discount(rate, years_to_ex), 0.0)
    plain = european(right, rest, strike, years, rate, 0.0, volatility)
    least = max(plain, intrinsic(right, spot, strike))
    left = years - years_to_ex
    if right == CALL:
        if is_certain(rest, strike, years, volatility):
            return max(least, european(CALL, rest, strike - amount, years_to_ex, rate, 0.0, volatility))
        if amount <= strike * (1.0 - discount(rate, left)):
            return least
        return max(least, _call(rest, strike, years, rate, volatility, years_to_ex, amount))
    if left <= 0.0 or rate <= 0.0 or is_certain(rest, strike, years, volatility):
        return least
    problem = Problem(left, rate, 0.0, volatility, 0.0)
    extra = exercise_premium(math.log(rest / strike), years_to_ex, exercise_depths(problem), problem)
    return max(plain + strike * extra, least)
