"""Limits, ranges over the stress, conditions and records of a sheet, each against another way to it."""

from __future__ import annotations

import math
from typing import Any

import numpy as np
import pandas as pd
import pytest
from hypothesis import given
from hypothesis import strategies as st
from scipy import stats

import hedgerow as hr
from desk_sheets import ROOT, STRATEGIES, orchard, study_of
from hedgerow.desk import conditions
from hedgerow.desk.conditions import Sight, failing
from hedgerow.desk.record import record_of
from hedgerow.desk.structure import accept_tests, limit_of
from hedgerow.kernels.probe import PROBED
from hedgerow.rules.load import load_strategy
from hedgerow.rules.schema import Accept
from hedgerow.study.one import Bench
from hedgerow.volatility.words import surface_words

CENT = 0.01


def lot(debit: float, floor: float, top: float, owed: float, shares: float, least: float = 0.0) -> Any:
    """What is found of one lot: bought for `debit`, worth `floor` at worst and `top` at best."""
    found = np.zeros(1, PROBED).view(np.recarray)[0]
    found.debit, found.credit, found.owed = debit, shares - debit, owed
    found.stake = max(debit + owed, least)
    found.best, found.worst, found.odds, found.wide = top - debit, debit - floor, 0.5, 0.0
    return found


ACCEPTS: dict[str, Any] = {
    "worst loss": {"worst_loss": {"at_most": "6%"}},
    "best gain": {"best_gain": {"at_least": "2%"}},
    "ratio": {"best_over_worst": {"at_least": 0.6}},
    "debit": {"net_debit": {"at_most": "0.5%"}},
    "credit": {"net_credit": True},
}
ACCEPTS["all"] = {**ACCEPTS["worst loss"], **ACCEPTS["debit"], **ACCEPTS["best gain"]}


@pytest.mark.parametrize("name", sorted(ACCEPTS))
@given(
    shares=st.floats(2_000.0, 20_000.0),
    cost=st.floats(-0.02, 0.03),
    width=st.floats(0.01, 0.12),
    room=st.floats(0.01, 0.1),
    owed=st.sampled_from((0.0, 0.3)),
    short=st.booleans(),
)
def test_up_to_its_limit_a_structure_is_accepted(
    name: str, shares: float, cost: float, width: float, room: float, owed: float, short: bool
) -> None:
    """At the limit every bound of the rule holds, and two cents a share beyond it one does not."""
    accept = Accept.model_validate(ACCEPTS[name])
    floor, top = shares * (1.0 - width), shares * (1.0 + room)
    least = shares if short else 0.0
    limit = limit_of(accept, lot(shares * (1.0 + cost), floor, top, owed * shares, shares), shares, short)

    def all_hold(debit: float) -> bool:
        tests = accept_tests(accept, lot(debit, floor, top, owed * shares, shares, least), shares)
        return all(test.holds for test in tests)

    at_limit = 100.0 * limit.net_debit
    assert all_hold(at_limit - 1e-6)
    assert not all_hold(at_limit + 200.0 * CENT)
    assert limit.options == pytest.approx(shares / 100.0 - limit.net_debit)


def test_a_rule_without_bounds_has_no_limit() -> None:
    """Nothing is accepted or refused by price: no limit, and no rule named."""
    limit = limit_of(None, lot(10_000.0, 9_000.0, 11_000.0, 0.0, 10_000.0), 10_000.0)
    assert math.isnan(limit.net_debit)
    assert limit.rule == ""


def test_the_range_is_that_of_sheets_under_other_premiums() -> None:
    """Strikes of a collar do not depend on the premium: sheets at ratios .8 and 1.4 have the ends as mids."""
    words = {"name": "Collar", "legs": load_strategy(ROOT / "strategies/collar.yaml").plain()["legs"]}
    sheets = {
        ratio: hr.today(study_of(words, {"ratio": ratio}, first="2019-06-21"), orchard(), as_of="2019-06-21")
        for ratio in (0.8, 1.0, 1.4)
    }
    low, middle, high = ({look.symbol: look.plan for look in sheets[r].of("open")} for r in (0.8, 1.0, 1.4))
    assert len(middle) >= 3
    for symbol in middle.keys() & low.keys() & high.keys():
        for leg, least, most in zip(*(plans[symbol].legs for plans in (middle, low, high)), strict=True):
            assert (leg.low, leg.high) == (pytest.approx(least.mid), pytest.approx(most.mid))
            assert leg.strike == least.strike == most.strike


@pytest.mark.parametrize("strategy", STRATEGIES, ids=lambda path: path.stem)
def test_an_opening_accepts_and_a_refusal_does_not(strategy: Any) -> None:
    """Of every shipped rule: all conditions of what is opened hold, and each one told of a refusal fails."""
    sheet = hr.today(study_of(strategy, first="2021-03-19"), orchard(), as_of="2021-03-19")
    for look in sheet.of("open"):
        assert all(test.holds for test in look.tests)
    for look in (*sheet.of("declined"), *sheet.of("no signal")):
        assert not any(test.holds for test in look.tests)
        assert look.reason or look.tests


WHEN = {
    "all": [
        {"signal": "close_over_mean", "sessions": 50},
        {"any": [{"signal": "momentum", "sessions": 63, "at_least": "5%"}, {"signal": "rsi", "at_most": 30}]},
        {"not": {"signal": "momentum", "sessions": 10, "at_least": "4%"}},
    ]
}


def test_what_fails_is_what_keeps_the_condition_from_holding() -> None:
    """Failing parts are told exactly when the whole fails, with numbers worked out again from prices."""
    condition = load_strategy({"name": "When", "enter": {"when": WHEN}}).enter.when
    seen = set()
    for day in pd.bdate_range("2020-01-06", periods=30, freq="7D").date:
        market = orchard().until(day)
        bench = Bench(market, surface_words(None))
        sight = Sight(bench)
        for symbol in np.flatnonzero(~np.isnan(market.close[-1]) & bench.traded.astype(bool))[:4]:
            missing = failing(condition, sight, int(symbol))
            assert bool(missing) is not sight.truth(condition, int(symbol))
            close = market.adj_close[:, symbol]
            change = float(close[-1] / close[-64] - 1.0)
            test = conditions.tests_of(condition, sight, int(symbol))[1]
            assert test.value == pytest.approx(change)
            assert test.distance == pytest.approx(abs(change - 0.05))
            assert test.holds is (change >= 0.05)
            seen |= {one.text for one in missing}
    assert len(seen) == 4


def test_the_interval_of_lone_weeks_is_students() -> None:
    """One position a week, over within it: the textbook's interval of a mean."""
    random = np.random.default_rng(5)
    results = random.normal(0.01, 0.03, 40)
    opened = pd.date_range("2020-01-06", periods=40, freq="7D").astype("datetime64[s]")
    trades = pd.DataFrame(
        {"symbol": "ASH", "return_on_debit": results, "outcome": "between", "opened": opened, "sessions": 3}
    )
    found = record_of(trades, 0.9)
    assert found is not None
    wanted = stats.t.interval(0.9, 39, loc=results.mean(), scale=stats.sem(results))
    assert (found.low, found.high) == (pytest.approx(wanted[0]), pytest.approx(wanted[1]))
    assert found.won == pytest.approx((results > 0.0).mean())
    assert record_of(trades, 0.9, "ELM") is None
