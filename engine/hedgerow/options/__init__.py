"""Arrays of options for people and tests; the walk values options one by one in `hedgerow.kernels`."""

from __future__ import annotations

from hedgerow.options.american import american_value
from hedgerow.options.chain import chain_table
from hedgerow.options.european import Greeks, chance_beyond, european_greeks, european_value
from hedgerow.options.implied import american_implied_volatility, implied_volatility

__all__ = [
    "Greeks",
    "american_implied_volatility",
    "american_value",
    "chain_table",
    "chance_beyond",
    "european_greeks",
    "european_value",
    "implied_volatility",
]
