"""The parts of the replay against published values, each other, and spoiled copies of themselves."""

from __future__ import annotations

import datetime as dt
import math
import random
from typing import Any

import pytest

from hedgerow.kernels import layout
from oracle import listed, past
from oracle.by_hand import COLLAR, FALLING, SURFACE
from oracle.compare import first_difference
from oracle.replay import Replay
from oracle.values import CALL, PUT, american, both_below, call_across_dividend, european
from oracle.words import Setting
from properties.markets import one_stock


@pytest.mark.parametrize(
    ("right", "spot", "strike", "years", "rate", "carry_yield", "volatility", "value"),
    [
        (CALL, 42, 40, 0.5, 0.10, 0.0, 0.20, 4.7594),  # Hull, Options, Futures and Other Derivatives
        (PUT, 42, 40, 0.5, 0.10, 0.0, 0.20, 0.8086),  # the same
        (CALL, 930, 900, 2 / 12, 0.08, 0.03, 0.20, 51.83),  # the same
        (PUT, 100, 95, 0.5, 0.10, 0.05, 0.20, 2.4648),  # Haug, Complete Guide to Option Pricing Formulas
    ],
)
def test_european_values(
    right: int,
    spot: float,
    strike: float,
    years: float,
    rate: float,
    carry_yield: float,
    volatility: float,
    value: float,
) -> None:
    """European values as printed in the books named beside them (from memory, recomputed)."""
    found = european(right, spot, strike, years, rate, carry_yield, volatility)
    assert found == pytest.approx(value, abs=0.005 if value > 10 else 5e-5)


def test_american_values() -> None:
    """The formula of 2002: 5.2869 and 4.4628, recomputed independently for two examples of Haug's book."""
    assert american(CALL, 42, 40, 0.75, 0.04, 0.08, 0.35) == pytest.approx(5.2869, abs=5e-5)
    assert american(PUT, 36, 40, 1.0, 0.06, 0.0, 0.20) == pytest.approx(4.4628, abs=5e-5)


def test_two_normals_against_scipy() -> None:
    """Chances of two correlated normals against scipy's bivariate normal."""
    from scipy.stats import multivariate_normal

    dice = random.Random(3)
    link = math.sqrt(0.5 * (math.sqrt(5.0) - 1.0))
    for _ in range(40):
        a, b, rho = dice.gauss(0, 2), dice.gauss(0, 2), dice.choice((link, -link))
        exact = multivariate_normal.cdf([a, b], mean=[0, 0], cov=[[1, rho], [rho, 1]])
        assert both_below(a, b, rho) == pytest.approx(exact, abs=1e-9)


def test_call_across_a_dividend_bounds() -> None:
    """At least Black's value (the better of two Europeans), at most the two Europeans together."""
    dice = random.Random(5)
    for _ in range(40):
        strike, years, rate = dice.uniform(80, 120), dice.uniform(0.05, 0.5), dice.choice((0.0, 0.02, 0.06))
        to_ex, amount, vol = years * dice.uniform(0.1, 0.9), dice.uniform(0.2, 3.0), dice.uniform(0.1, 0.6)
        base = 100.0 - amount * math.exp(-rate * to_ex)
        value = call_across_dividend(base, strike, years, rate, vol, to_ex, amount)
        kept = european(CALL, base, strike, years, rate, 0.0, vol)
        early = european(CALL, base, strike - amount, to_ex, rate, 0.0, vol)
        assert max(kept, early) - 1e-9 <= value <= kept + early


@pytest.mark.parametrize(
    ("day", "expiry"),
    [("2008-03-03", "2008-03-20"), ("2014-04-01", "2014-04-17"), ("2026-06-01", "2026-06-18")],
)
def test_expiries_before_holidays(day: str, expiry: str) -> None:
    """Third Fridays that were holidays: Good Friday 2008 and 2014, Juneteenth 2026 (OCC calendar)."""
    today = dt.date.fromisoformat(day).toordinal()
    assert listed.choose_expiry("monthly", 18, False, today) == dt.date.fromisoformat(expiry).toordinal()


def test_expected_dividends_by_hand() -> None:
    """Two payments 91 days apart, then none: the third is expected on its day, then daily for 45 days.

    A split of two for one in between halves what is expected.
    """
    days = list(range(1, 400))
    paid = {10: 0.5, 101: 0.6}
    columns: dict[str, Any] = {
        "open": [10.0] * 399,
        "high": [10.0] * 399,
        "low": [10.0] * 399,
        "close": [10.0] * 399,
        "dividend": [paid.get(day, 0.0) for day in days],
        "special": [0.0] * 399,
        "split": [2.0 if day == 150 else 1.0 for day in days],
        "implied": [math.nan] * 399,
    }
    expected = past.expected_dividends(past.History("HILL", True, days, **columns))
    at = {day: expected[day - 1] for day in days}
    assert at[100].amount == 0.0
    assert (at[101].amount, at[101].first, at[101].gap) == (0.6, 192, 91)
    assert (at[150].amount, at[150].first) == (0.3, 192)
    assert (at[192].amount, at[192].first) == (0.3, 193)
    assert (at[237].amount, at[237].first) == (0.3, 238)
    assert at[238].amount == 0.0


def spoiled(events: list[dict[str, Any]], place: int, **change: Any) -> list[dict[str, Any]]:
    """A copy of the events with one of them changed."""
    return [event | (change if n == place else {}) for n, event in enumerate(events)]


def test_every_change_of_an_event_is_seen() -> None:
    """A negative control: one field changed in one event, one event left out or added, is a difference."""
    market = one_stock(FALLING, implied=[0.3] * 10)
    events, _ = Replay(market, COLLAR, Setting(cash=12000.0, surface=SURFACE)).run()
    assert first_difference(events, events) == ""
    assert first_difference(events, events[:-1]) != ""
    assert first_difference(events, [*events, events[-1]]) != ""
    for place, event in enumerate(events):
        for field in ("session", "position", "kind", "leg", "reason", "cash"):
            more = 0.01 if field == "cash" else 1
            assert first_difference(events, spoiled(events, place, **{field: event[field] + more})) != ""
        if event["kind"] in (layout.KIND_LEG, layout.KIND_SHARES):
            changed = spoiled(events, place, price=event["price"] * (1.0 + 1e-8))
            assert first_difference(events, changed) != ""
