"""The summary of hand-made logs, every figure worked out by hand."""

from __future__ import annotations

import json
import math

import numpy as np
import pandas as pd
import pytest
from hypothesis import given, settings
from hypothesis import strategies as some

from builders import Builder, collar_that_is_called
from hedgerow.evidence import Summary, summarise
from hedgerow.evidence.figures import figures_of
from hedgerow.evidence.summary import curve_of
from hedgerow.kernels import layout as at
from hedgerow.ledger import Ledger
from random_logs import random_log_builder


def shares_book() -> Builder:
    """Positions of 100 shares at 50 that end at +200, +100, -150, 0, and one still open; costs of 1.00."""
    book = Builder(sessions=12)
    ends = [
        (52.0, at.WHY_EXPIRY, 0.5),
        (51.0, at.WHY_EXIT_RULE, 0.4),
        (48.5, at.WHY_STOP, 0.6),
        (50.0, at.WHY_EXPIRY, 0.3),
    ]
    for price, reason, odds in ends:
        place = book.open(
            0, shares=100.0, net_debit=5000.0, best_gain=200.0, worst_loss=300.0, odds_of_best=odds
        )
        book.shares(place, 100.0, 50.0, 50.0)
        book.night({0: 50.0})
        book.shares(place, -100.0, price, price, fee=0.0, reason=reason)
        book.close(place, reason)
        book.night()
    for reason, count in ((at.WHY_NO_LOT, 2.0), (at.WHY_NET_CREDIT, 5.0), (at.WHY_NO_LOT, 1.0)):
        book.write(at.KIND_DECLINED, -1, symbol=1, reason=reason, quantity=count)
    book.write(at.KIND_INTEREST, -1, cash=2.5, symbol=-1)
    place = book.open(1, shares=100.0, net_debit=2000.0, best_gain=math.inf, worst_loss=2000.0)
    book.shares(place, 100.0, 20.0, 19.99)
    book.night({1: 21.0})
    return book


def test_trade_figures_by_hand() -> None:
    """Compares win rate 2 of 4, average win 3 %, loss 3 %, break-even 50 %, expectancy .75 %, factor 2."""
    summary = summarise(Ledger.checked(shares_book().log()))
    assert (summary.positions, summary.positions_open) == (5, 1)
    assert summary.win_rate == 0.5
    assert summary.average_win == pytest.approx(0.03)
    assert summary.average_loss == pytest.approx(0.03)
    assert summary.break_even_win_rate == pytest.approx(0.5)
    assert (summary.average_win_money, summary.average_loss_money) == (150.0, 150.0)
    assert summary.expectancy == pytest.approx(0.0075)
    assert summary.expectancy_money == pytest.approx(37.5)
    assert summary.profit_factor == pytest.approx(2.0)
    assert summary.average_sessions == 1.0
    assert summary.time_invested == pytest.approx(5 / 9)
    assert summary.stock_pnl == pytest.approx(150.0 + 101.0)
    assert (summary.costs, summary.interest, summary.dividends) == pytest.approx((1.0, 2.5, 0.0))


def test_counts_by_hand() -> None:
    """Compares outcomes, reasons and declined entries with what was written, in a steady order."""
    summary = summarise(Ledger(shares_book().log()))
    assert dict(summary.outcomes) == {"best gain": 1, "between": 1, "cut": 1, "stop": 1, "open": 1}
    assert list(summary.outcomes) == ["best gain", "between", "cut", "stop", "open"]
    assert dict(summary.reasons) == {"expiry": 2, "open at end": 1, "stop": 1, "trend turned": 1}
    assert list(summary.declined.items()) == [("not a net credit", 5), ("capital too small for one lot", 3)]


def test_no_fact_is_shown_where_many_left_early() -> None:
    """Compares with what is honest: two of four left early, so those that stayed are a choice, no sample."""
    summary = summarise(Ledger(shares_book().log()))
    assert summary.odds_positions == 2
    assert math.isnan(summary.odds_observed)
    assert math.isnan(summary.odds_low)


