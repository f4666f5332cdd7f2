"""Cents, day counts and figures as people write them."""

from __future__ import annotations

import math
from decimal import ROUND_HALF_UP, Decimal

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as some

from hedgerow import units
from hedgerow.kernels import layout


@given(some.integers(-(10**11), 10**11))
def test_halves_go_away_from_zero(thousandths: int) -> None:
    """Compares rounding of amounts with three decimals with the standard library's exact decimals."""
    exact = (Decimal(thousandths) / 1000).quantize(Decimal("0.01"), ROUND_HALF_UP)
    assert units.round_cents(thousandths / 1000) == float(exact)
    assert int(units.to_cents(thousandths / 1000)) == int(exact * 100)


def test_cents_keep_the_shape() -> None:
    """Compares an array of amounts with their whole cents."""
    assert units.to_cents(np.array([[1.005, -1.005], [0.0, 2.0]])).tolist() == [[101, -101], [0, 200]]


def test_constants_agree_with_compiled_code() -> None:
    """Compares the year counts of this layer with those that compiled code uses."""
    assert units.DAYS_A_YEAR == layout.DAYS_A_YEAR
    assert units.SESSIONS_A_YEAR == layout.SESSIONS_A_YEAR
    assert units.years_between(734000, 734073) == pytest.approx(0.2)


@pytest.mark.parametrize(
    ("text", "expected"),
    [
        (units.money_text(1234.5), "1,234.50"),
        (units.money_text(-0.001), "0.00"),
        (units.money_text(1e6, "USD", 0), "1,000,000 USD"),
        (units.money_text(math.nan, "USD"), "-"),
        (units.percent_text(0.0213), "2.1%"),
        (units.percent_text(0.0213, 2, signed=True), "+2.13%"),
        (units.percent_text(math.nan), "-"),
        (units.percent_text(math.inf), "inf"),
        (units.number_text(-math.inf), "-inf"),
        (units.number_text(0.0, 1, signed=True), "0.0"),
        (units.days_text(1), "1 day"),
        (units.days_text(1204), "1,204 days"),
        (units.days_text(math.nan), "-"),
        (units.fraction_text(12, 48), "12 of 48 (25.0%)"),
        (units.fraction_text(0, 0), "0 of 0"),
    ],
)
def test_figures_as_text(text: str, expected: str) -> None:
    """Compares figures with how a person writes them."""
    assert text == expected
