"""The account, its positions and legs, and the list of what happened; money is kept in whole cents."""

from __future__ import annotations

import math
from dataclasses import dataclass, field
from typing import Any

from hedgerow.kernels import layout

SHARES_ROW, NO_ROW = layout.SHARES_ROW, layout.NO_ROW


def to_cents(money: float) -> int:
    """Whole cents, halves away from zero."""
    cents = math.floor(abs(money) * 100.0 + 0.5)
    return cents if money >= 0.0 else -cents


@dataclass
class Leg:
    """One option leg of a position; no quantity means that it is not held."""

    rule: Any
    quantity: float = 0.0
    strike: float = 0.0
    expiry: int = 0
    paid: float = 0.0  # its value a share when it was opened
    mid: float = 0.0  # its value a share when last seen
    due: bool = False  # ended and is to be written again
    ordered: tuple[float, int] | None = None  # strike and expiry to be opened with the next orders
    reason: int = 0  # why it is to be opened

    @property
    def live(self) -> bool:
        """Whether it is held."""
        return self.quantity != 0.0


@dataclass
class Position:
    """Shares and legs of one symbol, from the fill of their order on."""

    number: int
    symbol: int
    lots: float
    legs: list[Leg]
    shares: float = 0.0
    units: float = 0.0  # shares' worth of a contract per 100 shares where no shares are held
    entered: int = 0
    stock_price: float = 0.0
    stop_price: float = 0.0
    stop_from: int = 0
    flows: int = 0  # cents
    outlay: float = 0.0  # paid for shares and legs before fees, received counted off
    base: float = 0.0  # money on which gains are measured
    best: float = math.inf
    worst: float = math.inf
    reserve: float = 0.0
    closing: int = 0  # reason of an ordered end
    ended: bool = False  # a leg has ended since the last close
    silent: int = 0
    last_close: float = math.nan
    slot: int = 0  # its symbol's place, or one of several on a ladder
    decided: int = 0  # session at whose close it was ordered

    def held(self) -> list[Leg]:
        """Legs that are held."""
        return [leg for leg in self.legs if leg.live]


@dataclass
class Order:
    """A new position decided at a close, to be filled at the next open."""

    symbol: int
    lots: float
    terms: list[tuple[float, int]]  # strike and expiry of each leg; (0, 0) for one that comes later
    promised: float
    slot: int = 0
    decided: int = 0


@dataclass
class Book:
    """Cash in cents and the events that moved it."""

    cents: int = 0
    events: list[dict[str, Any]] = field(default_factory=list)

    @property
    def cash(self) -> float:
        """Cash as money."""
        return self.cents / 100.0

    def write(self, t: int, symbol: int, number: int, kind: int, reason: int, **more: Any) -> dict[str, Any]:
        """Append an event; what is not given is nothing."""
        event: dict[str, Any] = {
            "session": t,
            "symbol": symbol,
            "position": number,
            "kind": kind,
            "leg": NO_ROW,
            "reason": reason,
            "quantity": 0.0,
            "price": 0.0,
            "mid": 0.0,
            "fee": 0.0,
            "cash": 0.0,
            "strike": 0.0,
            "expiry": 0,
        }
        event.update(more)
        self.events.append(event)
        return event

    def pay(self, position: Position | None, event: dict[str, Any], money: float) -> None:
        """Move cash, in whole cents, for an event and for the position it belongs to."""
        cents = to_cents(money)
        event["cash"] = cents / 100.0
        self.cents += cents
        if position is not None:
            position.flows += cents
