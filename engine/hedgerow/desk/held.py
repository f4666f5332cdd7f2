"""Positions held: what the rule does with each at the close, and how far each of its triggers is."""

from __future__ import annotations

import math
from collections.abc import Iterator
from dataclasses import dataclass
from typing import Any

import numpy as np

from hedgerow.desk.book import Book
from hedgerow.desk.close import Close, Evening, triggers
from hedgerow.desk.conditions import Sight, Test, how_joined, position_tests
from hedgerow.desk.structure import day_of, dividends_until, reports_until
from hedgerow.events.kinds import reason_word
from hedgerow.kernels import layout as at
from hedgerow.kernels.layout import LOT_SHARES, Floats
from hedgerow.kernels.lognormal import intrinsic
from hedgerow.rules.condition import Condition
from hedgerow.rules.schema import Strategy
from hedgerow.units import number_text, percent_text

__all__ = ["HeldLeg", "HeldLine", "Trigger", "held_lines"]

HOLD = "hold"


@dataclass(frozen=True, slots=True)
class HeldLeg:
    """One leg held. Prices are per share; `away` is the strike over the stock's price less 1.

    `time_value` is the mid less what exercise would bring; `chance` of ending in the money. Of a written leg
    `exercised` says whether its holder would exercise it at this price, a call before the ex-date `due`, and
    `reach` is its chance of being in the money then.
    """

    name: str
    side: str
    right: str
    contracts: float
    strike: float
    expiry: str
    days: int
    paid: float
    mid: float
    time_value: float
    away: float
    chance: float
    due: str
    reach: float
    exercised: bool


@dataclass(frozen=True, slots=True)
class Trigger:
    """One exit or roll rule, or the stop, with its plain parts and whether it is what the close decided.

    `joined` says how the parts make the whole. `idle`: it holds, and yet nothing is moved, since what the leg
    would move to is not allowed.
    """

    name: str
    decided: bool
    tests: tuple[Test, ...]
    joined: str = ""
    idle: bool = False


@dataclass(frozen=True, slots=True)
class HeldLine:
    """One position held: its value now, what the close decides, and the distance to every trigger.

    Money is of the whole position; `gain` is so far at the model's mid, `gain_share` of what it tied up at
    entry, `leaving` what closing all of it would bring after the spread.
    """

    symbol: str
    opened: str
    sessions: int
    close: float
    shares: float
    stock_price: float
    gain: float
    gain_share: float
    leaving: float
    best_gain: float
    worst_loss: float
    verdict: str
    orders: tuple[str, ...]
    legs: tuple[HeldLeg, ...]
    triggers: tuple[Trigger, ...]
    dividends: tuple[tuple[str, float], ...]
    reports: tuple[str, ...]

    def row(self) -> dict[str, Any]:
        """The position as one row of the table."""
        row: dict[str, Any] = {"symbol": self.symbol, "status": "position", "close": self.close}
        row |= {"reason": "; ".join([self.verdict, *self.orders]), "shares": self.shares}
        row |= {"best_gain": self.best_gain, "worst_loss": self.worst_loss, "opened": self.opened}
        row |= {"gain": self.gain, "gain_share": self.gain_share, "leaving": self.leaving}
        for number, leg in enumerate(self.legs, 1):
            for name in ("name", "side", "right", "contracts", "strike", "expiry", "mid"):
                row[f"leg{number}_{name}"] = getattr(leg, name)
        return row


def held_lines(book: Book, close: Close, sight: Sight, evening: Evening) -> tuple[HeldLine, ...]:
    """What the sheet says of every position of a book, in its order."""
    figures = triggers(close.world(), close.rows - 1, book.seen)
    return tuple(_line(book, n, close, sight, evening, figures[n]) for n in range(len(book.words)))


