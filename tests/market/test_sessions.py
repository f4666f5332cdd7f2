"""Listed expiries, ticks and exercise by exception, against published dates and slow searches."""

from __future__ import annotations

import calendar as months
import datetime as dt

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as some

from hedgerow.errors import StudyError
from hedgerow.kernels.layout import DAILY, MONTHLY, QUARTERLY, WEEKLY
from hedgerow.market import sessions

CYCLES = some.sampled_from([DAILY, WEEKLY, MONTHLY, QUARTERLY])
REGIMES = some.sampled_from(sessions.REGIMES)


def ordinal(day: str) -> int:
    """The ordinal of an ISO date."""
    return dt.date.fromisoformat(day).toordinal()


SESSIONS = some.sampled_from(sessions.sessions_between(ordinal("1985-01-02"), ordinal("2030-12-31")).tolist())


def iso(ordinals: np.ndarray) -> list[str]:
    """Ordinals as ISO dates; "" for 0."""
    return [dt.date.fromordinal(day).isoformat() if day else "" for day in ordinals.tolist()]


def chosen(cycle: int, days: int, session: str, at_least: bool = False, regime: str = "modern") -> str:
    """The expiry chosen at one session, as an ISO date."""
    return iso(sessions.choose_expiries(cycle, days, at_least, [ordinal(session)], regime))[0]


@pytest.mark.parametrize(
    ("third_friday", "expiry"),
    [
        ("2008-03-21", "2008-03-20"),  # Good Friday
        ("2014-04-18", "2014-04-17"),  # Good Friday
        ("2019-04-19", "2019-04-18"),  # Good Friday
        ("2026-06-19", "2026-06-18"),  # Juneteenth
        ("2012-01-20", "2012-01-20"),
        ("2013-03-15", "2013-03-15"),
    ],
)
def test_standard_expiries_move_to_the_session_before_a_holiday(third_friday: str, expiry: str) -> None:
    """OCC release of 2013-06-24 and 78 FR 26413 for the rule; the calendars of 2008, 2014, 2019 and 2026."""
    around = sessions.listed_expiries(MONTHLY, ordinal(third_friday) - 5, ordinal(third_friday) + 5)
    assert iso(around) == [expiry]


def test_third_fridays_against_the_standard_library() -> None:
    """Every month 1985-2049: the third Friday by the module calendar, or the last session before it."""
    for year in range(1985, 2050):
        for month in range(1, 13):
            fridays = [week[4] for week in months.monthcalendar(year, month) if week[4]]
            day = dt.date(year, month, fridays[2]).toordinal()
            while not sessions.is_session(day):
                day -= 1
            first = dt.date(year, month, 1).toordinal()
            assert sessions.listed_expiries(MONTHLY, first, first + 27).tolist() == [day]


def test_weekly_expiries_are_every_friday() -> None:
    """April 2014, with its Good Friday on the third Friday: the exchange's calendar of that year."""
    found = sessions.listed_expiries(WEEKLY, ordinal("2014-04-01"), ordinal("2014-05-02"))
    assert iso(found) == ["2014-04-04", "2014-04-11", "2014-04-17", "2014-04-25", "2014-05-02"]


def test_quarterly_and_daily_expiries() -> None:
    """Third Fridays of March, June, September and December; a daily class expires each session."""
    found = sessions.listed_expiries(QUARTERLY, ordinal("2019-01-01"), ordinal("2019-12-31"))
    assert iso(found) == ["2019-03-15", "2019-06-21", "2019-09-20", "2019-12-20"]
    span = (ordinal("2024-01-01"), ordinal("2024-12-31"))
    assert sessions.listed_expiries(DAILY, *span).tolist() == sessions.sessions_between(*span).tolist()
    assert sessions.listed_expiries(MONTHLY, span[1], span[0]).size == 0


