"""Two rules on one invented market, day by day, with a difference that is known.

The market's volatility clusters and answers falls more than rises (Glosten, Jagannathan & Runkle 1993, "On
the Relation between the Expected Value and the Volatility of the Nominal Excess Return on Stocks", Journal of
Finance 48; persistence .98) and its shocks have the tails of Student's t with six degrees. Each rule is in
the market for weeks on end and out for weeks, and adds a little noise of its own, the first's with a memory.
"""

from __future__ import annotations

import math
from dataclasses import dataclass
from functools import cache

import numpy as np

from hedgerow.evidence.paired import expected_shortfall

SESSIONS = 252.0
USUAL_VARIANCE = 0.011**2
DRIFT = 0.0003
INVESTED = 0.6  # in the long run: .075 / (.075 + .05)
FIRST_EXTRA = 0.0001
BURN_IN = 250

Floats = np.ndarray


@dataclass(frozen=True)
class Truth:
    """What the differences of the two rules really are."""

    growth: float
    sharpe: float
    tail_loss: float
    drawdown: float


def simulate(paths: int, days: int, seed: int) -> tuple[Floats, Floats]:
    """Log returns (days, paths) of both rules on as many markets."""
    random = np.random.default_rng(seed)
    variance, shock, memory = np.full(paths, USUAL_VARIANCE), np.zeros(paths), np.zeros(paths)
    invested = random.random((2, paths)) < INVESTED
    returns = np.empty((2, days, paths))
    for day in range(-BURN_IN, days):
        fell = shock < 0.0
        variance = 0.02 * USUAL_VARIANCE + (0.05 + 0.06 * fell) * shock**2 + 0.90 * variance
        size = np.sqrt(variance)
        shock = size * random.standard_t(6, paths) / math.sqrt(1.5)
        market = DRIFT + shock
        draw, noise = random.random((2, paths)), size * random.standard_normal((3, paths))
        invested = np.where(invested, draw > 0.05, draw < 0.075)
        memory = 0.3 * memory + 0.15 * noise[0]
        if day >= 0:
            returns[0, day] = FIRST_EXTRA + 0.6 * market * invested[0] + memory + 0.1 * noise[1]
            returns[1, day] = 0.5 * market * invested[1] + 0.1 * noise[2]
    return returns[0], returns[1]


def curve(log_returns: Floats) -> Floats:
    """The account (T + 1,) that starts at 100 and has these log returns (T,)."""
    return 100.0 * np.exp(np.concatenate(([0.0], np.cumsum(log_returns))))


@cache
def truth(days: int, paths: int = 1000) -> Truth:
    """The true differences: growth in closed form, the rest from very many days.

    The drawdown is the middle difference over records of so many days. `growth` is that of mean log returns.
    """
    both = simulate(paths, days, 99)
    simple = [np.expm1(returns).ravel() for returns in both]
    sharpe = [math.sqrt(SESSIONS) * one.mean() / one.std() for one in simple]
    tail = [expected_shortfall(one) for one in simple]
    falls = [deepest_falls(returns) for returns in both]
    means = (FIRST_EXTRA + 0.6 * INVESTED * DRIFT, 0.5 * INVESTED * DRIFT)
    growth = [math.expm1(SESSIONS * mean) for mean in means]
    return Truth(
        growth[0] - growth[1],
        sharpe[0] - sharpe[1],
        tail[0] / tail[1] - 1.0,
        float(np.median(falls[0] - falls[1])),
    )


def deepest_falls(log_returns: Floats) -> Floats:
    """Deepest drawdowns (paths,) of log returns (days, paths)."""
    level = np.cumsum(log_returns, axis=0)
    peak = np.maximum(np.maximum.accumulate(level, axis=0), 0.0)
    return np.max(-np.expm1(level - peak), axis=0)


def days_of(count: int) -> Floats:
    """So many closes, evenly spread so that 252 sessions are one year of 365.25 days, to the day."""
    return np.datetime64("2001-01-01") + np.rint(np.arange(count) * 365.25 / SESSIONS).astype(
        "timedelta64[D]"
    )
