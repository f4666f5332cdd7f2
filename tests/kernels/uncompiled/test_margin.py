"""Margin by the regulation's table of strategies, one row after another by hand.

FINRA rule 4210 (f)(2) and Regulation T, from memory. Equity counts what is owed on options as a debt, so the
requirement of a written option is what stands beyond its premium; money of 100 shares or one contract.
"""

from __future__ import annotations

from typing import Any

import pytest

from hedgerow.kernels.margin import requirement
from step_records import call, position, put

Legs = tuple[dict[str, Any], ...]

# name, shares, stock price, legs, initial, maintenance
TABLE: tuple[tuple[str, float, float, Legs, float, float], ...] = (
    ("long shares: 50 %, then 25 %", 100, 60, (), 3000, 1500),
    ("short shares: 50 % beyond the proceeds, then 30 %", -100, 60, (), 3000, 1800),
    ("bought call: all of it", 0, 60, (call(60, 100, mid=2.5),), 250, 250),
    ("bought put: all of it", 0, 60, (put(60, 100, mid=3.0),), 300, 300),
    # 20 % of 60 less 5 out of the money is 7; 10 % of the price 6
    ("written call out of the money", 0, 60, (call(65, -100, mid=0.8),), 700, 700),
    # 20 % of 60 less 10 is 2, under 10 % of the price, 6
    ("written call far out of the money", 0, 60, (call(70, -100, mid=0.1),), 600, 600),
    ("written call in the money", 0, 60, (call(55, -100, mid=6.5),), 1200, 1200),
    # 20 % of 60 less 5 is 7; 10 % of the strike 5.50
    ("written put out of the money", 0, 60, (put(55, -100, mid=0.7),), 700, 700),
    # 20 % of 60 less 15 is nothing; 10 % of the strike 4.50
    ("written put far out of the money", 0, 60, (put(45, -100, mid=0.1),), 450, 450),
    ("written put in the money", 0, 60, (put(65, -100, mid=6.0),), 1200, 1200),
    ("covered call: none on the call", 100, 60, (call(65, -100, mid=0.8),), 3000, 1500),
    ("covered call in the money: shares at the strike", 100, 60, (call(50, -100, mid=10.6),), 3000, 1250),
    ("covered put: none on the put", -100, 60, (put(55, -100, mid=0.7),), 3000, 1800),
    # 10 % of 55 and 5 out of the money are 10.50; 25 % of 60 is 15; the put is paid in full
    ("protective put", 100, 60, (put(55, 100, mid=0.7),), 3070, 1120),
    # 10 % of 45 and 15 are 19.50; 15 is less
    ("protective put far below", 100, 60, (put(45, 100, mid=0.1),), 3010, 1510),
    # 10 % of 65, none out of the money
    ("protective put in the money", 100, 60, (put(65, 100, mid=6.0),), 3600, 1250),
    # 10.50 against 25 % of 65, 16.25
    ("collar", 100, 60, (call(65, -100, mid=0.8), put(55, 100, mid=0.7)), 3070, 1120),
    # 10 % of 45 and 15 are 19.50 against 16.25
    ("wide collar", 100, 60, (call(65, -100, mid=0.8), put(45, 100, mid=0.1)), 3010, 1635),
    ("conversion: 10 % of the strike", 100, 60, (call(55, -100, mid=6.0), put(55, 100, mid=1.0)), 3100, 650),
    # 10 % of 65 and 5 out of the money are 11.50 against 30 %, 18
    ("short shares under a call", -100, 60, (call(65, 100, mid=0.8),), 3080, 1230),
    # 10 % of 80 and 20 are 28 against 18
    ("short shares under a far call", -100, 60, (call(80, 100, mid=0.1),), 3010, 1810),
    ("reversal: 10 % of the strike", -100, 60, (call(55, 100, mid=6.0), put(55, -100, mid=1.0)), 3600, 1150),
    # width 5, of which .70 was received and .20 paid: 4.50
    ("put credit spread", 0, 60, (put(55, -100, mid=0.7), put(50, 100, mid=0.2)), 450, 450),
    # width 20 is more than 7 beyond the premium, so the written put asks as if alone
    ("put credit spread that is wide", 0, 60, (put(55, -100, mid=0.7), put(35, 100, mid=0.1)), 710, 710),
    ("call credit spread", 0, 60, (call(62, -100, mid=1.8), call(66, 100, mid=0.7)), 290, 290),
    ("call debit spread: what was paid", 0, 60, (call(55, 100, mid=6.1), call(65, -100, mid=0.8)), 530, 530),
    ("put debit spread: what was paid", 0, 60, (put(65, 100, mid=6.0), put(55, -100, mid=0.7)), 530, 530),
    # the bought leg is gone before the written one: 7 alone, and .10 paid
    ("bought leg that ends sooner", 0, 60, (put(55, -100, 60, mid=0.7), put(50, 100, 30, mid=0.1)), 710, 710),
    ("bought leg that ends later", 0, 60, (put(55, -100, 30, mid=0.7), put(50, 100, 60, mid=0.9)), 520, 520),
    # one of two is a spread worth 5 less .70, the other stands alone with 7; .20 was paid
    ("two written against one", 0, 60, (put(55, -200, mid=0.7), put(50, 100, mid=0.2)), 1150, 1150),
    # half under a put: 10 % of 55 and 5, the other half 25 % of 60; 50 of the put at .70 are paid
    ("protective put for half", 100, 60, (put(55, 50, mid=0.7),), 3035, 1310),
    # half a collar, half a covered call, 25 % of 60
    ("collar with half a put", 100, 60, (call(65, -100, mid=0.8), put(55, 50, mid=0.7)), 3035, 1310),
    # half at the strike of the call, 25 % of 50, half at 25 % of 60
    ("covered call on half", 100, 60, (call(50, -50, mid=10.6),), 3000, 1375),
    # half of it 10 % of 65 and 5, the other half 30 % of 60
    ("short shares half under a call", -100, 60, (call(65, 50, mid=0.8),), 3040, 1515),
    # half of it locked, 10 % of 55, half with the call alone, 5.50 and nothing out of the money
    ("half a reversal", -100, 60, (call(55, 100, mid=6.0), put(55, -50, mid=1.0)), 3600, 1150),
    # one call is covered, the other stands alone with 7
    ("two calls on one lot of shares", 100, 60, (call(65, -200, mid=0.8),), 3700, 2200),
    # the put at 55 stands behind the one at 45: .70 less .10 were paid; shares 25 % of 60
    (
        "put-spread collar",
        100,
        60,
        (put(55, 100, mid=0.7), put(45, -100, mid=0.1), call(65, -100, mid=0.8)),
        3060,
        1560,
    ),
)


