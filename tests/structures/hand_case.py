"""A shipped strategy on a market of ten sessions, and the lines of what must happen there."""

from __future__ import annotations

from collections.abc import Iterable, Iterator
from dataclasses import dataclass, field
from datetime import date
from functools import cached_property
from pathlib import Path
from typing import Any

import numpy as np

import hedgerow as hr
from hedgerow.events.log import EventLog
from hedgerow.kernels import layout as at
from hedgerow.kernels.layout import Costs
from hedgerow.market.table import Market
from properties.markets import make_market
from structures.ledger_lines import VOLATILITY, Reckoner

STRATEGIES = Path(__file__).parents[2] / "strategies"
PRICING = {"observed": "column", "skew": 0, "curvature": 0}
COMPARED = (
    "session",
    "position",
    "kind",
    "leg",
    "reason",
    "expiry",
    "quantity",
    "strike",
    "price",
    "fee",
    "cash",
)

# Ten sessions of 2024 each; third Fridays are 19 January, 16 February, 15 March, 19 April, 17 May, 21 June
# and 19 July. What is not listed here is no session of the market.
MONTH = "01-19 01-22 01-24 01-26 01-31 02-02 02-07 02-09 02-14 02-16"

# closes, and opens where they are not the close before
MARKETS: dict[str, tuple[tuple[float, ...], dict[int, float]]] = {
    "still": ((50.0,) * 10, {}),
    "rising": ((50.0, 50.0, 50.5, 51.0, 51.5, 52.0, 52.5, 53.0, 53.5, 54.0), {}),
    "falling": ((50.0, 50.0, 49.5, 49.0, 48.5, 48.0, 47.5, 47.0, 46.5, 46.0), {}),
    "gapping": ((50.0, 50.0, 50.0, 50.0, 44.0, 44.0, 43.5, 43.0, 43.0, 43.0), {4: 44.25}),
    "leaping": ((50.0, 50.0, 50.0, 50.0, 56.0, 56.0, 56.5, 57.0, 57.0, 57.0), {4: 56.0}),
    "recovering": ((50.0, 50.0, 48.0, 46.0, 46.0, 46.0, 47.5, 48.0, 52.0, 52.0), {}),
    "collapsing": ((50.0, 50.0, 50.0, 50.0, 26.0, 25.0, 25.0, 25.0, 25.0, 25.0), {4: 26.0}),
    "split in two": ((50.0,) * 5 + (25.0,) * 5, {5: 25.0}),
}


def _put(tree: dict[str, Any], path: str, value: Any) -> None:
    """Put a value at a dotted path."""
    *way, last = path.split(".")
    for word in way:
        tree = tree.setdefault(word, {})
    tree[last] = value


@dataclass(frozen=True)
class Structure:
    """One shipped file on several markets: the lines that all begin with, and those of each."""

    name: str
    file: str
    first: str
    told: dict[str, str]
    more: dict[str, Any] = field(default_factory=dict)  # fields of its cases

    def cases(self) -> Iterator[Case]:
        """One case a market."""
        for market, rest in self.told.items():
            closes, opens = MARKETS[market]
            lines = f"{self.first.strip()}\n{rest}"
            yield Case(f"{self.name}, {market}", self.file, closes, lines, opens=opens, **self.more)


@dataclass(frozen=True)
class Case:
    """One structure on one market; `told` are the lines, `changes` dotted paths of the shipped file."""

    name: str
    file: str
    closes: tuple[float, ...]
    told: str
    days: str = MONTH
    opens: dict[int, float] = field(default_factory=dict)  # where not yesterday's close
    columns: dict[str, dict[int, float]] = field(default_factory=dict)
    changes: dict[str, Any] = field(default_factory=dict)
    costs: dict[str, float] = field(default_factory=dict)
    cash: float = 12_000.0
    margin: str = "cash"

    @cached_property
    def dates(self) -> list[date]:
        """The sessions."""
        return [date.fromisoformat(f"2024-{day}") for day in self.days.split()]

    @cached_property
    def opened(self) -> list[float]:
        """The open of each session: yesterday's close unless said."""
        opens = [self.closes[0], *self.closes[:-1]]
        return [self.opens.get(t, price) for t, price in enumerate(opens)]

    @cached_property
    def strategy(self) -> dict[str, Any]:
        """The words of the shipped file with the changes."""
        words = hr.load_strategy(STRATEGIES / f"{self.file}.yaml").plain()
        for path, value in self.changes.items():
            _put(words, path, value)
        return words

    @property
    def market(self) -> Market:
        """One stock at a volatility of 30 %, no interest."""
        shape = (len(self.closes), 1)
        columns = {"open": np.array(self.opened)[:, None], "implied": np.full(shape, VOLATILITY)}
        for name, values in self.columns.items():
            column = np.full(shape, 1.0 if name == "split" else 0.0)
            if name in ("high", "low"):
                column = np.array([self.opened, self.closes]).T
                column = (column.max(axis=1) if name == "high" else column.min(axis=1))[:, None]
            for t, value in values.items():
                column[t] = value
            columns[name] = column
        ordinals = np.array([day.toordinal() for day in self.dates], np.int64)
        return make_market(["HILL"], ordinals, np.array(self.closes, float)[:, None], **columns)

    def walked(self) -> EventLog:
        """What the walk makes of it."""
        costs = Costs(**{name: self.costs.get(name, 0.0) for name in Costs._fields})
        account = hr.Account(cash=self.cash, per_position=1.0, margin=self.margin)
        result = hr.run(self.market, self.strategy, account=account, pricing=PRICING, costs=costs)
        assert len(result.trades) == result.log.terms.size  # the ledger adds up, or raises
        return result.log

    def reckoner(self) -> Reckoner:
        """Plain arithmetic for the lines."""
        rights = {name: leg.get("buy", leg.get("sell")) for name, leg in self.strategy["legs"].items()}
        exits = [rule["name"] for rule in self.strategy.get("exit", [])]
        rights = {name.replace(" ", "-"): right for name, right in rights.items()}
        return Reckoner(self.dates, self.opened, list(self.closes), rights, self.costs, exits, self.cash)

    @property
    def lines(self) -> list[str]:
        """What must happen, a line each."""
        return [line.strip() for line in self.told.splitlines() if line.strip()]


def events_of(log: EventLog) -> Iterable[dict[str, Any]]:
    """The events of a log but the deposit, as mappings."""
    rows = log.events[log.events["kind"] != at.KIND_DEPOSIT][list(COMPARED)]
    return [dict(zip(COMPARED, row, strict=True)) for row in rows.tolist()]
