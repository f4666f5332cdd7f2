"""What early exercise adds to a put on a stock without dividends, read off a table.

Such a put, in strikes, depends on three numbers: rate x years, volatility x sqrt(years) and ln(price/strike).
Here: `deviation` is volatility x sqrt(years); `leaning` is rate x sqrt(years) / volatility, the drift in
deviations; and the distance of ln(price) from the exercise boundary is measured in deviations too. In these
the table is smooth. It holds the boundary's own distance under the strike, and z where N(z) is the value of
early exercise over the interest, rate x years. It is read by cubic interpolation: by the fourth root of the
leaning, by the deviation, and by the distance, stretched near the boundary. How it is made stands in
`hedgerow.kernels.exercise_table`.

Measured on a strike of 100 against the method it is made by, with more points: within .00014 for rates of .2
to 6 %, volatilities of 10 to 80 % and 5 to 400 days; within .0006 up to 15 %, 150 % and three years.
"""

from __future__ import annotations

import math
from pathlib import Path

import numpy as np

from hedgerow.kernels.jit import compiled
from hedgerow.kernels.normal import cdf

__all__ = [
    "AWAY",
    "DEVIATIONS",
    "EXERCISED",
    "FILE",
    "LEANINGS",
    "TABLE",
    "is_tabled",
    "tabled_depth",
    "tabled_premium",
]

FILE = Path(__file__).with_name("exercise.npy")
Weights = tuple[float, float, float, float]
LEAST, MOST, ROWS = 1e-5, 3.0, 34
NARROWEST, WIDEST, COLUMNS = 1e-4, 1.8, 8
FARTHEST, PLACES = 7.0, 21
BEND = 0.2  # a distance y is stretched to sqrt(y + BEND^2) - BEND
EXERCISED = -1.0  # instead of a premium

FIRST_ROOT = LEAST**0.25
_REACH = math.sqrt(FARTHEST + BEND * BEND) - BEND
_STRETCHED = np.linspace(0.0, _REACH, PLACES)
LEANINGS = np.linspace(FIRST_ROOT, MOST**0.25, ROWS) ** 4
DEVIATIONS = np.linspace(NARROWEST, WIDEST, COLUMNS)
AWAY = _STRETCHED * (_STRETCHED + 2.0 * BEND)

PER_ROOT = (ROWS - 1) / (MOST**0.25 - FIRST_ROOT)
PER_DEVIATION = (COLUMNS - 1) / (WIDEST - NARROWEST)
PER_STRETCHED = (PLACES - 1) / _REACH
TABLE = np.load(FILE)  # (row, column, 0) the boundary's distance, (row, column, 1 + place) z


@compiled
def is_tabled(leaning: float, deviation: float) -> bool:
    """Tell whether the table covers a put."""
    return LEAST <= leaning <= MOST and NARROWEST <= deviation <= WIDEST


@compiled
def _row(leaning: float) -> float:
    """Where a leaning stands among LEANINGS, in points."""
    return (math.sqrt(math.sqrt(leaning)) - FIRST_ROOT) * PER_ROOT


@compiled
def _column(deviation: float) -> float:
    """Where a deviation stands among DEVIATIONS, in points."""
    return (deviation - NARROWEST) * PER_DEVIATION


@compiled
def _before(place: float, points: int) -> int:
    """The point before a place on a grid, but at the ends one that has the neighbours it needs."""
    return min(max(int(place), 1), points - 3)


@compiled
def _cubic(x: float) -> Weights:
    """Weights of the points -1, 0, 1, 2 in cubic interpolation to `x`."""
    low, high = x * (x - 1.0), (x + 1.0) * (x - 2.0)
    return -low * (x - 2.0) / 6.0, high * (x - 1.0) * 0.5, -high * x * 0.5, low * (x + 1.0) / 6.0


@compiled
def tabled_depth(leaning: float, deviation: float) -> float:
    """ln(strike / boundary) over `deviation` for a put that the table covers."""
    row, column = _row(leaning), _column(deviation)
    i, j = _before(row, ROWS), _before(column, COLUMNS)
    return _depth(i, j, _cubic(row - i), _cubic(column - j))


@compiled
def _depth(i: int, j: int, down: Weights, across: Weights) -> float:
    """The boundary's distance between the points around (i, j)."""
    depth = 0.0
    for a in range(4):
        for b in range(4):
            depth += down[a] * across[b] * TABLE[i - 1 + a, j - 1 + b, 0]
    return depth


@compiled
def tabled_premium(log_moneyness: float, leaning: float, deviation: float) -> float:
    """What early exercise adds to a put that the table covers, in strikes, or EXERCISED.

    `log_moneyness` is ln(price / strike). EXERCISED stands for a price at or under the boundary.
    """
    row, column = _row(leaning), _column(deviation)
    i, j = _before(row, ROWS), _before(column, COLUMNS)
    down, across = _cubic(row - i), _cubic(column - j)
    distance = log_moneyness / deviation + _depth(i, j, down, across)
    if distance <= 0.0:
        return EXERCISED
    if distance >= FARTHEST:
        return 0.0
    place = (math.sqrt(distance + BEND * BEND) - BEND) * PER_STRETCHED
    k = _before(place, PLACES)
    along = _cubic(place - k)
    z0, z1, z2, z3 = 0.0, 0.0, 0.0, 0.0
    for a in range(4):
        for b in range(4):
            weight = down[a] * across[b]
            z0 += weight * TABLE[i - 1 + a, j - 1 + b, k]
            z1 += weight * TABLE[i - 1 + a, j - 1 + b, k + 1]
            z2 += weight * TABLE[i - 1 + a, j - 1 + b, k + 2]
            z3 += weight * TABLE[i - 1 + a, j - 1 + b, k + 3]
    return leaning * deviation * cdf(along[0] * z0 + along[1] * z1 + along[2] * z2 + along[3] * z3)
