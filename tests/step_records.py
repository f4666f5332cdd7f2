"""Records of the walk made by hand, for tests of its steps as plain Python."""

from __future__ import annotations

import math
from typing import Any

import numpy as np

from hedgerow.kernels.layout import CALL, EVENT, LOT_SHARES, PUT, TERMS, Costs, SmileModel
from hedgerow.kernels.state import (
    BAR,
    COSTS,
    LEG_SPEC,
    LIVE,
    MAX_LEGS,
    OP,
    PLAN,
    POSITION,
    SESSION,
    SMILE,
    TOTALS,
    Clock,
    Desk,
)

TODAY = 735000  # a Monday in May 2013
SPOT = 100.0
SMILED = SmileModel(
    kappa=2.0,
    ratio=1.1,
    points=0.01,
    skew=-0.11,
    curvature=0.05,
    skew_decay=0.2,
    wing=2.5,
    report_moves=5.0,
    floor=0.05,
    cap=3.0,
)
FLAT_SMILE = SmileModel(0.0, 1.0, 0.0, 0.0, 0.0, 0.0, 2.5, 1.0, 0.0001, 10.0)
FREE = Costs(*([0.0] * len(Costs._fields)))
DEAR = Costs(
    half_spread=0.03,
    spread_rise=0.5,
    floor_ticks=0.5,
    use_ticks=1.0,
    contract_fee=0.65,
    share_fee=0.01,
    trade_fee=1.0,
    assignment_fee=5.0,
    slippage=0.001,
    borrow=0.0,
)


def records(layout: np.dtype, count: int = 1, **values: Any) -> Any:
    """So many records of a layout, all with the same values; fields not named are zero."""
    out = np.zeros(count, layout).view(np.recarray)
    for name, value in values.items():
        out[name] = value
    return out


def bar(**values: Any) -> Any:
    """One symbol at one close: price 100, volatility 25 % now and in the long run, nothing expected."""
    usual = {"open": SPOT, "high": SPOT, "low": SPOT, "close": SPOT, "level": 0.25, "anchor": 0.25}
    return records(BAR, **(usual | values))[0]


def clock(**values: Any) -> Clock:
    """The close of the day at a rate of 2 %, European exercise, ticks of a cent and five."""
    usual = Clock(ordinal=TODAY, extra_days=0.0, rate=0.02, american=0, low_tick=0.01, high_tick=0.05)
    return usual._replace(**values)


def smile(model: SmileModel = FLAT_SMILE) -> Any:
    """A surface's parameters as a record."""
    return records(SMILE, **model._asdict())[0]


def costs(given: Costs = FREE) -> Any:
    """Costs as a record."""
    return np.array([tuple(given)], COSTS).view(np.recarray)[0]


def leg(right: int, strike: float, quantity: float, days: int = 30, **values: Any) -> dict[str, Any]:
    """The fields of a live leg that expires so many days from today."""
    usual = {"expiry": TODAY + days, "status": LIVE, "volatility": 0.25, "entry_price": 1.0, "mid": 1.0}
    return {"right": right, "strike": strike, "quantity": quantity} | usual | values


def call(strike: float, quantity: float, days: int = 30, **values: Any) -> dict[str, Any]:
    """A call leg."""
    return leg(CALL, strike, quantity, days, **values)


def put(strike: float, quantity: float, days: int = 30, **values: Any) -> dict[str, Any]:
    """A put leg."""
    return leg(PUT, strike, quantity, days, **values)


def position(*legs: dict[str, Any], **values: Any) -> Any:
    """A position with these legs, and other fields by name."""
    out = records(POSITION, **values)[0]
    for number, fields in enumerate(legs):
        for name, value in fields.items():
            out.legs[number][name] = value
    return out


def spec(**values: Any) -> Any:
    """One leg of a rule: a call written, one contract a lot, nothing referred to."""
    usual = {"side": -1.0, "ratio": 1.0, "with_leg": -1, "strike_leg": -1, "right": CALL}
    return records(LEG_SPEC, **(usual | values))[0]


def ops(*items: tuple[float, int, int]) -> Any:
    """Operations of a condition: (value, code, argument)."""
    return np.array(list(items), OP).view(np.recarray)


def plan(*specs: Any, **values: Any) -> Any:
    """A rule on long shares with every condition of entry free."""
    usual: dict[str, Any] = {"shares": 1.0, "opening_cash": 100_000.0, "per_position": 0.5}
    usual |= dict.fromkeys(("worst_least", "best_least", "odds_least", "ratio_least"), -math.inf)
    usual |= dict.fromkeys(
        ("net_debit_most", "worst_most", "best_most", "odds_most", "spread_most"), math.inf
    )
    usual |= {"most_positions": 10, "most_new": 10, "ladder": 1, "legs": len(specs), "judged": 1}
    out = records(PLAN, **(usual | values))[0]
    for number, given in enumerate(specs):
        out.specs[number] = given
    out.order = np.arange(MAX_LEGS)
    return out


def session(*expiries: int, **values: Any) -> Any:
    """A session's record with the expiry chosen for each leg."""
    usual = {"ordinal": TODAY, "rate": 0.02, "low_tick": 0.01, "high_tick": 0.05, "exercise_threshold": 0.01}
    out = records(SESSION, **(usual | values))[0]
    out.expiry[: len(expiries)] = expiries
    return out


def desk(
    rule: Any = None, charged: Costs = FREE, model: SmileModel = FLAT_SMILE, cash: float = 100_000.0
) -> Desk:
    """A desk with empty books and so much cash."""
    return Desk(
        plan() if rule is None else rule,
        costs(charged),
        smile(model),
        records(TOTALS, cash=cash, equity=cash)[0],
        records(EVENT, 64),
        records(TERMS, 8),
        ops((0.0, 3, 0)),
        np.zeros(64),
    )


def written(books: Desk) -> Any:
    """The events written so far."""
    return books.events[: int(books.totals.events)]


def lots(count: float = 1.0) -> float:
    """Shares in so many lots."""
    return count * LOT_SHARES
