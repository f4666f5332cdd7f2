"""A collar worked out by hand, every cent."""

from __future__ import annotations

import pandas as pd
import pytest

from builders import Builder, collar_that_is_called
from hedgerow.kernels import layout as at
from hedgerow.ledger import Ledger

CENT = {"abs": 1e-9}


def test_called_collar_trade_row() -> None:
    """Compares the trade row with pencil and paper.

    Stock: bought at mid 50 x 200, gone at spot 53: +600. Call: +0.80 - (53 - 51) = -1.20 x 200 = -240.
    Put: -0.40 x 200 = -80. Dividend 0.15 x 200 = 30. Costs: 0.01 x 200 + 0.02 x 200 + 0.02 x 200 = 10 of
    spread, fees 1 + 1.30 + 1.30 + 5 = 8.60. Result 600 - 320 + 30 - 18.60 = 291.40, on 9,930.
    """
    row = Ledger.checked(collar_that_is_called().log()).trades.iloc[0]
    assert (row["symbol"], row["position"], row["variant"]) == ("ASH", 0, "one week")
    assert (row["opened"], row["closed"]) == (pd.Timestamp("2011-01-04"), pd.Timestamp("2011-01-07"))
    assert (row["sessions"], row["lots"], row["shares"]) == (3, 2.0, 200.0)
    assert (row["stock_in"], row["stock_out"]) == (50.01, 51.0)
    assert row["stock_pnl"] == pytest.approx(600.0, **CENT)
    assert row["option_pnl"] == pytest.approx(-320.0, **CENT)
    assert row["dividends"] == pytest.approx(30.0, **CENT)
    assert row["costs"] == pytest.approx(18.60, **CENT)
    assert row["pnl"] == pytest.approx(291.40, **CENT)
    assert row["return_on_debit"] == pytest.approx(291.40 / 9930.0)
    assert (row["reason"], row["outcome"]) == ("expiry", "best gain")


def test_called_collar_legs() -> None:
    """Compares both leg rows with pencil and paper: the call costs its intrinsic value, the put its price."""
    legs = Ledger(collar_that_is_called().log()).legs.set_index("leg")
    call, put = legs.loc["call"], legs.loc["put"]
    assert (call["side"], call["right"], call["strike"]) == ("sold", "call", 51.0)
    assert (call["quantity"], call["price_in"], call["price_out"]) == (-200.0, 0.78, 2.0)
    assert (call["ended"], call["expiry"]) == ("assigned", pd.Timestamp("2011-01-07"))
    assert (call["mid_pnl"], call["costs"]) == pytest.approx((-240.0, 4.0 + 1.30 + 5.0), **CENT)
    assert call["pnl"] == pytest.approx(-250.30, **CENT)
    assert (put["quantity"], put["price_in"], put["price_out"]) == (200.0, 0.42, 0.0)
    assert (put["ended"], put["sessions"], put["life"]) == ("expired worthless", 3, 1)
    assert (put["mid_pnl"], put["costs"]) == pytest.approx((-80.0, 5.30), **CENT)


def test_called_collar_attribution() -> None:
    """Compares attribution by position and day with the same sums, every day with the change of equity."""
    ledger = Ledger(collar_that_is_called().log())
    row = ledger.by_position.iloc[0]
    parts = (row["stock"], row["call"], row["put"], row["dividends"], row["interest"], row["costs"])
    assert parts == pytest.approx((600.0, -240.0, -80.0, 30.0, 0.0, -18.60), **CENT)
    assert row["pnl"] == pytest.approx(291.40, **CENT)
    days = ledger.by_day
    names = ["stock", "call", "put", "dividends", "interest", "costs", "deposits"]
    assert days[names].sum(axis=1).to_numpy() == pytest.approx(days["change"].to_numpy(), abs=1e-7)
    assert days["call"].to_list() == pytest.approx([0.0, -20.0, -60.0, -40.0, -120.0], abs=1e-7)
    month = ledger.by_month.iloc[0]
    assert (month["month"], month["stock"]) == (pd.Timestamp("2011-01-01"), pytest.approx(600.0))


