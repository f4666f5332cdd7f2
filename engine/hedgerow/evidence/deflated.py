"""What a Sharpe ratio is worth: its standard error, its scaling, and what is left after many tries.

Ratios here are of the returns as they are (a session's returns give a ratio a session), not scaled to a year.
Kurtosis is the plain fourth moment: 3 for a normal distribution.
"""

from __future__ import annotations

import math
from dataclasses import dataclass, field
from statistics import NormalDist
from typing import Any

import numpy as np
from numpy.typing import NDArray

from hedgerow.evidence.described import described, says
from hedgerow.evidence.ratios import LEAST_DEVIATION
from hedgerow.units import SESSIONS_A_YEAR

__all__ = [
    "NORMAL",
    "BestOfMany",
    "Shape",
    "best_of_many",
    "deflated_sharpe",
    "expected_maximum",
    "independent_trials",
    "minimum_track_record",
    "probabilistic_sharpe",
    "shape_of",
    "sharpe_error",
    "sharpe_scale",
]

Floats = NDArray[np.float64]

EULER_GAMMA = 0.5772156649015329


@dataclass(frozen=True, slots=True)
class Shape:
    """Skewness and kurtosis of returns."""

    skewness: float = 0.0
    kurtosis: float = 3.0


NORMAL = Shape()


def shape_of(returns: Floats) -> Shape:
    """Return the shape of returns (T,): third and fourth moments over powers of the standard deviation."""
    centred = returns - np.mean(returns)
    variance = float(np.mean(centred**2))
    if not math.sqrt(variance) > LEAST_DEVIATION:
        return NORMAL
    third, fourth = float(np.mean(centred**3)), float(np.mean(centred**4))
    return Shape(third / variance**1.5, fourth / variance**2)


def _error_squared(sharpe: float, shape: Shape) -> float:
    """Variance of a Sharpe ratio times the number of returns."""
    return max(1.0 - shape.skewness * sharpe + (shape.kurtosis - 1.0) / 4.0 * sharpe**2, 0.0)


def sharpe_error(sharpe: float, returns: int, shape: Shape = NORMAL) -> float:
    """Return the standard error of a Sharpe ratio measured on so many independent returns.

    sqrt((1 + SR^2 / 2) / T) for a normal shape: Lo 2002, "The Statistics of Sharpe Ratios", Financial
    Analysts Journal 58; with skewness and kurtosis as Mertens 2002 corrects it.
    """
    return math.sqrt(_error_squared(sharpe, shape) / returns)


def sharpe_scale(periods: int, autocorrelation: float = 0.0) -> float:
    """Return what a Sharpe ratio a period is multiplied by to cover so many periods.

    sqrt(q) without autocorrelation; for returns that follow a first-order autoregression, by Lo 2002,
    q / sqrt(q + 2 sum over k < q of (q - k) rho^k).
    """
    lag = np.arange(1, periods)
    together = float(np.sum((periods - lag) * np.float64(autocorrelation) ** lag))
    return periods / math.sqrt(periods + 2.0 * together)


def probabilistic_sharpe(sharpe: float, returns: int, shape: Shape = NORMAL, against: float = 0.0) -> float:
    """Return the chance that the true Sharpe ratio is above another, given one measured on so many returns.

    Bailey & Lopez de Prado 2012, "The Sharpe Ratio Efficient Frontier", Journal of Risk 15:
    Phi((SR - SR*) sqrt(T - 1) / sqrt(1 - skewness SR + (kurtosis - 1) / 4 SR^2)).
    """
    spread = math.sqrt(_error_squared(sharpe, shape))
    if not spread > 0.0:
        return math.nan
    return NormalDist().cdf((sharpe - against) * math.sqrt(returns - 1.0) / spread)


def minimum_track_record(
    sharpe: float, shape: Shape = NORMAL, against: float = 0.0, confidence: float = 0.95
) -> float:
    """Return how many returns show, at a confidence, that a Sharpe ratio as measured is above another.

    1 + (1 - skewness SR + (kurtosis - 1) / 4 SR^2) (z / (SR - SR*))^2 (Bailey & Lopez de Prado 2012); inf
    when the ratio measured is not above it.
    """
    if not sharpe > against:
        return math.inf
    reach = NormalDist().inv_cdf(confidence) / (sharpe - against)
    return 1.0 + _error_squared(sharpe, shape) * reach**2


