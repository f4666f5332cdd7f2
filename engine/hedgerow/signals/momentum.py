"""Signals of strength: RSI, change of price, distance from a high, rank of volatility."""

from __future__ import annotations

import numpy as np

from hedgerow.kernels.layout import Floats
from hedgerow.kernels.logs import log_ratio
from hedgerow.kernels.rolling import seeded_smooth, trailing_extreme, trailing_moments, trailing_rank
from hedgerow.signals.panel import Panel
from hedgerow.signals.registry import Number, Parameter, signal
from hedgerow.signals.trend import shifted

__all__ = ["change", "from_high", "relative_strength", "volatility_rank"]


@signal(
    "rsi",
    phrase="the RSI of {sessions} sessions",
    number=Number("points", 0.0, 100.0),
    parameters=(Parameter("sessions", 2, 250, 14),),
    lookback=lambda p: p["sessions"] + 1,
)
def relative_strength(panel: Panel, sessions: int) -> Floats:
    """Share of gains in all moves, smoothed, in points from 0 to 100; 50 when nothing moved.

    Gains and losses begin at their plain mean and are smoothed with gain 1 / sessions. Source: Wilder 1978,
    New Concepts in Technical Trading Systems.
    """
    moves = panel.close - shifted(panel.close, 1)
    gains = seeded_smooth(np.where(moves < 0.0, 0.0, moves), 1.0 / sessions, sessions, 0)
    losses = seeded_smooth(np.where(moves > 0.0, 0.0, -moves), 1.0 / sessions, sessions, 0)
    total = gains + losses
    share = np.divide(gains, total, out=np.full_like(total, 0.5), where=total > 0.0)
    return np.where(np.isnan(total), np.nan, 100.0 * share)


@signal(
    "momentum",
    phrase="the change of price over {sessions} sessions",
    number=Number("fraction", -1.0, 10.0),
    parameters=(Parameter("sessions", 1, 1000),),
    lookback=lambda p: p["sessions"] + 1,
)
def change(panel: Panel, sessions: int) -> Floats:
    """Close over the close `sessions` bars ago, less one (fraction); dividends are not added back."""
    return panel.close / shifted(panel.close, sessions) - 1.0


@signal(
    "distance_from_high",
    phrase="the distance below the high of {sessions} sessions",
    number=Number("fraction", 0.0, 1.0),
    parameters=(Parameter("sessions", 1, 1000),),
    lookback=lambda p: p["sessions"],
)
def from_high(panel: Panel, sessions: int) -> Floats:
    """One less close over the highest high of the last bars, today's among them (fraction, at least 0)."""
    counts, highest = trailing_extreme(panel.high, sessions, 1.0)
    return np.where(counts == sessions, np.maximum(1.0 - panel.close / highest, 0.0), np.nan)


@signal(
    "volatility_rank",
    phrase="the rank of {sessions}-session volatility among its last {over} sessions",
    number=Number("fraction", 0.0, 1.0),
    parameters=(Parameter("sessions", 2, 250, 21), Parameter("over", 2, 1000, 252)),
    lookback=lambda p: p["sessions"] + p["over"],
)
def volatility_rank(panel: Panel, sessions: int, over: int) -> Floats:
    """Share of the other `over` - 1 values of trailing volatility that lie below today's (0 to 1).

    Volatility is the sample deviation of log returns. A tie counts half.
    """
    counts, _, squares = trailing_moments(log_ratio(panel.close, shifted(panel.close, 1)), sessions)
    counts, ranks = trailing_rank(np.where(counts == sessions, squares, np.nan), over)
    return np.where(counts == over, ranks, np.nan)