def _line(book: Book, number: int, close: Close, sight: Sight, evening: Evening, figures: Floats) -> HeldLine:
    """One position's line."""
    record, found, words = book.seen[number], book.found[number], book.words[number]
    market, symbol = close.bench.market, int(book.seen[number].symbol)
    events = evening.log.events[evening.log.events["position"] == number]
    orders = tuple(_orders(events, close.program.strategy, float(record.shares)))
    price, fresh = float(record.last_close), not np.isnan(market.close[-1, symbol])
    gain = float(record.gain) if fresh else math.nan
    legs = tuple(_legs(record, found, close))
    last = max((leg.expiry for leg in legs), default="")
    leaving = float(found.leaving) + float(record.shares) * price
    return HeldLine(
        symbol=words.symbol,
        opened=words.opened,
        sessions=close.rows - 1 - int(record.entered),
        close=price,
        shares=float(record.shares),
        stock_price=float(record.stock_price) if record.shares else math.nan,
        gain=gain,
        gain_share=gain / float(record.stake) if record.stake > 0.0 else math.nan,
        leaving=leaving,
        best_gain=float(found.best),
        worst_loss=float(found.worst),
        verdict=_verdict(events, evening.after[number], evening.log.meta.exits, orders),
        orders=orders,
        legs=legs,
        triggers=tuple(_triggers(record, close, sight, figures, events)),
        dividends=dividends_until(close, symbol, last),
        reports=reports_until(market, symbol, last),
    )


def _legs(record: Any, found: Any, close: Close) -> Iterator[HeldLeg]:
    price, today = float(record.last_close), int(close.bench.market.ordinals[-1])
    for k, leg in enumerate(close.program.strategy.legs):
        one = record.legs[k]
        if one.quantity == 0.0:
            continue
        written = one.quantity < 0.0
        worth = intrinsic(int(one.right), price, float(one.strike))
        asked = written and leg.right == "call" and not math.isnan(found.reach[k])
        yield HeldLeg(
            name=leg.name,
            side="sold" if written else "bought",
            right=leg.right,
            contracts=abs(float(one.quantity)) / LOT_SHARES,
            strike=float(one.strike),
            expiry=day_of(int(one.expiry)),
            days=int(one.expiry) - today,
            paid=float(one.entry_price),
            mid=float(one.mid),
            time_value=float(one.mid) - worth,
            away=float(one.strike) / price - 1.0,
            chance=float(found.chances[k]),
            due=day_of(int(found.due)) if asked else "",
            reach=float(found.reach[k]),
            exercised=bool(found.early[k]),
        )


def _triggers(record: Any, close: Close, sight: Sight, figures: Floats, events: Any) -> Iterator[Trigger]:
    """Exit rules in the order of the file, then rolls and legs to be added, then the resting stop."""
    strategy, plan, symbol = close.program.strategy, close.program.plan[0], int(record.symbol)
    reasons, leaves = set(events["reason"].tolist()), bool((events["reason"] >= at.WHY_EXIT_RULE).any())

    def trigger(name: str, condition: Condition, start: int, decided: bool, moves: bool) -> Trigger:
        tests, holds = position_tests(condition, figures, sight, symbol, start)
        idle = moves and holds and not decided and not leaves
        return Trigger(name, decided, tuple(tests), how_joined(condition), idle)

    for number, rule in enumerate(strategy.exit):
        start, decided = int(plan["exit_start"][number]), at.WHY_EXIT_RULE + number in reasons
        yield trigger(f"leave: {rule.name}", rule.condition, start, decided, False)
    for number, leg in enumerate(strategy.legs):
        spec, live = plan["specs"][number], record.legs[number].quantity != 0.0
        moved = bool(((events["leg"] == number) & np.isin(events["reason"], _MOVES)).any())
        if live and leg.roll is not None and leg.roll.condition is not None:
            yield trigger(f"roll `{leg.name}`", leg.roll.condition, int(spec["roll_start"]), moved, True)
        if not live and leg.add_when is not None:
            yield trigger(f"add `{leg.name}`", leg.add_when, int(spec["add_start"]), moved, True)
    yield from _stop(record, strategy, float(plan["shares"]))


