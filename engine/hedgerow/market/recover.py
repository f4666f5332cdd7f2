"""Splits and dividends recovered from a raw and an adjusted close.

The ratio q of adjusted to raw close stands still between actions. On an action's date it steps up. With r new
shares for one old, D paid per new share and C the raw close, the step q[t] / q[t-1] is

    r / (1 - r D / C[t-1])    where the dividend is taken as reinvested at the close before the ex-date
    r (1 + D / C[t])          where it is taken as reinvested at the close of the ex-date

Both are in use (common practice of data vendors); the amounts tell which, since dividends are declared in
whole cents far more often than not.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from hedgerow.kernels.layout import Floats, Ints

SPLIT_RATIOS = np.array(
    [2, 3, 4, 5, 6, 7, 8, 10, 15, 20, 25, 30, 50, 3 / 2, 4 / 3, 5 / 4, 5 / 2, 5 / 3, 6 / 5]
)
RATIOS = np.concatenate([SPLIT_RATIOS, 1.0 / SPLIT_RATIOS])
REINVESTED = ("close before", "ex-date close")
LEAST_DECIMALS, MOST_DECIMALS = 2, 8
NEAR_RATIO = 0.02
NEAR_PRICE = 0.25
CENT = 0.01
BARS_A_STEP = 10  # a company acts at most about twice a month
SINGLE_PRECISION = 1.2e-7  # relative; many tables went through 32-bit floats


@dataclass(frozen=True)
class Steps:
    """The steps of one symbol's ratio: at which bars, by how much, and the closes around them, (k,).

    `least` and `most` bound q[t] / q[t-1] as the decimals of the adjusted close allow. `crooked` are bars
    from which the ratio drifts without a step.
    """

    bar: Ints
    least: Floats
    most: Floats
    before: Floats
    after: Floats
    split: Floats
    crooked: Ints

    def amounts(self, reinvested: str) -> tuple[Floats, Floats]:
        """Return the least and the greatest dividend per new share that explain each step, (k,)."""
        if reinvested == REINVESTED[0]:
            bounds = [self.before / self.split - self.before / step for step in (self.least, self.most)]
        else:
            bounds = [self.after * (step / self.split - 1.0) for step in (self.least, self.most)]
        return bounds[0], bounds[1]


def steps_of(close: Floats, adjusted: Floats) -> Steps:
    """Return the steps of the ratio of adjusted to raw close of one symbol's bars, (n,).

    First only the adjusted close's own decimals are granted as noise. Where that gives more steps than any
    company acts, half a cent of the raw close is granted too (prices in sixteenths written in cents). Where
    even that does not help there are no steps, and every bar is crooked.
    """
    for cents in (0.0, CENT / 2.0):
        low, high = _ratio_bounds(close, adjusted, cents)
        bar = 1 + np.flatnonzero((low[1:] > high[:-1]) | (high[1:] < low[:-1]))
        if len(bar) * BARS_A_STEP <= max(len(close), BARS_A_STEP):
            return _steps_at(bar, close, low, high)
    none = np.empty(0)
    return Steps(np.empty(0, dtype=np.int64), none, none, none, none, none, np.zeros(1, dtype=np.int64))


def _ratio_bounds(close: Floats, adjusted: Floats, cents: float) -> tuple[Floats, Floats]:
    """Return the least and the greatest ratio that the decimals of the closes allow, (n,)."""
    half = 0.5 * 10.0 ** -_decimals(adjusted) + SINGLE_PRECISION * adjusted
    raw = SINGLE_PRECISION * close + cents
    return (adjusted - half) / (close + raw), (adjusted + half) / (close - raw)


def _steps_at(bar: Ints, close: Floats, low: Floats, high: Floats) -> Steps:
    """Return the steps at some bars, the ratio between them taken from all bars of a level."""
    starts = np.concatenate([[0], bar]).astype(np.int64)
    lowest, highest = np.maximum.reduceat(low, starts), np.minimum.reduceat(high, starts)
    drifts = lowest > highest
    means = np.add.reduceat((low + high) / 2.0, starts) / np.diff(np.append(starts, len(close)))
    lowest, highest = np.where(drifts, means, lowest), np.where(drifts, means, highest)
    least, most = lowest[1:] / highest[:-1], highest[1:] / lowest[:-1]
    before, after = close[bar - 1], close[bar]
    split = _split_ratios(before, after, (least + most) / 2.0)
    return Steps(bar, least, most, before, after, split, starts[drifts])


def _decimals(values: Floats) -> int:
    """Return how many decimals the numbers are written with, from 2 to 8."""
    for decimals in range(LEAST_DECIMALS, MOST_DECIMALS):
        scaled = values * 10.0**decimals
        if np.all(np.abs(scaled - np.round(scaled)) < 1e-7 + 1e-9 * np.abs(scaled)):
            return decimals
    return MOST_DECIMALS


def _split_ratios(before: Floats, after: Floats, step: Floats) -> Floats:
    """Return the split that explains each step, 1 for none; the raw price must have moved with it."""
    distance = np.abs(np.log(step[:, None] / RATIOS[None, :]))
    ratio = RATIOS[distance.argmin(axis=1)]
    moved = np.abs(np.log(before / after / ratio)) < NEAR_PRICE
    return np.where((distance.min(axis=1) < NEAR_RATIO) & moved, ratio, 1.0)


def convention(steps: Sequence[Steps]) -> str:
    """Return where the dividends of some symbols were taken as reinvested: the one that gives whole cents."""
    distances = []
    for reinvested in REINVESTED:
        bounds = [step.amounts(reinvested) for step in steps]
        middle = np.concatenate([(low + high) / 2.0 for low, high in bounds] or [np.empty(0)])
        paid = middle[middle > CENT / 2.0]
        distances.append(float(np.mean(np.abs(paid - np.round(paid, 2)))) if len(paid) else 0.0)
    return REINVESTED[1] if distances[1] < distances[0] else REINVESTED[0]


def dividends(steps: Steps, reinvested: str) -> Floats:
    """Return the dividend per new share of each step, (k,): the shortest decimal that explains it, 0 none."""
    least, most = steps.amounts(reinvested)
    return np.array([shortest_decimal(low, high) for low, high in zip(least, most, strict=True)])


def shortest_decimal(low: float, high: float) -> float:
    """Return the amount with the fewest decimals between two bounds, near their middle; 0 where 0 fits.

    A width of a tenth of a cent is always granted: prices are written in cents too.
    """
    middle = (low + high) / 2.0
    slack = max((high - low) / 2.0, CENT / 20.0)
    if middle <= slack:
        return 0.0
    for decimals in range(2, 6):
        rounded = round(middle, decimals)
        if abs(rounded - middle) <= slack:
            return float(rounded)
    return float(round(middle, 6))
