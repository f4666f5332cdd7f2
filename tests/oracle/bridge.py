"""The package's own walk of what the replay walks, and its American puts for runs compared to the cent.

A replay values American puts by Bjerksund & Stensland 2002, the walk by the exercise boundary; the two differ
by up to some cents. `WalkPuts` lends the walk's values (held to QuantLib elsewhere) to a replay, so that
everything else can be compared to the cent.
"""

from __future__ import annotations

import math
from typing import Any

import hedgerow
from hedgerow.events.log import EventLog
from hedgerow.kernels.american import american_or_european, put_exercise_is_due
from hedgerow.kernels.cash import american_cash
from hedgerow.kernels.layout import PUT, Costs
from hedgerow.market import Market
from hedgerow.study.one import Bench
from hedgerow.volatility.words import surface_words
from hedgerow.walk.run import Window
from oracle.moment import Ahead, Puts
from oracle.words import Setting

MOST = 1000


def walked(
    market: Market,
    strategy: dict[str, Any],
    setting: Setting,
    pricing: Any = None,
    window: tuple[str | None, str | None] = (None, None),
) -> EventLog:
    """The log of the package's walk, from one ISO date to another."""
    account = hedgerow.Account(
        cash=setting.cash,
        per_position=setting.per_position,
        most_positions=min(setting.most_positions, MOST),
        most_new_a_day=min(setting.most_new_a_day, MOST),
        most_per_sector=min(setting.most_per_sector, MOST),
        interest=setting.interest,
    )
    costs = Costs(**{name: setting.cost(name) for name in Costs._fields})
    bench = Bench(market, surface_words(pricing), symbols=market.symbols)
    return bench.run(hedgerow.load_strategy(strategy), account, costs, Window.of(market, *window)).log


class WalkPuts(Puts):
    """American puts as the walk values them."""

    def value(
        self, base: float, strike: float, years: float, rate: float, volatility: float, ahead: Ahead | None
    ) -> float:
        """Money a share."""
        if ahead is None:
            return float(american_or_european(PUT, base, strike, years, rate, 0.0, volatility, 0.01))
        spot = base + ahead.amount * math.exp(-rate * ahead.years)
        return float(american_cash(PUT, spot, strike, years, rate, volatility, *ahead))

    def is_due(self, spot: float, strike: float, years: float, rate: float, volatility: float) -> bool:
        """Whether exercise now is worth at least as much as keeping it."""
        return bool(put_exercise_is_due(spot, strike, years, rate, 0.0, volatility))
