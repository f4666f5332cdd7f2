"""The sessions that `enter.on` names, as one truth a session, known at that session's close."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from hedgerow.kernels import layout
from hedgerow.kernels.layout import Ints
from hedgerow.market.calendar import EPOCH, previous_session
from hedgerow.market.sessions import listed_expiries
from hedgerow.rules.entering import WEEKDAYS, On

__all__ = ["occasions"]

_EXPIRIES = {"weekly": layout.WEEKLY, "monthly": layout.MONTHLY, "quarterly": layout.QUARTERLY}
_MONTHS = {"month": 1, "quarter": 3}
_FIRST_MONDAY = 1  # ordinal 1 was a Monday


def occasions(on: On, ordinals: Ints) -> NDArray[np.bool_]:
    """Which sessions (T,) are named. A weekday that is no session has none in its week.

    A session is the first of its period when the one before it lies in another. Before the first of the data
    stands the exchange's own calendar, so a history that begins in mid-month begins in no new month.
    """
    if on.weekday is not None:
        wanted = [WEEKDAYS.index(day) for day in on.weekday]
        return np.asarray(np.isin((ordinals - _FIRST_MONDAY) % 7, wanted))
    if on.first_session_of is not None:
        before = np.concatenate([[previous_session(int(ordinals[0]))], ordinals[:-1]])
        new = _periods(on.first_session_of, ordinals) != _periods(on.first_session_of, before)
        return np.asarray(new)
    cycle = _EXPIRIES[on.expiry_of or "monthly"]
    return np.isin(ordinals, listed_expiries(cycle, int(ordinals[0]), int(ordinals[-1])))


def _periods(period: str, ordinals: Ints) -> Ints:
    """A number that is the same for all days of one week, month or quarter."""
    if period == "week":
        return (ordinals - _FIRST_MONDAY) // 7
    months = (ordinals - EPOCH).astype("datetime64[D]").astype("datetime64[M]").astype(np.int64)
    return months // _MONTHS[period]