@pytest.mark.parametrize("row", TABLE, ids=lambda row: row[0])
def test_a_row_of_the_table(row: tuple[str, float, float, Legs, float, float]) -> None:
    """Each figure worked out by hand beside the row."""
    _, shares, spot, legs, initial, maintenance = row
    found = requirement(position(*legs, shares=float(shares)), len(legs), float(shares), float(spot))
    assert found == pytest.approx((initial, maintenance))


def test_legs_that_are_gone_ask_nothing() -> None:
    """A leg without a quantity neither asks nor protects: 25 % of 60."""
    held = position(call(65, 0.0, mid=0.8), put(55, 0.0, mid=0.7), shares=100.0)
    assert requirement(held, 2, 100.0, 60.0) == (3000.0, 1500.0)
    assert requirement(position(), 0, 0.0, 60.0) == (0.0, 0.0)


@pytest.mark.parametrize("lots", [2.0, 7.0])
def test_twice_as_much_asks_twice_as_much(lots: float) -> None:
    """Each row again with so many lots."""
    for _, shares, spot, legs, initial, maintenance in TABLE:
        more = tuple({**leg, "quantity": leg["quantity"] * lots} for leg in legs)
        found = requirement(position(*more), len(more), shares * lots, float(spot))
        assert found == pytest.approx((initial * lots, maintenance * lots))


def test_a_conversion_needs_one_expiry() -> None:
    """With the call a month sooner it is a collar: 10 % of 55, 5 out of the money, against 25 % of 55."""
    held = position(call(55, -100, 30, mid=6.0), put(55, 100, 60, mid=1.0))
    assert requirement(held, 2, 100.0, 60.0)[1] == pytest.approx(1050 + 100)
    short = position(call(55, 100, 60, mid=6.0), put(55, -100, 30, mid=1.0))
    assert requirement(short, 2, -100.0, 60.0)[1] == pytest.approx(min(550, 1800) + 600)
