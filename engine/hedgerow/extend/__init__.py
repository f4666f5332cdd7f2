"""Signals, estimators of volatility and costs of your own: what a file of extensions imports.

    from hedgerow.extend import Number, Panel, Parameter, signal

A study names such a file under `extensions`; `hedgerow extensions check FILE` holds it to the
rules of the house.
"""

from hedgerow.extend.costs import COST_MODELS, CostModel, cost
from hedgerow.extend.load import Extension, load_extension, load_extensions
from hedgerow.kernels.layout import Costs
from hedgerow.kernels.rolling import trailing_extreme, trailing_moments
from hedgerow.market.table import Market
from hedgerow.signals.panel import Panel
from hedgerow.signals.registry import Number, Parameter, signal
from hedgerow.volatility.registry import Bars, Estimate, estimator
from hedgerow.walk.account import DEFAULT_COSTS

__all__ = [
    "COST_MODELS",
    "DEFAULT_COSTS",
    "Bars",
    "CostModel",
    "Costs",
    "Estimate",
    "Extension",
    "Market",
    "Number",
    "Panel",
    "Parameter",
    "cost",
    "estimator",
    "load_extension",
    "load_extensions",
    "signal",
    "trailing_extreme",
    "trailing_moments",
]
