"""Every structure on five real stocks, 2000-2013: bounds at expiry, locked results, dividends, assignments.

Prices, dividends, splits and bill rates: `hedgerow.market.samples`, sources there. The bounds are those of
the payoff at expiry; that a conversion locks in its result, and that a collar and a call spread of the same
strikes come to the same, is put-call parity (Stoll 1969).
"""

from __future__ import annotations

import math
from functools import cache
from typing import Any

import numpy as np
import pandas as pd
import pytest

import hedgerow as hr
from hedgerow.kernels import layout as at
from hedgerow.market.sessions import exercise_threshold
from hedgerow.rules.load import load_strategy
from published.test_real_stocks import ACCOUNT, FILES, STRATEGIES, column, early, session_of, stocks

ONE_EXPIRY = (
    "call-debit-spread",
    "cash-secured-put",
    "collar",
    "collar-debit",
    "collar-reverse",
    "collar-weekly",
    "collar-zero-cost",
    "conversion",
    "covered-call",
    "covered-call-in-the-money",
    "index-buywrite",
    "put-credit-spread",
    "put-spread-collar",
    "reversal",
)
LOCKED = ("conversion", "reversal")


@cache
def to_expiry(name: str, costs: str | None = None) -> hr.Result:
    """A shipped strategy without its exits and stop, on all five stocks."""
    rule = load_strategy(STRATEGIES / f"{name}.yaml")
    words = {word: value for word, value in rule.plain().items() if word not in ("exit", "stop")}
    if len(rule.legs) > 2:
        words.pop("accept", None)  # its few quarters would be fewer still
    return hr.run(stocks(), words, account=hr.Account(cash=1_000_000.0, per_position=0.05), costs=costs)


def ended_at_expiry(result: hr.Result) -> pd.DataFrame:
    """Positions that ran to their expiry, with what they earned before fees and dividends, and the slack.

    A special dividend that came off the strikes has left the price of shares held. What is in the money by
    less than the exercise threshold of the time (OCC rule 805) is not exercised.
    """
    market = stocks()
    trades = result.trades.assign(spread=result.ledger.postings.entry_spread() / 100.0)
    trades = trades[trades["reason"] == "expiry"].copy()
    earned, slack = [], []
    for row in trades.itertuples():
        start, stop = session_of(market, row.opened) + 1, session_of(market, row.closed)
        where = (slice(start, stop + 1), column(market, row.symbol))
        special = (market.special[where] * row.shares).sum()
        earned.append(row.stock_pnl + row.option_pnl - row.spread + special)
        size = max(abs(row.shares), 100.0 * row.lots) * market.split[where].prod()
        slack.append(float(exercise_threshold([market.ordinals[stop]])[0]) * size + 0.05)
    return trades.assign(earned=earned, slack=slack)


@pytest.mark.parametrize("name", ONE_EXPIRY)
@pytest.mark.parametrize("costs", ["none", None])
def test_results_lie_within_the_bounds_of_the_terms(name: str, costs: str | None) -> None:
    """Between worst loss and best gain, fees, dividends and interest apart, whatever the stock did."""
    rows = ended_at_expiry(to_expiry(name, costs))
    assert len(rows) >= 20
    assert (rows["earned"] <= rows["best_gain"] + rows["slack"]).all()
    assert (rows["earned"] >= -rows["worst_loss"] - rows["slack"]).all()


@pytest.mark.parametrize("name", LOCKED)
def test_a_locked_result_is_what_it_was_at_entry(name: str) -> None:
    """Best gain is the worst loss turned around, and the result is that, whatever the stock did."""
    rows = ended_at_expiry(to_expiry(name))
    moved = (rows["stock_out"] / rows["stock_in"] - 1.0).abs()
    assert moved.max() > 0.05
    assert (rows["best_gain"] + rows["worst_loss"]).abs().max() < 0.01
    assert ((rows["earned"] - rows["best_gain"]).abs() <= rows["slack"]).all()


@pytest.mark.parametrize("name", LOCKED)
def test_without_costs_a_locked_result_is_the_carry(name: str) -> None:
    """Google pays no dividend: a conversion earns, a reversal pays, at most the interest on the strike.

    Less than that, since an American put is worth up to so much more than a European one.
    """
    result, market = to_expiry(name, "none"), stocks()
    rows = ended_at_expiry(result)
    rows = rows[rows["symbol"] == "GOOG"]
    assert len(rows) >= 20
    for row in rows.itertuples():
        start, stop = session_of(market, row.opened), session_of(market, row.closed)
        years = (market.ordinals[stop] - market.ordinals[start] + 6.5 / 24.0) / 365.0
        carry = abs(row.stock_out) * -math.expm1(-market.rate[start - 1] * years) * 100.0 * row.lots
        gain = row.earned if name == "conversion" else -row.earned
        assert -row.slack <= gain <= carry + row.slack


WEEK = {"days": 7, "listed": "weekly"}
HIGH = {"sell": "call", "expiry": WEEK, "strike": {"from_spot": "2%", "snap": "up"}}
LOW = {"expiry": {"with": "high"}, "strike": {"from_spot": "-4%", "snap": "down"}}
COLLAR: dict[str, Any] = {"name": "collar", "legs": {"high": HIGH, "low": {"buy": "put"} | LOW}}
SPREAD: dict[str, Any] = {
    "name": "spread",
    "shares": "none",
    "legs": {"low": {"buy": "call"} | LOW, "high": HIGH},
}


