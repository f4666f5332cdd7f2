"""The next dividend a trader would expect, by hand and by what was known."""

from __future__ import annotations

import datetime as dt

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from array_market import array_market
from hedgerow.market.expected import expected_dividends, usual_gap
from hedgerow.market.table import Market

DAYS = 500  # sessions of Mondays to Fridays from 2015-01-05 on


def paying(amounts: dict[str, float], split: dict[str, float] | None = None, sessions: int = DAYS) -> Market:
    """One symbol at 50 that pays on these days, and splits on those."""
    market = array_market(np.full((sessions, 1), 50.0))
    dividend, ratio = np.zeros((sessions, 1)), np.ones((sessions, 1))
    for day, amount in amounts.items():
        dividend[at(market, day)] = amount
    for day, new in (split or {}).items():
        ratio[at(market, day)] = new
    return array_market(np.full((sessions, 1), 50.0), dividend=dividend, split=ratio)


def at(market: Market, day: str) -> int:
    """The session of a day, or the first one after it."""
    return int(np.searchsorted(market.dates, np.datetime64(day)))


def known(market: Market, day: str) -> tuple[float, str | None, int]:
    """Amount, day and gap expected at the close of a day."""
    found = expected_dividends(market)
    here = at(market, day)
    due = int(found.ordinal[here, 0])
    text = dt.date.fromordinal(due).isoformat() if due else None
    return float(found.cash[here, 0]), text, int(found.gap_days[here, 0])


QUARTERS = {"2015-02-02": 0.30, "2015-05-04": 0.30, "2015-08-03": 0.35}


def test_nothing_is_expected_of_one_payment() -> None:
    """Without a gap there is no rhythm; from the second payment on there is."""
    market = paying(QUARTERS)
    assert known(market, "2015-05-01") == (0.0, None, 0)
    assert known(market, "2015-05-04") == (0.30, "2015-08-03", 91)


def test_the_last_amount_is_expected_again() -> None:
    """0.35 after the raise, a quarter later."""
    assert known(paying(QUARTERS), "2015-09-15") == (0.35, "2015-11-02", 91)


def test_a_late_payment_is_expected_tomorrow_and_then_no_more() -> None:
    """From the due day for half a gap, 45 days; then the payer is taken to have stopped."""
    market = paying(QUARTERS)
    assert known(market, "2015-11-02") == (0.35, "2015-11-03", 91)
    assert known(market, "2015-12-17") == (0.35, "2015-12-18", 91)
    assert known(market, "2015-12-18") == (0.0, None, 0)


def test_a_split_divides_what_is_expected() -> None:
    """Two for one: half the amount a new share, from that session on."""
    market = paying(QUARTERS, {"2015-09-10": 2.0})
    assert known(market, "2015-09-09")[0] == 0.35
    assert known(market, "2015-09-10")[0] == pytest.approx(0.175)


@pytest.mark.parametrize(
    ("gaps", "expected"),
    [([], 0), ([28], 30), ([33, 29, 31], 30), ([98, 84], 91), ([181, 183], 182), ([364], 365)],
)
def test_the_usual_gap(gaps: list[int], expected: int) -> None:
    """The nearest of a month, a quarter, half a year and a year to the median of the gaps."""
    assert usual_gap(np.cumsum([735_000, *gaps])) == expected


def test_only_the_last_four_gaps_count() -> None:
    """A payer that went from quarters to months is a monthly one after three of them."""
    assert usual_gap(np.cumsum([735_000, 91, 91, 91, 91, 30, 30])) == 91
    assert usual_gap(np.cumsum([735_000, 91, 91, 91, 91, 30, 30, 30])) == 30


@given(st.lists(st.integers(0, 299), unique=True, min_size=1, max_size=12), st.integers(1, 299))
def test_only_the_past_is_known(days: list[int], stop: int) -> None:
    """Cut anywhere, what was expected before stands."""
    dividend = np.zeros((300, 1))
    dividend[days] = 0.25
    close = np.full((300, 1), 50.0)
    whole = expected_dividends(array_market(close, dividend=dividend))
    part = expected_dividends(array_market(close[:stop], dividend=dividend[:stop]))
    for one, other in zip(whole, part, strict=True):
        np.testing.assert_array_equal(one[:stop], other)