def expected_maximum(trials: float) -> float:
    """Return the expected largest of so many independent standard normal numbers; 0 for one.

    (1 - g) z(1 - 1/N) + g z(1 - 1/(N e)) with Euler's g: Bailey & Lopez de Prado 2014, "The Deflated Sharpe
    Ratio", Journal of Portfolio Management 40. Raises ValueError for fewer than one trial.
    """
    if not trials >= 1.0:
        raise ValueError(f"the best of {trials:g} trials has no meaning; at least one trial is needed")
    if trials == 1.0:
        return 0.0
    normal = NormalDist()
    return max(
        0.0,
        (1.0 - EULER_GAMMA) * normal.inv_cdf(1.0 - 1.0 / trials)
        + EULER_GAMMA * normal.inv_cdf(1.0 - 1.0 / (trials * math.e)),
    )


def deflated_sharpe(sharpe: float, returns: int, shape: Shape, trials: float, variance: float) -> float:
    """Return the probability that the best of many trials has a Sharpe ratio above what luck alone brings.

    `variance` is that of the trials' ratios. The probabilistic Sharpe ratio against sqrt(variance) x the
    expected maximum of the trials (Bailey & Lopez de Prado 2014). Raises ValueError for fewer than one trial.
    """
    lucky = math.sqrt(variance) * expected_maximum(trials)
    return probabilistic_sharpe(sharpe, returns, shape, lucky)


def independent_trials(trials: int, mean_correlation: float) -> float:
    """Return how many independent trials so many correlated ones amount to: rho + (1 - rho) N.

    Bailey & Lopez de Prado 2014, appendix. A negative mean correlation counts as none.
    """
    share = min(max(mean_correlation, 0.0), 1.0)
    return share + (1.0 - share) * trials


@dataclass(frozen=True, slots=True)
class BestOfMany:
    """The trial with the highest Sharpe ratio, and what is left of it after counting every try."""

    best: str = field(metadata=says("name", "the variant with the highest Sharpe ratio"))
    trials: int = field(metadata=says("trials", "variants that were evaluated, all of them"))
    trials_independent: float = field(
        metadata=says("trials", "independent trials that the correlated ones amount to")
    )
    sharpe: float = field(metadata=says("ratio a year", "its Sharpe ratio"))
    sharpe_of_luck: float = field(
        metadata=says("ratio a year", "the highest that so many trials without merit are expected to show")
    )
    chance_above_nothing: float = field(
        metadata=says("fraction", "probabilistic Sharpe ratio: chance that its true ratio is above nothing")
    )
    chance_above_luck: float = field(
        metadata=says(
            "fraction", "deflated Sharpe ratio: chance that its true ratio is above that of luck, all trials"
        )
    )
    chance_above_luck_independent: float = field(
        metadata=says("fraction", "the same, counting correlated trials as fewer independent ones")
    )
    sessions_needed: float = field(
        metadata=says("sessions", "record that shows at 95 % that a ratio like this is above nothing")
    )

    def as_dict(self) -> dict[str, Any]:
        """Return every figure as {value, unit, meaning}, ready for JSON."""
        return described(self)


def best_of_many(returns: Floats, names: tuple[str, ...], trials: int | None = None) -> BestOfMany:
    """Return the best of excess returns (T, N) a session of N variants, judged by its Sharpe ratio.

    `trials` counts tries that are not among the N too, and is at least N. Variants that never moved count as
    trials without a ratio. Raises ValueError without a variant that moved.
    """
    count = len(returns)
    deviation = returns.std(axis=0, ddof=1)
    moved = np.flatnonzero(deviation > LEAST_DEVIATION)
    if not moved.size:
        raise ValueError("none of the variants moved at all, so there is no best one to judge")
    ratio = returns[:, moved].mean(axis=0) / deviation[moved]
    place = int(np.argmax(ratio))
    best, shape = float(ratio[place]), shape_of(returns[:, moved[place]])
    tried = max(len(names), trials or 0)
    alike = independent_trials(tried, _mean_correlation(returns[:, moved]))
    variance = float(np.var(ratio, ddof=1)) if moved.size > 1 else 0.0
    year = math.sqrt(SESSIONS_A_YEAR)
    return BestOfMany(
        best=names[int(moved[place])],
        trials=tried,
        trials_independent=alike,
        sharpe=best * year,
        sharpe_of_luck=math.sqrt(variance) * expected_maximum(tried) * year,
        chance_above_nothing=probabilistic_sharpe(best, count, shape),
        chance_above_luck=deflated_sharpe(best, count, shape, tried, variance),
        chance_above_luck_independent=deflated_sharpe(best, count, shape, alike, variance),
        sessions_needed=minimum_track_record(best, shape),
    )


def _mean_correlation(returns: Floats) -> float:
    """Mean correlation of different columns, from the variance of the sum of standardised ones."""
    count = returns.shape[1]
    if count < 2:
        return 0.0
    scaled = (returns - returns.mean(axis=0)) / returns.std(axis=0)
    together = float(np.var(scaled.sum(axis=1)))
    return float((together - count) / (count * (count - 1)))