def test_equity_days() -> None:
    """Compares the equity of the first held close with cash 90,066.40 + stock 10,100 - call 180 + put 60."""
    equity = Ledger(collar_that_is_called().log()).equity
    day = equity.iloc[1]
    assert day["cash"] == pytest.approx(100_000 - 9930 - 3.60, **CENT)
    assert (day["stock"], day["options"], day["positions"]) == pytest.approx((10_100.0, -120.0, 1), abs=1e-7)
    assert equity["equity"].iloc[-1] == pytest.approx(100_291.40, **CENT)
    assert Ledger(collar_that_is_called().log()).marks["gain"].iloc[0] == pytest.approx(46.40, abs=1e-7)


def put_exercised() -> Builder:
    """One lot at 50 with a 51 call and a 48 put, which is exercised at 44."""
    book = Builder(marked=False)
    place = book.open(1, shares=100.0, net_debit=5000.0, best_gain=100.0, worst_loss=200.0)
    book.shares(place, 100.0, 50.0, 50.0)
    book.leg(place, 0, -100.0, (0.5, 0.5), (51.0, "2011-01-07"))
    book.leg(place, 1, 100.0, (0.5, 0.5), (48.0, "2011-01-07"))
    book.night({1: 50.0}, {(place, 0): 0.5, (place, 1): 0.5})
    book.expired(place, 0, 44.0)
    book.delivered(place, 1, 44.0)
    book.close(place)
    book.night()
    return book


def test_exercised_put_is_the_floor() -> None:
    """Compares a fall to 44: stock -600, put +4 - 0.50 a share, call +0.50; in all the worst loss of 200."""
    ledger = Ledger.checked(put_exercised().log())
    row = ledger.trades.iloc[0]
    assert (row["stock_pnl"], row["option_pnl"], row["pnl"]) == pytest.approx((-600.0, 400.0, -200.0), **CENT)
    assert row["outcome"] == "floor"
    legs = ledger.legs.set_index("leg")
    assert legs.loc["put", "mid_pnl"] == pytest.approx(350.0, **CENT)
    assert (legs.loc["put", "ended"], legs.loc["put", "price_out"]) == ("exercised", 4.0)
    days = ledger.by_day
    assert days["options"].to_list() == pytest.approx([0.0, 400.0], abs=1e-7)
    assert days["stock"].to_list() == pytest.approx([0.0, -600.0], abs=1e-7)


def test_split_keeps_units_of_the_first_day() -> None:
    """Compares shares through a 2-for-1 split: 100 bought at 50, 200 sold at 27: 54 in old shares, +400."""
    book = Builder()
    place = book.open(0, shares=100.0, net_debit=4950.0, best_gain=150.0, worst_loss=4950.0)
    book.shares(place, 100.0, 50.0, 50.0)
    book.leg(place, 0, -100.0, (0.5, 0.5), (51.0, "2011-01-07"))
    book.night({0: 50.0}, {(place, 0): 0.5})
    book.split(place, 2.0)
    book.dividend(place, 0.1)
    book.night({0: 27.0}, {(place, 0): 1.6})
    book.leg(place, 0, 200.0, (1.6, 1.6), reason=at.WHY_EXIT_RULE)
    book.shares(place, -200.0, 27.0, 27.0, reason=at.WHY_EXIT_RULE)
    book.close(place, at.WHY_EXIT_RULE)
    book.night()
    ledger = Ledger.checked(book.log())
    row, leg = ledger.trades.iloc[0], ledger.legs.iloc[0]
    assert (row["stock_in"], row["stock_out"], row["stock_pnl"]) == (50.0, 54.0, 400.0)
    assert (row["dividends"], row["option_pnl"], row["pnl"]) == (20.0, -270.0, 150.0)
    assert (row["reason"], row["outcome"]) == ("trend turned", "cut")
    assert (leg["strike"], leg["price_in"], leg["price_out"], leg["quantity"]) == (51.0, 0.5, 3.2, -100.0)


