"""Time runs one way: what comes after a date changes nothing that happened up to it, to the last bit."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import replace
from typing import Any

import numpy as np
import pytest
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st

from hedgerow.events.log import EventLog
from hedgerow.market import Market
from hedgerow.signals import SIGNALS, Panel, signal
from oracle.bridge import walked
from oracle.real_markets import stocks
from oracle.words import Setting
from properties.accounts import SHORT_BLEND, SHORT_SURFACE, accounts
from properties.markets import wild_market, wild_markets
from properties.rules import Rule, rules

TABLES = ("events", "terms", "days", "marks")
WEEKLY = {"days": 7, "listed": "weekly"}
COLLAR: Rule = {
    "name": "Collar",
    "legs": {
        "call": {"sell": "call", "expiry": WEEKLY, "strike": {"from_spot": "1%", "snap": "up"}},
        "put": {"buy": "put", "expiry": {"with": "call"}, "strike": {"from_spot": "-4%", "snap": "down"}},
    },
    "exit": [{"name": "cut", "if": {"loss": {"at_least": "2%"}}}],
}
HELD: Rule = {
    "name": "Shares of a rising tomorrow",
    "enter": {"when": {"signal": "rises_tomorrow"}},
    "exit": [{"name": "falling", "if": {"not": {"signal": "rises_tomorrow"}}}],
}


def until(log: EventLog, session: int) -> dict[str, bytes]:
    """The tables of a log up to and with a session, as bytes."""
    tables = {name: getattr(log, name) for name in TABLES}
    return {name: table[table["session"] <= session].tobytes() for name, table in tables.items()}


def unlike(one: EventLog, other: EventLog, session: int) -> list[str]:
    """The tables of two logs that differ somewhere up to a session."""
    mine, theirs = until(one, session), until(other, session)
    return [name for name in TABLES if mine[name] != theirs[name]]


def with_other_future(market: Market, session: int, seed: int) -> Market:
    """The market with every number after a session changed, and every report unknown by then."""
    dice = np.random.default_rng(seed)
    later = slice(session + 1, None)
    changed: dict[str, np.ndarray] = {}
    factors = np.exp(dice.normal(0.1, 0.3, market.close.shape))
    for name in ("open", "high", "low", "close"):
        changed[name] = getattr(market, name) * factors
    changed["split"] = dice.choice([1.0, 1.0, 2.0], market.close.shape)
    changed["dividend"] = dice.choice([0.0, 0.0, 0.7], market.close.shape)
    changed["special"] = dice.choice([0.0, 0.0, 1.5], market.close.shape)
    changed["rate"] = dice.uniform(0.0, 0.09, market.rate.shape)
    arrays = {name: np.array(getattr(market, name)) for name in changed}
    for name, values in changed.items():
        arrays[name][later] = values[later]
    today = int(market.ordinals[session])
    reports = tuple(
        report if report.reaction_ordinal <= today else report._replace(eps=-99.0)
        for report in market.reports
        if report.announced_ordinal <= today
    )
    return replace(market, reports=reports, **arrays)


@settings(max_examples=80, suppress_health_check=[HealthCheck.too_slow])
@given(market=wild_markets(), rule=rules(), setting=accounts(), share=st.floats(0.1, 0.99))
def test_cutting_the_future(market: Market, rule: Rule, setting: Setting, share: float) -> None:
    """A market that ends at a date has the same log up to it as the whole one."""
    session = int(share * (len(market.dates) - 1))
    whole = walked(market, rule, setting, SHORT_BLEND)
    cut = walked(market.until(str(market.dates[session])), rule, setting, SHORT_BLEND)
    assert unlike(whole, cut, session) == []


@settings(max_examples=80, suppress_health_check=[HealthCheck.too_slow])
@given(
    market=wild_markets(),
    rule=rules(),
    setting=accounts(),
    share=st.floats(0.1, 0.99),
    seed=st.integers(0, 99),
)
def test_changing_the_future(market: Market, rule: Rule, setting: Setting, share: float, seed: int) -> None:
    """Other prices, dividends, splits, interest and reports after a date leave the log up to it as it was."""
    session = int(share * (len(market.dates) - 1))
    whole = walked(market, rule, setting, SHORT_BLEND)
    other = walked(with_other_future(market, session, seed), rule, setting, SHORT_BLEND)
    assert unlike(whole, other, session) == []


@pytest.mark.parametrize("date", ["2001-09-10", "2005-02-25", "2008-10-10"])
def test_cutting_real_stocks(date: str) -> None:
    """Five real stocks cut before a closure, before a split and in a crash: the same log up to that day."""
    market, setting = stocks(), Setting(per_position=1 / 3)
    cut = market.until(date)
    session = len(cut.dates) - 1
    assert unlike(walked(market, COLLAR, setting), walked(cut, COLLAR, setting), session) == []


@pytest.fixture
def peeking() -> Iterator[str]:
    """A signal that looks at tomorrow's close, registered for one test."""

    @signal("rises_tomorrow", phrase="the next close is higher")
    def rises_tomorrow(panel: Panel) -> Any:
        out = np.zeros(panel.close.shape, np.bool_)
        out[:-1] = panel.close[1:] > panel.close[:-1]
        return out

    yield "rises_tomorrow"
    del SIGNALS["rises_tomorrow"]


@pytest.mark.usefixtures("peeking")
def test_a_peeking_signal_is_caught() -> None:
    """A negative control: a signal that knows tomorrow's close is seen by either change of the future."""
    setting = Setting(cash=100000.0, surface=SHORT_SURFACE)
    caught = {"cut": 0, "changed": 0}
    sessions = range(40, 60)
    market = wild_market(7, 110, 2)
    whole = walked(market, HELD, setting, SHORT_BLEND)
    for session in sessions:
        cut = walked(market.until(str(market.dates[session])), HELD, setting, SHORT_BLEND)
        other = walked(with_other_future(market, session, session), HELD, setting, SHORT_BLEND)
        caught["cut"] += bool(unlike(whole, cut, session))
        caught["changed"] += bool(unlike(whole, other, session))
    assert min(caught.values()) >= len(sessions) // 4, caught


def test_the_future_does_matter_later() -> None:
    """A negative control: the same comparison over all sessions finds the changed future."""
    setting = Setting(cash=100000.0, surface=SHORT_SURFACE)
    market = wild_market(7, 110, 2)
    other = with_other_future(market, 60, 1)
    logs = [walked(each, COLLAR, setting, SHORT_BLEND) for each in (market, other)]
    assert unlike(*logs, 60) == []
    assert "events" in unlike(*logs, 109)
    assert "days" in unlike(*logs, 109)
