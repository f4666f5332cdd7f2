"""Volatility from closes alone."""

from __future__ import annotations

import numpy as np

from hedgerow.kernels.rolling import trailing_moments, weighted_mean
from hedgerow.volatility.registry import Bars, Estimate, estimator

__all__ = ["close_about_mean", "close_to_close", "exponentially_weighted"]


@estimator("close")
def close_to_close(bars: Bars, horizon: float) -> Estimate:
    """Mean square of log returns about zero, over `horizon` sessions.

    Over days and weeks the mean return is mostly noise: taking it out adds error to the estimate, so that it
    is usually assumed to be zero. Source: Figlewski 1997, "Forecasting volatility", Financial Markets,
    Institutions & Instruments 6 (from memory).
    """
    counts, mean, squares = trailing_moments(bars.returns, round(horizon))
    return Estimate(counts, squares / np.maximum(counts, 1.0) + mean * mean)


@estimator("close_about_mean")
def close_about_mean(bars: Bars, horizon: float) -> Estimate:
    """Sample variance of log returns about their mean, divisor n - 1, over `horizon` sessions.

    Source: Hull, Options, Futures and Other Derivatives, "Estimating volatility from historical data".
    """
    counts, _, squares = trailing_moments(bars.returns, round(horizon))
    return Estimate(counts, squares / np.maximum(counts - 1.0, 1.0))


@estimator("ewma", parameter="decay", least=0.5, most=0.995)
def exponentially_weighted(bars: Bars, decay: float) -> Estimate:
    """Exponentially weighted mean of squared log returns about zero; a decay of .94 is common for days.

    Source: RiskMetrics Technical Document, 1996. Weights are made to add up to one, so that no starting
    value lingers.
    """
    counts, variance = weighted_mean(bars.returns * bars.returns, decay)
    return Estimate(counts, variance)