_MOVES = (at.WHY_ROLL, at.WHY_ADDED)


def _stop(record: Any, strategy: Strategy, sign: float) -> Iterator[Trigger]:
    """The stop that rests in the stock, and how far the price is from it."""
    if strategy.stop is None or record.shares == 0.0:
        return
    level, price = float(record.stock_price) * (1.0 - sign * strategy.stop.distance), float(record.last_close)
    away = sign * (price - level) / price
    side = "below" if sign > 0 else "above"
    told = f"rests at {number_text(level)}, {percent_text(max(away, 0.0))} {side} the close"
    yield Trigger("stop", False, (Test(told, away <= 0.0, price, level, "price"),))


def _orders(events: Any, strategy: Strategy, shares: float) -> Iterator[str]:
    """What the close does with a position, in words, from the events that the walk wrote of it."""
    for event in events:
        kind, leg = int(event["kind"]), int(event["leg"])
        name = f"`{strategy.legs[leg].name}`" if leg >= 0 else ""
        strike = number_text(float(event["strike"]), 2).removesuffix(".00")
        if kind == at.KIND_EXPIRED:
            yield f"{name} {strike} ends worthless"
        elif kind in (at.KIND_EXERCISED, at.KIND_ASSIGNED):
            word = "exercised" if kind == at.KIND_EXERCISED else "assigned"
            paid = f", settled at {number_text(float(event['price']))}" if event["price"] > 0.0 else ""
            yield f"{name} {strike} is {word}{paid}"
        elif int(event["reason"]) in _MOVES and _opens(event, kind, strategy):
            word = "roll" if event["reason"] == at.WHY_ROLL else "add"
            yield f"{word} {name}: {strike} to {day_of(int(event['expiry']))}"
        elif kind == at.KIND_SHARES and event["reason"] == at.WHY_EXPIRY and event["strike"] == 0.0:
            yield from _moved(event, events)


def _opens(event: Any, kind: int, strategy: Strategy) -> bool:
    """Whether an event is the order of a leg, or the fill that opens it again."""
    if kind == at.KIND_SIGNALLED:
        return True
    return kind == at.KIND_LEG and float(event["quantity"]) * strategy.legs[int(event["leg"])].sign > 0.0


def _moved(event: Any, events: Any) -> Iterator[str]:
    """Shares that change hands at an expiry: by a delivery, or sold since no leg keeps them."""
    delivered = np.isin(events["kind"], (at.KIND_EXERCISED, at.KIND_ASSIGNED)) & (events["price"] == 0.0)
    at_strike = (events["strike"][delivered] == event["price"]).any()
    verb = "buy" if event["quantity"] > 0.0 else "sell"
    count = f"{abs(float(event['quantity'])):,.0f} shares"
    if at_strike:
        word = "come" if event["quantity"] > 0.0 else "leave"
        yield f"{count} {word} at {number_text(float(event['price']))}"
    else:
        yield f"{verb} the {count} that no leg keeps"


def _verdict(events: Any, after: Any, exits: tuple[str, ...], orders: tuple[str, ...]) -> str:
    """What the close decides of a position, in a few words."""
    reasons = [int(reason) for reason in events["reason"] if reason >= at.WHY_EXIT_RULE]
    if reasons:
        return f"leave: {reason_word(reasons[0], exits)}"
    kinds = set(events["kind"].tolist())
    if at.KIND_GONE in kinds:
        return "over: no price for 5 sessions"
    if at.KIND_CLOSED in kinds:
        return "over at expiry"
    if int(after["closing"]) in (at.WHY_MARGIN, at.WHY_LEFT_OVER):
        left = int(after["closing"]) == at.WHY_LEFT_OVER
        return "close what is left of it" if left else "leave: the margin is too small"
    for word in ("roll", "add"):
        if any(order.startswith(word) for order in orders):
            return word
    return HOLD