def test_forecast_against_what_happened(monkeypatch: pytest.MonkeyPatch) -> None:
    """Compares the two positions that ran to expiry: forecast (50 % + 30 %) / 2, seen one of two."""
    monkeypatch.setattr("hedgerow.evidence.summary.LEAST_RUN_OUT", 0.0)
    summary = summarise(Ledger(shares_book().log()))
    assert summary.odds_positions == 2
    assert summary.odds_forecast == pytest.approx(0.4)
    assert summary.odds_observed == 0.5
    assert summary.odds_low < 0.4 < summary.odds_high
    assert summary.odds_held is True
    called = summarise(Ledger(collar_that_is_called().log()))
    assert (called.odds_positions, called.odds_forecast, called.odds_observed) == (1, 0.4, 1.0)


@pytest.mark.parametrize(
    ("spot", "outcome"), [(51.0, "best gain"), (50.994, "between"), (50.9951, "best gain")]
)
def test_best_gain_is_reached_within_half_a_cent_a_share(spot: float, outcome: str) -> None:
    """Compares results at, just inside and just outside half a cent a share from the best gain of 100."""
    book = Builder()
    place = book.open(0, shares=1000.0, net_debit=50_000.0, best_gain=1000.0, worst_loss=900.0, lots=10.0)
    book.shares(place, 1000.0, 50.0, 50.0)
    book.night({0: 50.0})
    book.shares(place, -1000.0, spot, spot, reason=at.WHY_EXPIRY)
    book.close(place)
    book.night()
    assert Ledger(book.log()).trades["outcome"].to_list() == [outcome]


def test_spread_at_entry_does_not_hide_the_floor() -> None:
    """Compares a fall to the put with the floor, counted from the fills: 48 - 50.10 - 0.40 = -2.50."""
    book = Builder()
    terms = {"shares": 100.0, "net_debit": 5050.0, "best_gain": math.inf, "worst_loss": 250.0}
    place = book.open(0, **terms)
    book.shares(place, 100.0, 50.1, 50.0)
    book.leg(place, 1, 100.0, (0.4, 0.3), (48.0, "2011-01-07"))
    book.night({0: 50.0}, {(place, 1): 0.3})
    book.delivered(place, 1, 45.0)
    book.close(place)
    book.night()
    row = Ledger.checked(book.log()).trades.iloc[0]
    assert (row["outcome"], row["pnl"], row["costs"]) == ("floor", pytest.approx(-250.0), pytest.approx(20.0))


def test_rolled_positions_do_not_judge_the_forecast() -> None:
    """Compares a position whose call was written again with: left out of forecast against actual."""
    book = Builder()
    place = book.open(0, shares=100.0, net_debit=4950.0, best_gain=150.0, worst_loss=4950.0, odds_of_best=0.5)
    book.shares(place, 100.0, 50.0, 50.0)
    book.leg(place, 0, -100.0, (0.5, 0.5), (51.0, "2011-01-07"))
    book.night({0: 50.0}, {(place, 0): 0.5})
    book.expired(place, 0, 50.0)
    book.leg(place, 0, -100.0, (0.5, 0.5), (51.0, "2011-01-14"), reason=at.WHY_ROLL)
    book.night({0: 50.0}, {(place, 0): 0.5})
    book.delivered(place, 0, 52.0)
    book.close(place)
    book.night()
    summary = summarise(Ledger.checked(book.log()))
    assert (summary.positions, summary.odds_positions) == (1, 0)
    assert math.isnan(summary.odds_observed)
    assert summary.odds_held is None


def test_curve_by_hand() -> None:
    """Compares the curve 100, 110, 99, 121 with falls and growth worked out by hand."""
    dates = np.array(["2011-01-03", "2011-01-04", "2011-01-05", "2012-01-03"], dtype="datetime64[D]")
    curve = curve_of(np.array([100.0, 110.0, 99.0, 121.0]), dates)
    assert curve.whole_growth == pytest.approx(0.21)
    assert curve.growth_a_year == pytest.approx(1.21 ** (365.25 / 365) - 1)
    assert curve.deepest_drawdown == pytest.approx(0.1)
    assert (curve.deepest_from, curve.deepest_to) == ("2011-01-04", "2011-01-05")
    assert (curve.longest_drawdown_days, curve.longest_from) == (364, "2011-01-04")
    nothing = curve_of(np.array([]), dates[:0])
    assert math.isnan(nothing.sharpe)


