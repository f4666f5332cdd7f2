"""Studies, markets and walks beside which sheets are laid."""

from __future__ import annotations

from dataclasses import replace
from functools import cache
from pathlib import Path
from typing import Any

import numpy as np

import hedgerow as hr
from hedgerow.desk.sheet import Sheet
from hedgerow.events.log import EventLog
from hedgerow.kernels import layout as at
from hedgerow.market import Market, load_market
from hedgerow.rules.load import load_strategy
from hedgerow.study.one import Bench
from hedgerow.volatility.words import surface_words
from hedgerow.walk.account import DEFAULT_COSTS, Account
from hedgerow.walk.run import Window
from oracle import real_markets

ROOT = Path(__file__).parents[1]
STRATEGIES = sorted((ROOT / "strategies").glob("*.yaml"))
ACCOUNT: dict[str, Any] = {"cash": 400_000.0, "per_position": 1 / 8, "most_positions": 6}


@cache
def orchard() -> Market:
    """The invented demo market."""
    return load_market(ROOT / "datasets/orchard-bay")


MARKETS = {"stocks": real_markets.stocks, "index": real_markets.index, "orchard": orchard}


@cache
def bench_of(name: str) -> Bench:
    """A market made ready, to its end."""
    return Bench(MARKETS[name](), surface_words(None))


def walk_from(bench: Bench, rule: Any, session: int, stop: int) -> EventLog:
    """The log of a rule that begins with a flat account at a session of the whole market."""
    window = Window(session, min(stop, len(bench.market.dates)))
    return bench.run(load_strategy(rule), Account(**ACCOUNT), DEFAULT_COSTS, window, beside=False).log


def ordered(log: EventLog, session: int) -> list[str]:
    """Symbols whose entry the walk decided at a session, in their order, with the lots ordered or filled."""
    events = log.events
    here = (events["session"] == session) & (events["reason"] == at.WHY_ENTRY)
    now = log.terms["position"][log.terms["decided"] == session]
    opened = (events["kind"] == at.KIND_OPENED) & np.isin(events["position"], now)
    chosen = here & (opened | (events["kind"] == at.KIND_SIGNALLED))
    return [f"{log.meta.symbols[event['symbol']]} {event['quantity']:g}" for event in events[chosen]]


def named(sheet: Sheet) -> list[str]:
    """Symbols the sheet opens, with their lots."""
    return [f"{look.symbol} {look.plan.lots:g}" for look in sheet.of("open") if look.plan is not None]


def study_of(
    strategy: Any, pricing: dict[str, Any] | None = None, first: str | None = None, **account: Any
) -> hr.Study:
    """A study of one strategy on the test's account; its market is given beside it."""
    given = account or {"cash": 400000, "per_position": "1/8", "most_positions": 6}
    rule = dict(strategy) if isinstance(strategy, dict) else str(strategy)
    words = {"name": "Sheet", "market": ".", "strategy": rule, "account": given}
    study = hr.load_study(words | ({"pricing": {"volatility": pricing}} if pricing else {}))
    return replace(study, first=first)