def a_lot(rule: dict[str, Any]) -> pd.DataFrame:
    """What each position on Google earned a lot, without costs, by the day it was opened."""
    account = hr.Account(cash=10_000_000.0, per_position=0.3)
    result = hr.run(stocks().select(["GOOG"]), rule, account=account, costs="none", first="2005-01-03")
    rows = result.trades[result.trades["reason"].isin(["expiry", "left over"])]
    earned = (rows["stock_pnl"] + rows["option_pnl"]) / rows["lots"]
    return rows.assign(earned=earned).set_index("opened")


def test_a_call_spread_is_the_collar_of_the_same_strikes() -> None:
    """By put-call parity they differ by interest on the lower strike at most, over hundreds of weeks."""
    both = a_lot(COLLAR).merge(a_lot(SPREAD), left_index=True, right_index=True, suffixes=("", "_spread"))
    both = both[both["closed"] == both["closed_spread"]]
    assert len(both) > 200
    market = stocks()
    sessions = [session_of(market, day) for day in both.index]
    rate = market.rate[np.array(sessions) - 1]
    years = (both["closed"] - both.index).dt.days.to_numpy() / 365.0 + 1.0 / 365.0
    carry = 100.0 * both["stock_in"].to_numpy() * np.expm1(rate * years)
    gap = (both["earned"] - both["earned_spread"]).to_numpy()
    assert (gap >= -1.05).all()  # a cent a share where what is barely in the money is not exercised
    assert (gap <= carry + 1.05).all()
    assert both["earned"].std() > 200.0  # the two move, together


@cache
def ran(file: str) -> hr.Result:
    """A shipped strategy as it is, on all five stocks."""
    return hr.run(stocks(), STRATEGIES / file, account=ACCOUNT)


def shares_over_night(events: list[Any], sessions: list[int]) -> dict[int, float]:
    """Shares of one position in each of its nights before a dividend, from its events in their order.

    Early assignments take shares away before the dividend, and splits come first.
    """
    found, held, place = {}, 0.0, 0
    for session in sessions:
        while place < len(events):
            when, kind, reason, quantity, _ = events[place]
            first = kind == at.KIND_SPLIT or reason == at.WHY_ASSIGNED_EARLY
            if when > session or (when == session and not first):
                break
            if kind == at.KIND_SPLIT:
                held *= quantity
            elif kind == at.KIND_SHARES:
                held += quantity
            place += 1
        found[session] = held
    return {session: held for session, held in found.items() if abs(held) > 1e-6}


WITH_SHARES = [file for file in FILES if load_strategy(STRATEGIES / file).shares != "none"]


@pytest.mark.parametrize("file", [*WITH_SHARES, "cash-secured-put-then-calls.yaml"])
def test_dividends_are_those_of_the_record(file: str) -> None:
    """Each ex-date of shares held, or owed, over the night: once, at the record's amount, on those shares."""
    log, market, some = ran(file).log, stocks(), 0
    of_position: dict[int, list[Any]] = {}
    for row in log.events[["session", "kind", "reason", "quantity", "price", "position"]].tolist():
        of_position.setdefault(row[-1], []).append(row[:-1])
    for terms in log.terms:
        events, symbol = of_position[int(terms["position"])], int(terms["symbol"])
        paid = (market.dividend + market.special)[:, symbol]
        closed = [row[0] for row in events if row[1] == at.KIND_CLOSED]
        first, last = int(terms["session"]) + 1, closed[0] if closed else len(market.dates) - 1
        days = (first + np.flatnonzero(paid[first : last + 1] > 0.0)).tolist()
        expected = shares_over_night([row for row in events if row[1] != at.KIND_DIVIDEND], days)
        got = {row[0]: row for row in events if row[1] == at.KIND_DIVIDEND}
        assert {day: row[3] for day, row in got.items()} == pytest.approx(expected)
        assert all(row[4] == paid[day] for day, row in got.items())
        some += len(got)
    assert some > 3


@pytest.mark.parametrize("file", FILES)
def test_early_assignments_are_those_that_pay(file: str) -> None:
    """Calls in the money on an ex-date, for its dividend; puts in the money, with interest to earn."""
    result, market = ran(file), stocks()
    for row in early(result, "call").itertuples():
        session, symbol = session_of(market, row.date), column(market, row.symbol)
        assert market.dividend[session, symbol] + market.special[session, symbol] > 0.0
        assert market.close[session - 1, symbol] > row.strike
    for row in early(result, "put").itertuples():
        session, symbol = session_of(market, row.date), column(market, row.symbol)
        assert row.strike > market.close[session - 1, symbol]
        assert market.rate[session - 1] > 0.0


@pytest.mark.parametrize(("file", "right"), [("collar.yaml", "call"), ("reversal.yaml", "put")])
def test_an_early_assignment_is_told_as_the_end(file: str, right: str) -> None:
    """What it leaves is closed for that alone: the outcome is `assigned`, not a bound of the payoff."""
    result = ran(file)
    taken = set(early(result, right)["position"])
    assert len(taken) >= 5
    outcome = result.trades.set_index("position")["outcome"]
    assert set(outcome[sorted(taken)]) == {"assigned"}
    assert not (outcome.drop(sorted(taken)) == "assigned").any()
