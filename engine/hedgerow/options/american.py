"""American options on arrays: value, with a continuous yield or known cash dividends."""

from __future__ import annotations

from numpy.typing import ArrayLike

from hedgerow.kernels.layout import Floats
from hedgerow.options.door import Dividends, cash_of, rows_of

__all__ = ["american_value"]


def american_value(
    right: ArrayLike,
    spot: ArrayLike,
    strike: ArrayLike,
    years: ArrayLike,
    volatility: ArrayLike,
    rate: ArrayLike = 0.0,
    dividend_yield: ArrayLike = 0.0,
    dividends: Dividends = (),
) -> Floats:
    """Value American options, money per share, float64 in the common shape of the inputs.

    Arguments and units as in `hedgerow.options.european_value`. Without cash dividends the exercise boundary
    is solved for (Andersen, Lake & Offengenden 2016; see `hedgerow.kernels.boundary`); with them a binomial
    lattice on the price less the dividends' present value serves (Hull, the chapter on basic numerical
    procedures; see `hedgerow.kernels.lattice`). Raises InputError as `european_value` does.

    >>> round(float(american_value("put", 50, 50, 5 / 12, 0.4, rate=0.1)), 3)
    4.284
    """
    from hedgerow.kernels.vector import american_rows

    rows, _ = rows_of(
        "american_value",
        right,
        spot=spot,
        strike=strike,
        years=years,
        rate=rate,
        dividend_yield=dividend_yield,
        volatility=volatility,
    )
    return rows.give(american_rows(rows.table, *cash_of("american_value", dividends)))
