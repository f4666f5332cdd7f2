"""The volatility that a price implies, on arrays of European or American options."""

from __future__ import annotations

from numpy.typing import ArrayLike

from hedgerow.kernels.layout import Floats
from hedgerow.options.door import Dividends, cash_of, escrow, rows_of

__all__ = ["american_implied_volatility", "implied_volatility"]


def implied_volatility(
    right: ArrayLike,
    price: ArrayLike,
    spot: ArrayLike,
    strike: ArrayLike,
    years: ArrayLike,
    rate: ArrayLike = 0.0,
    dividend_yield: ArrayLike = 0.0,
    dividends: Dividends = (),
) -> Floats:
    """Find the volatility, an annual fraction, at which a European option is worth `price` (money per share).

    float64 in the common shape of the inputs; NaN where no volatility gives the price: under the discounted
    forward's intrinsic value, or at or over the discounted forward (call) or strike (put). Other arguments as
    in `hedgerow.options.european_value`.

    Source: Newton's method from the point of Manaster & Koehler 1982, kept in a bracket. Raises InputError as
    `european_value` does.

    >>> round(float(implied_volatility("call", 1.875, 21, 20, 0.25, rate=0.1)), 4)
    0.2345
    """
    from hedgerow.kernels.vector import implied_rows

    rows, prices = rows_of(
        "implied_volatility",
        right,
        spot=spot,
        strike=strike,
        years=years,
        rate=rate,
        dividend_yield=dividend_yield,
        volatility=0.0,
        price=price,
    )
    rows = escrow(rows, *cash_of("implied_volatility", dividends))
    return rows.give(implied_rows(rows.table, prices))


def american_implied_volatility(
    right: ArrayLike,
    price: ArrayLike,
    spot: ArrayLike,
    strike: ArrayLike,
    years: ArrayLike,
    rate: ArrayLike = 0.0,
    dividend_yield: ArrayLike = 0.0,
    dividends: Dividends = (),
) -> Floats:
    """Find the volatility, an annual fraction, at which an American option is worth `price`.

    `price` is money per share; the result is float64 in the common shape of the inputs. NaN where the price
    is not over immediate exercise, which says nothing about volatility, or needs a volatility over 1,000 %.
    Other arguments as in `hedgerow.options.american_value`, whose values it inverts by false position.
    Raises InputError as `european_value` does.
    """
    from hedgerow.kernels.vector import american_implied_rows

    rows, prices = rows_of(
        "american_implied_volatility",
        right,
        spot=spot,
        strike=strike,
        years=years,
        rate=rate,
        dividend_yield=dividend_yield,
        volatility=0.0,
        price=price,
    )
    cash = cash_of("american_implied_volatility", dividends)
    return rows.give(american_implied_rows(rows.table, prices, *cash))
