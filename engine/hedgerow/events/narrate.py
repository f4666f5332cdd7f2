"""One event as one plain sentence, one position as a story."""

from __future__ import annotations

from collections.abc import Callable
from typing import Any

import numpy as np

from hedgerow.events.kinds import leg_word, reason_word
from hedgerow.events.log import EventLog, dates_of
from hedgerow.kernels import layout as at
from hedgerow.units import money_text, number_text

__all__ = ["sentence", "story"]


def sentence(log: EventLog, index: int) -> str:
    """Return event number `index` of the log as one sentence that starts with its date."""
    event = log.events[index]
    day = log.meta.dates[event["session"]]
    return f"{day}: {_TELLERS[int(event['kind'])](log, event)}."


def story(log: EventLog, position: int) -> list[str]:
    """Return every event of one position as sentences, in order. Raises KeyError for an unknown position."""
    rows = np.flatnonzero(log.events["position"] == position)
    if not rows.size:
        raise KeyError(f"this log has no position of the number {position}; see the table of terms")
    return [sentence(log, int(row)) for row in rows]


def _symbol(log: EventLog, event: Any) -> str:
    code = int(event["symbol"])
    return log.meta.symbols[code] if code >= 0 else "the account"


def _why(log: EventLog, event: Any) -> str:
    word = reason_word(int(event["reason"]), log.meta.exits)
    return f" ({word})" if word else ""


def _cash(event: Any) -> str:
    cash, fee = float(event["cash"]), float(event["fee"])
    fees = f", {money_text(fee)} of fees counted in" if fee > 0 else ""
    if cash == 0.0 and not fees:
        return "no money moved"
    return f"{money_text(abs(cash))} {'received' if cash >= 0 else 'paid'}{fees}"


def _count(quantity: float) -> str:
    size = abs(quantity)
    return f"{size:,.0f}" if size == round(size) else f"{size:,.4g}"


def _at(event: Any) -> str:
    price, mid = float(event["price"]), float(event["mid"])
    middle = "" if abs(price - mid) < 0.00005 else f" (middle {number_text(mid, 4)})"
    return f"at {number_text(price, 4)}{middle}"


def _option(log: EventLog, event: Any) -> str:
    leg = int(event["leg"])
    name = leg_word(leg, log.meta.leg_names)
    right = log.meta.legs[leg].right
    kind = right if right in name else f"{name}, a {right},"
    contracts = _count(float(event["quantity"]) / at.LOT_SHARES)
    noun = "contract" if contracts == "1" else "contracts"
    strike = number_text(float(event["strike"]), 2)
    expiry = dates_of(np.array([event["expiry"]]))[0]
    until = "" if np.isnat(expiry) else f" to {expiry.astype('datetime64[D]')}"
    named = name if kind == right else kind
    return f"{contracts} {noun} of the {named} struck at {strike}{until}"


def _deposit(_log: EventLog, event: Any) -> str:
    return f"The account opens with {money_text(float(event['cash']))}"


def _opened(log: EventLog, event: Any) -> str:
    return f"Position {event['position']} in {_symbol(log, event)} is opened{_why(log, event)}"


def _shares(log: EventLog, event: Any) -> str:
    verb = "Bought" if event["quantity"] > 0 else "Sold"
    what = f"{_count(float(event['quantity']))} shares of {_symbol(log, event)}"
    return f"{verb} {what} {_at(event)}{_why(log, event)}: {_cash(event)}"


def _leg(log: EventLog, event: Any) -> str:
    verb = "Bought" if event["quantity"] > 0 else "Sold"
    what = f"{_option(log, event)} on {_symbol(log, event)}"
    return f"{verb} {what} {_at(event)}{_why(log, event)}: {_cash(event)}"


def _expired(log: EventLog, event: Any) -> str:
    spot = number_text(float(event["spot"]), 2)
    return f"{_option(log, event)} on {_symbol(log, event)} ended worthless with the stock at {spot}"


def _delivered(word: str) -> Callable[[EventLog, Any], str]:
    def tell(log: EventLog, event: Any) -> str:
        spot = number_text(float(event["spot"]), 2)
        cash = f", settled {_at(event)}" if event["price"] > 0 else ""
        verb = "was" if abs(event["quantity"]) == at.LOT_SHARES else "were"
        what = f"{_option(log, event)} on {_symbol(log, event)} {verb} {word} with the stock at {spot}{cash}"
        return f"{what}{_why(log, event)}: {_cash(event)}"

    return tell


def _dividend(log: EventLog, event: Any) -> str:
    verb = "earned" if event["cash"] >= 0 else "owed"
    held = f"{_count(float(event['quantity']))} shares of {_symbol(log, event)}"
    return f"{held} {verb} a dividend of {number_text(float(event['price']), 4)} a share: {_cash(event)}"


def _split(log: EventLog, event: Any) -> str:
    return f"{_symbol(log, event)} was split, {float(event['quantity']):g} new shares for one old"


def _interest(_log: EventLog, event: Any) -> str:
    return f"Interest on cash: {_cash(event)}"


def _borrow(log: EventLog, event: Any) -> str:
    return f"Cost of borrowing shares of {_symbol(log, event)}: {_cash(event)}"


def _declined(log: EventLog, event: Any) -> str:
    reason = reason_word(int(event["reason"]), log.meta.exits)
    if event["position"] >= 0:
        leg = leg_word(int(event["leg"]), log.meta.leg_names)
        return f"The leg `{leg}` of {_symbol(log, event)} was left as it is: {reason}"
    times = "" if event["quantity"] <= 1 else f" {_count(float(event['quantity']))} times"
    return f"An entry in {_symbol(log, event)} was declined{times}: {reason}"


def _signalled(log: EventLog, event: Any) -> str:
    reason = reason_word(int(event["reason"]), log.meta.exits)
    return f"At the close, an order for {_symbol(log, event)} was decided: {reason}"


def _closed(log: EventLog, event: Any) -> str:
    result = number_text(float(event["price"]), 2, signed=True)
    return f"Position {event['position']} in {_symbol(log, event)} is over{_why(log, event)}: result {result}"


def _margin_call(_log: EventLog, event: Any) -> str:
    return f"Equity is {money_text(float(event['price']))} short of the maintenance margin"


def _gone(log: EventLog, event: Any) -> str:
    return f"{_symbol(log, event)} has had no price for 5 sessions"


_TELLERS: tuple[Callable[[EventLog, Any], str], ...] = (
    _deposit,
    _opened,
    _shares,
    _leg,
    _expired,
    _delivered("exercised"),
    _delivered("assigned"),
    _dividend,
    _split,
    _interest,
    _borrow,
    _declined,
    _signalled,
    _closed,
    _gone,
    _margin_call,
)
