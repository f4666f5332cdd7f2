"""One option on a stock without dividends in plain Python: European, American where a put may be exercised.

What early exercise adds is read by cubic interpolation off the table that the compiled kernels read, so that
all loops do the same work. Where it is proven under half a cent it is left out.
"""

from __future__ import annotations

import math

from hedgerow.kernels import exercise

__all__ = ["american_or_european"]

ROOT_HALF = math.sqrt(0.5)
HALF_TICK = 0.005
TABLE = exercise.TABLE.tolist()


def cdf(x: float) -> float:
    """Probability that a standard normal variable is at most x."""
    return 0.5 * math.erfc(-x * ROOT_HALF)


def european(right: int, spot: float, strike: float, years: float, rate: float, volatility: float) -> float:
    """Value of a European option, 0 a call and 1 a put (Hull, the Black-Scholes-Merton formulas)."""
    owed = strike * math.exp(-rate * years)
    deviation = volatility * math.sqrt(years)
    d1 = math.log(spot / owed) / deviation + 0.5 * deviation
    d2 = d1 - deviation
    if right == 0:
        return max(spot * cdf(d1) - owed * cdf(d2), 0.0)
    return max(owed * cdf(-d2) - spot * cdf(-d1), 0.0)


def put_bound(spot: float, strike: float, years: float, rate: float, volatility: float) -> float:
    """Most that early exercise can add: interest on the strike, times the best chance of being under it."""
    if rate <= 0.0:
        return 0.0
    away, likely = math.log(spot / strike), 1.0
    if away > 0.0:
        drift = rate - 0.5 * volatility * volatility
        when = min(years, away / drift) if drift > 0.0 else years
        likely = cdf(-(away + drift * when) / (volatility * math.sqrt(when)))
    return strike * (1.0 - math.exp(-rate * years)) * likely


def cubic(x: float) -> list[float]:
    """Weights of the points -1, 0, 1, 2 in cubic interpolation to x."""
    low, high = x * (x - 1.0), (x + 1.0) * (x - 2.0)
    return [-low * (x - 2.0) / 6.0, high * (x - 1.0) * 0.5, -high * x * 0.5, low * (x + 1.0) / 6.0]


def before(place: float, points: int) -> int:
    """The point before a place, with a neighbour before it and two after."""
    return min(max(int(place), 1), points - 3)


def premium(away: float, leaning: float, deviation: float) -> float:
    """What early exercise adds, in strikes, with `away` = ln(S/K); negative at or under the boundary."""
    row = (math.sqrt(math.sqrt(leaning)) - exercise.FIRST_ROOT) * exercise.PER_ROOT
    column = (deviation - exercise.NARROWEST) * exercise.PER_DEVIATION
    i, j = before(row, exercise.ROWS), before(column, exercise.COLUMNS)
    corner = [
        (down * across, line)
        for down, plane in zip(cubic(row - i), TABLE[i - 1 : i + 3], strict=True)
        for across, line in zip(cubic(column - j), plane[j - 1 : j + 3], strict=True)
    ]
    distance = away / deviation + sum(weight * line[0] for weight, line in corner)
    if distance <= 0.0:
        return -1.0
    if distance >= exercise.FARTHEST:
        return 0.0
    place = (math.sqrt(distance + exercise.BEND**2) - exercise.BEND) * exercise.PER_STRETCHED
    k = before(place, exercise.PLACES)
    z = sum(
        along * sum(weight * line[k + c] for weight, line in corner)
        for c, along in enumerate(cubic(place - k))
    )
    return leaning * deviation * cdf(z)


def american_or_european(
    right: int, spot: float, strike: float, years: float, rate: float, volatility: float
) -> float:
    """Value of an American option, 0 a call and 1 a put, with time left."""
    plain = european(right, spot, strike, years, rate, volatility)
    if right == 0:
        return plain
    most = put_bound(spot, strike, years, rate, volatility)
    if most < HALF_TICK:
        return plain
    root, gain = math.sqrt(years), max(strike - spot, 0.0)
    extra = premium(math.log(spot / strike), rate * root / volatility, volatility * root)
    return max(plain + min(strike * max(extra, 0.0), most), gain)
