"""What every model of costs must do: give numbers a study could have written, and always the same ones."""

from __future__ import annotations

import math
from collections.abc import Callable

from hedgerow.extend.costs import CostModel
from hedgerow.extend.invented import reporting_market
from hedgerow.kernels.layout import Costs
from hedgerow.walk.account import COST_RANGES

__all__ = ["COST_CHECKS"]


def right_kind(chosen: CostModel) -> str:
    """It gives `Costs`, each a number within its range."""
    found = chosen.function(reporting_market(1))
    if not isinstance(found, Costs):
        return f"it gives {type(found).__name__}, and `Costs` is wanted, such as `DEFAULT_COSTS`"
    for name, number in found._asdict().items():
        least, most = COST_RANGES[name]
        if not isinstance(number, int | float) or not math.isfinite(number) or not least <= number <= most:
            return f"its {name} is {number}, and a number from {least:g} to {most:g} is allowed"
    return ""


def steady(chosen: CostModel) -> str:
    """Asked twice about the same market it gives the same."""
    market = reporting_market(2)
    if chosen.costs(market) != chosen.costs(market):
        return "asked twice about the same market it gives two answers: nothing in it may be drawn or kept"
    return ""


COST_CHECKS: dict[str, Callable[[CostModel], str]] = {
    "gives costs within their ranges": right_kind,
    "says the same when asked twice": steady,
}
