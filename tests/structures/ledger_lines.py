"""What must happen to a structure, written as lines, and what each line comes to: plain arithmetic.

A line is `session moment reason what ...`. The moment is `night` (yesterday's close), `open`, `close`, or
`at:46.50` for a price reached during the day; shares and premiums are priced there. What may be

    ordered 2            entry ordered, lots               opened 2       position begun, lots
    shares +200          traded at the moment's price      shares -200 51 delivered at 51
    call -200 51 02-16   premium by the formula            call +200      out of the leg that is held
    call expired | exercised | assigned                    call ordered 53 03-15  roll or addition ordered
    leaving              an exit ordered                   dividend 0.50  a share
    borrow               of the shares sold short          split 2        new shares for one old
    over -581.75         the position's whole result       declined 1     an entry not made
    interest             on a loan, 1.5 % a year           called 2600    for that much maintenance

A line is about the position opened last, or about the one named by `#0`, `#1` at the end. Premiums are
those of Black and Scholes without interest and dividends (Hull, Options, Futures and Other Derivatives) at a
volatility of 30 %, on time in days of 24 hours over 365; at an open six and a half hours of the day remain.
An option without interest and dividends is worth the same whether it may be exercised early or not.
"""

from __future__ import annotations

import math
from dataclasses import dataclass, field
from datetime import date
from statistics import NormalDist
from typing import Any

from hedgerow.kernels import layout as at

VOLATILITY = 0.30
KINDS = {"expired": at.KIND_EXPIRED, "exercised": at.KIND_EXERCISED, "assigned": at.KIND_ASSIGNED}
REASONS = {
    n[4:].lower(): code for n, code in vars(at).items() if n.startswith("WHY_") and code < at.WHY_EXIT_RULE
}
PHI = NormalDist().cdf


def premium(right: str, spot: float, strike: float, days: float) -> float:
    """Money a share."""
    if days <= 0.0:
        return max(spot - strike, 0.0) if right == "call" else max(strike - spot, 0.0)
    spread = VOLATILITY * math.sqrt(days / 365.0)
    d1 = math.log(spot / strike) / spread + spread / 2.0
    value = spot * PHI(d1) - strike * PHI(d1 - spread)
    return value if right == "call" else value - spot + strike


def cents(money: float) -> float:
    """Halves away from zero."""
    return math.copysign(math.floor(abs(money) * 100.0 + 0.5) / 100.0, money) + 0.0


@dataclass
class Leg:
    """A leg held: shares' worth, strike, last day."""

    quantity: float
    strike: float
    expiry: date


@dataclass
class Held:
    """A position: its shares, legs, and every cash flow so far."""

    shares: float = 0.0
    legs: dict[str, Leg] = field(default_factory=dict)
    flows: float = 0.0


