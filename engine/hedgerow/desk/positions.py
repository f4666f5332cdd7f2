"""The words of a file of positions held: read at the door, with every fault and its place."""

from __future__ import annotations

import datetime as dt
from collections.abc import Iterator, Mapping
from pathlib import Path
from typing import Annotated, Any

from pydantic import Field, ValidationError

from hedgerow.errors import DeskError
from hedgerow.market.table import Market
from hedgerow.rules.base import Words, loosened
from hedgerow.rules.document import tree_of_file, tree_of_mapping
from hedgerow.rules.figures import Number, Whole
from hedgerow.rules.schema import Strategy
from hedgerow.rules.words import Loose, Text, unknown_name
from hedgerow.study.words import Day
from hedgerow.textfile import capped

__all__ = ["HeldWords", "LegWords", "PositionsWords", "read_positions"]

_PRICE = Number(0.0, 1e7, "per share")
_MONEY = Number(-1e12, 1e12, "money")


class LegWords(Words):
    """One option leg held: its listed strike and expiry, and the premium per share at which it was traded.

    `contracts` when it is not one for every 100 shares times the rule's ratio; `mid` the middle of the quote
    at that time, where it is known.
    """

    strike: Annotated[float, Number(0.0, 1e7, "per share", open_ends=True)]
    expiry: Annotated[str, Day()]
    price: Annotated[float, _PRICE]
    contracts: Annotated[float, Number(0.0, 1e7, "contracts", open_ends=True)] | None = None
    mid: Annotated[float, _PRICE] | None = None


class HeldWords(Words):
    """One position: when it was opened, its shares and their price, its legs by the rule's names.

    `premiums` is what legs that are over have brought (+) or cost (-), `income` dividends less fees so far.
    `tied_up`, `best_gain` and `worst_loss` are those of the entry, which exit rules measure by; without them
    they are worked out from what is held now.
    """

    symbol: Annotated[str, Text(20)]
    opened: Annotated[str, Day()]
    shares: Annotated[int, Whole(0, 1_000_000_000, "shares, also where they are sold short")] = 0
    stock_price: Annotated[float, Number(0.0, 1e7, "per share", open_ends=True)] | None = None
    legs: dict[str, LegWords] = Field(default_factory=dict)
    premiums: Annotated[float, _MONEY] = 0.0
    income: Annotated[float, _MONEY] = 0.0
    tied_up: Annotated[float, Number(0.0, 1e12, "money", open_ends=True)] | None = None
    best_gain: Annotated[float, _MONEY] | None = None
    worst_loss: Annotated[float, _MONEY] | None = None


class LostWords(Words):
    """A losing position that is over, for rules that pause after one."""

    symbol: Annotated[str, Text(20)]
    closed: Annotated[str, Day()]


class PositionsWords(Words):
    """The cash of the account, and all it holds at the close that is looked at."""

    cash: Annotated[float, _MONEY]
    positions: Annotated[tuple[HeldWords, ...], Field(strict=False)] = ()
    lost: Annotated[tuple[LostWords, ...], Field(strict=False)] = ()


def read_positions(
    source: str | Path | Mapping[str, Any], market: Market, strategy: Strategy
) -> PositionsWords:
    """Read a file of positions, or its words, against a market that ends at the close looked at.

    Raises DeskError with every fault: its place, what was found, what is allowed.
    """
    tree = tree_of_mapping(source, "positions") if isinstance(source, Mapping) else tree_of_file(source)
    if tree.faults and not tree.plain:
        raise DeskError(capped(tree.faults))
    loose: list[Loose] = []
    words: PositionsWords | None = None
    try:
        words = PositionsWords.model_validate(tree.plain)
    except ValidationError as error:
        loose = loosened(error)
    if words is not None:
        loose = list(_faults(words, market, strategy))
    faults = tree.all_faults(loose)
    if faults or words is None:
        raise DeskError(capped(faults))
    return words


def _faults(words: PositionsWords, market: Market, strategy: Strategy) -> Iterator[Loose]:
    """What is wrong with words that are right by themselves."""
    room = 1 if strategy.enter is None or strategy.enter.ladder is None else strategy.enter.ladder.positions
    seen: dict[str, int] = {}
    for at, held in enumerate(words.positions):
        path = ("positions", at)
        yield from _day_faults((*path, "opened"), held.opened, market)
        if held.symbol not in market.symbols:
            yield unknown_name((*path, "symbol"), held.symbol, market.symbols[:12], "symbol of the market")
            continue
        seen[held.symbol] = seen.get(held.symbol, 0) + 1
        if seen[held.symbol] > room:
            found = f"is `{held.symbol}`, of which another position stands above"
            allowed = f"allowed: at most {room} of one symbol by this rule"
            yield Loose((*path, "symbol"), "twice", found, allowed)
        if market.last_bar[market.index_of(held.symbol)] < 0:
            yield Loose((*path, "symbol"), "no-price", f"is `{held.symbol}`, which has no price by then")
        yield from (fault.under(*path) for fault in _held_faults(held, market, strategy))
    for at, lost in enumerate(words.lost):
        yield from _day_faults(("lost", at, "closed"), lost.closed, market)
        if lost.symbol not in market.symbols:
            yield unknown_name(
                ("lost", at, "symbol"), lost.symbol, market.symbols[:12], "symbol of the market"
            )


def _day_faults(path: tuple[str | int, ...], day: str, market: Market) -> Iterator[Loose]:
    """A day that is no session of the data up to the close looked at."""
    if dt.date.fromisoformat(day).toordinal() in market.ordinals:
        return
    span = f"allowed: a session from {market.dates[0]} to {market.dates[-1]}"
    yield Loose(path, "no-session", f"is {day}, which is no session of the data up to the close", span)


def _held_faults(held: HeldWords, market: Market, strategy: Strategy) -> Iterator[Loose]:
    """What is wrong with one position by its rule."""
    if strategy.holds_nothing:
        yield Loose((), "holds-nothing", "is held, and the rule holds nothing")
        return
    may_hold = strategy.shares != "none" or strategy.after_assignment == "keep"
    if held.shares and not may_hold:
        yield Loose(("shares",), "shares", f"is {held.shares}, and the rule holds no shares", "allowed: 0")
    if held.shares and held.stock_price is None:
        yield Loose((), "missing", "has shares and no `stock_price`, the price at which they were traded")
    if not held.shares and not held.legs:
        yield Loose((), "empty", "holds neither shares nor legs", "allowed: what is held now")
    if strategy.shares != "none" and not held.shares:
        found = "has no `shares`, and the rule holds them"
        yield Loose((), "missing", found, "allowed: the number of shares held now")
    names = [leg.name for leg in strategy.legs]
    for name, leg in held.legs.items():
        if name not in names:
            yield _unknown_leg(name, names)
        elif leg.contracts is None and not held.shares:
            found = "has no `contracts`, and there are no shares that would say how many"
            yield Loose(("legs", name), "missing", found)
        if dt.date.fromisoformat(leg.expiry).toordinal() < int(market.ordinals[-1]):
            found = f"is {leg.expiry}, before the close of {market.dates[-1]} that is looked at"
            remedy = "write the position as that expiry left it"
            yield Loose(("legs", name, "expiry"), "expired", found, "", remedy)


def _unknown_leg(name: str, names: list[str]) -> Loose:
    told = unknown_name(("legs", name), name, names, "leg of the rule")
    return Loose(told.path, "legs", told.found, told.allowed, told.remedy)
