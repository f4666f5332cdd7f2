"""Makes the table of `hedgerow.kernels.exercise`: `python -m hedgerow.kernels.exercise_table`.

The method is that of `hedgerow.kernels.boundary` with many more points: the boundary at 20 times, all refined
together by Newton steps until nothing moves, then Kim's integral on 96 points. A put without yield depends on
rate x years, volatility x sqrt(years) and ln(price / strike) alone, so strike and years are 1 here,
`interest` is the rate and `deviation` the volatility. Arrays: P puts, N times, L points.
"""

from __future__ import annotations

import numpy as np

from hedgerow.kernels.exercise import AWAY, DEVIATIONS, FILE, LEANINGS
from hedgerow.kernels.layout import Floats
from hedgerow.kernels.normal import ONE_OVER_ROOT_TWO_PI, cdf, quantile

__all__ = ["boundary_depths", "make_table"]

TIMES, INNER, OUTER = 20, 40, 96
MOST_STEPS = 100
_cdf = np.vectorize(cdf, otypes=[float])
_quantile = np.vectorize(quantile, otypes=[float])


def _half_rule(points: int) -> tuple[Floats, Floats]:
    """Gauss-Legendre points and weights on [0, 1]."""
    places, weights = np.polynomial.legendre.leggauss(points)
    return 0.5 * (1.0 + places), 0.5 * weights


def _roots() -> Floats:
    """Square roots of the times, (N,): Chebyshev points on (0, 1], the last exactly 1."""
    points = 0.5 * (1.0 - np.cos(np.pi * (np.arange(TIMES) + 0.5) / TIMES))
    return points / points[-1]


ROOTS = _roots()


def _interpolation(places: Floats) -> Floats:
    """Weights (L, N) of Lagrange interpolation from ROOTS to places."""
    apart = ROOTS[:, None] - ROOTS + np.eye(TIMES)
    gaps = places[:, None, None] - ROOTS + np.zeros((TIMES, 1))
    terms = np.where(np.eye(TIMES, dtype=bool), 1.0, gaps / apart)
    return np.asarray(terms.prod(axis=2))


HALF, WEIGHT = _half_rule(INNER)
LEFT = np.sqrt(1.0 - HALF**2)
INWARD = np.stack([_interpolation(root * LEFT) * LEFT[:, None] for root in ROOTS])  # (N, L, N)


def _newton(depths: Floats, interest: Floats, deviation: Floats) -> Floats:
    """One Newton step of ln B = ln(N/D) for all times of all puts; `depths` (P, N) are ln(K/B) / sqrt(t)."""
    time = ROOTS**2
    spread = deviation * ROOTS  # (P, N)
    depth = depths * ROOTS
    d2 = (interest * time - depth) / spread - 0.5 * spread
    front = np.exp(-interest * time - 0.5 * d2 * d2) * ONE_OVER_ROOT_TWO_PI / spread
    inner = np.maximum(np.einsum("nlk,pk->pnl", INWARD, depths), 0.0) * ROOTS[:, None]
    elapsed, span = time[:, None] * HALF**2, spread[..., None] * HALF
    d = (inner - depth[..., None] + interest[..., None] * elapsed) / span - 0.5 * span
    term = WEIGHT * np.exp(-interest[..., None] * elapsed - 0.5 * d * d)
    moves = (1.0 - np.einsum("nln->nl", INWARD)) / span
    scale = 2.0 * ONE_OVER_ROOT_TWO_PI * interest * ROOTS / deviation
    above = front + scale * term.sum(axis=2)
    above_slope = -front * d2 / spread - scale * (term * d * moves).sum(axis=2)
    below = front * np.exp(depth) + _cdf(d2 + spread)
    below_slope = -front * np.exp(depth) * d2 / spread
    slope = np.maximum(1.0 - above_slope / above + below_slope / below, 0.2)
    better = depth - (depth + np.log(above / below)) / slope
    return np.asarray(np.clip(better, 0.25 * depth, 4.0 * depth) / ROOTS)


def boundary_depths(interest: Floats, deviation: Floats) -> Floats:
    """Depths ln(K/B) / sqrt(t) of the boundary at ROOTS**2, (P, N), for rate and volatility of shape (P, 1).

    Raises ArithmeticError when they do not settle.
    """
    leaning = interest / deviation
    depths = deviation * np.sqrt(2.0 * np.log1p(1.0 / (leaning * ROOTS))) / (1.0 + leaning)
    for _ in range(MOST_STEPS):
        better = _newton(depths, interest, deviation)
        moved = float(np.abs(better / depths - 1.0).max())
        depths = better
        if moved < 1e-8:  # where the deviation is small, rounding moves them by a tenth of that
            return depths
    raise ArithmeticError(f"the boundary of early exercise does not settle: still moved by {moved:.1e} of it")


def _premiums(away: Floats, interest: Floats, deviation: Floats, depths: Floats) -> Floats:
    """What early exercise adds at ln(price / strike) `away` (P, Y), in strikes: Kim's integral."""
    half, weight = _half_rule(OUTER)
    left = np.sqrt(1.0 - half**2)
    deep = np.maximum(depths @ _interpolation(left).T, 0.0) * left  # (P, L)
    elapsed, span = half**2, deviation * half
    over = (away[:, :, None] + deep[:, None, :] + (interest * elapsed)[:, None, :]) / span[:, None, :]
    flow = weight * half * interest * np.exp(-interest * elapsed)
    return np.asarray(2.0 * (flow[:, None, :] * _cdf(0.5 * span[:, None, :] - over)).sum(axis=2))


def make_table() -> Floats:
    """The table: (leaning, deviation, 1 + distance); see `hedgerow.kernels.exercise`."""
    leaning, deviation = (grid.reshape(-1, 1) for grid in np.meshgrid(LEANINGS, DEVIATIONS, indexing="ij"))
    interest = leaning * deviation
    depths = boundary_depths(interest, deviation)
    edge = depths[:, -1:] / deviation
    chance = _premiums((AWAY - edge) * deviation, interest, deviation, depths) / interest
    table = np.hstack([edge, _quantile(chance)])
    return table.reshape(len(LEANINGS), len(DEVIATIONS), 1 + len(AWAY))


if __name__ == "__main__":
    np.save(FILE, make_table())
