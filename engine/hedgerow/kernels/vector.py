"""Loops over many options: one row an option, columns right, spot, strike, years, rate, yield, volatility.

`right` is CALL or PUT as a float; units are those of `hedgerow.kernels.lognormal`. Every function takes a
C-ordered float64 array (n, 7) and gives float64 arrays of n rows.
"""

from __future__ import annotations

import math

import numpy as np

from hedgerow.kernels.american import american
from hedgerow.kernels.boundary import Problem
from hedgerow.kernels.implied import IMPLIED_OK, implied_european
from hedgerow.kernels.jit import compiled
from hedgerow.kernels.lattice import american_with_dividends
from hedgerow.kernels.layout import CALL, Floats
from hedgerow.kernels.lognormal import chance_above, delta, european, gamma, rho, theta, vega

__all__ = [
    "american_implied_rows",
    "american_rows",
    "chance_rows",
    "european_rows",
    "greek_rows",
    "implied_rows",
]

_LOWEST, _HIGHEST = 1e-4, 10.0  # volatilities between which an American option's is looked for
_MOST_STEPS = 100


@compiled
def european_rows(rows: Floats) -> Floats:
    """Value European options, money per share: (n,)."""
    out = np.empty(len(rows))
    for i in range(len(rows)):
        r = rows[i]
        out[i] = european(int(r[0]), r[1], r[2], r[3], r[4], r[5], r[6])
    return out


@compiled
def chance_rows(rows: Floats) -> Floats:
    """Find the chance of ending beyond the strike, above it for a call, at or below for a put: (n,)."""
    out = np.empty(len(rows))
    for i in range(len(rows)):
        r = rows[i]
        above = chance_above(r[1], r[2], r[3], r[4], r[5], r[6])
        out[i] = above if int(r[0]) == CALL else 1.0 - above
    return out


@compiled
def greek_rows(rows: Floats) -> Floats:
    """Find delta, gamma, vega, theta and rho of European options: (n, 5)."""
    out = np.empty((len(rows), 5))
    for i in range(len(rows)):
        r = rows[i]
        right = int(r[0])
        out[i, 0] = delta(right, r[1], r[2], r[3], r[4], r[5], r[6])
        out[i, 1] = gamma(r[1], r[2], r[3], r[4], r[5], r[6])
        out[i, 2] = vega(r[1], r[2], r[3], r[4], r[5], r[6])
        out[i, 3] = theta(right, r[1], r[2], r[3], r[4], r[5], r[6])
        out[i, 4] = rho(right, r[1], r[2], r[3], r[4], r[5], r[6])
    return out


@compiled
def implied_rows(rows: Floats, prices: Floats) -> Floats:
    """Find volatilities at which European options are worth `prices` (n,), NaN where there is none: (n,)."""
    out = np.empty(len(rows))
    for i in range(len(rows)):
        r = rows[i]
        found, status = implied_european(int(r[0]), prices[i], r[1], r[2], r[3], r[4], r[5])
        out[i] = found if status == IMPLIED_OK else math.nan
    return out


@compiled
def _american_at(row: Floats, volatility: float, ex_years: Floats, amounts: Floats) -> float:
    """Value the American option of a row at another volatility, by lattice where there are dividends."""
    right = int(row[0])
    if len(ex_years) > 0:
        problem = Problem(row[3], row[4], row[5], volatility, 0.0)
        return american_with_dividends(right, row[1], row[2], problem, ex_years, amounts)
    return american(right, row[1], row[2], row[3], row[4], row[5], volatility)


@compiled
def american_rows(rows: Floats, ex_years: Floats, amounts: Floats) -> Floats:
    """Value American options, money per share: (n,).

    `ex_years`, `amounts` (m,): years to each cash dividend and money per share, the same for every row; the
    spot of a row is the price with its dividends.
    """
    out = np.empty(len(rows))
    for i in range(len(rows)):
        out[i] = _american_at(rows[i], rows[i, 6], ex_years, amounts)
    return out


@compiled
def _american_implied(row: Floats, price: float, ex_years: Floats, amounts: Floats) -> float:
    """Find an American option's volatility by false position (Illinois rule), NaN where there is none."""
    low, high = _LOWEST, _HIGHEST
    under = _american_at(row, low, ex_years, amounts) - price
    over = _american_at(row, high, ex_years, amounts) - price
    if not (row[3] > 0.0 and under < 0.0 and over > 0.0):
        return math.nan
    found = low
    side = 0
    for _ in range(_MOST_STEPS):
        found = (low * over - high * under) / (over - under)
        miss = _american_at(row, found, ex_years, amounts) - price
        if abs(miss) <= 1e-12 * price or high - low <= 1e-12:
            return found
        if miss < 0.0:
            low, under = found, miss
            over = 0.5 * over if side < 0 else over
            side = -1
        else:
            high, over = found, miss
            under = 0.5 * under if side > 0 else under
            side = 1
    return found


@compiled
def american_implied_rows(rows: Floats, prices: Floats, ex_years: Floats, amounts: Floats) -> Floats:
    """Find volatilities at which American options are worth `prices` (n,), NaN where there is none: (n,).

    NaN too where the price is not over immediate exercise, which says nothing about volatility.
    """
    out = np.empty(len(rows))
    for i in range(len(rows)):
        out[i] = _american_implied(rows[i], prices[i], ex_years, amounts)
    return out
