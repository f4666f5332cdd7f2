"""What a walk holds at a close before anything is decided there, written as a person would write it down."""

from __future__ import annotations

import datetime as dt
from dataclasses import dataclass, field
from typing import Any

from hedgerow.events.log import EventLog
from hedgerow.kernels import layout as at

Name = tuple[str, str]
SETTLED = (at.KIND_EXPIRED, at.KIND_EXERCISED, at.KIND_ASSIGNED)


@dataclass
class Kept:
    """One position while its events are read."""

    terms: Any
    shares: float = 0.0
    share_price: float = 0.0
    flows: float = 0.0
    outlay: float = 0.0
    changed: bool = False
    legs: dict[int, dict[str, float]] = field(default_factory=dict)

    def take(self, event: Any) -> None:
        """Keep one event."""
        kind, leg = int(event["kind"]), int(event["leg"])
        self.flows += float(event["cash"])
        if kind == at.KIND_SHARES:
            if not self.shares:
                self.share_price = float(event["price"])
            self.shares += float(event["quantity"])
            self.outlay += float(event["quantity"] * event["price"])
        elif kind == at.KIND_LEG:
            self._trade(leg, event)
        elif kind in SETTLED:
            self.outlay += float(event["quantity"] * event["price"])
            self.legs.pop(leg, None)
            self.changed = True
        elif kind == at.KIND_SPLIT:
            self._split(float(event["quantity"]))

    def name(self, log: EventLog) -> Name:
        """The symbol and the day of opening, which a sheet names a position by."""
        symbol, day = int(self.terms["symbol"]), int(self.terms["session"])
        return log.meta.symbols[symbol], str(log.meta.dates[day])

    def _trade(self, leg: int, event: Any) -> None:
        self.outlay += float(event["quantity"] * event["price"])
        self.changed = self.changed or event["reason"] != at.WHY_ENTRY
        if leg in self.legs:
            del self.legs[leg]
            return
        names = ("quantity", "strike", "expiry", "price", "mid")
        self.legs[leg] = {name: float(event[name]) for name in names}

    def _split(self, ratio: float) -> None:
        self.shares *= ratio
        self.share_price /= ratio
        for leg in self.legs.values():
            leg["quantity"] *= ratio
            for name in ("strike", "price", "mid"):
                leg[name] /= ratio

    def words(self, log: EventLog) -> dict[str, Any]:
        """The position in the words of a file."""
        terms = self.terms
        paid = self.shares * self.share_price + sum(
            leg["quantity"] * leg["price"] for leg in self.legs.values()
        )
        words: dict[str, Any] = {
            "symbol": self.name(log)[0],
            "opened": self.name(log)[1],
            "shares": round(abs(self.shares)),
            "legs": {log.meta.legs[k].name: self._leg(leg) for k, leg in self.legs.items()},
            "premiums": paid - self.outlay,
            "income": self.flows + self.outlay,
        }
        tied = float(terms["net_debit"] + terms["reserve"])
        tied = max(tied, -float(terms["shares"] * terms["stock_price"]))
        if tied > 0.0:
            words["tied_up"] = tied
        if self.shares:
            words["stock_price"] = self.share_price
        if not self.changed:
            words |= {name: float(terms[name]) for name in ("best_gain", "worst_loss")}
        return {name: value for name, value in words.items() if value is not None and abs_ok(value)}

    def _leg(self, leg: dict[str, float]) -> dict[str, Any]:
        expiry = dt.date.fromordinal(int(leg["expiry"])).isoformat()
        contracts = abs(leg["quantity"]) / at.LOT_SHARES
        return {name: leg[name] for name in ("strike", "price", "mid")} | {
            "expiry": expiry,
            "contracts": contracts,
        }


def abs_ok(value: Any) -> bool:
    """Whether a value can be written: unbounded figures, and nothing tied up, are left out."""
    return not isinstance(value, float) or (abs(value) < 1e12)


def at_the_close(event: Any, day: int, fills_at_close: bool) -> bool:
    """Whether an event of the day itself belongs to its close rather than to its morning."""
    kind, reason = int(event["kind"]), int(event["reason"])
    if kind in SETTLED and event["expiry"] == day and reason == at.WHY_EXPIRY:
        return True
    if kind in (at.KIND_SIGNALLED, at.KIND_DECLINED, at.KIND_MARGIN_CALL):
        return True
    return (
        fills_at_close
        and kind not in (at.KIND_DIVIDEND, at.KIND_SPLIT, at.KIND_INTEREST, at.KIND_BORROW)
        and (reason != at.WHY_ASSIGNED_EARLY)
    )


def positions_before(
    log: EventLog, session: int, fills_at_close: bool
) -> tuple[dict[str, Any], dict[int, Name]]:
    """The words of a file of positions at a close, and the name of each position held by its number."""
    day = log.meta.dates[session].astype(object).toordinal()
    cash, held, lost, over = 0.0, {}, {}, set()
    terms = {int(one["position"]): one for one in log.terms}
    for event in log.events[log.events["session"] <= session]:
        number = int(event["position"])
        if event["session"] == session and (number in over or at_the_close(event, day, fills_at_close)):
            over.add(number if number >= 0 else None)
            continue
        cash += float(event["cash"])
        if number < 0:
            continue
        held.setdefault(number, Kept(terms[number])).take(event)
        if event["kind"] == at.KIND_CLOSED:
            del held[number]
            if event["price"] < 0.0:
                lost[log.meta.symbols[int(event["symbol"])]] = str(log.meta.dates[int(event["session"])])
            else:
                lost.pop(log.meta.symbols[int(event["symbol"])], None)
    words = {
        "cash": round(cash, 2),
        "positions": [kept.words(log) for kept in held.values()],
        "lost": [{"symbol": symbol, "closed": closed} for symbol, closed in lost.items()],
    }
    return words, {number: kept.name(log) for number, kept in held.items()}