def test_what_a_monthly_class_lists() -> None:
    """Nine months of third Fridays, then Januaries for three years: the long-dated cycle, from memory."""
    wanted = [
        "2015-03-20",
        "2015-04-17",
        "2015-05-15",
        "2015-06-19",
        "2015-07-17",
        "2015-08-21",
        "2015-09-18",
    ]
    wanted += ["2015-10-16", "2015-11-20", "2016-01-15", "2017-01-20", "2018-01-19"]
    assert iso(sessions.listed_at(MONTHLY, ordinal("2015-03-02"))) == wanted


@pytest.mark.parametrize(
    ("cycle", "days", "session", "expiry"),
    [
        (WEEKLY, 7, "2013-06-03", "2013-06-07"),  # a Monday: 4 days against 11, of 7 wanted
        (WEEKLY, 7, "2013-06-04", "2013-06-14"),  # a Tuesday: 3 days against 10
        (WEEKLY, 7, "2014-04-10", "2014-04-17"),  # Thursday before Good Friday
        (WEEKLY, 7, "2014-04-14", "2014-04-25"),  # Monday: 3 and 11 days lie as far from 7; the later wins
        (WEEKLY, 1, "2013-06-07", ""),  # on a Friday nothing expires within 5 days
        (MONTHLY, 30, "2013-06-21", "2013-07-19"),
        (MONTHLY, 7, "2013-06-24", ""),  # 25 days is no week
        (QUARTERLY, 7, "2013-04-01", ""),
        (QUARTERLY, 7, "2013-06-13", "2013-06-21"),
        (DAILY, 1, "2013-06-06", "2013-06-07"),
        (DAILY, 1, "2013-06-07", "2013-06-10"),
        (
            MONTHLY,
            400,
            "2013-06-03",
            "2014-02-21",
        ),  # 263 days, the last month listed, or 592 to the second January
        (MONTHLY, 1000, "2013-06-03", "2016-01-15"),
    ],
)
def test_choice_by_hand(cycle: int, days: int, session: str, expiry: str) -> None:
    """Counted by hand on the exchange's calendar."""
    assert chosen(cycle, days, session) == expiry


def test_at_least_never_takes_a_nearer_expiry() -> None:
    """Counted by hand: Monday 2013-06-03 and 7 days wanted; 4 days are too few, so Friday week."""
    assert chosen(WEEKLY, 7, "2013-06-03", at_least=True) == "2013-06-14"
    assert chosen(MONTHLY, 30, "2013-06-21", at_least=True) == ""
    assert chosen(MONTHLY, 25, "2013-06-21", at_least=True) == "2013-07-19"


def slow_choice(cycle: int, days: int, at_least: bool, session: int, regime: str) -> int:
    """The choice by asking every listed expiry."""
    listed = sessions.listed_at(cycle, session, regime).tolist()
    near = [day for day in listed if not at_least or day - session >= days]
    if not near:
        return 0
    best = min(near, key=lambda day: (abs(day - session - days), -day))
    return best if abs(best - session - days) <= max(4, days / 2) else 0


@given(
    cycle=CYCLES,
    days=some.integers(1, 1100),
    at_least=some.booleans(),
    run=some.lists(SESSIONS, max_size=8),
    regime=REGIMES,
)
def test_choice_against_a_slow_search(
    cycle: int, days: int, at_least: bool, run: list[int], regime: str
) -> None:
    """The vectorised choice against a plain search among all that is listed at each session."""
    wanted = [slow_choice(cycle, days, at_least, day, regime) for day in run]
    assert sessions.choose_expiries(cycle, days, at_least, run, regime).tolist() == wanted


@given(cycle=CYCLES, session=SESSIONS, regime=REGIMES)
def test_what_is_listed_lies_ahead_and_is_a_session(cycle: int, session: int, regime: str) -> None:
    """Identities: later than the session, sorted, each a session, three years at most; fewer if longer."""
    listed = sessions.listed_at(cycle, session, regime)
    assert (np.diff(listed) > 0).all()
    assert all(sessions.is_session(day) and 0 < day - session <= 1096 for day in listed.tolist())
    if cycle in (DAILY, WEEKLY):
        longer = sessions.listed_at(cycle + 1, session, regime)
        assert set(longer.tolist()) <= set(listed.tolist())


