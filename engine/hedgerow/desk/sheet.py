"""What a sheet says, as frozen values: the same for the terminal, the page, CSV, JSON and programs.

Money is in the account's currency, prices and premiums are per share, fractions are fractions, dates are ISO
text. What is not known, or not bounded, is NaN or inf, and null in JSON.
"""

from __future__ import annotations

import math
from collections.abc import Iterator
from dataclasses import asdict, dataclass, field
from typing import Any

import pandas as pd

from hedgerow.desk.conditions import Test
from hedgerow.desk.record import Record

__all__ = ["DECLINED", "HOLDING", "OPEN", "QUIET", "LegLine", "Limit", "Look", "Plan", "Sheet"]

OPEN, DECLINED, QUIET, HOLDING = "open", "declined", "no signal", "held"
"""What a close says of a symbol: a position is to be opened; its signals say yes but it is not made; its
signals say no; what is held there leaves no room."""


@dataclass(frozen=True, slots=True)
class LegLine:
    """One option leg: contracts, listed strike and expiry, and its premium per share.

    `price` is the fill assumed after the spread, `mid` the model's value, `low` and `high` that value over
    the stress of the premium; `chance` is of ending in the money, fraction.
    """

    name: str
    side: str
    right: str
    contracts: float
    strike: float
    expiry: str
    days: int
    price: float
    mid: float
    low: float
    high: float
    volatility: float
    chance: float

    def told(self) -> str:
        """The order in words."""
        return f"{self.side} {self.contracts:g} {self.right} {self.strike:g}"


@dataclass(frozen=True, slots=True)
class Limit:
    """The worst price at which the rule would still take the structure, per share.

    `net_debit` counts shares and options, `options` the options alone with the stock as it closed: what they
    bring (+) or cost (-). `rule` is the bound that would break first; empty where the rule sets none. `whole`
    says that it bounds shares and options together, so that `net_debit` holds wherever the stock then stands.
    """

    net_debit: float
    options: float
    rule: str
    whole: bool


@dataclass(frozen=True, slots=True)
class Plan:
    """A concrete position. Money of the whole position, before fees; the stock at the close.

    `capital` is what gains and losses are measured on: the net debit and what could be owed.
    """

    lots: float
    shares: float
    stock: float
    legs: tuple[LegLine, ...]
    net_debit: float
    debit_low: float
    debit_high: float
    option_credit: float
    credit_low: float
    credit_high: float
    best_gain: float
    worst_loss: float
    break_even: float
    odds_of_best: float
    odds_of_gain: float
    capital: float
    fees: float
    first_expiry: str
    limit: Limit
    dividends: tuple[tuple[str, float], ...]
    reports: tuple[str, ...]

    @property
    def unit(self) -> float:
        """Shares by which money is divided for a price per share: 100 a lot."""
        return 100.0 * self.lots


@dataclass(frozen=True, slots=True)
class Look:
    """What the close says of one symbol; `tests` are the conditions that fail, of an opening all of them."""

    symbol: str
    close: float
    status: str
    reason: str
    tests: tuple[Test, ...] = ()
    plan: Plan | None = None
    record: Record | None = None


@dataclass(frozen=True)
class Sheet:
    """Everything a rule says at one close."""

    name: str
    variant: str
    as_of: str
    next_session: str
    fill: str
    currency: str
    cash: float
    equity: float
    per_position: float
    ratios: tuple[float, float]
    record: Record | None
    looks: tuple[Look, ...]
    held: tuple[Any, ...] = ()
    positions_known: bool = False
    notes: tuple[str, ...] = ()
    cautions: tuple[str, ...] = field(default=(), repr=False)

    def of(self, status: str) -> tuple[Look, ...]:
        """The symbols of one status, in their order."""
        return tuple(look for look in self.looks if look.status == status)

    def as_dict(self) -> dict[str, Any]:
        """Everything as plain values for JSON; what is not finite is null."""
        return {"format": 1, **_plain(asdict(self))}

    def to_frame(self) -> pd.DataFrame:
        """One row a position held, then one a symbol; legs in columns leg1_... to leg4_..."""
        return pd.DataFrame([*(_held_row(one) for one in self.held), *(_row(look) for look in self.looks)])


def _plain(value: Any) -> Any:
    if isinstance(value, dict):
        return {key: _plain(item) for key, item in value.items()}
    if isinstance(value, list | tuple):
        return [_plain(item) for item in value]
    if isinstance(value, float) and not math.isfinite(value):
        return None
    return value


_MONEY = (
    "net_debit",
    "debit_low",
    "debit_high",
    "option_credit",
    "credit_low",
    "credit_high",
    "best_gain",
    "worst_loss",
    "break_even",
    "odds_of_best",
    "odds_of_gain",
    "capital",
    "fees",
)


def _row(look: Look) -> dict[str, Any]:
    row: dict[str, Any] = {"symbol": look.symbol, "status": look.status, "close": look.close}
    row["reason"] = "; ".join([look.reason, *(test.told() for test in look.tests)]).strip("; ")
    if look.plan is None:
        return row
    plan = look.plan
    row |= {"lots": plan.lots, "shares": plan.shares}
    row |= {name: getattr(plan, name) for name in _MONEY}
    row |= {"limit_net_debit": plan.limit.net_debit, "limit_options": plan.limit.options}
    row |= {"dividends": _joined(plan.dividends), "reports": " ".join(plan.reports)}
    for number, leg in enumerate(plan.legs, 1):
        row |= dict(_leg_cells(number, leg))
    if look.record is not None:
        row |= {"past_entries": look.record.positions, "past_mean": look.record.mean}
    return row


def _leg_cells(number: int, leg: LegLine) -> Iterator[tuple[str, Any]]:
    for name in ("name", "side", "right", "contracts", "strike", "expiry", "price", "mid", "low", "high"):
        yield f"leg{number}_{name}", getattr(leg, name)


def _joined(dividends: tuple[tuple[str, float], ...]) -> str:
    return " ".join(f"{day}:{cash:g}" for day, cash in dividends)


def _held_row(held: Any) -> dict[str, Any]:
    return dict(held.row())
