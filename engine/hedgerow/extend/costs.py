"""Costs with a name: a function of the market that gives the numbers of `Costs`; one decorator."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

from hedgerow.errors import StudyError, nearest_word
from hedgerow.kernels.layout import Costs
from hedgerow.market.table import Market

__all__ = ["COST_MODELS", "CostModel", "cost", "named_costs"]


@dataclass(frozen=True)
class CostModel:
    """A registered model of costs. Its numbers hold for the whole run and for every symbol of the market."""

    name: str
    function: Callable[[Market], Costs]

    def costs(self, market: Market) -> Costs:
        """The costs on that market, as plain floats."""
        return Costs(*(float(number) for number in self.function(market)))


COST_MODELS: dict[str, CostModel] = {}


def cost(name: str) -> Callable[[Callable[[Market], Costs]], Callable[[Market], Costs]]:
    """Register a model of costs under `name`; raises ValueError when the name is taken."""

    def register(function: Callable[[Market], Costs]) -> Callable[[Market], Costs]:
        if name in COST_MODELS or name == "none":
            raise ValueError(f"a model of costs is already registered under the name `{name}`")
        COST_MODELS[name] = CostModel(name, function)
        return function

    return register


def named_costs(name: str) -> CostModel:
    """Return the model of that name; raises StudyError with the nearest right word when there is none."""
    if name not in COST_MODELS:
        known = ", ".join(f"`{word}`" for word in ("none", *sorted(COST_MODELS)))
        found = f"`{name}` is no model of costs"
        remedy = nearest_word(name, COST_MODELS) or "name the file that holds it under `extensions`"
        allowed = f"allowed: a mapping of costs, or one of {known}"
        raise StudyError.one("costs", "unknown", found, allowed, remedy)
    return COST_MODELS[name]
