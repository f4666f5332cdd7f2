"""The calendar of US sessions, against exchange_calendars and dates of the public record."""

from __future__ import annotations

import datetime as dt
import warnings

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as some

from hedgerow.errors import DataError
from hedgerow.market import calendar

SPAN = (dt.date(1971, 1, 1).toordinal(), dt.date(2050, 12, 31).toordinal())
DAYS = some.integers(*SPAN)


def ordinal(day: str) -> int:
    """The ordinal of an ISO date."""
    return dt.date.fromisoformat(day).toordinal()


@pytest.fixture(scope="module")
def oracle() -> np.ndarray:
    """Every session of 1971-2050 by the package exchange_calendars (calendar XNYS), as ordinals."""
    import exchange_calendars

    first, last = (dt.date.fromordinal(day).isoformat() for day in SPAN)
    with warnings.catch_warnings():
        warnings.simplefilter("ignore")  # the package itself calls what pandas 3.1 deprecates
        sessions = exchange_calendars.get_calendar("XNYS", start=first, end=last).sessions
    return sessions.to_numpy().astype("datetime64[D]").astype(np.int64) + ordinal("1970-01-01")


def test_every_session_of_eighty_years_agrees(oracle: np.ndarray) -> None:
    """exchange_calendars XNYS, all sessions 1971-2050: none more, none fewer."""
    assert np.setxor1d(calendar.sessions_between(*SPAN), oracle).tolist() == []


def test_the_comparison_would_notice_one_day(oracle: np.ndarray) -> None:
    """Negative control: leaving out the last special closure makes the two calendars differ by that day."""
    peeled = np.setxor1d(calendar.sessions_between(*SPAN), np.append(oracle, ordinal("2025-01-09")))
    assert peeled.tolist() == [ordinal("2025-01-09")]


@pytest.mark.parametrize(
    ("day", "why"),
    [
        ("1997-01-20", ""),  # Martin Luther King Day is kept by the exchange from 1998
        ("1998-01-19", "Martin Luther King Day"),
        ("2021-06-18", ""),  # Juneteenth from 2022
        ("2022-06-20", "Juneteenth"),  # a Sunday, kept on the Monday
        ("2027-06-18", "Juneteenth"),  # a Saturday, kept on the Friday
        ("2010-12-31", ""),  # New Year's Day on a Saturday is not kept
        ("2023-01-02", "New Year's Day"),
        ("1976-11-02", "presidential election"),
        ("1984-11-06", ""),  # a session from 1984 on
        ("2001-09-14", "attacks of September 11"),
        ("2012-10-30", "Hurricane Sandy"),
        ("2008-03-21", "Good Friday"),
        ("2020-07-03", "Independence Day"),
        ("2024-03-30", "weekend"),
    ],
)
def test_closures_of_the_public_record(day: str, why: str) -> None:
    """Dates on which the New York Stock Exchange was open or shut, from its own lists."""
    assert calendar.why_closed(ordinal(day)) == why
    assert calendar.is_session(ordinal(day)) is (why == "")


def test_sessions_a_year() -> None:
    """A year holds 248 to 254 sessions; 2001 held 248, 1996 254, 2024 252 (public record)."""
    counts = {
        year: calendar.sessions_between(ordinal(f"{year}-01-01"), ordinal(f"{year}-12-31")).size
        for year in range(1971, 2051)
    }
    assert (counts[2001], counts[1996], counts[2024]) == (248, 254, 252)
    assert set(counts.values()) <= set(range(248, 255))


@given(day=DAYS)
def test_neighbours_are_the_nearest_sessions(day: int) -> None:
    """next_session, previous_session and on_or_before against a walk from day to day."""
    after, before = day + 1, day - 1
    while not calendar.is_session(after):
        after += 1
    while not calendar.is_session(before):
        before -= 1
    assert calendar.next_session(day) == after
    assert calendar.previous_session(day) == before
    assert calendar.on_or_before([day]).tolist() == [day if calendar.is_session(day) else before]


@given(day=DAYS, days=some.integers(-3, 40))
def test_sessions_between_holds_both_ends(day: int, days: int) -> None:
    """sessions_between against is_session for every day; empty when the span runs backwards."""
    wanted = [d for d in range(day, day + days + 1) if calendar.is_session(d)]
    assert calendar.sessions_between(day, day + days).tolist() == wanted


def test_sessions_cannot_be_changed_by_a_caller() -> None:
    """The shared arrays are read-only: an identity of the cache."""
    with pytest.raises(ValueError, match="read-only"):
        calendar.sessions_between(*SPAN)[0] = 0


@pytest.mark.parametrize("day", [0, -5, ordinal("1899-12-31"), ordinal("2200-01-01"), 10**9])
def test_days_outside_the_calendar_are_refused(day: int) -> None:
    """A day the calendar does not hold is an error that names it, never a wrong answer."""
    for ask in (calendar.is_session, calendar.next_session, calendar.previous_session):
        with pytest.raises(DataError, match="outside the years it holds"):
            ask(day)
    with pytest.raises(DataError, match="1900-01-02 to 2199-12-30"):
        calendar.on_or_before([day])
