"""Replay rules for protected stock over daily prices, and say with evidence which rule to trade.

    import hedgerow as hr
    market = hr.load_market("prices.csv")            # or a folder, Parquet, or hr.Market.from_frame(frame)
    result = hr.run(market, "strategies/collar-weekly.yaml")
    result.trades, result.equity, result.summary

Results are hypothetical: premiums are synthesized from realized volatility. Nothing here is advice.
"""

from __future__ import annotations

import importlib
from typing import Any

__version__ = "0.1.0"

_HOMES = {
    "Account": "hedgerow.walk.account",
    "Costs": "hedgerow.kernels.layout",
    "DataError": "hedgerow.errors",
    "DeskError": "hedgerow.errors",
    "ExtensionError": "hedgerow.errors",
    "HedgerowError": "hedgerow.errors",
    "InputError": "hedgerow.errors",
    "Market": "hedgerow.market",
    "Result": "hedgerow.study.one",
    "RulesError": "hedgerow.errors",
    "Sheet": "hedgerow.desk.sheet",
    "Strategy": "hedgerow.rules.schema",
    "Study": "hedgerow.study.declare",
    "StudyError": "hedgerow.errors",
    "StudyResult": "hedgerow.study.compare",
    "SurfaceModel": "hedgerow.volatility.model",
    "extend": "hedgerow",
    "load_extension": "hedgerow.extend",
    "load_market": "hedgerow.market",
    "load_strategy": "hedgerow.rules.load",
    "load_study": "hedgerow.study.declare",
    "run": "hedgerow.study.one",
    "run_large": "hedgerow.study.large",
    "run_study": "hedgerow.study.compare",
    "today": "hedgerow.desk.today",
}

__all__ = ["__version__", *_HOMES]


def __getattr__(name: str) -> Any:
    """Import a public name when it is first used, so that importing the package is light."""
    if name == "extend":
        return importlib.import_module("hedgerow.extend")
    if name not in _HOMES:
        raise AttributeError(f"the package hedgerow has no public name {name!r}")
    return getattr(importlib.import_module(_HOMES[name]), name)


def __dir__() -> list[str]:
    """The public names."""
    return sorted(__all__)