@dataclass
class Reckoner:
    """Works the lines out, one after another; `wrong` gathers results that are not those written."""

    days: list[date]
    open: list[float]
    close: list[float]
    rights: dict[str, str]
    costs: dict[str, float]
    exits: list[str]
    cash: float
    positions: dict[int, Held] = field(default_factory=dict)
    closed: int = 0  # sessions whose close has been looked at
    wrong: list[str] = field(default_factory=list)

    def spot(self, session: int, moment: str) -> tuple[float, float]:
        """The stock's price at a moment, and days still to go on that date."""
        if moment == "night":
            return self.close[session - 1], 0.0
        if moment == "close":
            return self.close[session], 0.0
        return (self.open[session] if moment == "open" else float(moment[3:])), 6.5 / 24.0

    def cost(self, name: str) -> float:
        """One of the costs; nothing unless given."""
        return self.costs.get(name, 0.0)

    def worth(self, name: str, leg: Leg, session: int, moment: str) -> float:
        """The mid of a leg, money a share."""
        spot, left = self.spot(session, moment)
        return premium(self.rights[name], spot, leg.strike, (leg.expiry - self.days[session]).days + left)

    def expiry(self, word: str) -> date:
        """The date `02-16` of the market's year."""
        return date.fromisoformat(f"{self.days[0].year}-{word}")

    def event(self, line: str) -> dict[str, Any]:
        """The event of one line, its cash counted."""
        words = line.split()
        number = len(self.positions) if words[3] == "opened" else max(0, len(self.positions) - 1)
        if words[-1].startswith("#"):
            number = int(words.pop()[1:])
        session, moment, reason = int(words[0]), words[1], words[2].replace("-", " ")
        code = REASONS.get(reason.replace(" ", "_"))
        out = {"session": session, "reason": 100 + self.exits.index(reason) if code is None else code}
        out |= {"leg": at.NO_ROW, "quantity": 0.0, "price": 0.0, "fee": 0.0, "cash": 0.0}
        out |= {"strike": 0.0, "expiry": 0, "position": number}
        out |= self._filled(words[3], words[4:], session, moment, number)
        self.cash = cents(self.cash + out["cash"])
        if out["position"] >= 0:
            self.positions[number].flows += out["cash"]
        return out

    def _filled(self, what: str, rest: list[str], session: int, moment: str, number: int) -> dict[str, Any]:
        """The fields that are particular to what happens."""
        if what in ("ordered", "declined"):
            kind = at.KIND_SIGNALLED if what == "ordered" else at.KIND_DECLINED
            return {"kind": kind, "position": -1, "quantity": float(rest[0])}
        if what in ("interest", "called"):
            return self._owed(what, rest, session)
        if what == "opened":
            self.positions[number] = Held()
            return {"kind": at.KIND_OPENED, "quantity": float(rest[0])}
        held = self.positions[number]
        if what == "leaving":
            return {"kind": at.KIND_SIGNALLED}
        if what == "over":
            if float(rest[0]) != cents(held.flows):
                self.wrong.append(f"{session}: {rest[0]} is written, and the cash comes to {held.flows:+.2f}")
            self.positions[number] = Held()
            return {"kind": at.KIND_CLOSED, "price": cents(held.flows)}
        if what == "split":
            return self._split(held, float(rest[0]))
        if what in ("shares", "dividend", "borrow"):
            return self._shares(held, what, rest, session, moment)
        return self._leg(held, what, rest, session, moment)

    def _owed(self, what: str, rest: list[str], session: int) -> dict[str, Any]:
        """Interest on cash that is owed, or by how much equity falls short of the maintenance written."""
        if what == "called":
            return {
                "kind": at.KIND_MARGIN_CALL,
                "position": -1,
                "price": float(rest[0]) - self.equity(session),
            }
        growth = math.exp(0.015 * (self.days[session] - self.days[session - 1]).days / 365.0) - 1.0
        row = {"kind": at.KIND_INTEREST, "position": -1, "quantity": self.cash, "price": growth}
        return row | {"cash": cents(self.cash * growth)}

    def _split(self, held: Held, ratio: float) -> dict[str, Any]:
        """New shares for old, and strikes that much lower."""
        held.shares *= ratio
        for leg in held.legs.values():
            leg.quantity, leg.strike = leg.quantity * ratio, leg.strike / ratio
        return {"kind": at.KIND_SPLIT, "quantity": ratio}

    def _shares(self, held: Held, what: str, rest: list[str], session: int, moment: str) -> dict[str, Any]:
        """Shares traded or delivered, their dividend, or the cost of borrowing them."""
        if what == "dividend":
            amount = float(rest[0])
            paid = cents(held.shares * amount)
            return {"kind": at.KIND_DIVIDEND, "quantity": held.shares, "price": amount, "cash": paid}
        if what == "borrow":
            days = (self.days[session] - self.days[session - 1]).days
            price = self.cost("borrow") * days / 365.0 * self.close[session - 1]
            paid = cents(held.shares * price)
            return {"kind": at.KIND_BORROW, "quantity": held.shares, "price": price, "cash": paid}
        quantity, fee = float(rest[0]), 0.0
        price = float(rest[1]) if len(rest) > 1 else 0.0
        if len(rest) == 1:
            fee = self.cost("trade_fee")
            price = self.spot(session, moment)[0] * (1.0 + math.copysign(self.cost("slippage"), quantity))
        held.shares += quantity
        row = {"kind": at.KIND_SHARES, "leg": at.SHARES_ROW, "quantity": quantity, "price": price, "fee": fee}
        return row | {"cash": cents(-quantity * price - fee)}

    def _leg(self, held: Held, name: str, rest: list[str], session: int, moment: str) -> dict[str, Any]:
        """A leg traded, ended, or ordered."""
        row: dict[str, Any] = {"leg": list(self.rights).index(name)}
        if rest[0] == "ordered":
            strike, expiry = float(rest[1]), self.expiry(rest[2]).toordinal()
            return row | {"kind": at.KIND_SIGNALLED, "strike": strike, "expiry": expiry}
        if rest[0] in KINDS:
            leg = held.legs.pop(name)
            fee = 0.0 if rest[0] == "expired" else self.cost("assignment_fee")
            row |= {"kind": KINDS[rest[0]], "quantity": -leg.quantity, "fee": fee, "cash": cents(-fee)}
            return row | {"strike": leg.strike, "expiry": leg.expiry.toordinal()}
        quantity = float(rest[0])
        if len(rest) > 1:
            leg = held.legs[name] = Leg(quantity, float(rest[1]), self.expiry(rest[2]))
        else:
            leg = held.legs.pop(name)
        mid = self.worth(name, leg, session, moment)
        price = mid * (1.0 + math.copysign(self.cost("half_spread"), quantity))
        fee = self.cost("contract_fee") * abs(quantity) / 100.0
        row |= {"kind": at.KIND_LEG, "quantity": quantity, "price": price, "fee": fee}
        row |= {"strike": leg.strike, "expiry": leg.expiry.toordinal()}
        return row | {"cash": cents(-quantity * price - fee)}

    def equity(self, session: int) -> float:
        """Cash, shares at the close, legs at their mids."""
        total = self.cash
        for held in self.positions.values():
            total += held.shares * self.close[session]
            total += sum(
                leg.quantity * self.worth(name, leg, session, "close") for name, leg in held.legs.items()
            )
        return total
