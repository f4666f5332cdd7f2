"""Strategies as mappings for tests of the rule language, and what is wrong with them."""

from __future__ import annotations

import copy
from collections.abc import Mapping
from typing import Any

from hedgerow.errors import Fault, RulesError
from hedgerow.rules.load import load_strategy

COLLAR: dict[str, Any] = {
    "name": "Collar",
    "legs": {
        "call": {
            "sell": "call",
            "expiry": {"days": 30, "listed": "monthly"},
            "strike": {"from_spot": "2%", "snap": "up"},
        },
        "put": {
            "buy": "put",
            "expiry": {"with": "call"},
            "strike": {"from_spot": "-5%", "snap": "down"},
        },
    },
}


def collar(**words: Any) -> dict[str, Any]:
    """A plain collar with other words of a strategy laid over it."""
    return copy.deepcopy(COLLAR) | words


def with_leg(name: str, base: Mapping[str, Any] | None = None, **words: Any) -> dict[str, Any]:
    """A collar, or another base, in which one leg has other words."""
    strategy = copy.deepcopy(dict(base or COLLAR))
    strategy["legs"].setdefault(name, {}).update(words)
    return strategy


def leg(side: str, right: str, days: int = 30, listed: str = "monthly", **words: Any) -> dict[str, Any]:
    """One leg at the money."""
    plain = {side: right, "expiry": {"days": days, "listed": listed}, "strike": {"from_spot": "0%"}}
    return plain | words


def faults_of(words: Any, changes: Mapping[str, Any] | None = None) -> list[Fault]:
    """Every fault of a strategy; none when it is right."""
    try:
        load_strategy(words, changes)
    except RulesError as error:
        return list(error.faults)
    return []


def codes_of(words: Any, changes: Mapping[str, Any] | None = None) -> list[str]:
    """The codes of its faults, in their order."""
    return [fault.code for fault in faults_of(words, changes)]


def only_fault(words: Any, changes: Mapping[str, Any] | None = None) -> Fault:
    """The one fault of a strategy; fails when there are none or several."""
    faults = faults_of(words, changes)
    assert len(faults) == 1, [str(fault) for fault in faults]
    return faults[0]
