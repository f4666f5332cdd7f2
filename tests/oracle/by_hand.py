"""Ten-session markets with what must happen in them, worked out by hand, each cent.

Every market runs from Monday 2024-01-08 to Monday 2024-01-22 (Monday the 15th is a holiday, so Friday the
12th is session 4 and Friday the 19th session 8). Volatility is observed at 30 % with a flat smile, interest
nothing unless said, and there is one entry, decided on the first Monday and filled on Tuesday at 50.00. The
account is 12,000, enough for two lots.

Premiums were worked out apart from this project with the Black-Scholes formula and a table of the normal: on
Tuesday's open there are 10 days and 6.5 hours, .028139 years, to Friday the 19th, and a 51 call is worth
.5912, a 48 put .2905 (d1 -.3683 and .8364). The days' equities follow in the same way.
"""

from __future__ import annotations

from dataclasses import dataclass, field
from typing import Any

from hedgerow.market.table import Market
from oracle.words import Setting
from properties.markets import one_stock

NAN = float("nan")
SURFACE = {"observed": "column", "skew": 0.0, "curvature": 0.0, "report_moves": 1.0}
MONDAY = {"when": {"signal": "weekday", "is": ["monday"]}}
CALL = {
    "sell": "call",
    "expiry": {"days": 11, "listed": "weekly"},
    "strike": {"from_spot": "2%", "snap": "up"},
}
PUT = {
    "buy": "put",
    "expiry": {"days": 11, "listed": "weekly"},
    "strike": {"from_spot": "-4%", "snap": "down"},
}
DEEP = CALL | {"strike": {"from_spot": "-10%", "snap": "up"}}
WEEK = CALL | {"expiry": {"days": 4, "listed": "weekly"}, "roll": {"at": "expiry"}}
COVERED_CALL = {"name": "Covered call", "legs": {"call": CALL}, "enter": MONDAY}
COLLAR = {
    "name": "Collar",
    "legs": {"call": CALL, "put": PUT | {"expiry": {"with": "call"}}},
    "enter": MONDAY,
}
MARRIED_PUT = {"name": "Married put", "legs": {"put": PUT}, "enter": MONDAY}
CASH_PUT = {
    "name": "Cash-secured put",
    "shares": "none",
    "legs": {"put": PUT | {"strike": {"from_spot": "-2%", "snap": "down"}}},
    "enter": MONDAY,
}
CASH_PUT["legs"]["put"] = {"sell": "put"} | {k: v for k, v in CASH_PUT["legs"]["put"].items() if k != "buy"}
WEEK_PUT = CASH_PUT["legs"]["put"] | {"expiry": {"days": 4, "listed": "weekly"}, "roll": {"at": "expiry"}}
WEEKLY_CASH_PUT = CASH_PUT | {"name": "Weekly cash-secured put", "legs": {"put": WEEK_PUT}}
TWO_MONTHS = {"name": "Weekly call over a put", "legs": {"call": WEEK, "put": PUT}, "enter": MONDAY}
STOP = {"stop": {"below_entry": "7%"}}

STILL = [50.0] * 10
RISING = [50, 50, 50.5, 51, 51.5, 52, 52.5, 53, 53.5, 54]
CRASHING = [50, 50, 50, 50, 50, 40, 41, 41, 41, 41]
FALLING = [50, 50, 49.5, 49, 48.5, 48, 47.5, 47, 46.5, 46]
COSTS = {"half_spread": 0.04, "floor_ticks": 0.5, "use_ticks": 1.0, "contract_fee": 0.65}
COSTS |= {"assignment_fee": 5.0, "slippage": 0.001, "trade_fee": 1.0}
GAPPING = {"close": [50, 50, 50, 50, 50, 44, 44.5, 44, 43, 43]}
GAPPING["open"] = [50, 50, 50, 50, 50, 44.25, 44, 44, 44, 43]
TOUCHING = {"close": [50] * 5 + [47] * 5, "open": [50] * 5 + [49] + [47] * 4, "low": [50] * 5 + [46] * 5}


@dataclass(frozen=True)
class Case:
    """One market, one rule, and what must happen."""

    name: str
    strategy: dict[str, Any]
    columns: dict[str, Any]
    events: str
    last_equity: float
    costs: dict[str, float] = field(default_factory=dict)

    @property
    def lines(self) -> list[str]:
        """The events, a line each."""
        return [line.strip() for line in self.events.strip().splitlines()]

    @property
    def market(self) -> Market:
        """The market of the case."""
        words = {"implied": [0.3] * 10} | self.columns
        closes = words.pop("close")
        return one_stock(closes, **words)

    @property
    def setting(self) -> Setting:
        """The account, costs and surface of the case."""
        return Setting(cash=12000.0, costs=self.costs, surface=SURFACE)


def at(session: int, value: float, nothing: float = 0.0) -> list[float]:
    """Ten sessions of nothing, but for one."""
    return [value if t == session else nothing for t in range(10)]
