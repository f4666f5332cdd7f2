"""Money and quantities: cents, fills, fees, deliveries, beside decimals and arithmetic by hand."""

from __future__ import annotations

from decimal import ROUND_HALF_UP, Decimal

import pytest
from hypothesis import given
from hypothesis import strategies as st

from hedgerow.kernels import layout as at
from hedgerow.kernels.state import FLAT, LIVE, NONE, OPEN
from hedgerow.kernels.trades import (
    cents,
    close_position,
    deliver,
    settle_leg,
    share_price,
    trade_leg,
    trade_shares,
)
from step_records import DEAR, SPOT, call, clock, costs, desk, position, put, written


@given(st.integers(-(10**12), 10**12))
def test_whole_cents_stay(amount: int) -> None:
    """Every whole number of cents, up to ten thousand million, is its own nearest cent."""
    assert cents(amount / 100) == amount / 100


@given(st.decimals(-1_000_000, 1_000_000, places=4))
def test_cents_are_those_of_decimals(amount: Decimal) -> None:
    """Python's decimals, halves away from zero; a binary half may lie a hair off, so those are left out."""
    exact = amount.quantize(Decimal("0.01"), ROUND_HALF_UP)
    if abs(amount * 100) % 1 != Decimal("0.5"):
        assert cents(float(amount)) == float(exact)


@pytest.mark.parametrize(
    ("money", "expected"), [(0.125, 0.13), (-0.125, -0.13), (2.375, 2.38), (-0.004, 0.0)]
)
def test_halves_go_away_from_zero(money: float, expected: float) -> None:
    """Halves that are exact in binary."""
    assert cents(money) == expected


def test_shares_are_bought_above_and_sold_below() -> None:
    """A tenth of a percent of slippage around 50."""
    assert share_price(100.0, 50.0, costs(DEAR)) == pytest.approx(50.05)
    assert share_price(-100.0, 50.0, costs(DEAR)) == pytest.approx(49.95)


def test_buying_and_selling_shares() -> None:
    """200 at 50 with slippage 0.1 %, a cent a share and 1.00 a trade: -10,013.00, then +9,987.00."""
    books, held = desk(charged=DEAR), position(symbol=3, position=7)
    trade_shares(books, held, 4, at.WHY_ENTRY, 200.0, 50.0)
    (row,) = written(books)
    assert (row.session, row.symbol, row.position) == (4, 3, 7)
    assert (row.kind, row.leg, row.reason) == (at.KIND_SHARES, at.SHARES_ROW, at.WHY_ENTRY)
    assert (row.quantity, row.mid, row.spot) == (200.0, 50.0, 50.0)
    assert (row.price, row.fee, row.cash) == (pytest.approx(50.05), 3.0, -10_013.0)
    assert (held.shares, held.flows, held.outlay) == (200.0, -10_013.0, pytest.approx(10_010.0))
    trade_shares(books, held, 5, at.WHY_EXPIRY, -200.0, 50.0)
    assert written(books)[1].cash == 9987.0
    assert (held.shares, held.flows) == (0.0, -26.0)
    assert books.totals.cash == 99_974.0


def test_writing_and_buying_back_a_leg() -> None:
    """200 of a 1.50 mid: half-spread 3 % and half of it for one deviation, ticks of a cent."""
    books, held = desk(charged=DEAR), position(call(100, 0.0, mid=1.5, moneyness=1.0, volatility=0.3))
    held.legs[0].status = NONE
    trade_leg(books, held, 0, 1, at.WHY_ENTRY, -200.0, clock(), SPOT)
    (row,) = written(books)
    assert (row.kind, row.leg, row.strike, row.volatility) == (at.KIND_LEG, 0, 100.0, 0.3)
    assert (row.price, row.mid, row.fee) == (1.43, 1.5, pytest.approx(1.3))  # 1.4325 is 1.43
    assert row.cash == pytest.approx(286 - 1.3)
    assert (held.legs[0].quantity, held.legs[0].status) == (-200.0, LIVE)
    trade_leg(books, held, 0, 2, at.WHY_ROLL, 200.0, clock(), SPOT)
    assert written(books)[1].price == 1.57  # 1.5675 is 1.57
    assert (held.legs[0].quantity, held.legs[0].status) == (0.0, NONE)
    assert held.flows == pytest.approx(286 - 314 - 2.6)


