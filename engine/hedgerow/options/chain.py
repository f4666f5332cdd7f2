"""One table of the options of one stock at one close, for people to read."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from typing import TYPE_CHECKING

import numpy as np

from hedgerow.kernels.layout import Floats
from hedgerow.options.american import american_value
from hedgerow.options.door import Dividends
from hedgerow.options.european import chance_beyond, european_greeks, european_value

if TYPE_CHECKING:
    import pandas as pd

__all__ = ["chain_table"]


def chain_table(
    spot: float,
    strikes: Sequence[float],
    years: float,
    volatility: Callable[[Floats], Floats],
    *,
    rate: float = 0.0,
    dividends: Dividends = (),
    american: bool = True,
) -> pd.DataFrame:
    """Lay out calls and puts of one expiry, a row a strike in rising order.

    `spot` and `strikes` are money per share, `years` the time to expiry, `rate` an annual fraction,
    `dividends` pairs of (years, money per share). `volatility` is called once with the strikes (n,) and gives
    annual fractions (n,). Columns: strike; call, put: model mid, money per share; volatility; call_delta and
    put_delta; odds_above, odds_below: risk-neutral chance of finishing above and at or below the strike,
    fractions. Deltas and odds are those of the European option. Raises InputError where a number makes no
    sense.
    """
    import pandas as pd

    levels = np.sort(np.asarray(strikes, dtype=np.float64))
    implied = np.asarray(volatility(levels), dtype=np.float64)
    cash = tuple(dividends)
    value = american_value if american else european_value
    terms = (spot, levels, years, implied, rate, 0.0, cash)
    return pd.DataFrame(
        {
            "strike": levels,
            "call": value("call", *terms),
            "put": value("put", *terms),
            "volatility": implied,
            "call_delta": european_greeks("call", *terms).delta,
            "put_delta": european_greeks("put", *terms).delta,
            "odds_above": chance_beyond("call", *terms),
            "odds_below": chance_beyond("put", *terms),
        }
    )
