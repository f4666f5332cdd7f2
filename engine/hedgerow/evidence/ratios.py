"""Growth, volatility and reward for risk of a curve of account values, one a session."""

from __future__ import annotations

import math

import numpy as np
from numpy.typing import NDArray

from hedgerow.units import DAYS_A_CALENDAR_YEAR, SESSIONS_A_YEAR

__all__ = ["excess_returns", "growth_a_year", "returns_of", "sharpe", "sortino", "volatility_a_year"]

Floats = NDArray[np.float64]

LEAST_DEVIATION = 1e-12
"""Standard deviation of session returns below which a curve counts as still."""


def returns_of(curve: Floats) -> Floats:
    """Return simple returns (T - 1,) of a curve (T,), fractions a session."""
    return np.asarray(curve[1:] / curve[:-1] - 1.0)


def excess_returns(returns: Floats, rate: Floats | None) -> Floats:
    """Return the returns (T - 1,) less the interest of the session before.

    `rate` (T,) is annual and continuously compounded, fraction; one session earns exp(rate / 252) - 1.
    """
    if rate is None:
        return returns
    return np.asarray(returns - np.expm1(rate[:-1] / SESSIONS_A_YEAR))


def growth_a_year(first: float, last: float, days: float) -> float:
    """Return the constant yearly growth, a fraction, that leads from one value to another in calendar days.

    (last / first)^(365.25 / days) - 1; NaN without days or with a value that is not positive.
    """
    if days <= 0 or first <= 0 or last <= 0:
        return math.nan
    try:
        return math.expm1(math.log(last / first) * DAYS_A_CALENDAR_YEAR / days)
    except OverflowError:
        return math.inf


def volatility_a_year(returns: Floats) -> float:
    """Return the standard deviation (n - 1) of session returns times sqrt(252), a fraction; NaN under two."""
    return _deviation(returns) * math.sqrt(SESSIONS_A_YEAR)


def sharpe(excess: Floats) -> float:
    """Return the yearly Sharpe ratio of excess returns: mean / standard deviation (n - 1) x sqrt(252).

    Sharpe 1994, "The Sharpe Ratio", Journal of Portfolio Management 21. NaN for a still curve.
    """
    deviation = _deviation(excess)
    if not deviation > LEAST_DEVIATION:
        return math.nan
    return float(np.mean(excess)) / deviation * math.sqrt(SESSIONS_A_YEAR)


def sortino(excess: Floats) -> float:
    """Return the yearly Sortino ratio: mean / root mean square of what falls short of nothing x sqrt(252).

    Sortino & Price 1994, "Performance Measurement in a Downside Risk Framework", Journal of Investing 3. The
    mean square is over all sessions, those above counting as 0. NaN when nothing fell short.
    """
    if excess.size < 2:
        return math.nan
    shortfall = math.sqrt(float(np.mean(np.minimum(excess, 0.0) ** 2)))
    if not shortfall > LEAST_DEVIATION:
        return math.nan
    return float(np.mean(excess)) / shortfall * math.sqrt(SESSIONS_A_YEAR)


def _deviation(returns: Floats) -> float:
    return float(np.std(returns, ddof=1)) if returns.size >= 2 else math.nan
