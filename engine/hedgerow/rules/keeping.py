"""Checks of what is held: nothing at all, shares that an assignment brings, and legs that wait for them."""

from __future__ import annotations

from collections.abc import Iterator, Mapping

from hedgerow.rules.condition import AllOf, Condition, HoldsSharesTest
from hedgerow.rules.legs import Leg
from hedgerow.rules.parts import Parts
from hedgerow.rules.words import Loose

__all__ = ["keeping_faults", "waits_for_shares"]

_OF_POSITIONS = ("after_assignment", "accept", "enter", "exit", "stop")


def waits_for_shares(leg: Leg) -> bool:
    """Whether a leg is added only while the position holds shares."""
    return leg.add_when is not None and _needs_shares(leg.add_when)


def _needs_shares(condition: Condition) -> bool:
    """Whether a condition can hold only while shares are held."""
    if isinstance(condition, AllOf):
        return any(_needs_shares(part) for part in condition.conditions)
    return isinstance(condition, HoldsSharesTest)


def keeping_faults(parts: Parts) -> Iterator[Loose]:
    """Every fault of shares that come by assignment, and of a strategy that holds nothing."""
    yield from _nothing_held(parts)
    if parts.whole:
        yield from _kept(parts)
        yield from _never_held(parts)


def _nothing_held(parts: Parts) -> Iterator[Loose]:
    """Cash alone is said by `shares: none` and `legs: {}`; nothing else may stand beside it."""
    legs = parts.raw.get("legs")
    if parts.shares != "none" or parts.names or (legs is not None and not isinstance(legs, Mapping)):
        return
    if legs is None:
        allowed = "allowed: shares, at least one leg, or both"
        remedy = "for cash alone write `legs: {}` beside it"
        yield Loose((), "empty-position", "holds neither shares nor legs", allowed, remedy)
        return
    for word in _OF_POSITIONS:
        if word in parts.raw:
            found = "is about positions, and this strategy holds none"
            yield Loose((word,), "idle", found, "", "take it out, or add shares or legs")


def _kept(parts: Parts) -> Iterator[Loose]:
    """Shares can be kept only where a put that is sold brings them, and it is not sold again beside them."""
    if not parts.keeps:
        return
    puts = [leg for leg in parts.legs.values() if leg.sold and leg.right == "put"]
    if parts.shares != "none":
        found = f"is `keep`, and the shares of `shares: {parts.shares}` are the strategy's own"
        yield Loose(("after_assignment",), "idle", found, "allowed with `shares: none`", "take it out")
    elif parts.names and not puts:
        found = "is `keep`, and no put is sold that could bring shares"
        yield Loose(("after_assignment",), "idle", found, "", "sell a put, or take it out")
    for leg in puts:
        if leg.roll is not None and leg.roll.at_expiry:
            found = (
                f"sells `{leg.name}` again while the shares it brought are kept, and could owe as much twice"
            )
            allowed = "allowed: `roll: {if: CONDITION}`; a put that ends worthless ends the position"
            yield Loose(("legs", leg.name, "roll", "at"), "twice", found, allowed)


def _never_held(parts: Parts) -> Iterator[Loose]:
    """Shares sold short are owed, never held."""
    if parts.shares != "short":
        return
    for asked in parts.asked:
        if isinstance(asked.test, HoldsSharesTest):
            found = "can never hold: shares sold short are owed"
            yield Loose((*asked.path, "holds_shares"), "never", found, "", "take it out")
