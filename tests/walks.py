"""Walks of small made-up markets, with rules that use every part of the walk."""

from __future__ import annotations

import hashlib
from dataclasses import replace
from typing import Any

import numpy as np

from array_market import array_market, report
from hedgerow.events.log import EventLog
from hedgerow.kernels.layout import Costs
from hedgerow.market.table import Market
from hedgerow.rules.load import load_strategy
from hedgerow.study.one import Bench
from hedgerow.volatility.surface import SurfaceModel
from hedgerow.walk.account import DEFAULT_COSTS, Account
from hedgerow.walk.run import Terms, Window, walk_program

SURFACE = SurfaceModel(terms=SurfaceModel().terms[:1])
WEEK = {"days": 7, "listed": "weekly"}
RULES: dict[str, dict[str, Any]] = {
    "collar": {
        "legs": {
            "call": {"sell": "call", "expiry": WEEK, "strike": {"from_spot": "0%", "snap": "up"}},
            "put": {"buy": "put", "expiry": {"with": "call"}, "strike": {"from_spot": "-4%", "snap": "down"}},
        },
        "accept": {"worst_loss": {"at_most": "9%"}},
    },
    "rolled call": {
        "legs": {
            "call": {
                "sell": "call",
                "expiry": WEEK,
                "strike": {"delta": 0.3},
                "roll": {"at": "expiry"},
            },
        },
        "exit": [
            {"name": "gain", "if": {"gain": {"at_least": "3%"}}},
            {
                "name": "turn",
                "if": {"all": [{"held": {"at_least": 5}}, {"signal": "mean_falling", "sessions": 10}]},
            },
        ],
        "stop": {"below_entry": "6%"},
        "enter": {"rank": {"by": {"signal": "momentum", "sessions": 10}, "order": "high"}},
    },
    "married put": {
        "legs": {
            "put": {"buy": "put", "expiry": {"days": 45, "listed": "monthly"}, "strike": {"odds": "30%"}},
            "call": {
                "sell": "call",
                "expiry": {"with": "put"},
                "strike": {"zero_cost_with": "put"},
                "add_when": {"stock_up": {"at_least": "1%"}},
            },
        },
        "exit": [{"name": "cut", "if": {"loss": {"at_least": "50%", "of": "worst"}}}],
        "fill": "close",
    },
}


def lively_market(seed: int = 11, sessions: int = 260, symbols: int = 4) -> Market:
    """Random walks with dividends, a split, reports, holes, a history that ends, and a rate."""
    rng = np.random.default_rng(seed)
    close = 60.0 * np.exp(np.cumsum(rng.normal(0.0003, 0.018, (sessions, symbols)), axis=0))
    opened = close * np.exp(rng.normal(0.0, 0.008, close.shape))
    high, low = np.fmax(opened, close) * 1.004, np.fmin(opened, close) * 0.996
    split, dividend = np.ones(close.shape), np.zeros(close.shape)
    split[90, 0] = 2.0
    for array in (close, opened, high, low):
        array[90:, 0] /= 2.0
        array[150:153, 1] = np.nan
        array[200:, 2] = np.nan
    dividend[20::63] = 0.5
    dividend[np.isnan(close)] = 0.0
    last = np.full(symbols, sessions - 1)
    last[2] = 199
    made = array_market(close, open=opened, high=high, low=low, split=split, dividend=dividend, last_bar=last)
    reports = tuple(report(made, at, symbol=at % symbols) for at in range(30, sessions, 37))
    return replace(made, rate=np.full(sessions, 0.03), reports=tuple(sorted(reports)))


def moved_to(market: Market, first: str) -> Market:
    """The same market on weekdays from another Monday on, without its reports."""
    dates = np.busday_offset(np.datetime64(first), np.arange(len(market.dates)))
    shift = (dates - market.dates).astype(np.int64)
    return replace(market, dates=dates, ordinals=market.ordinals + shift, reports=())


def walked(
    market: Market,
    rule: str,
    costs: Costs = DEFAULT_COSTS,
    window: Window | None = None,
    marks: bool = True,
    account: Account | None = None,
) -> EventLog:
    """Walk one of the rules over a market, or over a window of it."""
    bench = Bench(market, SURFACE)
    program = bench.program(load_strategy({"name": rule, **RULES[rule]}))
    span = window or Window.of(market)
    terms = Terms(account or Account(per_position=0.2), costs, span, "modern", marks)
    return walk_program(market, bench.tape, program, terms, rule)


def digest(log: EventLog) -> str:
    """A hash of every record of a log."""
    whole = hashlib.sha256()
    for table in (log.events, log.terms, log.days, log.marks):
        for name in table.dtype.names or ():
            whole.update(np.ascontiguousarray(table[name]).tobytes())
    return whole.hexdigest()


def same_bits(one: np.ndarray, other: np.ndarray) -> bool:
    """Whether two tables hold the same records, NaN being itself."""
    names = one.dtype.names or ()
    return one.shape == other.shape and all(one[name].tobytes() == other[name].tobytes() for name in names)
