"""Structures other than a collar, every cent worked out by hand; a log in, rows out."""

from __future__ import annotations

import math

import pandas as pd
import pytest

from builders import Builder
from hedgerow.events import LegName
from hedgerow.evidence import summarise
from hedgerow.kernels import layout as at
from hedgerow.ledger import Ledger

CENT = {"abs": 1e-9}
EXPIRY = "2011-01-07"
CALL, PUT = LegName("call", "buy", "call"), LegName("put", "sell", "put")


def only_row(book: Builder) -> pd.Series:
    """The one trade of a log that adds up."""
    return Ledger.checked(book.log()).trades.iloc[0]


@pytest.mark.parametrize(("spot", "ending"), [(57.0, 0), (44.0, 1)])
def test_reversal_is_flat_whatever_the_stock_does(spot: float, ending: int) -> None:
    """Compares short shares at 50 with a long call and a short put struck at 50, at 57 and at 44.

    Call bought at 2.00, put sold at 2.30: .30 a share stays, 30 in all. A dividend of .20 is owed, 20;
    borrowing costs 1.50. At 57 the call is exercised, at 44 the put is assigned; the shares come back at 50.
    """
    book = Builder(legs=(CALL, PUT))
    terms = {"net_debit": -5030.0, "reserve": 5030.0, "best_gain": 30.0, "worst_loss": -30.0}
    place = book.open(0, shares=-100.0, **terms)
    book.shares(place, -100.0, 50.0, 50.0)
    book.leg(place, 0, 100.0, (2.0, 2.0), (50.0, EXPIRY))
    book.leg(place, 1, -100.0, (2.3, 2.3), (50.0, EXPIRY))
    book.night({0: 50.0}, {(place, 0): 2.0, (place, 1): 2.3})
    book.dividend(place, 0.2)
    book.write(at.KIND_BORROW, place, cash=-1.5)
    book.night({0: spot}, {(place, 0): 7.0, (place, 1): 0.0})
    book.expired(place, 1 - ending, spot)
    book.delivered(place, ending, spot)
    book.close(place)
    book.night()
    row = only_row(book)
    assert row["stock_pnl"] == pytest.approx((50.0 - spot) * 100, **CENT)
    assert row["option_pnl"] == pytest.approx(30.0 - (50.0 - spot) * 100, **CENT)
    assert (row["dividends"], row["interest"], row["costs"]) == (-20.0, -1.5, 0.0)
    assert row["pnl"] == pytest.approx(8.5, **CENT)
    assert (row["shares"], row["stock_in"], row["stock_out"]) == (-100.0, 50.0, 50.0)
    assert row["outcome"] == "best gain"
    assert math.isnan(row["return_on_debit"])


@pytest.mark.parametrize(
    ("spot", "pnl", "outcome"),
    [(56.0, -340.0, "floor"), (48.0, 160.0, "best gain"), (52.4, -80.0, "between")],
)
def test_call_credit_spread_without_shares(spot: float, pnl: float, outcome: str) -> None:
    """Compares a 50 call sold at 2.10 and a 55 call bought at .50, one lot, cash-settled: +160 to -340."""
    legs = (LegName("short", "sell", "call"), LegName("long", "buy", "call"))
    book = Builder(legs=legs)
    terms = {"net_debit": -160.0, "reserve": 500.0, "best_gain": 160.0, "worst_loss": 340.0}
    place = book.open(0, **terms)
    book.leg(place, 0, -100.0, (2.1, 2.1), (50.0, EXPIRY))
    book.leg(place, 1, 100.0, (0.5, 0.5), (55.0, EXPIRY))
    book.night({}, {(place, 0): 2.1, (place, 1): 0.5})
    for leg, strike in ((0, 50.0), (1, 55.0)):
        if spot > strike:
            book.settled(place, leg, spot, round(spot - strike, 2))
        else:
            book.expired(place, leg, spot)
    book.close(place)
    book.night()
    row = only_row(book)
    assert (row["pnl"], row["stock_pnl"], row["outcome"]) == (pytest.approx(pnl), 0.0, outcome)
    assert row["return_on_debit"] == pytest.approx(pnl / 340.0)
    assert math.isnan(row["stock_in"])


