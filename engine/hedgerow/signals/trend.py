"""Signals of direction: means of closes, and the difference of two exponential means (MACD)."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from hedgerow.kernels.layout import Floats
from hedgerow.kernels.rolling import seeded_smooth, trailing_moments
from hedgerow.signals.panel import Panel
from hedgerow.signals.registry import Parameter, signal

__all__ = ["exponential_mean", "macd", "mean", "shifted"]

Truth = NDArray[np.bool_]

_SESSIONS = Parameter("sessions", 2, 1000)
_OVER = Parameter("over", 1, 250, 5)
_FAST, _SLOW = Parameter("fast", 2, 250, 12), Parameter("slow", 3, 500, 26)
_SMOOTH = Parameter("smooth", 2, 250, 9)
_MACD = "the MACD line ({fast}, {slow})"
_ITS_SIGNAL = "its signal line ({smooth})"


def mean(values: Floats, sessions: int) -> Floats:
    """Plain mean of the last `sessions` values (T, N); NaN until there are as many."""
    counts, means, _ = trailing_moments(values, sessions)
    return np.where(counts == sessions, means, np.nan)


def shifted(values: Floats, sessions: int) -> Floats:
    """Values of `sessions` rows ago (T, N); NaN before the first."""
    out = np.full_like(values, np.nan)
    if sessions < len(values):
        out[sessions:] = values[: len(values) - sessions]
    return out


def exponential_mean(values: Floats, sessions: int, skip: int = 0) -> Floats:
    """Exponential mean with gain 2 / (sessions + 1), begun at the plain mean of `sessions` after `skip`."""
    return seeded_smooth(values, 2.0 / (sessions + 1.0), sessions, skip)


def macd(values: Floats, fast: int, slow: int) -> Floats:
    """Fast exponential mean less the slow one, in price per share (T, N).

    Both begin on the bar that completes the slow one's first mean. Source: Appel 2005, Technical Analysis.
    """
    return exponential_mean(values, fast, slow - fast) - exponential_mean(values, slow)


@signal(
    "close_over_mean",
    phrase="the close is over its mean of {sessions} sessions",
    parameters=(_SESSIONS,),
    lookback=lambda p: p["sessions"],
)
def close_over_mean(panel: Panel, sessions: int) -> Truth:
    """Close over the plain mean of the last closes, today's among them."""
    return panel.close > mean(panel.close, sessions)


@signal(
    "close_under_mean",
    phrase="the close is under its mean of {sessions} sessions",
    parameters=(_SESSIONS,),
    lookback=lambda p: p["sessions"],
)
def close_under_mean(panel: Panel, sessions: int) -> Truth:
    """Close under the plain mean of the last closes, today's among them."""
    return panel.close < mean(panel.close, sessions)


@signal(
    "mean_rising",
    phrase="the mean of {sessions} sessions is higher than {over} sessions ago",
    parameters=(_SESSIONS, _OVER),
    lookback=lambda p: p["sessions"] + p["over"],
)
def mean_rising(panel: Panel, sessions: int, over: int) -> Truth:
    """Mean of closes over itself `over` bars ago."""
    means = mean(panel.close, sessions)
    return means > shifted(means, over)


@signal(
    "mean_falling",
    phrase="the mean of {sessions} sessions is lower than {over} sessions ago",
    parameters=(_SESSIONS, _OVER),
    lookback=lambda p: p["sessions"] + p["over"],
)
def mean_falling(panel: Panel, sessions: int, over: int) -> Truth:
    """Mean of closes under itself `over` bars ago."""
    means = mean(panel.close, sessions)
    return means < shifted(means, over)


@signal(
    "macd_positive",
    phrase=f"{_MACD} is above zero",
    parameters=(_FAST, _SLOW),
    lookback=lambda p: p["slow"],
)
def macd_positive(panel: Panel, fast: int, slow: int) -> Truth:
    """Fast exponential mean over the slow one."""
    return macd(panel.close, fast, slow) > 0.0


def _gap(panel: Panel, fast: int, slow: int, smooth: int) -> Floats:
    """MACD line less its own exponential mean, the signal line."""
    line = macd(panel.close, fast, slow)
    return line - exponential_mean(line, smooth)


@signal(
    "macd_over_signal",
    phrase=f"{_MACD} is over {_ITS_SIGNAL}",
    parameters=(_FAST, _SLOW, _SMOOTH),
    lookback=lambda p: p["slow"] + p["smooth"] - 1,
)
def macd_over_signal(panel: Panel, fast: int, slow: int, smooth: int) -> Truth:
    """MACD line over its signal line."""
    return _gap(panel, fast, slow, smooth) > 0.0


@signal(
    "macd_crossed_up",
    phrase=f"{_MACD} crossed up over {_ITS_SIGNAL} that day",
    parameters=(_FAST, _SLOW, _SMOOTH),
    lookback=lambda p: p["slow"] + p["smooth"],
)
def macd_crossed_up(panel: Panel, fast: int, slow: int, smooth: int) -> Truth:
    """MACD line over its signal line, and at or under it on the bar before."""
    gap = _gap(panel, fast, slow, smooth)
    return (gap > 0.0) & (shifted(gap, 1) <= 0.0)


@signal(
    "macd_crossed_down",
    phrase=f"{_MACD} crossed down under {_ITS_SIGNAL} that day",
    parameters=(_FAST, _SLOW, _SMOOTH),
    lookback=lambda p: p["slow"] + p["smooth"],
)
def macd_crossed_down(panel: Panel, fast: int, slow: int, smooth: int) -> Truth:
    """MACD line under its signal line, and at or over it on the bar before."""
    gap = _gap(panel, fast, slow, smooth)
    return (gap < 0.0) & (shifted(gap, 1) >= 0.0)
