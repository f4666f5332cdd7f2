"""Hand-made event logs: a plain bookkeeper that writes what it is told, with decimals of its own."""

from __future__ import annotations

import datetime as dt
from dataclasses import dataclass, field
from decimal import ROUND_HALF_UP, Decimal
from typing import Any

import numpy as np

from hedgerow.events.log import EventLog, LegName, LogMeta
from hedgerow.kernels import layout as at

COLLAR = (LegName("call", "sell", "call"), LegName("put", "buy", "put"))


def weekdays(count: int, first: str = "2011-01-03") -> np.ndarray:
    """So many weekdays from a Monday on, as datetime64[D]."""
    return np.busday_offset(np.datetime64(first), np.arange(count))


def cents(*factors: float) -> float:
    """The product of numbers as their shortest decimals, to the cent, halves away from zero."""
    product = Decimal(1)
    for factor in factors:
        product *= Decimal(repr(float(factor)))
    return float(product.quantize(Decimal("0.01"), ROUND_HALF_UP))


def filled(layout: np.dtype, **values: Any) -> np.ndarray:
    """One record of a layout; fields not named are zero."""
    record = np.zeros(1, dtype=layout)
    for name, value in values.items():
        record[name] = value
    return record


@dataclass
class Builder:
    """Writes events, terms, days and marks as told, and keeps cash and quantities."""

    sessions: int = 10
    symbols: tuple[str, ...] = ("ASH", "ELM")
    legs: tuple[LegName, ...] = COLLAR
    exits: tuple[str, ...] = ("trend turned", "cut")
    opening_cash: float = 100_000.0
    variant: str = "one week"
    marked: bool = True
    now: int = 0
    cash: Decimal = Decimal(0)
    events: list[np.ndarray] = field(default_factory=list)
    terms: list[np.ndarray] = field(default_factory=list)
    days: list[np.ndarray] = field(default_factory=list)
    marks: list[np.ndarray] = field(default_factory=list)
    held: dict[int, dict[int, float]] = field(default_factory=dict)
    strikes: dict[tuple[int, int], tuple[float, int]] = field(default_factory=dict)
    symbol_of: dict[int, int] = field(default_factory=dict)
    flows: dict[int, Decimal] = field(default_factory=dict)

    def __post_init__(self) -> None:
        self.dates = weekdays(self.sessions)
        self.write(at.KIND_DEPOSIT, -1, cash=self.opening_cash, symbol=-1)

    def write(self, kind: int, position: int, cash: float = 0.0, **values: Any) -> None:
        """Append one event at the current session and move its cash."""
        values.setdefault("symbol", self.symbol_of.get(position, 0))
        values.setdefault("leg", at.NO_ROW)
        self.cash += Decimal(repr(cash))
        if position >= 0:
            self.flows[position] = self.flows.get(position, Decimal(0)) + Decimal(repr(cash))
        self.events.append(
            filled(at.EVENT, session=self.now, position=position, kind=kind, cash=cash, **values)
        )

    def open(self, symbol: int, **terms: Any) -> int:
        """Open a position with its terms; return its number."""
        position = len(self.terms)
        self.symbol_of[position] = symbol
        self.held[position] = {}
        defaults = {
            "decided": max(self.now - 1, 0),
            "lots": 1.0,
            "break_even": np.nan,
            "odds_of_best": np.nan,
        }
        values = defaults | {"session": self.now, "symbol": symbol, "position": position} | terms
        self.terms.append(filled(at.TERMS, **values))
        self.write(at.KIND_OPENED, position, reason=at.WHY_ENTRY, quantity=values["lots"])
        return position

    def _add(self, position: int, leg: int, quantity: float) -> None:
        self.held[position][leg] = self.held[position].get(leg, 0.0) + quantity

    def shares(
        self,
        position: int,
        quantity: float,
        price: float,
        mid: float,
        fee: float = 0.0,
        reason: int = at.WHY_ENTRY,
    ) -> None:
        """Buy or sell shares at `price` around `mid`."""
        self._add(position, at.SHARES_ROW, quantity)
        cash = float(Decimal(repr(cents(-quantity, price))) - Decimal(repr(fee)))
        row = {
            "leg": at.SHARES_ROW,
            "quantity": quantity,
            "price": price,
            "mid": mid,
            "fee": fee,
            "spot": mid,
        }
        self.write(at.KIND_SHARES, position, cash, reason=reason, **row)

    def leg(
        self,
        position: int,
        leg: int,
        quantity: float,
        price: tuple[float, float],
        terms: tuple[float, str] | None = None,
        fee: float = 0.0,
        reason: int = at.WHY_ENTRY,
    ) -> None:
        """Buy or sell a leg at price = (fill, mid); terms = (strike, expiry) when it is a new contract."""
        if terms is not None:
            self.strikes[position, leg] = (terms[0], dt.date.fromisoformat(terms[1]).toordinal())
        self._add(position, leg, quantity)
        cash = float(Decimal(repr(cents(-quantity, price[0]))) - Decimal(repr(fee)))
        row = {"quantity": quantity, "price": price[0], "mid": price[1], "fee": fee}
        self.write(at.KIND_LEG, position, cash, reason=reason, **row, **self._contract(position, leg))

    def _contract(self, position: int, leg: int) -> dict[str, Any]:
        strike, expiry = self.strikes[position, leg]
        return {"leg": leg, "strike": strike, "expiry": expiry}

    def expired(self, position: int, leg: int, spot: float) -> None:
        """A leg ends worthless."""
        quantity = -self.held[position][leg]
        self._add(position, leg, quantity)
        row = {"quantity": quantity, "spot": spot, "reason": at.WHY_EXPIRY}
        self.write(at.KIND_EXPIRED, position, **row, **self._contract(position, leg))

    def delivered(
        self, position: int, leg: int, spot: float, fee: float = 0.0, reason: int = at.WHY_EXPIRY
    ) -> None:
        """A leg is exercised or assigned and its shares move at the strike."""
        held = self.held[position][leg]
        kind = at.KIND_EXERCISED if held > 0 else at.KIND_ASSIGNED
        self._add(position, leg, -held)
        contract = self._contract(position, leg)
        row = {"quantity": -held, "spot": spot, "fee": fee, "reason": reason}
        self.write(kind, position, -fee, **row, **contract)
        moved = held if self.legs[leg].right == "call" else -held
        self.shares(position, moved, contract["strike"], contract["strike"], reason=reason)

    def settled(self, position: int, leg: int, spot: float, worth: float, fee: float = 0.0) -> None:
        """A leg is settled in cash for what it is worth."""
        held = self.held[position][leg]
        kind = at.KIND_EXERCISED if held > 0 else at.KIND_ASSIGNED
        self._add(position, leg, -held)
        cash = float(Decimal(repr(cents(held, worth))) - Decimal(repr(fee)))
        row = {
            "quantity": -held,
            "price": worth,
            "mid": worth,
            "spot": spot,
            "fee": fee,
            "reason": at.WHY_EXPIRY,
        }
        self.write(kind, position, cash, **row, **self._contract(position, leg))

    def dividend(self, position: int, amount: float) -> None:
        """Shares held earn a dividend."""
        quantity = self.held[position][at.SHARES_ROW]
        row = {"quantity": quantity, "price": amount, "mid": amount}
        self.write(at.KIND_DIVIDEND, position, cents(quantity, amount), **row)

    def split(self, position: int, ratio: float) -> None:
        """New shares for old; strikes fall."""
        self.write(at.KIND_SPLIT, position, quantity=ratio)
        for leg in self.held[position]:
            self.held[position][leg] *= ratio
        for key, (strike, expiry) in list(self.strikes.items()):
            if key[0] == position:
                self.strikes[key] = (strike / ratio, expiry)

    def close(self, position: int, reason: int = at.WHY_EXPIRY) -> None:
        """The position is over; its result is what its cash came to."""
        self.write(at.KIND_CLOSED, position, reason=reason, price=float(self.flows[position]))
        del self.held[position]

    def night(
        self, spots: dict[int, float] | None = None, mids: dict[tuple[int, int], float] | None = None
    ) -> None:
        """End the session: mark what is held (spots by symbol, mids by position and leg) and go on."""
        stock = options = 0.0
        for position, held in self.held.items():
            spot = (spots or {}).get(self.symbol_of[position], 0.0)
            values = {leg: q * (mids or {}).get((position, leg), 0.0) for leg, q in held.items() if leg >= 0}
            shares = held.get(at.SHARES_ROW, 0.0)
            stock, options = stock + shares * spot, options + sum(values.values())
            gain = float(self.flows[position]) + shares * spot + sum(values.values())
            names = {f"leg{leg}": value for leg, value in values.items()}
            row = {"session": self.now, "position": position, "shares": shares, "spot": spot, "gain": gain}
            self.marks.append(filled(at.MARK, **row, **names))
        cash = float(self.cash)
        row = {
            "session": self.now,
            "positions": len(self.held),
            "cash": cash,
            "stock": stock,
            "options": options,
        }
        self.days.append(filled(at.DAY, **row, equity=cash + stock + options))
        self.now += 1

    def log(self) -> EventLog:
        """The log as it stands."""
        meta = LogMeta(
            symbols=self.symbols,
            dates=self.dates,
            legs=self.legs,
            exits=self.exits,
            strategy="Weekly collar",
            variant=self.variant,
            opening_cash=self.opening_cash,
            currency="USD",
        )
        return EventLog.join(meta, self.events, self.terms, self.days, self.marks if self.marked else [])