@given(session=SESSIONS, days=some.integers(1, 1100), cut=some.integers(0, 9))
def test_a_choice_knows_nothing_of_later_sessions(session: int, days: int, cut: int) -> None:
    """Time runs one way: the choice at a session is the same with and without the sessions after it."""
    run = sessions.sessions_between(session, session + 20)
    whole = sessions.choose_expiries(MONTHLY, days, False, run)
    assert (
        sessions.choose_expiries(MONTHLY, days, False, run[: cut + 1]).tolist() == whole[: cut + 1].tolist()
    )


def test_weekly_holder_always_finds_the_next_friday_or_the_one_after() -> None:
    """At every session 1985-2030 a wish for 7 days on the weekly cycle is met within 4 days (identity)."""
    days = sessions.sessions_between(ordinal("1985-01-02"), ordinal("2030-12-31"))
    away = sessions.choose_expiries(WEEKLY, 7, False, days) - days
    assert ((away >= 3) & (away <= 11)).all()


def test_historical_regime_lists_what_was_there() -> None:
    """Weekly series on stocks from mid-2010, daily from 2022 (exchange notices); before, third Fridays."""
    assert chosen(WEEKLY, 7, "2010-06-28", regime="historical") == ""
    assert chosen(WEEKLY, 7, "2010-06-28") == "2010-07-02"
    assert chosen(WEEKLY, 7, "2010-07-06", regime="historical") == "2010-07-16"
    assert chosen(WEEKLY, 7, "2009-07-10", regime="historical") == "2009-07-17"
    assert chosen(DAILY, 1, "2021-06-01", regime="historical") == "2021-06-04"
    assert chosen(DAILY, 1, "2022-06-01", regime="historical") == "2022-06-02"
    assert chosen(MONTHLY, 30, "1973-04-02", regime="historical") == ""


def test_exercise_by_exception() -> None:
    """OCC rule 805: 0.25 before October 2006, 0.05 from then, 0.01 from June 2008."""
    days = [ordinal(d) for d in ("2006-09-15", "2006-10-20", "2008-05-16", "2008-06-20")]
    assert sessions.exercise_threshold(days).tolist() == [0.25, 0.05, 0.05, 0.01]


def test_ticks_of_the_time() -> None:
    """Penny classes from 2007-01-26, nickels and dimes before (exchange notices); pennies if modern."""
    days = [ordinal("2007-01-25"), ordinal("2007-01-26")]
    assert [a.tolist() for a in sessions.tick_rules(days, "historical")] == [[0.05, 0.01], [0.10, 0.05]]
    assert [a.tolist() for a in sessions.tick_rules(days)] == [[0.01, 0.01], [0.05, 0.05]]


def test_strike_spacing_of_the_time() -> None:
    """Strikes 0.50 apart from January 2015 (80 FR 1559); the old classes' spacing before, if historical."""
    days = [ordinal("2014-12-31"), ordinal("2015-01-02")]
    assert sessions.modern_strikes(days, "historical").tolist() == [0, 1]
    assert sessions.modern_strikes(days).tolist() == [1, 1]


def test_an_unknown_regime_is_refused_with_the_nearest_word() -> None:
    """A word that is no regime is an error that offers the nearest one."""
    for ask in (
        lambda: sessions.tick_rules([1], "historic"),
        lambda: sessions.modern_strikes([1], "historic"),
        lambda: sessions.listed_at(WEEKLY, 730000, "historic"),
        lambda: sessions.choose_expiries(WEEKLY, 7, False, [730000], "historic"),
    ):
        with pytest.raises(StudyError, match="did you mean `historical`"):
            ask()
