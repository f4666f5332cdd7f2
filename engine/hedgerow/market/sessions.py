"""Sessions and what is listed on them: expiries by cycle, ticks, exercise by exception.

Days are proleptic ordinals. A regime says whose listings hold: `modern`, the default, gives all of history
today's listings, so that a rule is judged by what it could trade now; `historical` those of the time.
An expiry is the last day of trading: standard series that ended legally on the Saturday, up to January 2015,
stand here on their Friday. One that falls on a closed day stands on the session before.
"""

from __future__ import annotations

import datetime as dt
from functools import cache
from typing import Literal, NamedTuple, TypeAlias

import numpy as np
from numpy.typing import ArrayLike, NDArray

from hedgerow.errors import StudyError, nearest_word
from hedgerow.kernels.layout import MONTHLY, QUARTERLY, WEEKLY
from hedgerow.market.calendar import (
    EPOCH,
    EXACT_FROM,
    FIRST_DAY,
    LAST_DAY,
    is_session,
    next_session,
    on_or_before,
    previous_session,
    sessions_between,
    why_closed,
)

__all__ = [
    "DAILY_DAYS",
    "EXACT_FROM",
    "FIRST_DAY",
    "LAST_DAY",
    "LEAST_TOLERANCE_DAYS",
    "LONG_DAYS",
    "MONTHLY_DAYS",
    "REGIMES",
    "WEEKLY_DAYS",
    "Regime",
    "check_regime",
    "choose_expiries",
    "exercise_threshold",
    "is_session",
    "listed_at",
    "listed_expiries",
    "modern_strikes",
    "next_session",
    "on_or_before",
    "previous_session",
    "sessions_between",
    "tick_rules",
    "why_closed",
]

Floats = NDArray[np.float64]
Ordinals = NDArray[np.int64]
Regime: TypeAlias = Literal["modern", "historical"]

REGIMES = ("modern", "historical")
FRIDAY = 4
LEAST_TOLERANCE_DAYS = 4
NEVER = 2**40  # later than any day of the calendar

DAILY_DAYS = 35  # how far ahead each kind of series is listed, calendar days: common practice
WEEKLY_DAYS = 63
MONTHLY_DAYS = 285  # nine months and a few days, from memory
LONG_DAYS = 1096  # three years, from memory

OPTIONS_FROM = dt.date(1973, 4, 26).toordinal()  # first listed stock options, from memory
LONG_FROM = dt.date(1990, 10, 5).toordinal()  # first long-dated series on stocks, from memory
WEEKLY_FROM = dt.date(2010, 7, 1).toordinal()  # weekly series on single stocks; exchange notices, mid-2010
DAILY_FROM = dt.date(2022, 5, 11).toordinal()  # an expiry on every weekday, on the largest funds; from memory
PENNY_FROM = dt.date(2007, 1, 26).toordinal()  # penny pilot; exchange notices
CLOSE_STRIKES_FROM = dt.date(2015, 1, 1).toordinal()  # strikes 0.50 apart in weekly series; 80 FR 1559
NICKEL_EXERCISE_FROM = dt.date(2006, 10, 1).toordinal()  # OCC rule 805
CENT_EXERCISE_FROM = dt.date(2008, 6, 1).toordinal()  # OCC rule 805


class Series(NamedTuple):
    """One kind of listed series: its expiries, how many days ahead they are listed, and since when."""

    expiries: Ordinals  # sorted, shape (n,)
    ahead_days: int
    since: int  # ordinal; in the modern regime no date holds it back

    def listed_days(self, sessions: Ordinals, regime: Regime) -> Ordinals:
        """How many days ahead the series is listed at each session; 0 where it is not listed; shape (T,)."""
        if regime == "modern":
            return np.full(sessions.shape, self.ahead_days, dtype=np.int64)
        return np.where(sessions >= self.since, self.ahead_days, 0)


def check_regime(regime: str) -> None:
    """Raise StudyError when `regime` is no regime of listing."""
    if regime not in REGIMES:
        found, allowed = f"unknown listing regime `{regime}`", f"one of {', '.join(REGIMES)} is allowed"
        raise StudyError.one("listings", "unknown-regime", found, allowed, nearest_word(regime, REGIMES))


@cache
def _fridays(third_only: bool, months: tuple[int, ...] = tuple(range(1, 13))) -> Ordinals:
    """The Fridays of some months, or only their third ones, each moved to the session before a holiday."""
    first, last = FIRST_DAY + 1, LAST_DAY - 1
    days = np.arange(first, last + 1, dtype=np.int64)
    days = days[(days + 6) % 7 == FRIDAY]
    dates = (days - EPOCH).astype("datetime64[D]")
    month_starts = dates.astype("datetime64[M]")
    of_month = (dates - month_starts.astype("datetime64[D]")).astype(np.int64) + 1
    keep = np.isin(month_starts.astype(np.int64) % 12 + 1, months)
    if third_only:
        keep &= (of_month >= 15) & (of_month <= 21)
    return on_or_before(days[keep])