def test_put_assigned_into_shares_that_are_then_called_away() -> None:
    """Compares a put at 50 assigned at 48, then a 49 call written for .60 and assigned at 51.

    Put sold at 1.00: +1.00 - 2.00 = -100. Shares at 48 in effect, gone at 51: +300. Call +.60 - 2.00 = -140.
    In cash: 100 - 5,000 + 60 + 4,900 = 60.
    """
    book = Builder(legs=(PUT, LegName("call", "sell", "call")))
    place = book.open(0, net_debit=-100.0, reserve=5000.0, best_gain=100.0, worst_loss=4900.0)
    book.leg(place, 0, -100.0, (1.0, 1.0), (50.0, EXPIRY))
    book.night({}, {(place, 0): 1.0})
    book.delivered(place, 0, 48.0)
    book.leg(place, 1, -100.0, (0.6, 0.6), (49.0, "2011-01-14"), reason=at.WHY_ADDED)
    book.night({0: 48.0}, {(place, 1): 0.6})
    book.delivered(place, 1, 51.0)
    book.close(place)
    book.night()
    ledger = Ledger.checked(book.log())
    row, parts = ledger.trades.iloc[0], ledger.by_position.iloc[0]
    assert (parts["stock"], parts["put"], parts["call"]) == pytest.approx((300.0, -100.0, -140.0), **CENT)
    assert row["pnl"] == pytest.approx(60.0, **CENT)
    assert (row["stock_in"], row["stock_out"]) == (50.0, 49.0)
    assert row["return_on_debit"] == pytest.approx(60.0 / 4900.0)
    assert ledger.legs["ended"].to_list() == ["assigned", "assigned"]
    assert summarise(ledger).odds_positions == 0


def test_call_assigned_before_the_dividend() -> None:
    """Compares a covered call assigned on yesterday's close of 55, the put that is left sold at the open.

    No dividend is earned. Stock 50 to 55: +500. Call sold at 1.00, worth 5.00: -400. Put .50 to .10 at mid,
    sold at .08: -40 and 2 of costs.
    """
    book = Builder()
    place = book.open(0, shares=100.0, net_debit=4950.0, best_gain=50.0, worst_loss=150.0, odds_of_best=0.5)
    book.shares(place, 100.0, 50.0, 50.0)
    book.leg(place, 0, -100.0, (1.0, 1.0), (50.0, "2011-01-21"))
    book.leg(place, 1, 100.0, (0.5, 0.5), (48.0, "2011-01-21"))
    book.night({0: 55.0}, {(place, 0): 5.0, (place, 1): 0.1})
    book.delivered(place, 0, 55.0, reason=at.WHY_ASSIGNED_EARLY)
    book.leg(place, 1, -100.0, (0.08, 0.1), reason=at.WHY_LEFT_OVER)
    book.close(place, at.WHY_ASSIGNED_EARLY)
    book.night()
    ledger = Ledger.checked(book.log())
    row = ledger.trades.iloc[0]
    assert (row["stock_pnl"], row["option_pnl"]) == pytest.approx((500.0, -440.0), **CENT)
    assert (row["dividends"], row["costs"], row["pnl"]) == pytest.approx((0.0, 2.0, 58.0), **CENT)
    assert (row["outcome"], row["reason"]) == ("assigned", "assigned early")
    assert ledger.legs.set_index("leg")["ended"].to_dict() == {"call": "assigned early", "put": "closed"}
    summary = summarise(ledger)
    assert (summary.odds_positions, summary.odds_observed) == (1, 1.0)


