"""Signals of the calendar."""

from __future__ import annotations

import numpy as np

from hedgerow.kernels.layout import Floats
from hedgerow.signals.panel import Panel
from hedgerow.signals.registry import Number, signal

__all__ = ["WEEKDAYS", "weekday"]

WEEKDAYS = ("monday", "tuesday", "wednesday", "thursday", "friday")
_DAYS_A_WEEK = 7


@signal(
    "weekday",
    phrase="the day of the week",
    number=Number("day", 0.0, 4.0, WEEKDAYS),
    by_bars=False,
)
def weekday(panel: Panel) -> Floats:
    """Day of the week of the session itself: 0 Monday to 4 Friday, (T, N)."""
    days = (panel.market.ordinals + _DAYS_A_WEEK - 1) % _DAYS_A_WEEK
    return np.repeat(days.astype(np.float64)[:, None], len(panel.market.symbols), axis=1)
