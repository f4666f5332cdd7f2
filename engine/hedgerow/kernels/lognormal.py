"""European options on a lognormal price: value, greeks, odds, implied volatility; one option at a time.

Everywhere: `right` is CALL or PUT, `spot` and `strike` are money per share, `years` is the time to expiry,
`rate` and `dividend_yield` are continuously compounded annual fractions, `volatility` is an annual fraction.
Values are money per share. Formulas: Hull, Options, Futures and Other Derivatives, the chapters on the
Black-Scholes-Merton model, on indices and currencies (dividend yield) and on the greek letters.

Limits. At or after expiry (`years` <= 0) a value is what exercise pays. Without volatility the price is
certain to follow its forward. A strike of zero or less is always paid. NaN in gives NaN out.
"""

from __future__ import annotations

import math

from hedgerow.kernels.jit import compiled
from hedgerow.kernels.layout import CALL
from hedgerow.kernels.normal import ROOT_HALF, cdf, pdf

__all__ = [
    "chance_above",
    "delta",
    "discount",
    "european",
    "european_pair",
    "gamma",
    "intrinsic",
    "is_certain",
    "rho",
    "theta",
    "vega",
]


@compiled
def discount(rate: float, years: float) -> float:
    """Value today of one unit of money in `years`; costs nothing at a rate of zero."""
    return 1.0 if rate == 0.0 else math.exp(-rate * years)


@compiled
def intrinsic(right: int, spot: float, strike: float) -> float:
    """Value exercise now, money per share; never negative."""
    gain = spot - strike if right == CALL else strike - spot
    return 0.0 if gain <= 0.0 else gain


@compiled
def is_certain(spot: float, strike: float, years: float, volatility: float) -> bool:
    """Whether nothing is left to chance: no time, no volatility, or a price or strike of zero or less."""
    return years <= 0.0 or volatility <= 0.0 or spot <= 0.0 or strike <= 0.0


@compiled
def _d1(forward: float, owed: float, deviation: float) -> float:
    """Form d1 from the discounted forward, the discounted strike and volatility x sqrt(years)."""
    return math.log(forward / owed) / deviation + 0.5 * deviation


@compiled
def european(
    right: int,
    spot: float,
    strike: float,
    years: float,
    rate: float,
    dividend_yield: float,
    volatility: float,
) -> float:
    """Value a European option, money per share.

    Hull, equations for c and p with a known dividend yield. One log, one sqrt, one or two exp, two erfc.
    """
    if years <= 0.0:
        return intrinsic(right, spot, strike)
    forward = spot * discount(dividend_yield, years)
    owed = strike * discount(rate, years)
    if is_certain(spot, strike, years, volatility):
        return intrinsic(right, forward, owed)
    deviation = volatility * math.sqrt(years)
    d1 = _d1(forward, owed, deviation)
    a = d1 * ROOT_HALF
    b = (d1 - deviation) * ROOT_HALF
    if right == CALL:
        value = 0.5 * (forward * math.erfc(-a) - owed * math.erfc(-b))
    else:
        value = 0.5 * (owed * math.erfc(b) - forward * math.erfc(a))
    return 0.0 if value < 0.0 else value


@compiled
def european_pair(
    spot: float, strike: float, years: float, rate: float, dividend_yield: float, volatility: float
) -> tuple[float, float]:
    """Value the European call and put of one strike together, money per share.

    The option out of the money is computed, the other follows from put-call parity (Hull, put-call parity).
    """
    if years <= 0.0:
        return max(spot - strike, 0.0), max(strike - spot, 0.0)
    forward = spot * discount(dividend_yield, years)
    owed = strike * discount(rate, years)
    if is_certain(spot, strike, years, volatility):
        return max(forward - owed, 0.0), max(owed - forward, 0.0)
    deviation = volatility * math.sqrt(years)
    d1 = _d1(forward, owed, deviation)
    a = d1 * ROOT_HALF
    b = (d1 - deviation) * ROOT_HALF
    if forward <= owed:
        call = max(0.5 * (forward * math.erfc(-a) - owed * math.erfc(-b)), 0.0)
        return call, call - forward + owed
    put = max(0.5 * (owed * math.erfc(b) - forward * math.erfc(a)), 0.0)
    return put + forward - owed, put


