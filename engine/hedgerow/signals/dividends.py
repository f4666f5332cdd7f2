"""Signals of dividends: the sessions to the ex-date a trader would expect.

What is expected is worked out from what had been paid by each close (`market.expected`), never from a date
that was declared later. Counts of sessions ahead follow the exchange's calendar.
"""

from __future__ import annotations

import numpy as np

from hedgerow.kernels.layout import Floats
from hedgerow.market.calendar import sessions_between
from hedgerow.market.expected import expected_dividends
from hedgerow.signals.panel import Panel
from hedgerow.signals.registry import Number, signal

__all__ = ["NO_DIVIDEND_SESSIONS", "sessions_to_ex_dividend"]

NO_DIVIDEND_SESSIONS = 999.0
_WEEK_DAYS = 7  # more than any closure of the exchange


@signal(
    "sessions_to_ex_dividend",
    phrase="the number of sessions to the next expected ex-dividend date",
    number=Number("sessions", 0.0, NO_DIVIDEND_SESSIONS),
    by_bars=False,
)
def sessions_to_ex_dividend(panel: Panel) -> Floats:
    """Sessions until the next expected ex-date, 1 on its eve; 999 when none is expected; shape (T, N).

    A day that is no session goes ex at the session after it. A dividend that is late is expected the next
    session, for up to half its usual gap.
    """
    market = panel.market
    due = expected_dividends(market).ordinal
    if not due.any():
        return np.full(market.close.shape, NO_DIVIDEND_SESSIONS)
    calendar = sessions_between(int(market.ordinals[0]), int(due.max()) + _WEEK_DAYS)
    reached = np.searchsorted(calendar, due)
    passed = np.searchsorted(calendar, market.ordinals, side="right")
    ahead = (reached + 1 - passed[:, np.newaxis]).astype(np.float64)
    return np.where(due > 0, ahead, NO_DIVIDEND_SESSIONS)
