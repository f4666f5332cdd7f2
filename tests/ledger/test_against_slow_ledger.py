"""The vectorised ledger against one in plain Python with exact decimals."""

from __future__ import annotations

import numpy as np
import pandas as pd
import pytest
from hypothesis import given, settings
from hypothesis import strategies as some

from hedgerow.events.log import EventLog
from hedgerow.ledger import Ledger
from random_logs import random_log_builder
from slow_ledger import SlowPosition, slow_ledger

SEEDS = some.integers(0, 10**6)
CENT = 1e-6


def shuffled_numbers(log: EventLog, seed: int) -> EventLog:
    """The same log with position numbers far apart and the terms in another order."""
    dice = np.random.default_rng(seed)
    numbers = dice.permutation(log.terms.size * 7)[: log.terms.size].astype(np.int32)
    tables = {name: np.array(getattr(log, name)) for name in ("events", "terms", "days", "marks")}
    for name in ("events", "terms", "marks"):
        own = tables[name]["position"] >= 0
        tables[name]["position"][own] = numbers[tables[name]["position"][own]]
    tables["terms"] = tables["terms"][dice.permutation(log.terms.size)]
    return EventLog(log.meta, **tables)


def over(trades: pd.DataFrame) -> pd.DataFrame:
    """The trades that are over, by position."""
    return trades[trades["closed"].notna()].set_index("position")


@settings(max_examples=30, deadline=None)
@given(SEEDS)
def test_every_heading_of_every_position(seed: int) -> None:
    """Compares stock, options, dividends, interest, costs and result of closed positions, to the cent."""
    log = random_log_builder(seed).log()
    slow, trades = slow_ledger(log), over(Ledger(log).trades)
    assert sorted(trades.index) == sorted(n for n, one in slow.items() if one.closed is not None)
    for number, row in trades.iterrows():
        one: SlowPosition = slow[int(str(number))]
        parts = [one.stock, one.options, one.dividends, one.interest, one.costs, one.cash]
        names = ["stock_pnl", "option_pnl", "dividends", "interest", "costs", "pnl"]
        assert row[names].to_list() == pytest.approx([float(part) for part in parts], abs=CENT)
        assert one.stock + one.options + one.dividends + one.interest - one.costs == one.cash


@settings(max_examples=30, deadline=None)
@given(SEEDS)
def test_every_life_of_every_leg(seed: int) -> None:
    """Compares number, order, dates, money and costs of leg lives with the plain bookkeeping."""
    log = random_log_builder(seed).log()
    ledger = Ledger(log)
    slow = slow_ledger(log)
    legs = ledger.legs
    names = list(log.meta.leg_names)
    assert len(legs) == sum(len(one.lives) for one in slow.values())
    for (number, leg), rows in legs.groupby(["position", "leg"]):
        lives = [life for life in slow[int(number)].lives if life.leg == names.index(str(leg))]
        assert rows["life"].to_list() == list(range(1, len(lives) + 1))
        for row, life in zip(rows.to_dict("records"), lives, strict=True):
            assert row["opened"] == pd.Timestamp(str(log.meta.dates[life.opened]))
            assert row["costs"] == pytest.approx(float(life.costs), abs=CENT)
            assert (row["ended"] == "open") == (life.closed is None)
            if life.closed is not None:
                assert row["closed"] == pd.Timestamp(str(log.meta.dates[life.closed]))
                assert row["mid_pnl"] == pytest.approx(float(life.mid_pnl), abs=CENT)


@settings(max_examples=25, deadline=None)
@given(SEEDS)
def test_open_positions_hold_what_the_plain_book_holds(seed: int) -> None:
    """Compares what an open position is worth with shares and lives still held, at the last marks."""
    log = random_log_builder(seed).log()
    slow, trades = slow_ledger(log), Ledger(log).trades
    last = log.marks[log.marks["session"] == log.days["session"][-1]]
    still = {n: one for n, one in slow.items() if one.closed is None}
    assert sorted(last["position"].tolist()) == sorted(still)
    by_number = trades.set_index("position")
    for mark in last:
        one = still[int(mark["position"])]
        assert one.shares == pytest.approx(float(mark["shares"]))
        value = float(mark["shares"] * mark["spot"]) + sum(float(mark[f"leg{k}"]) for k in range(4))
        assert by_number.loc[int(mark["position"]), "pnl"] == pytest.approx(float(one.cash) + value, abs=0.04)


@settings(max_examples=25, deadline=None)
@given(SEEDS)
def test_numbers_and_order_of_positions_do_not_matter(seed: int) -> None:
    """Compares the ledger of a log with that of the same log under other numbers and an order of terms."""
    log = random_log_builder(seed).log()
    other = shuffled_numbers(log, seed)
    mine, theirs = Ledger.checked(log), Ledger.checked(other)
    columns = [name for name in mine.trades.columns if name != "position"]
    order = ["opened", "symbol", "net_debit", "pnl"]
    left = mine.trades.sort_values(order, ignore_index=True)[columns]
    right = theirs.trades.sort_values(order, ignore_index=True)[columns]
    pd.testing.assert_frame_equal(left, right)
    legs = [name for name in mine.legs.columns if name != "position"]
    keys = ["opened", "symbol", "leg", "strike", "price_in", "mid_pnl"]
    pd.testing.assert_frame_equal(
        mine.legs.sort_values(keys, ignore_index=True)[legs],
        theirs.legs.sort_values(keys, ignore_index=True)[legs],
    )
    pd.testing.assert_frame_equal(mine.by_day, theirs.by_day)


@settings(max_examples=20, deadline=None)
@given(SEEDS, some.integers(1, 11))
def test_a_shorter_log_has_the_same_beginning(seed: int, sessions: int) -> None:
    """Compares the ledger of a log cut after some sessions with the beginning of the whole one."""
    whole = random_log_builder(seed).log()
    kept = {
        name: getattr(whole, name)[getattr(whole, name)["session"] < sessions]
        for name in ("events", "terms", "days", "marks")
    }
    part = Ledger.checked(EventLog(whole.meta, **kept))
    full = Ledger(whole)
    limit = pd.Timestamp(str(whole.meta.dates[sessions - 1]))
    pd.testing.assert_frame_equal(part.equity, full.equity.iloc[:sessions])
    pd.testing.assert_frame_equal(part.by_day, full.by_day.iloc[:sessions], check_exact=False)
    ended = full.trades[full.trades["closed"] <= limit]
    mine = part.trades[part.trades["closed"].notna()]
    pd.testing.assert_frame_equal(mine.reset_index(drop=True), ended.reset_index(drop=True))