@compiled
def chance_above(
    spot: float, strike: float, years: float, rate: float, dividend_yield: float, volatility: float
) -> float:
    """Risk-neutral chance that the price ends above `strike`, a fraction: N(d2).

    Where the outcome is certain: 1 when the forward is above the strike, otherwise 0.
    """
    span = max(years, 0.0)
    forward = spot * discount(dividend_yield, span)
    owed = strike * discount(rate, span)
    if is_certain(spot, strike, years, volatility):
        return 1.0 if forward > owed else 0.0
    deviation = volatility * math.sqrt(years)
    return cdf(_d1(forward, owed, deviation) - deviation)


@compiled
def delta(
    right: int,
    spot: float,
    strike: float,
    years: float,
    rate: float,
    dividend_yield: float,
    volatility: float,
) -> float:
    """Change of the value per unit of the spot price; calls 0 to 1, puts -1 to 0.

    Hull, delta of European options: e^(-qT) N(d1), for the put e^(-qT) (N(d1) - 1).
    """
    carried = discount(dividend_yield, max(years, 0.0))
    owed = strike * discount(rate, max(years, 0.0))
    if is_certain(spot, strike, years, volatility):
        if right == CALL:
            return carried if spot * carried > owed else 0.0
        return -carried if spot * carried < owed else 0.0
    d1 = _d1(spot * carried, owed, volatility * math.sqrt(years))
    return carried * cdf(d1) if right == CALL else -carried * cdf(-d1)


@compiled
def gamma(
    spot: float, strike: float, years: float, rate: float, dividend_yield: float, volatility: float
) -> float:
    """Change of delta per unit of the spot price, the same for call and put; 0 where all is certain.

    Hull, gamma: e^(-qT) n(d1) / (S sigma sqrt(T)).
    """
    if is_certain(spot, strike, years, volatility):
        return 0.0
    carried = discount(dividend_yield, years)
    deviation = volatility * math.sqrt(years)
    d1 = _d1(spot * carried, strike * discount(rate, years), deviation)
    return carried * pdf(d1) / (spot * deviation)


@compiled
def vega(
    spot: float, strike: float, years: float, rate: float, dividend_yield: float, volatility: float
) -> float:
    """Change of the value per unit (100 points) of volatility, money per share; the same for call and put.

    Hull, vega: S sqrt(T) n(d1) e^(-qT). 0 where all is certain.
    """
    if is_certain(spot, strike, years, volatility):
        return 0.0
    forward = spot * discount(dividend_yield, years)
    root = math.sqrt(years)
    d1 = _d1(forward, strike * discount(rate, years), volatility * root)
    return forward * root * pdf(d1)


@compiled
def theta(
    right: int,
    spot: float,
    strike: float,
    years: float,
    rate: float,
    dividend_yield: float,
    volatility: float,
) -> float:
    """Change of the value per year that passes, money per share; divide by 365 for a calendar day.

    Hull, theta with a dividend yield. Where all is certain, what carrying the discounted forward and strike
    brings while in the money; 0 at or after expiry.
    """
    if years <= 0.0:
        return 0.0
    forward = spot * discount(dividend_yield, years)
    owed = strike * discount(rate, years)
    sign = 1.0 if right == CALL else -1.0
    if is_certain(spot, strike, years, volatility):
        carry = dividend_yield * forward - rate * owed
        return sign * carry if sign * (forward - owed) > 0.0 else 0.0
    deviation = volatility * math.sqrt(years)
    d1 = _d1(forward, owed, deviation)
    decay = -0.5 * forward * pdf(d1) * deviation / years
    stays = dividend_yield * forward * cdf(sign * d1) - rate * owed * cdf(sign * (d1 - deviation))
    return decay + sign * stays


@compiled
def rho(
    right: int,
    spot: float,
    strike: float,
    years: float,
    rate: float,
    dividend_yield: float,
    volatility: float,
) -> float:
    """Change of the value per unit (100 points) of the interest rate, money per share.

    Hull, rho: K T e^(-rT) N(d2) for the call, -K T e^(-rT) N(-d2) for the put.
    """
    if years <= 0.0:
        return 0.0
    owed = strike * discount(rate, years)
    sign = 1.0 if right == CALL else -1.0
    if is_certain(spot, strike, years, volatility):
        forward = spot * discount(dividend_yield, years)
        return sign * owed * years if sign * (forward - owed) > 0.0 else 0.0
    deviation = volatility * math.sqrt(years)
    d2 = _d1(spot * discount(dividend_yield, years), owed, deviation) - deviation
    return sign * owed * years * cdf(sign * d2)
