"""When US stocks trade: sessions and holidays, behind and ahead.

Days are proleptic ordinals (`datetime.date.toordinal`). The regular holidays are rules; closures nobody could
know ahead are a table with its reasons. The calendar is exact from 1971 on, the years the tests compare; the
rules of 1971 are applied to earlier years and hold there only roughly (no Saturday sessions, no closures).

A dataset's own dates are the sessions behind; this calendar says which days it lacks, and decides ahead.
"""

from __future__ import annotations

import datetime as dt
from functools import cache
from typing import Any

import numpy as np
from numpy.typing import ArrayLike, NDArray

from hedgerow.errors import DataError

__all__ = [
    "EXACT_FROM",
    "FIRST_DAY",
    "LAST_DAY",
    "is_session",
    "next_session",
    "on_or_before",
    "previous_session",
    "sessions_between",
    "why_closed",
]

Ordinals = NDArray[np.int64]

FIRST_DAY = dt.date(1900, 1, 1).toordinal()
LAST_DAY = dt.date(2199, 12, 31).toordinal()
EXACT_FROM = dt.date(1971, 1, 1).toordinal()
EPOCH = dt.date(1970, 1, 1).toordinal()
SATURDAY = 5

# Whole days on which the exchange stayed shut outside the rules, from 1971 on (NYSE, "Special closings").
SPECIAL_CLOSURES = {
    "1972-11-07": "presidential election",
    "1972-12-28": "day of mourning for President Truman",
    "1973-01-25": "day of mourning for President Johnson",
    "1976-11-02": "presidential election",
    "1977-07-14": "blackout in New York City",
    "1980-11-04": "presidential election",
    "1985-09-27": "Hurricane Gloria",
    "1994-04-27": "day of mourning for President Nixon",
    "2001-09-11": "attacks of September 11",
    "2001-09-12": "attacks of September 11",
    "2001-09-13": "attacks of September 11",
    "2001-09-14": "attacks of September 11",
    "2004-06-11": "day of mourning for President Reagan",
    "2007-01-02": "day of mourning for President Ford",
    "2012-10-29": "Hurricane Sandy",
    "2012-10-30": "Hurricane Sandy",
    "2018-12-05": "day of mourning for President Bush",
    "2025-01-09": "day of mourning for President Carter",
}


def _regular_holidays() -> list[Any]:
    """The rules of the exchange's regular holidays (NYSE rule 7.2).

    A holiday on a Sunday is kept on the Monday and one on a Saturday on the Friday, but for New Year's Day,
    which is not kept when it falls on a Saturday.
    """
    from pandas import Timestamp
    from pandas.tseries import holiday as rules
    from pandas.tseries.offsets import LastWeekOfMonth, WeekOfMonth

    monday, nearest = rules.sunday_to_monday, rules.nearest_workday
    third, last = WeekOfMonth(week=2, weekday=0), LastWeekOfMonth(weekday=0)
    king, juneteenth = Timestamp(1998, 1, 1), Timestamp(2022, 1, 1)
    return [
        rules.Holiday("New Year's Day", month=1, day=1, observance=monday),
        rules.Holiday("Martin Luther King Day", month=1, day=1, offset=third, start_date=king),
        rules.Holiday("Washington's Birthday", month=2, day=1, offset=third),
        rules.GoodFriday,
        rules.Holiday("Memorial Day", month=5, day=1, offset=last),
        rules.Holiday("Juneteenth", month=6, day=19, observance=nearest, start_date=juneteenth),
        rules.Holiday("Independence Day", month=7, day=4, observance=nearest),
        rules.USLaborDay,
        rules.USThanksgivingDay,
        rules.Holiday("Christmas Day", month=12, day=25, observance=nearest),
    ]


@cache
def _closures() -> dict[int, str]:
    """Every closed day that is no weekend, by ordinal, with its reason."""
    first, last = dt.date.fromordinal(FIRST_DAY).isoformat(), dt.date.fromordinal(LAST_DAY).isoformat()
    found = {dt.date.fromisoformat(day).toordinal(): why for day, why in SPECIAL_CLOSURES.items()}
    for rule in _regular_holidays():
        days = rule.dates(first, last).to_numpy().astype("datetime64[D]").astype(np.int64) + EPOCH
        found.update(dict.fromkeys(days.tolist(), str(rule.name)))
    return found


@cache
def _sessions() -> Ordinals:
    """All sessions from FIRST_DAY to LAST_DAY, sorted, read-only."""
    days = np.arange(FIRST_DAY, LAST_DAY + 1, dtype=np.int64)
    days = days[(days + 6) % 7 < SATURDAY]
    sessions = days[~np.isin(days, np.fromiter(_closures(), dtype=np.int64))]
    sessions.flags.writeable = False
    return sessions


def _check(first: int, last: int) -> None:
    """Raise DataError when days lie outside the years the calendar holds."""
    if FIRST_DAY < first <= last < LAST_DAY:
        return
    wrong = first if first <= FIRST_DAY else last
    shown = dt.date.fromordinal(wrong).isoformat() if 0 < wrong <= dt.date.max.toordinal() else f"day {wrong}"
    raise DataError.one(
        "calendar of US sessions",
        "outside-calendar",
        f"{shown} lies outside the years it holds",
        "days from 1900-01-02 to 2199-12-30 are known",
        "check the year of the dates",
    )


def is_session(ordinal: int) -> bool:
    """Whether US stocks trade on that day. Raises DataError outside the years of the calendar."""
    return why_closed(ordinal) == ""


def why_closed(ordinal: int) -> str:
    """The reason for which no trade takes place that day.

    It is "weekend", a holiday's name or an event; nothing ("") on a session. Raises DataError outside the
    years of the calendar.
    """
    _check(ordinal, ordinal)
    return "weekend" if (ordinal + 6) % 7 >= SATURDAY else _closures().get(ordinal, "")


def sessions_between(from_ordinal: int, to_ordinal: int) -> Ordinals:
    """Every session from one day to another, both included: sorted ordinals of shape (n,), read-only.

    Raises DataError outside the years of the calendar; empty when `to_ordinal` lies before `from_ordinal`.
    """
    if to_ordinal < from_ordinal:
        return _sessions()[:0]
    _check(from_ordinal, to_ordinal)
    start, stop = np.searchsorted(_sessions(), [from_ordinal, to_ordinal + 1])
    return _sessions()[start:stop]


def next_session(ordinal: int) -> int:
    """The first session after that day. Raises DataError outside the years of the calendar."""
    _check(ordinal, ordinal)
    return int(_sessions()[np.searchsorted(_sessions(), ordinal, side="right")])


def previous_session(ordinal: int) -> int:
    """The last session before that day. Raises DataError outside the years of the calendar."""
    return int(on_or_before([ordinal - 1])[0])


def on_or_before(ordinals: ArrayLike) -> Ordinals:
    """The day itself where it is a session, else the last session before it, for each day; shape (n,).

    Raises DataError outside the years of the calendar.
    """
    days = np.asarray(ordinals, dtype=np.int64)
    if days.size:
        _check(int(days.min()), int(days.max()))
    return _sessions()[np.searchsorted(_sessions(), days, side="right") - 1]