def test_rolled_call_has_two_lives() -> None:
    """Compares a call bought back and written again: two rows, -20 and +30, and the second still open."""
    book = Builder()
    place = book.open(0, shares=100.0, net_debit=4950.0, best_gain=150.0, worst_loss=4950.0)
    book.shares(place, 100.0, 50.0, 50.0)
    book.leg(place, 0, -100.0, (0.5, 0.5), (51.0, "2011-01-07"))
    book.night({0: 50.0}, {(place, 0): 0.5})
    book.leg(place, 0, 100.0, (0.7, 0.7), reason=at.WHY_ROLL)
    book.leg(place, 0, -100.0, (1.1, 1.1), (52.0, "2011-01-14"), reason=at.WHY_ROLL)
    book.night({0: 50.4}, {(place, 0): 0.8})
    ledger = Ledger.checked(book.log())
    first, second = ledger.legs.to_dict("records")
    assert (first["life"], first["ended"], first["pnl"]) == (1, "rolled", pytest.approx(-20.0))
    assert (second["life"], second["ended"], second["pnl"]) == (2, "open", pytest.approx(30.0))
    assert (second["strike"], second["price_out"], second["expiry"]) == (
        52.0,
        0.8,
        pd.Timestamp("2011-01-14"),
    )
    assert pd.isna(second["closed"])
    row = ledger.trades.iloc[0]
    assert (row["reason"], row["outcome"], row["pnl"]) == ("open at end", "open", pytest.approx(50.0))
    assert pd.isna(row["closed"])
    assert pd.isna(row["stock_out"])


def test_open_position_without_marks_is_not_guessed() -> None:
    """Compares the result of an open position of a log without marks with: not known."""
    book = Builder(marked=False)
    place = book.open(0, shares=100.0, net_debit=5000.0, best_gain=100.0, worst_loss=200.0)
    book.shares(place, 100.0, 50.0, 50.0)
    book.night({0: 51.0})
    row = Ledger.checked(book.log()).trades.iloc[0]
    assert pd.isna(row["pnl"])
    assert row["costs"] == 0.0


def test_cash_settlement_and_reserve() -> None:
    """Compares a put written on an index for 2.00, settled at 3.50 against 5,000 set aside: -150 of 4,800."""
    book = Builder(legs=(Builder().legs[1],))
    place = book.open(0, net_debit=-200.0, reserve=5000.0, best_gain=200.0, worst_loss=4800.0)
    book.leg(place, 0, -100.0, (2.0, 2.0), (50.0, "2011-01-07"))
    book.night(mids={(place, 0): 2.0})
    book.settled(place, 0, 46.5, 3.5)
    book.close(place)
    book.night()
    ledger = Ledger.checked(book.log())
    row = ledger.trades.iloc[0]
    assert (row["stock_pnl"], row["option_pnl"], row["pnl"]) == (0.0, -150.0, -150.0)
    assert row["return_on_debit"] == pytest.approx(-150.0 / 4800.0)
    assert ledger.legs["ended"].to_list() == ["settled in cash"]
    assert row["outcome"] == "between"


@pytest.mark.parametrize(
    ("reason", "outcome", "word"),
    [
        (at.WHY_STOP, "stop", "stop"),
        (at.WHY_STOP_GAP, "stop", "stop through a gap"),
        (at.WHY_GONE, "gone", "no price for 5 sessions"),
        (at.WHY_ASSIGNED_EARLY, "assigned", "assigned early"),
        (at.WHY_EXIT_RULE + 1, "cut", "cut"),
        (at.WHY_EXPIRY, "between", "expiry"),
    ],
)
def test_outcome_words(reason: int, outcome: str, word: str) -> None:
    """Compares the outcome of shares sold for 40 less with what each reason means."""
    book = Builder()
    place = book.open(0, shares=100.0, net_debit=5000.0, best_gain=100.0, worst_loss=200.0)
    book.shares(place, 100.0, 50.0, 50.0)
    book.night({0: 50.0})
    book.shares(place, -100.0, 49.6, 49.6, reason=reason)
    book.close(place, reason)
    book.night()
    row = Ledger.checked(book.log()).trades.iloc[0]
    assert (row["outcome"], row["reason"], row["pnl"]) == (outcome, word, pytest.approx(-40.0))
