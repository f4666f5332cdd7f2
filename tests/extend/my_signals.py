"""A user's own file, as DEVELOPERS.md shows it: two signals, an estimator of volatility, a model of costs."""

import numpy as np

from hedgerow.extend import (
    DEFAULT_COSTS,
    Bars,
    Costs,
    Estimate,
    Market,
    Number,
    Panel,
    Parameter,
    cost,
    estimator,
    signal,
    trailing_moments,
)


@signal(
    "gap_at_open",
    phrase="the open over the close before",
    number=Number("fraction", -1.0, 10.0),
    lookback=lambda p: 2,
)
def gap_at_open(panel: Panel) -> np.ndarray:
    """The jump overnight (fraction)."""
    gap = np.full_like(panel.close, np.nan)
    gap[1:] = panel.open[1:] / panel.close[:-1] - 1.0
    return gap


@signal(
    "quiet",
    phrase="the average range of {sessions} sessions is under {percent} percent of the close",
    parameters=(
        Parameter("sessions", 2, 250, 10),
        Parameter("percent", 0.1, 50.0, 2.0, "percent", whole=False),
    ),
    lookback=lambda p: p["sessions"],
)
def quiet(panel: Panel, sessions: int, percent: float) -> np.ndarray:
    """Whether a stock moves little within its days."""
    counts, mean, _ = trailing_moments((panel.high - panel.low) / panel.close, sessions)
    return (counts == sessions) & (mean < percent / 100.0)


@estimator("absolute")
def absolute(bars: Bars, horizon: float) -> Estimate:
    """Square of the mean absolute log return, times pi / 2."""
    counts, mean, _ = trailing_moments(np.abs(bars.returns), round(horizon))
    return Estimate(counts, 0.5 * np.pi * mean * mean)


@cost("thin_names")
def thin_names(market: Market) -> Costs:
    """A wider spread where half of all closes are under 30."""
    cheap = np.nanmedian(market.close) < 30.0
    return DEFAULT_COSTS._replace(half_spread=0.06 if cheap else 0.04, contract_fee=1.0)
