"""Conditions in postfix order, asked of one position at one close."""

from __future__ import annotations

import math
from typing import Any

from hedgerow.kernels.jit import step
from hedgerow.kernels.layout import (
    OP_AND,
    OP_DAYS_LEFT,
    OP_GAIN_OF_BEST,
    OP_GAIN_OF_DEBIT,
    OP_HELD,
    OP_HOLDS_SHARES,
    OP_LEG_LOST,
    OP_LOSS_OF_DEBIT,
    OP_LOSS_OF_WORST,
    OP_NOT,
    OP_OR,
    OP_SIGNAL,
    OP_STOCK_DOWN,
    OP_STOCK_UP,
    Records,
)
from hedgerow.kernels.state import LIVE

__all__ = ["days_left", "holds"]

_NEVER = 1_000_000_000
_DUST = 1e-12


@step
def days_left(legs: Any, count: int, which: int, ordinal: int) -> int:
    """Calendar days to the nearest expiry of a live leg, or of leg `which` when that is >= 0."""
    least = _NEVER
    for k in range(count):
        if legs[k].status == LIVE and (which < 0 or which == k):
            least = min(least, legs[k].expiry - ordinal)
    return least


@step
def _share(part: float, whole: float) -> float:
    """`part` over `whole`; never reached (-inf) where the whole is unbounded or not positive."""
    return part / whole if 0.0 < whole < math.inf else -math.inf


@step
def _leg_lost(leg: Any) -> float:
    """Share of its entry price a live leg has lost; -inf when it is not held."""
    if leg.status != LIVE or leg.entry_price <= 0.0:
        return -math.inf
    return 1.0 - leg.mid / leg.entry_price


@step
def _figure(op: Any, position: Any, legs: Any, count: int, moment: tuple[int, int]) -> float:
    """The number an operation compares with its value; every comparison is `figure >= value`."""
    session, _ = moment
    code = op.code
    if code == OP_GAIN_OF_DEBIT:
        return _share(position.gain, position.stake)
    if code == OP_LOSS_OF_DEBIT:
        return _share(-position.gain, position.stake)
    if code == OP_GAIN_OF_BEST:
        return _share(position.gain, position.best_gain)
    if code == OP_LOSS_OF_WORST:
        return _share(-position.gain, position.worst_loss)
    if code == OP_HELD:
        return float(session - position.entered)
    if code == OP_STOCK_UP:
        return position.last_close / position.stock_price - 1.0
    if code == OP_STOCK_DOWN:
        return 1.0 - position.last_close / position.stock_price
    if code == OP_LEG_LOST:
        return _leg_lost(legs[op.arg])
    return -math.inf


@step
def _atom(op: Any, position: Any, legs: Any, count: int, moment: tuple[int, int], word: int) -> int:
    """1 when one plain operation holds, otherwise 0."""
    if op.code == OP_SIGNAL:
        return (word >> op.arg) & 1
    if op.code == OP_DAYS_LEFT:
        return 1 if days_left(legs, count, op.arg, moment[1]) <= op.value else 0
    if op.code == OP_HOLDS_SHARES:
        return 1 if position.shares > 0.0 else 0
    return 1 if _figure(op, position, legs, count, moment) >= op.value - _DUST else 0


@step
def holds(ops: Records, position: Any, legs: Any, count: int, moment: tuple[int, int], word: int) -> bool:
    """Whether the condition `ops` holds; `moment` is (session, ordinal), `word` the day's signal bits."""
    stack = 0
    for i in range(ops.shape[0]):
        op = ops[i]
        if op.code == OP_NOT:
            stack ^= 1
        elif op.code == OP_AND:
            stack = (stack >> 1) & ((stack & 1) | ~1)
        elif op.code == OP_OR:
            stack = (stack >> 1) | (stack & 1)
        else:
            stack = (stack << 1) | _atom(op, position, legs, count, moment, word)
    return (stack & 1) == 1
