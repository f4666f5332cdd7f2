"""Conditions in postfix order, beside Python's own evaluation of the same trees."""

from __future__ import annotations

import math
from typing import Any

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from hedgerow.kernels import layout as at
from hedgerow.kernels.state import NONE
from hedgerow.kernels.triggers import days_left, holds
from step_records import TODAY, call, ops, position, put

Tree = Any  # a bit, or ("not", tree), ("and" | "or", tree, tree)
BITS = st.integers(0, 61)
TREES: st.SearchStrategy[Tree] = st.recursive(
    BITS,
    lambda inner: st.one_of(
        st.tuples(st.just("not"), inner), st.tuples(st.sampled_from(["and", "or"]), inner, inner)
    ),
    max_leaves=25,
)


def postfix(tree: Tree) -> list[tuple[float, int, int]]:
    """The tree's operations, operands first."""
    if isinstance(tree, int):
        return [(0.0, at.OP_SIGNAL, tree)]
    inner = [item for part in tree[1:] for item in postfix(part)]
    return [*inner, (0.0, {"not": at.OP_NOT, "and": at.OP_AND, "or": at.OP_OR}[tree[0]], -1)]


def python_of(tree: Tree) -> str:
    """The tree as a Python expression over `bits`."""
    if isinstance(tree, int):
        return f"bits[{tree}]"
    parts = [python_of(part) for part in tree[1:]]
    return f"(not {parts[0]})" if tree[0] == "not" else f"({f' {tree[0]} '.join(parts)})"


def asked(
    items: list[tuple[float, int, int]], held: Any, word: int = 0, session: int = 0, day: int = TODAY
) -> bool:
    """Whether a condition holds for a position with two legs."""
    return bool(holds(ops(*items), held, held.legs, 2, (session, day), np.int64(word)))


@settings(max_examples=60)
@given(TREES, st.integers(0, 2**62 - 1))
def test_random_trees_of_signals(tree: Tree, word: int) -> None:
    """Python's own `and`, `or` and `not` over the same bits."""
    bits = [bool(word >> bit & 1) for bit in range(62)]
    expected = eval(python_of(tree), {"bits": bits})  # the expression was written above
    assert asked(postfix(tree), position(), word) is expected


@pytest.mark.parametrize(
    ("code", "fields", "share"),
    [
        (at.OP_GAIN_OF_DEBIT, {"gain": 250.0, "stake": 10_000.0}, 0.025),
        (at.OP_LOSS_OF_DEBIT, {"gain": -250.0, "stake": 10_000.0}, 0.025),
        (at.OP_GAIN_OF_BEST, {"gain": 110.0, "best_gain": 440.0}, 0.25),
        (at.OP_LOSS_OF_WORST, {"gain": -230.0, "worst_loss": 460.0}, 0.5),
        (at.OP_STOCK_UP, {"last_close": 106.0, "stock_price": 100.0}, 0.06),
        (at.OP_STOCK_DOWN, {"last_close": 91.0, "stock_price": 100.0}, 0.09),
    ],
)
def test_shares_reached_and_not_reached(code: int, fields: dict[str, float], share: float) -> None:
    """Figures by hand: a bound met exactly holds, a hair above does not."""
    held = position(**fields)
    assert asked([(share, code, -1)], held)
    assert asked([(share - 1e-6, code, -1)], held)
    assert not asked([(share + 1e-6, code, -1)], held)


def test_a_share_of_what_has_no_bound_is_never_reached() -> None:
    """Half of an unbounded best, or of a loss that cannot happen."""
    assert not asked([(0.0, at.OP_GAIN_OF_BEST, -1)], position(gain=1e9, best_gain=math.inf))
    assert not asked([(0.0, at.OP_LOSS_OF_WORST, -1)], position(gain=-5.0, worst_loss=-3.0))
    assert not asked([(0.0, at.OP_GAIN_OF_DEBIT, -1)], position(gain=5.0, stake=0.0))


def test_shares_that_are_held() -> None:
    """Only shares of one's own count: none before an assignment, none sold short."""
    for shares, holds_some in ((0.0, False), (-100.0, False), (100.0, True)):
        assert asked([(1.0, at.OP_HOLDS_SHARES, -1)], position(shares=shares)) is holds_some
    both = [(1.0, at.OP_HOLDS_SHARES, -1), (0.05, at.OP_STOCK_DOWN, -1), (0.0, at.OP_AND, -1)]
    assert asked(both, position(shares=100.0, last_close=94.0, stock_price=100.0))
    assert not asked(both, position(shares=0.0, last_close=94.0, stock_price=100.0))


def test_sessions_held() -> None:
    """Session 17 less session 12 is five."""
    held = position(entered=12)
    assert asked([(5.0, at.OP_HELD, -1)], held, session=17)
    assert not asked([(6.0, at.OP_HELD, -1)], held, session=17)


def test_days_left_of_the_nearest_or_of_one_leg() -> None:
    """Live legs only: the call has 3 days, the put 30; nothing is left of a leg that is gone."""
    held = position(call(100, -100, 3), put(95, 100, 30))
    assert days_left(held.legs, 2, -1, TODAY) == 3
    assert days_left(held.legs, 2, 1, TODAY) == 30
    assert asked([(3.0, at.OP_DAYS_LEFT, -1)], held)
    assert not asked([(2.0, at.OP_DAYS_LEFT, -1)], held)
    assert not asked([(3.0, at.OP_DAYS_LEFT, 1)], held)
    held.legs[0].status = NONE
    assert days_left(held.legs, 2, -1, TODAY) == 30
    assert not asked([(999.0, at.OP_DAYS_LEFT, 0)], held)


def test_what_a_leg_has_lost_of_its_price() -> None:
    """From 2.00 to 0.40 is 80 %; a leg that is not held, or was worth nothing, has lost nothing."""
    held = position(call(100, -100, entry_price=2.0, mid=0.4), put(95, 100, entry_price=0.0, mid=0.0))
    assert asked([(0.8, at.OP_LEG_LOST, 0)], held)
    assert not asked([(0.81, at.OP_LEG_LOST, 0)], held)
    assert not asked([(0.0, at.OP_LEG_LOST, 1)], held)
    held.legs[0].status = NONE
    assert not asked([(0.0, at.OP_LEG_LOST, 0)], held)


@settings(max_examples=30)
@given(TREES, st.integers(0, 2**62 - 1), st.booleans())
def test_words_about_the_position_among_signals(tree: Tree, word: int, stays: bool) -> None:
    """(tree) and held >= 5: Python's own evaluation beside it."""
    bits = [bool(word >> bit & 1) for bit in range(62)]
    expected = bool(eval(python_of(tree), {"bits": bits})) and stays
    items = [*postfix(tree), (5.0, at.OP_HELD, -1), (0.0, at.OP_AND, -1)]
    assert asked(items, position(), word, session=5 if stays else 4) is expected
