"""The standard normal distribution: density, probability and quantile, and two variables together."""

from __future__ import annotations

import math

import numpy as np

from hedgerow.kernels.jit import compiled

__all__ = ["bivariate_cdf", "cdf", "pdf", "quantile"]

ROOT_HALF = 0.7071067811865476
ONE_OVER_ROOT_TWO_PI = 0.3989422804014327
_PLACES, _WEIGHTS = np.polynomial.legendre.leggauss(20)


@compiled
def pdf(x: float) -> float:
    """Density of the standard normal distribution at `x`."""
    return ONE_OVER_ROOT_TWO_PI * math.exp(-0.5 * x * x)


@compiled
def cdf(x: float) -> float:
    """Probability that a standard normal variable is at most `x`; full relative precision in both tails."""
    return 0.5 * math.erfc(-x * ROOT_HALF)


@compiled
def _middle(r: float) -> float:
    """Rational approximation of AS 241 for |p - 1/2| <= 0.425, where r = 0.425^2 - (p - 1/2)^2."""
    above = 2509.0809287301226727 * r + 33430.575583588128105
    above = (above * r + 67265.770927008700853) * r + 45921.953931549871457
    above = (above * r + 13731.693765509461125) * r + 1971.5909503065514427
    above = (above * r + 133.14166789178437745) * r + 3.387132872796366608
    below = 5226.495278852545925 * r + 28729.085735721942674
    below = (below * r + 39307.89580009271061) * r + 21213.794301586595867
    below = (below * r + 5394.1960214247511077) * r + 687.1870074920579083
    below = (below * r + 42.313330701600911252) * r + 1.0
    return above / below


@compiled
def _near_tail(r: float) -> float:
    """Rational approximation of AS 241 in the tail, r = sqrt(-ln p) - 1.6, for sqrt(-ln p) <= 5."""
    above = 7.7454501427834140764e-4 * r + 0.0227238449892691845833
    above = (above * r + 0.24178072517745061177) * r + 1.27045825245236838258
    above = (above * r + 3.64784832476320460504) * r + 5.7694972214606914055
    above = (above * r + 4.6303378461565452959) * r + 1.42343711074968357734
    below = 1.05075007164441684324e-9 * r + 5.475938084995344946e-4
    below = (below * r + 0.0151986665636164571966) * r + 0.14810397642748007459
    below = (below * r + 0.68976733498510000455) * r + 1.6763848301838038494
    below = (below * r + 2.05319162663775882187) * r + 1.0
    return above / below


@compiled
def _far_tail(r: float) -> float:
    """Rational approximation of AS 241 in the far tail, r = sqrt(-ln p) - 5."""
    above = 2.01033439929228813265e-7 * r + 2.71155556874348757815e-5
    above = (above * r + 0.0012426609473880784386) * r + 0.026532189526576123093
    above = (above * r + 0.29656057182850489123) * r + 1.7848265399172913358
    above = (above * r + 5.4637849111641143699) * r + 6.6579046435011037772
    below = 2.04426310338993978564e-15 * r + 1.4215117583164458887e-7
    below = (below * r + 1.8463183175100546818e-5) * r + 7.868691311456132591e-4
    below = (below * r + 0.0148753612908506148525) * r + 0.13692988092273580531
    below = (below * r + 0.59983220655588793769) * r + 1.0
    return above / below


@compiled
def quantile(p: float) -> float:
    """Find the value a standard normal variable stays at or under with probability `p`.

    Wichura 1988, "Algorithm AS 241: The percentage points of the normal distribution", Applied Statistics
    37(3), routine PPND16: relative error about 1e-16. Minus infinity for p <= 0, infinity for p >= 1.
    """
    if p <= 0.0:
        return -math.inf
    if p >= 1.0:
        return math.inf
    q = p - 0.5
    if abs(q) <= 0.425:
        return q * _middle(0.180625 - q * q)
    r = math.sqrt(-math.log(p if q < 0.0 else 1.0 - p))
    x = _near_tail(r - 1.6) if r <= 5.0 else _far_tail(r - 5.0)
    return -x if q < 0.0 else x


@compiled
def _by_angle(h: float, k: float, rho: float) -> float:
    """Integrate Plackett's identity over the angle arcsin(rho): P(X > h, Y > k) less its value at rho = 0."""
    half = 0.5 * math.asin(rho)
    mean = 0.5 * (h * h + k * k)
    total = 0.0
    for i in range(20):
        sine = math.sin(half * (1.0 + _PLACES[i]))
        total += _WEIGHTS[i] * math.exp((sine * h * k - mean) / (1.0 - sine * sine))
    return total * half / (2.0 * math.pi)


@compiled
def _near_one(h: float, k: float, rho: float) -> float:
    """P(X > h, Y > k) less its value at rho = 1, for 0.925 <= rho < 1: the expansion of Genz 2004."""
    square = (1.0 - rho) * (1.0 + rho)
    root = math.sqrt(square)
    gap = (h - k) * (h - k)
    c, d = (4.0 - h * k) / 8.0, (12.0 - h * k) / 16.0
    total = 0.0
    power = -0.5 * (gap / square + h * k)
    if power > -100.0:
        fourth = 1.0 - c * (gap - square) * (1.0 - d * gap / 5.0) / 3.0 + c * d * square * square / 5.0
        total = root * math.exp(power) * fourth
    if h * k > -100.0:
        away = math.sqrt(gap)
        tail = cdf(-away / root) / ONE_OVER_ROOT_TWO_PI * away
        total -= math.exp(-0.5 * h * k) * tail * (1.0 - c * gap * (1.0 - d * gap / 5.0) / 3.0)
    half = 0.5 * root
    for i in range(20):
        place = half * (1.0 + _PLACES[i])
        x = place * place
        power = -0.5 * (gap / x + h * k)
        if power > -100.0:
            rest = math.sqrt(1.0 - x)
            exact = math.exp(-0.5 * h * k * (1.0 - rest) / (1.0 + rest)) / rest
            total += half * _WEIGHTS[i] * math.exp(power) * (exact - (1.0 + c * x * (1.0 + d * x)))
    return -total / (2.0 * math.pi)


@compiled
def bivariate_cdf(x: float, y: float, rho: float) -> float:
    """Probability that two standard normal variables of correlation `rho` are at most `x` and `y`.

    Genz 2004, "Numerical computation of rectangular bivariate and trivariate normal and t probabilities",
    Statistics and Computing 14, after Drezner & Wesolowsky 1990; absolute error about 1e-15.
    """
    if abs(rho) < 0.925:
        return min(max(cdf(x) * cdf(y) + _by_angle(-x, -y, rho), 0.0), 1.0)
    if rho > 0.0:
        near = _near_one(-x, -y, rho) if rho < 1.0 else 0.0
        return min(max(cdf(min(x, y)) + near, 0.0), 1.0)
    near = _near_one(-x, y, -rho) if rho > -1.0 else 0.0
    return min(max(max(cdf(x) - cdf(-y), 0.0) - near, 0.0), 1.0)