def collar_that_is_called(variant: str = "one week") -> Builder:
    """Two lots of ASH at 50 with a 51 call and a 48 put; a dividend; the call is assigned at 53.

    Stock bought 200 at 50.01 (mid 50.00), fee 1.00; call sold at 0.78 (0.80), put bought at 0.42 (0.40), fee
    1.30 each. Paid before fees: 10,002 - 156 + 84 = 9,930. Best gain 10,200 - 9,930 = 270; worst 330.
    """
    book = Builder(variant=variant)
    book.night()
    terms = {"net_debit": 9930.0, "option_credit": 72.0, "best_gain": 270.0, "worst_loss": 330.0}
    entry = {"lots": 2.0, "shares": 200.0, "stock_price": 50.01, "break_even": 49.65, "odds_of_best": 0.4}
    place = book.open(0, **terms, **entry, first_expiry=dt.date(2011, 1, 7).toordinal())
    book.shares(place, 200.0, 50.01, 50.0, fee=1.0)
    book.leg(place, 0, -200.0, (0.78, 0.80), (51.0, "2011-01-07"), fee=1.3)
    book.leg(place, 1, 200.0, (0.42, 0.40), (48.0, "2011-01-07"), fee=1.3)
    book.night({0: 50.5}, {(place, 0): 0.9, (place, 1): 0.3})
    book.dividend(place, 0.15)
    book.night({0: 51.5}, {(place, 0): 1.2, (place, 1): 0.1})
    book.night({0: 52.0}, {(place, 0): 1.4, (place, 1): 0.05})
    book.delivered(place, 0, 53.0, fee=5.0)
    book.expired(place, 1, 53.0)
    book.close(place)
    book.night()
    return book
