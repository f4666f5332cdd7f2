"""Signals of a close beyond its Bollinger band."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from hedgerow.kernels.layout import Floats
from hedgerow.kernels.rolling import trailing_moments
from hedgerow.signals.panel import Panel
from hedgerow.signals.registry import Parameter, signal

__all__ = ["band", "band_break_down", "band_break_up"]

_PARAMETERS = (
    Parameter("sessions", 2, 1000, 20),
    Parameter("width", 0.1, 10.0, 2.0, unit="standard deviations", whole=False),
)


def band(values: Floats, sessions: int, width: float) -> Floats:
    """Plain mean of the last values plus `width` population standard deviations (T, N); NaN until as many.

    Source: Bollinger 2001, Bollinger on Bollinger Bands: the deviation has the divisor n.
    """
    counts, means, squares = trailing_moments(values, sessions)
    return np.where(counts == sessions, means + width * np.sqrt(squares / sessions), np.nan)


@signal(
    "band_break_up",
    phrase="the close is above its band of {sessions} sessions and {width} standard deviations",
    parameters=_PARAMETERS,
    lookback=lambda p: p["sessions"],
)
def band_break_up(panel: Panel, sessions: int, width: float) -> NDArray[np.bool_]:
    """Close over the upper band of the last closes, today's among them."""
    return panel.close > band(panel.close, sessions, width)


@signal(
    "band_break_down",
    phrase="the close is below its band of {sessions} sessions and {width} standard deviations",
    parameters=_PARAMETERS,
    lookback=lambda p: p["sessions"],
)
def band_break_down(panel: Panel, sessions: int, width: float) -> NDArray[np.bool_]:
    """Close under the lower band of the last closes, today's among them."""
    return panel.close < band(panel.close, sessions, -width)