def test_three_calls_against_one_put() -> None:
    """Compares a different-month collar: a call written three times, the put kept, each month by itself.

    January: call 1.00, worthless. February: rolled at 1.50 after .80: -70. March: .90, bought back at .20
    when the trend turned: +70. Put 3.00 to 1.40: -160. Stock 50 to 49: -100. In all -160.
    """
    book = Builder(sessions=60)
    place = book.open(0, shares=100.0, net_debit=5200.0, best_gain=100.0, worst_loss=500.0)
    book.shares(place, 100.0, 50.0, 50.0)
    book.leg(place, 0, -100.0, (1.0, 1.0), (51.0, "2011-01-21"))
    book.leg(place, 1, 100.0, (3.0, 3.0), (48.0, "2011-06-17"))
    months = [(20, None), (20, 1.5), (10, 0.2)]
    fresh = [(0.8, 52.0, "2011-02-18"), (0.9, 53.0, "2011-03-18")]
    for (sessions, paid), new in zip(months, [*fresh, None], strict=True):
        for _ in range(sessions):
            book.night({0: 49.5}, {(place, 0): 0.5, (place, 1): 2.0})
        if new is None:
            break
        if paid is None:
            book.expired(place, 0, 49.5)
        else:
            book.leg(place, 0, 100.0, (paid, paid), reason=at.WHY_ROLL)
        book.leg(place, 0, -100.0, (new[0], new[0]), (new[1], new[2]), reason=at.WHY_ROLL)
    book.leg(place, 0, 100.0, (0.2, 0.2), reason=at.WHY_EXIT_RULE)
    book.leg(place, 1, -100.0, (1.4, 1.4), reason=at.WHY_EXIT_RULE)
    book.shares(place, -100.0, 49.0, 49.0, reason=at.WHY_EXIT_RULE)
    book.close(place, at.WHY_EXIT_RULE)
    book.night()
    ledger = Ledger.checked(book.log())
    calls = ledger.legs[ledger.legs["leg"] == "call"]
    assert calls["pnl"].to_list() == pytest.approx([100.0, -70.0, 70.0], abs=1e-9)
    assert calls["ended"].to_list() == ["expired worthless", "rolled", "closed"]
    assert calls["life"].to_list() == [1, 2, 3]
    row = ledger.trades.iloc[0]
    assert row["pnl"] == pytest.approx(-160.0, **CENT)
    months_of = ledger.by_month.set_index("month")["change"]
    assert list(months_of.index.strftime("%Y-%m")) == ["2011-01", "2011-02", "2011-03"]
    assert months_of.sum() == pytest.approx(100_000.0 - 160.0, abs=1e-7)
    named = ledger.by_month[["stock", "call", "put"]].sum()
    assert named.to_list() == pytest.approx([-100.0, 100.0, -160.0], abs=1e-7)


def test_history_that_ends_under_a_position() -> None:
    """Compares a symbol that stops trading at 30: legs are worth their intrinsic value in cash, shares 30."""
    book = Builder()
    place = book.open(0, shares=100.0, net_debit=5000.0, best_gain=100.0, worst_loss=200.0)
    book.shares(place, 100.0, 50.0, 50.0)
    book.leg(place, 1, 100.0, (0.0, 0.0), (48.0, EXPIRY))
    book.night({0: 50.0}, {(place, 1): 0.0})
    book.write(at.KIND_GONE, place, reason=at.WHY_GONE)
    book.settled(place, 1, 30.0, 18.0)
    book.shares(place, -100.0, 30.0, 30.0, reason=at.WHY_GONE)
    book.close(place, at.WHY_GONE)
    book.night()
    row = only_row(book)
    assert (row["stock_pnl"], row["option_pnl"], row["pnl"]) == (-2000.0, 1800.0, -200.0)
    assert (row["outcome"], row["reason"]) == ("gone", "no price for 5 sessions")


def test_interest_of_a_reserve_belongs_to_its_position() -> None:
    """Compares interest on cash set aside with the position's own, and the rest with the account's."""
    book = Builder(legs=(PUT,))
    place = book.open(0, net_debit=-100.0, reserve=5000.0, best_gain=100.0, worst_loss=4900.0)
    book.leg(place, 0, -100.0, (1.0, 1.0), (50.0, EXPIRY))
    book.night({}, {(place, 0): 1.0})
    book.write(at.KIND_INTEREST, place, cash=0.41, quantity=5000.0, price=0.00008)
    book.write(at.KIND_INTEREST, -1, cash=7.6, symbol=-1)
    book.expired(place, 0, 51.0)
    book.close(place)
    book.night()
    ledger = Ledger.checked(book.log())
    row = ledger.trades.iloc[0]
    assert (row["interest"], row["pnl"]) == pytest.approx((0.41, 100.41), **CENT)
    assert summarise(ledger).interest == pytest.approx(8.01, **CENT)
    assert ledger.by_day["interest"].to_list() == pytest.approx([0.0, 8.01], **CENT)


def test_attribution_without_marks_keeps_options_together() -> None:
    """Compares the days of a log whose marks were not kept: one column for all legs, sums as before."""
    book = Builder(marked=False)
    place = book.open(0, shares=100.0, net_debit=4950.0, best_gain=150.0, worst_loss=4950.0)
    book.shares(place, 100.0, 50.0, 50.0)
    book.leg(place, 0, -100.0, (0.5, 0.5), (51.0, EXPIRY))
    book.night({0: 50.5}, {(place, 0): 0.7})
    book.night({0: 49.0}, {(place, 0): 0.1})
    days = Ledger.checked(book.log()).by_day
    assert "call" not in days.columns
    assert days["options"].to_list() == pytest.approx([-20.0, 60.0], abs=1e-7)
    assert days["stock"].to_list() == pytest.approx([50.0, -150.0], abs=1e-7)