@cache
def _series(cycle: int) -> tuple[Series, ...]:
    """What a class on a cycle lists: near series close together, then the sparser ones of longer cycles."""
    if cycle == QUARTERLY:
        return (Series(_fridays(True, (3, 6, 9, 12)), LONG_DAYS, OPTIONS_FROM),)
    monthly = Series(_fridays(True), MONTHLY_DAYS, OPTIONS_FROM)
    januaries = Series(_fridays(True, (1,)), LONG_DAYS, LONG_FROM)
    if cycle == MONTHLY:
        return (monthly, januaries)
    weekly = Series(_fridays(False), WEEKLY_DAYS, WEEKLY_FROM)
    if cycle == WEEKLY:
        return (weekly, monthly, januaries)
    daily = Series(sessions_between(FIRST_DAY + 1, LAST_DAY - 1), DAILY_DAYS, DAILY_FROM)
    return (daily, weekly, monthly, januaries)


def listed_expiries(cycle: int, from_ordinal: int, to_ordinal: int) -> Ordinals:
    """The expiries of a cycle's own series between two days, both included: sorted ordinals, shape (n,).

    DAILY: every session; WEEKLY: every Friday, the third included; MONTHLY: third Fridays; QUARTERLY: those
    of March, June, September and December; each moved to the session before a holiday.
    """
    expiries = _series(cycle)[0].expiries
    start, stop = np.searchsorted(expiries, [from_ordinal, to_ordinal + 1])
    return expiries[start : max(start, stop)]


def listed_at(cycle: int, session_ordinal: int, regime: Regime = "modern") -> Ordinals:
    """Every expiry a class on `cycle` lists at one session, later than it: sorted ordinals, shape (n,).

    Near expiries follow the cycle; further out only the longer cycles are listed: weekly and daily classes go
    over to third Fridays, those to Januaries up to three years out. Raises StudyError for an unknown regime.
    """
    check_regime(regime)
    session = np.array([session_ordinal], dtype=np.int64)
    found = []
    for series in _series(cycle):
        last = session_ordinal + int(series.listed_days(session, regime)[0])
        start, stop = np.searchsorted(series.expiries, [session_ordinal + 1, last + 1])
        found.append(series.expiries[start:stop])
    return np.unique(np.concatenate(found))


def _around(series: Series, target: Ordinals, last: Ordinals) -> tuple[Ordinals, Ordinals]:
    """The series' last expiry up to the target, 0 for none, and its first from there on, NEVER for none.

    Both as far as the series is listed, which is up to `last`.
    """
    padded = np.concatenate(([0], series.expiries, [NEVER]))
    before = padded[np.searchsorted(padded, np.minimum(target, last), side="right") - 1]
    after = padded[np.searchsorted(padded, target, side="left")]
    return before, np.where(after <= last, after, NEVER)


def choose_expiries(
    cycle: int, days_wanted: int, at_least: bool, session_ordinals: ArrayLike, regime: Regime = "modern"
) -> Ordinals:
    """The expiry chosen at each session for a leg of `days_wanted` calendar days, ordinals of shape (T,).

    The listed expiry nearest to that many days (of two as near, the later), or with `at_least` the first that
    is no nearer; always after the session itself. 0 where none is listed within max(4, half of `days_wanted`)
    days of the wish. Raises StudyError for an unknown regime.
    """
    check_regime(regime)
    sessions = np.asarray(session_ordinals, dtype=np.int64)
    target = sessions + max(days_wanted, 1)
    early, late = np.zeros_like(sessions), np.full_like(sessions, NEVER)
    for series in _series(cycle):
        before, after = _around(series, target, sessions + series.listed_days(sessions, regime))
        early, late = np.maximum(early, before), np.minimum(late, after)
    take_late = (late - target <= target - early) | (early <= sessions) | at_least
    chosen = np.where(take_late, late, early)
    tolerance = max(LEAST_TOLERANCE_DAYS, days_wanted / 2)
    return np.where(np.abs(chosen - target) <= tolerance, chosen, 0)


def exercise_threshold(ordinals: ArrayLike, regime: Regime = "historical") -> Floats:
    """How far in the money, per share, an option must end to be exercised by exception; shape (T,).

    0.25 before October 2006, 0.05 to May 2008, 0.01 from June 2008 (OCC rule 805 and its amendments); in the
    modern regime 0.01 throughout. Raises StudyError for an unknown regime.
    """
    check_regime(regime)
    days = np.asarray(ordinals, dtype=np.int64)
    cent = (days >= CENT_EXERCISE_FROM) | (regime == "modern")
    return np.where(cent, 0.01, np.where(days >= NICKEL_EXERCISE_FROM, 0.05, 0.25))


def tick_rules(ordinals: ArrayLike, regime: Regime = "modern") -> tuple[Floats, Floats]:
    """The least steps of a premium below 3.00 and from 3.00, per share; two arrays of shape (T,).

    0.01 and 0.05, as in the penny classes; in the historical regime 0.05 and 0.10 before 2007-01-26 (exchange
    notices 2007-2020). Raises StudyError for an unknown regime.
    """
    check_regime(regime)
    days = np.asarray(ordinals, dtype=np.int64)
    penny = (days >= PENNY_FROM) | (regime == "modern")
    return np.where(penny, 0.01, 0.05), np.where(penny, 0.05, 0.10)


def modern_strikes(ordinals: ArrayLike, regime: Regime = "modern") -> Ordinals:
    """1 where today's strike spacing holds, 0 where the old classes' does, for `kernels.listing`; shape (T,).

    In the historical regime today's begins in 2015 (80 FR 1559). Raises StudyError for an unknown regime.
    """
    check_regime(regime)
    days = np.asarray(ordinals, dtype=np.int64)
    return np.where((days >= CLOSE_STRIKES_FROM) | (regime == "modern"), 1, 0)