def test_yardstick_beside_the_account() -> None:
    """Compares the yardstick given by session, by every date and as a series: the same curve each time."""
    ledger = Ledger(shares_book().log())
    size = ledger.log.days.size
    values = np.linspace(100.0, 120.0, 12)
    dates = pd.DatetimeIndex(ledger.log.meta.dates)
    curves = [
        summarise(ledger, yardstick=values[:size], yardstick_name="shares").yardstick,
        summarise(ledger, yardstick=values).yardstick,
        summarise(ledger, yardstick=pd.Series(values, index=dates)).yardstick,
    ]
    assert curves[0] == curves[1] == curves[2]
    assert curves[0] is not None
    assert curves[0].last_value == values[size - 1]
    lower = summarise(ledger, rate=np.full(size, 0.05), yardstick=values).yardstick
    assert lower is not None
    assert lower.sharpe < curves[0].sharpe


def test_what_does_not_fit_is_refused() -> None:
    """Negative control: a yardstick of the wrong length, a series that lacks sessions."""
    ledger = Ledger(shares_book().log())
    with pytest.raises(ValueError, match="the yardstick has 3 values"):
        summarise(ledger, yardstick=np.ones(3))
    short = pd.Series([1.0], index=pd.DatetimeIndex(["2011-01-03"]))
    with pytest.raises(ValueError, match="no value for 8 sessions"):
        summarise(ledger, yardstick=short)


def test_the_account_starts_from_its_opening_cash() -> None:
    """Compares an account that loses on its first day with its opening cash, not with that day's close."""
    book = Builder()
    place = book.open(0, shares=100.0, net_debit=5000.0)
    book.shares(place, 100.0, 50.0, 50.0, fee=10.0)
    book.night({0: 40.0})
    book.night({0: 40.0})
    account = summarise(Ledger(book.log())).account
    assert (account.first_value, account.last_value) == (100_000.0, 98_990.0)
    assert account.deepest_drawdown == pytest.approx(0.0101)


def test_dictionary_has_units_and_meanings() -> None:
    """Compares the dictionary with its promise: value, unit, meaning of every figure; strict JSON."""
    summary = summarise(Ledger(shares_book().log()), yardstick=np.linspace(1.0, 2.0, 12))
    described = summary.as_dict()
    text = json.dumps(described, allow_nan=False)
    assert json.loads(text)["win_rate"]["value"] == 0.5
    flat = {**described, **described["account"], **described["yardstick"]}
    figures = [value for key, value in flat.items() if key not in ("account", "yardstick")]
    assert len(figures) > 40
    for figure in figures:
        assert set(figure) == {"value", "unit", "meaning"}
        assert figure["unit"]
        assert len(figure["meaning"]) > 10 or figure["unit"] == "name"
    assert described["declined"]["value"] == {"not a net credit": 5, "capital too small for one lot": 3}
    assert figures_of(summary)["win_rate"].unit == "fraction"
    assert "account" not in figures_of(summary)


def test_an_account_that_never_traded() -> None:
    """Compares every figure of no trades with: counts of nothing, the rest not known, null in JSON."""
    book = Builder()
    book.night()
    summary = summarise(Ledger(book.log()))
    assert (summary.positions, summary.outcomes, summary.declined) == (0, {}, {})
    for name in ("win_rate", "break_even_win_rate", "average_win", "expectancy", "profit_factor"):
        assert math.isnan(getattr(summary, name))
        assert summary.as_dict()[name]["value"] is None
    assert summary.as_dict()["yardstick"]["value"] is None


@settings(max_examples=25, deadline=None)
@given(some.integers(0, 10**6))
def test_figures_agree_with_the_frames(seed: int) -> None:
    """Compares figures of random logs with plain sums over the trades frame."""
    ledger = Ledger(random_log_builder(seed).log())
    summary: Summary = summarise(ledger)
    trades = ledger.trades
    assert sum(summary.outcomes.values()) == sum(summary.reasons.values()) == len(trades)
    over = trades[trades["outcome"] != "open"]
    if len(over):
        assert summary.expectancy_money == pytest.approx(over["pnl"].mean())
        assert summary.win_rate == pytest.approx((over["pnl"] > 0).mean())
    known = [summary.average_win, summary.average_loss, summary.win_rate]
    if not any(math.isnan(value) for value in known) and (over["pnl"] != 0).all():
        expected = summary.win_rate * summary.average_win - (1 - summary.win_rate) * summary.average_loss
        assert summary.expectancy == pytest.approx(expected)
