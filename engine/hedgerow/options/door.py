"""Checks and broadcasts what people hand to the functions on arrays of options."""

from __future__ import annotations

from collections.abc import Iterable
from typing import NamedTuple

import numpy as np
from numpy.typing import ArrayLike

from hedgerow.errors import Fault, InputError
from hedgerow.kernels.layout import CALL, PUT, Floats

__all__ = ["Dividends", "Rows", "cash_of", "escrow", "rows_of"]

Dividends = Iterable[tuple[float, float]]

_RIGHTS = {"call": CALL, "put": PUT}
_MAY_BE_NEGATIVE = {"rate", "dividend_yield"}


class Rows(NamedTuple):
    """Options as rows (n, 7) for `hedgerow.kernels.vector`, and the shape they came in."""

    table: Floats
    shape: tuple[int, ...]

    def give(self, column: Floats) -> Floats:
        """Give a result (n,) back in the shape that came in; no dimension when all inputs were single."""
        return column.reshape(self.shape)


def _rights(right: ArrayLike, where: str, faults: list[Fault]) -> Floats:
    """Codes of "call" and "put"; anything else is a fault."""
    words = np.asarray(right)
    codes = np.zeros(words.shape)
    for place, word in np.ndenumerate(words):
        if str(word) not in _RIGHTS:
            faults.append(Fault(where, 0, 0, "right", f"right is {str(word)!r}", "it is `call` or `put`"))
            break
        codes[place] = _RIGHTS[str(word)]
    return codes


def _numbers(name: str, value: ArrayLike, where: str, faults: list[Fault]) -> Floats:
    """Take `value` as float64; what is not a finite number, or negative where it may not be, is a fault."""
    try:
        numbers = np.asarray(value, dtype=np.float64)
    except (TypeError, ValueError):
        faults.append(
            Fault(where, 0, 0, "not a number", f"{name} is {value!r}", "it is a number or an array")
        )
        return np.zeros(())
    wrong = ~np.isfinite(numbers)
    allowed = "it is a finite number"
    if name not in _MAY_BE_NEGATIVE:
        wrong |= numbers < 0.0
        allowed = "it is a finite number of zero or more"
    if wrong.any():
        found = f"{name} holds {float(numbers[wrong][0])!r} ({int(wrong.sum())} of {wrong.size} are wrong)"
        faults.append(Fault(where, 0, 0, f"bad {name}", found, allowed))
    return numbers


def rows_of(where: str, right: ArrayLike, **columns: ArrayLike) -> tuple[Rows, Floats]:
    """Check and broadcast an option's terms; give the rows and the flattened `extra` column.

    `columns` are spot, strike, years, rate, dividend_yield, volatility, and one more under the name `price`
    where it is needed. Raises InputError with every fault: a number that is not finite or is negative where
    that means nothing, a right that is not `call` or `put`, shapes that do not broadcast.
    """
    faults: list[Fault] = []
    codes = _rights(right, where, faults)
    arrays = {name: _numbers(name, value, where, faults) for name, value in columns.items()}
    if faults:
        raise InputError(faults)
    try:
        whole = np.broadcast_arrays(codes, *arrays.values())
    except ValueError as problem:
        shapes = ", ".join(f"{name} {array.shape}" for name, array in arrays.items() if array.ndim)
        raise InputError.one(
            where, "shapes", f"the arrays do not fit together: {shapes}", "shapes must broadcast"
        ) from problem
    named = dict(zip(["right", *arrays], whole, strict=True))
    extra = np.ascontiguousarray(named.pop("price", np.zeros(whole[0].shape)), dtype=np.float64).ravel()
    table = np.empty((whole[0].size, len(named)))
    for k, column in enumerate(named.values()):
        table[:, k] = column.ravel()
    return Rows(table, whole[0].shape), extra


def cash_of(where: str, dividends: Dividends) -> tuple[Floats, Floats]:
    """Check known cash dividends, pairs of (years to the ex-date, money per share), as two arrays.

    Raises InputError where one is not a pair of finite numbers, with years above 0 and money of 0 or more.
    """
    faults: list[Fault] = []
    pairs: list[tuple[float, float]] = []
    for k, item in enumerate(dividends):
        try:
            years, amount = (float(part) for part in item)
        except (TypeError, ValueError):
            years, amount = np.nan, np.nan
        if not (np.isfinite(years) and np.isfinite(amount) and years > 0.0 and amount >= 0.0):
            text = f"dividend {k + 1} is {item!r}"
            allowed = "it is a pair of years to the ex-date (above 0) and money per share (0 or more)"
            faults.append(Fault(where, 0, 0, "dividend", text, allowed))
        pairs.append((years, amount))
    if faults:
        raise InputError(faults)
    table = np.array(pairs, dtype=np.float64).reshape(-1, 2)
    return table[:, 0].copy(), table[:, 1].copy()


def escrow(rows: Rows, ex_years: Floats, amounts: Floats) -> Rows:
    """Take the present value of the dividends up to each expiry off the spot; never below zero.

    Hull, the chapter on the Black-Scholes-Merton model, European options on a dividend-paying stock.
    """
    if not len(ex_years):
        return rows
    table = rows.table.copy()
    years, rate = table[:, 3:4], table[:, 4:5]
    worth = np.where(ex_years <= years, amounts * np.exp(-rate * ex_years), 0.0)
    table[:, 1] = np.maximum(table[:, 1] - worth.sum(axis=1), 0.0)
    return Rows(table, rows.shape)
