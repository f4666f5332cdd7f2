"""The sessions that `enter.on` names, compared with Python's own calendar and with days counted by hand."""

from __future__ import annotations

import datetime as dt
from typing import Any

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from hedgerow.market.calendar import sessions_between
from hedgerow.rules.occasions import occasions
from hedgerow.rules.schema import On

FIRST, LAST = dt.date(2012, 12, 20), dt.date(2014, 1, 10)
ORDINALS = sessions_between(FIRST.toordinal(), LAST.toordinal())
DAYS = [dt.date.fromordinal(int(day)) for day in ORDINALS]


def named(on: dict[str, Any], ordinals: Any = ORDINALS) -> list[dt.date]:
    """The days that are named."""
    chosen = occasions(On.model_validate(on), ordinals)
    return [dt.date.fromordinal(int(day)) for day in ordinals[chosen]]


def test_weekdays() -> None:
    """Compares with Python's weekday of each session; a Monday that is a holiday has no stand-in."""
    assert named({"weekday": "monday"}) == [day for day in DAYS if day.weekday() == 0]
    assert named({"weekday": ["tuesday", "friday"]}) == [day for day in DAYS if day.weekday() in (1, 4)]
    labor_day = dt.date(2013, 9, 2)
    assert not {labor_day, labor_day + dt.timedelta(1)} & set(named({"weekday": "monday"}))


def test_first_sessions_by_hand() -> None:
    """2013 began on Wednesday the 2nd; its quarters on 1 April, 1 July, 1 October (exchange calendar)."""
    quarters = [dt.date(2013, 1, 2), dt.date(2013, 4, 1), dt.date(2013, 7, 1), dt.date(2013, 10, 1)]
    assert named({"first_session_of": "quarter"}) == [*quarters, dt.date(2014, 1, 2)]
    months = named({"first_session_of": "month"})
    assert len(months) == 13
    assert dt.date(2013, 9, 3) in months  # the 2nd was Labor Day
    weeks = named({"first_session_of": "week"})
    assert dt.date(2013, 9, 3) in weeks
    assert dt.date(2013, 1, 7) in weeks


@pytest.mark.parametrize(
    ("period", "key"), [("month", lambda d: (d.year, d.month)), ("week", dt.date.isocalendar)]
)
def test_first_sessions_by_python(period: str, key: Any) -> None:
    """Compares with the first day of each group of Python's dates, but for the group that began before."""
    groups: dict[Any, dt.date] = {}
    for day in DAYS:
        groups.setdefault(key(day)[:2], day)
    assert named({"first_session_of": period}) == list(groups.values())[1:]


def test_data_that_begin_with_a_period_begin_it() -> None:
    """The first day counts when the exchange's session before the data lies in another month."""
    from_january = ORDINALS[np.searchsorted(ORDINALS, dt.date(2013, 1, 2).toordinal()) :]
    assert named({"first_session_of": "month"}, from_january)[0] == dt.date(2013, 1, 2)
    assert named({"first_session_of": "month"}, from_january[1:])[0] == dt.date(2013, 2, 1)


def test_expiries_by_hand() -> None:
    """Third Fridays of 2013 that end quarters; in March 2008 the third Friday was Good Friday: Thursday."""
    quarterly = named({"expiry_of": "quarterly"})
    assert quarterly[:5] == [
        dt.date(2012, 12, 21),
        dt.date(2013, 3, 15),
        dt.date(2013, 6, 21),
        dt.date(2013, 9, 20),
        dt.date(2013, 12, 20),
    ]
    assert len(named({"expiry_of": "monthly"})) == 13
    fridays = named({"expiry_of": "weekly"})
    assert set(named({"expiry_of": "monthly"})) <= set(fridays)
    march = sessions_between(dt.date(2008, 3, 3).toordinal(), dt.date(2008, 3, 31).toordinal())
    assert named({"expiry_of": "monthly"}, march) == [dt.date(2008, 3, 20)]


@given(st.integers(1, len(DAYS) - 1), st.sampled_from(["week", "month", "quarter"]))
def test_time_runs_one_way(cut: int, period: str) -> None:
    """The answer for the sessions so far is the same whatever sessions follow, or none."""
    for on in ({"first_session_of": period}, {"expiry_of": "monthly"}, {"weekday": "friday"}):
        words = On.model_validate(on)
        assert occasions(words, ORDINALS[:cut]).tolist() == occasions(words, ORDINALS)[:cut].tolist()