def test_a_leg_without_a_bid_lapses_free_of_charge() -> None:
    """Nobody pays for a mid of a tenth of a cent: no price, no commission."""
    books, held = desk(charged=DEAR), position(put(60, 100.0, mid=0.001))
    trade_leg(books, held, 0, 1, at.WHY_EXPIRY, -100.0, clock(), SPOT)
    (row,) = written(books)
    assert (row.price, row.fee, row.cash) == (0.0, 0.0, 0.0)


@pytest.mark.parametrize(
    ("leg", "kind", "moved"),
    [
        (call(100, -100.0), at.KIND_ASSIGNED, -100.0),
        (call(100, 100.0), at.KIND_EXERCISED, 100.0),
        (put(110, -100.0), at.KIND_ASSIGNED, 100.0),
        (put(110, 100.0), at.KIND_EXERCISED, -100.0),
    ],
)
def test_delivery_at_the_strike(leg: dict[str, float], kind: int, moved: float) -> None:
    """Stock at 105: shares move at the strike itself, 5.00 for the assignment."""
    books, held = desk(charged=DEAR), position(leg, shares=100.0)
    settle_leg(books, held, 0, 9, at.WHY_EXPIRY, 105.0, 0.01, True)
    first, second = written(books)
    assert (first.kind, first.quantity, first.price, first.cash) == (kind, -leg["quantity"], 0.0, -5.0)
    assert (second.kind, second.leg, second.quantity) == (at.KIND_SHARES, at.SHARES_ROW, moved)
    assert (second.price, second.mid, second.fee) == (leg["strike"], leg["strike"], 0.0)
    assert second.cash == -moved * leg["strike"]
    assert (held.shares, held.legs[0].quantity, held.legs[0].status) == (100.0 + moved, 0.0, NONE)


def test_settlement_in_cash() -> None:
    """An index at 105: a written 100 call pays 500, a bought one brings 500, less 5.00."""
    for quantity, cash in ((-100.0, -505.0), (100.0, 495.0)):
        books, held = desk(charged=DEAR), position(call(100, quantity))
        settle_leg(books, held, 0, 9, at.WHY_EXPIRY, 105.0, 0.01, False)
        (row,) = written(books)
        assert (row.price, row.mid, row.cash) == (5.0, 5.0, cash)
        assert held.flows == cash


@pytest.mark.parametrize(
    ("spot", "least", "taken"), [(100.01, 0.01, True), (100.0, 0.01, False), (100.2, 0.25, False)]
)
def test_exercise_by_exception(spot: float, least: float, taken: bool) -> None:
    """In the money by the threshold or more; at the money nothing happens, and an expiry costs nothing."""
    books, held = desk(charged=DEAR), position(call(100, -100.0), shares=100.0)
    settle_leg(books, held, 0, 9, at.WHY_EXPIRY, spot, least, True)
    assert written(books)[0].kind == (at.KIND_ASSIGNED if taken else at.KIND_EXPIRED)
    assert held.shares == (0.0 if taken else 100.0)
    assert books.totals.cash == (100_000.0 if not taken else 100_000.0 + 10_000.0 - 5.0)


def test_delivery_at_a_price_costs_nothing() -> None:
    """Neither slippage nor commission."""
    books, held = desk(charged=DEAR), position(shares=100.0)
    deliver(books, held, 1, at.WHY_GONE, -100.0, 31.25)
    (row,) = written(books)
    assert (row.price, row.mid, row.fee, row.cash) == (31.25, 31.25, 0.0, 3125.0)


@pytest.mark.parametrize(("flows", "lost"), [(-12.34, 1), (0.0, 0), (12.34, 0)])
def test_a_position_that_is_over(flows: float, lost: int) -> None:
    """Its result is its flows, its reserve is free again, its slot too, and it remembers a loss."""
    books = desk()
    books.totals.reserved, books.totals.open = 700.0, 2
    held = position(flows=flows, reserve=300.0, status=OPEN, last_close=55.0, orders=1, closing=4)
    close_position(books, held, 8, at.WHY_STOP)
    (row,) = written(books)
    assert (row.kind, row.price, row.cash, row.reason) == (at.KIND_CLOSED, flows, 0.0, at.WHY_STOP)
    assert (books.totals.reserved, books.totals.open) == (400.0, 1)
    assert (held.status, held.left, held.lost) == (FLAT, 8, lost)
    assert (held.closing, held.orders, held.reserve) == (0, 0, 0.0)
