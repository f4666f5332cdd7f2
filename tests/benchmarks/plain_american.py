"""One option on a stock without dividends in plain Python: European, American where a put may be exercised.

The method is that of Andersen, Lake & Offengenden 2016 (Journal of Computational Finance 20, system A) for
the exercise boundary, in the depth ln(K/B)/sqrt(t) at a few times, and Kim's integral (Review of Financial
Studies 3, 1990) for what early exercise adds. Where that is proven under half a cent it is left out. The
numbers of times, points and rounds are those of the compiled kernel, so that both do the same work.
"""

from __future__ import annotations

import math

import numpy as np

from hedgerow.kernels.boundary import FIRST_STEPS, HARD_REFINEMENTS, INNER, NODES, OUTER, REFINEMENTS

__all__ = ["american_or_european"]

ROOT_HALF = math.sqrt(0.5)
DENSITY_AT_ZERO = 1.0 / math.sqrt(2.0 * math.pi)
HALF_TICK = 0.005
Table = list[list[list[float]]]


def _half_rule(points: int) -> tuple[list[float], list[float]]:
    """Gauss-Legendre points and weights on [0, 1]."""
    places, weights = np.polynomial.legendre.leggauss(points)
    return (0.5 * (1.0 + places)).tolist(), (0.5 * weights).tolist()


ROOTS = [((i + 1) / NODES) ** 0.8 for i in range(NODES)]
HALF_IN, WEIGHT_IN = _half_rule(INNER)
HALF_OUT, WEIGHT_OUT = _half_rule(OUTER)


def _lagrange(known: int, place: float) -> list[float]:
    """Weights of the first `known` nodes in Lagrange interpolation at a place, zero for the others."""
    weights = [
        math.prod((place - ROOTS[k]) / (ROOTS[j] - ROOTS[k]) for k in range(known) if k != j)
        for j in range(known)
    ]
    return weights + [0.0] * (NODES - known)


def _scaled(known: int, place: float, left: float) -> list[float]:
    return [weight * left for weight in _lagrange(known, place * left)]


LEFT_IN = [math.sqrt(1.0 - half * half) for half in HALF_IN]
LEFT_OUT = [math.sqrt(1.0 - half * half) for half in HALF_OUT]
MARCHING: Table = [[_scaled(i + 1, ROOTS[i], left) for left in LEFT_IN] for i in range(NODES)]
TOGETHER: Table = [[_scaled(NODES, ROOTS[i], left) for left in LEFT_IN] for i in range(NODES)]
OUTWARD = [_scaled(NODES, 1.0, left) for left in LEFT_OUT]


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


def _first_guess(years: float, rate: float, volatility: float) -> float:
    """Depth of the flat boundary of Bjerksund & Stensland 1993."""
    m = -rate / (volatility * volatility) - 0.5
    beta = max(-2.0 * m, 1.0001)
    high = max(beta / (beta - 1.0), 1.0001)
    fall = (2.0 * volatility * math.sqrt(years) - rate * years) / (high - 1.0)
    return math.log1p((high - 1.0) * -math.expm1(-max(fall, 1e-8)))


def _step(table: Table, known: int, i: int, depths: list[float], put: tuple[float, float, float]) -> float:
    """One Newton step for scaled depth i over the first `known` nodes; `put` is (years, rate, volatility)."""
    years, rate, volatility = put
    root = math.sqrt(years) * ROOTS[i]
    time, deviation, depth = root * root, volatility * root, depths[i] * root
    d2 = (rate * time - depth) / deviation - 0.5 * deviation
    front = math.exp(-rate * time - 0.5 * d2 * d2) * DENSITY_AT_ZERO / deviation
    carried = front * math.exp(depth)
    above = above_slope = 0.0
    for k in range(INNER):
        row = table[i][k]
        elapsed, span, inner = time * HALF_IN[k] * HALF_IN[k], deviation * HALF_IN[k], 0.0
        for j in range(known):
            inner += row[j] * depths[j]
        d = (max(inner * root, 0.0) - depth + rate * elapsed) / span - 0.5 * span
        term = WEIGHT_IN[k] * math.exp(-rate * elapsed - 0.5 * d * d)
        above += term
        above_slope -= term * d * (1.0 - row[i]) / span
    scale = 2.0 * DENSITY_AT_ZERO * root / volatility
    n = front + rate * scale * above
    n_slope = -front * d2 / deviation + rate * scale * above_slope
    below = carried + cdf(d2 + deviation)
    if not (n > 0.0 and below > 0.0):
        return depths[i]
    slope = max(1.0 - n_slope / n - carried * d2 / deviation / below, 0.2)
    better = depth + (-depth - math.log(n / below)) / slope
    return min(max(better, 0.25 * depth), 4.0 * depth, 50.0) / root


def _exercise_depths(put: tuple[float, float, float]) -> list[float]:
    """Scaled depths of the exercise boundary at a few times; `put` is (years, rate, volatility)."""
    years, rate, volatility = put
    shortest = years * ROOTS[0] * ROOTS[0]
    depths = [_first_guess(shortest, rate, volatility) / math.sqrt(shortest)] + [0.0] * (NODES - 1)
    for _ in range(FIRST_STEPS):
        depths[0] = _step(MARCHING, 1, 0, depths, put)
    for i in range(1, NODES):
        depths[i] = depths[0] if i == 1 else depths[i - 1] ** 2 / depths[i - 2]
        depths[i] = _step(MARCHING, i + 1, i, depths, put)
    hard = rate > 5.0 * volatility * volatility
    for _ in range(HARD_REFINEMENTS if hard else REFINEMENTS):
        depths = [_step(TOGETHER, NODES, i, depths, put) for i in range(NODES)]
    return depths


def _exercise_premium(away: float, depths: list[float], put: tuple[float, float, float]) -> float:
    """What early exercise adds, in strikes, with `away` = ln(S/K); `put` is (years, rate, volatility)."""
    years, rate, volatility = put
    root, total = math.sqrt(years), 0.0
    for half, weight, row in zip(HALF_OUT, WEIGHT_OUT, OUTWARD, strict=True):
        elapsed, depth = years * half * half, 0.0
        for j in range(NODES):
            depth += row[j] * depths[j]
        span = volatility * math.sqrt(elapsed)
        d2 = (away + max(depth, 0.0) * root + rate * elapsed) / span - 0.5 * span
        total += weight * half * rate * math.exp(-rate * elapsed) * cdf(-d2)
    return max(2.0 * years * total, 0.0)


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
    put = (years, rate, volatility)
    gain, away = max(strike - spot, 0.0), math.log(spot / strike)
    depths = _exercise_depths(put)
    if away <= -depths[-1] * math.sqrt(years):
        return max(gain, plain)
    return max(plain + min(strike * _exercise_premium(away, depths, put), most), gain)
