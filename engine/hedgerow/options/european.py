"""European options on arrays: value, greeks and the chance of finishing beyond the strike."""

from __future__ import annotations

from typing import NamedTuple

from numpy.typing import ArrayLike

from hedgerow.kernels.layout import Floats
from hedgerow.options.door import Dividends, Rows, cash_of, escrow, rows_of

__all__ = ["Greeks", "chance_beyond", "european_greeks", "european_value"]


class Greeks(NamedTuple):
    """Sensitivities of European options, each an array in the shape of the input."""

    delta: Floats  # per unit of spot
    gamma: Floats  # of delta, per unit of spot
    vega: Floats  # money per share per unit (100 points) of volatility
    theta: Floats  # money per share per year that passes
    rho: Floats  # money per share per unit (100 points) of the interest rate, the forward's escrow unchanged


def _rows(where: str, right: ArrayLike, terms: dict[str, ArrayLike], dividends: Dividends) -> Rows:
    """Checked rows with the dividends taken off the spot."""
    rows, _ = rows_of(where, right, **terms)
    return escrow(rows, *cash_of(where, dividends))


def european_value(
    right: ArrayLike,
    spot: ArrayLike,
    strike: ArrayLike,
    years: ArrayLike,
    volatility: ArrayLike,
    rate: ArrayLike = 0.0,
    dividend_yield: ArrayLike = 0.0,
    dividends: Dividends = (),
) -> Floats:
    """Value European options, money per share, float64 in the common shape of the inputs.

    `right` is "call" or "put" or an array of them. `spot` and `strike` are money per share, `years` the time
    to expiry, `volatility`, `rate` and `dividend_yield` annual fractions, the last two continuously
    compounded. `dividends` are known cash dividends, pairs of (years to the ex-date, money per share), the
    same for all options; those after an option's expiry do not touch it. Single numbers give an array
    without dimensions.

    Source: Hull, Options, Futures and Other Derivatives, the Black-Scholes-Merton formulas with a dividend
    yield; known dividends are taken off the price at their present value. Raises InputError where a number is
    not finite, a price, strike, time or volatility is negative, or the shapes do not fit.

    >>> round(float(european_value("call", 42, 40, 0.5, 0.2, rate=0.1)), 4)
    4.7594
    """
    from hedgerow.kernels.vector import european_rows

    terms = _terms(spot, strike, years, volatility, rate, dividend_yield)
    rows = _rows("european_value", right, terms, dividends)
    return rows.give(european_rows(rows.table))


def _terms(
    spot: ArrayLike,
    strike: ArrayLike,
    years: ArrayLike,
    volatility: ArrayLike,
    rate: ArrayLike,
    dividend_yield: ArrayLike,
) -> dict[str, ArrayLike]:
    """Name the terms in the order of the columns of a row."""
    return {
        "spot": spot,
        "strike": strike,
        "years": years,
        "rate": rate,
        "dividend_yield": dividend_yield,
        "volatility": volatility,
    }


def european_greeks(
    right: ArrayLike,
    spot: ArrayLike,
    strike: ArrayLike,
    years: ArrayLike,
    volatility: ArrayLike,
    rate: ArrayLike = 0.0,
    dividend_yield: ArrayLike = 0.0,
    dividends: Dividends = (),
) -> Greeks:
    """Find delta, gamma, vega, theta and rho of European options, float64 in the common shape of the inputs.

    Arguments and units as in `european_value`; units of the greeks at `Greeks`. With cash dividends they are
    those of an option on the price less the dividends' present value.

    Source: Hull, Options, Futures and Other Derivatives, the chapter on the greek letters. Raises InputError
    as `european_value` does.
    """
    from hedgerow.kernels.vector import greek_rows

    terms = _terms(spot, strike, years, volatility, rate, dividend_yield)
    rows = _rows("european_greeks", right, terms, dividends)
    table = greek_rows(rows.table)
    return Greeks(*(rows.give(table[:, k].copy()) for k in range(5)))


def chance_beyond(
    right: ArrayLike,
    spot: ArrayLike,
    strike: ArrayLike,
    years: ArrayLike,
    volatility: ArrayLike,
    rate: ArrayLike = 0.0,
    dividend_yield: ArrayLike = 0.0,
    dividends: Dividends = (),
) -> Floats:
    """Find the risk-neutral chance of finishing beyond the strike, a fraction in the inputs' common shape.

    Above the strike for a call, at or below it for a put. Arguments and units as in `european_value`.

    Source: Hull, Options, Futures and Other Derivatives, the interpretation of N(d2). Raises InputError as
    `european_value` does.
    """
    from hedgerow.kernels.vector import chance_rows

    terms = _terms(spot, strike, years, volatility, rate, dividend_yield)
    rows = _rows("chance_beyond", right, terms, dividends)
    return rows.give(chance_rows(rows.table))
