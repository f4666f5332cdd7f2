"""The shape of a structure as far as its rules tell it: slopes, sides, and which strike lies above which."""

from __future__ import annotations

from hedgerow.rules.keeping import waits_for_shares
from hedgerow.rules.legs import Leg
from hedgerow.rules.schema import Strategy

__all__ = [
    "at_entry",
    "fall",
    "higher",
    "is_locked",
    "is_plain",
    "is_reversed",
    "of_kind",
    "rise",
    "together",
    "vertical",
]


def at_entry(strategy: Strategy) -> list[Leg]:
    """The legs that are opened with the position."""
    return [leg for leg in strategy.legs if leg.add_when is None]


def of_kind(strategy: Strategy, right: str, sold: bool) -> list[Leg]:
    """The legs at entry of one right and side."""
    return [leg for leg in at_entry(strategy) if leg.right == right and leg.sold == sold]


def _count(legs: list[Leg]) -> float:
    return sum(leg.ratio for leg in legs)


def _held(strategy: Strategy) -> float:
    return {"long": 1.0, "short": -1.0, "none": 0.0}[strategy.shares]


def rise(strategy: Strategy) -> float:
    """Lots of shares the position amounts to far above every strike."""
    bought, sold = of_kind(strategy, "call", False), of_kind(strategy, "call", True)
    return _held(strategy) + _count(bought) - _count(sold)


def fall(strategy: Strategy) -> float:
    """Lots of shares the position amounts to far below every strike."""
    bought, sold = of_kind(strategy, "put", False), of_kind(strategy, "put", True)
    return _held(strategy) - _count(bought) + _count(sold)


def _place(leg: Leg) -> float | None:
    """A number that rises with the strike among legs of one right and rule; below zero is under the price."""
    strike, toward = leg.strike, 1.0 if leg.right == "put" else -1.0
    if strike.rule in ("from_spot", "steps", "deviations"):
        return float(getattr(strike, strike.rule))
    if strike.rule in ("delta", "odds"):
        return toward * (float(getattr(strike, strike.rule)) - 0.5)
    return None


def higher(one: Leg, other: Leg) -> bool | None:
    """Whether one leg is struck above another; None when the rules do not tell."""
    here, there = _place(one), _place(other)
    if here is None or there is None:
        return None
    if one.strike.rule != other.strike.rule or (one.right != other.right and one.strike.rule != "from_spot"):
        here, there = float(here > 0) - float(here < 0), float(there > 0) - float(there < 0)
    return None if here == there else here > there


def together(strategy: Strategy) -> bool:
    """Whether all legs at entry expire on one day by their rules."""
    own = [leg for leg in at_entry(strategy) if leg.expiry.with_leg is None]
    return len({(leg.expiry.days, leg.expiry.listed, leg.expiry.choose) for leg in own}) <= 1


def is_reversed(strategy: Strategy) -> bool:
    """Whether shares stand with a call sold and a put bought that is known to be struck above it."""
    puts, calls = of_kind(strategy, "put", False), of_kind(strategy, "call", True)
    return strategy.shares == "long" and any(higher(put, call) is True for put in puts for call in calls)


def is_locked(strategy: Strategy) -> bool:
    """Whether shares, a call and a put of one strike and expiry cancel each other."""
    if strategy.shares == "none" or len(strategy.legs) != 2 or len(at_entry(strategy)) != 2:
        return False
    names = {leg.name for leg in strategy.legs}
    same = any(leg.strike.same_as in names for leg in strategy.legs)
    level = rise(strategy) == 0 and fall(strategy) == 0
    return same and level and together(strategy) and all(leg.roll is None for leg in strategy.legs)


def is_plain(strategy: Strategy) -> bool:
    """Whether shares stand with at most one call sold and one put bought, the put not above the call."""
    now = at_entry(strategy)
    kinds = [(leg.sold, leg.right) for leg in now]
    usual = len(set(kinds)) == len(kinds) and {*kinds} <= {(True, "call"), (False, "put")}
    whole = all(leg.ratio == 1 for leg in now)
    return strategy.shares == "long" and usual and whole and not is_reversed(strategy)


def vertical(strategy: Strategy) -> tuple[Leg, Leg, bool] | None:
    """The leg sold, the leg bought and whether they bring money in, of two of one right and expiry alone."""
    now = at_entry(strategy)
    sold, bought = [leg for leg in now if leg.sold], [leg for leg in now if not leg.sold]
    if strategy.shares != "none" or len(now) != 2 or len(sold) != 1 or not together(strategy):
        return None
    one, other = sold[0], bought[0]
    above = higher(one, other)
    if one.right != other.right or one.ratio != other.ratio or above is None:
        return None
    return one, other, above == (one.right == "put")


def later_calls(strategy: Strategy) -> list[Leg]:
    """Calls sold not at entry but later, over shares."""
    later = [leg for leg in strategy.legs if leg.add_when is not None and leg.sold and leg.right == "call"]
    return [leg for leg in later if strategy.shares == "long" or waits_for_shares(leg)]
