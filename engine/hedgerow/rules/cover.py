"""Checks of the structure as a whole: what covers the calls that are sold, what is bounded, what is held."""

from __future__ import annotations

from collections.abc import Iterator

from hedgerow.market.sessions import DAILY_DAYS, LEAST_TOLERANCE_DAYS, MONTHLY_DAYS, WEEKLY_DAYS
from hedgerow.rules.keeping import waits_for_shares
from hedgerow.rules.legs import Expiry, Leg
from hedgerow.rules.parts import Parts
from hedgerow.rules.references import expiry_root
from hedgerow.rules.words import Loose

_GAPS = (("daily", 4, DAILY_DAYS), ("weekly", 8, WEEKLY_DAYS), ("monthly", 35, MONTHLY_DAYS))

__all__ = ["cover_faults", "outlasts"]


def cover_faults(parts: Parts) -> Iterator[Loose]:
    """Every fault of the structure; nothing when a part of it cannot be read."""
    if not parts.whole:
        return
    yield from _uncovered(parts)
    yield from _stop_side(parts)


def _uncovered(parts: Parts) -> Iterator[Loose]:
    """Calls sold beyond what shares and longer-lived calls cover. Greedy, the hardest to cover first.

    Shares that are kept after an assignment cover the calls that are added only while they are held.
    """
    left = {leg.name: leg.ratio for leg in parts.legs.values() if leg.right == "call" and not leg.sold}
    spare = {"held": 1.0 if parts.shares == "long" else 0.0, "kept": 1.0 if parts.keeps else 0.0}
    sold = [leg for leg in parts.legs.values() if leg.right == "call" and leg.sold]
    covers = {leg.name: [name for name in left if _covers(parts, parts.legs[name], leg)] for leg in sold}
    for leg in sorted(sold, key=lambda item: len(covers[item.name])):
        need = leg.ratio
        for name in covers[leg.name]:
            used = min(need, left[name])
            left[name] -= used
            need -= used
        shares = "kept" if parts.shares == "none" and waits_for_shares(leg) else "held"
        used = min(need, spare[shares])
        spare[shares] -= used
        need -= used
        if need > 1e-9:
            yield _naked(parts, leg, leg.ratio - need)


def _naked(parts: Parts, leg: Leg, covered: float) -> Loose:
    shorter = [
        name
        for name, other in parts.legs.items()
        if other.right == "call" and not other.sold and not _covers(parts, other, leg)
    ]
    allowed = "allowed: `shares: long`, or a call bought that lives at least as long, one for each sold"
    if parts.shares == "none" and waits_for_shares(leg) and not parts.keeps:
        allowed += ", or `after_assignment: keep`"
    if covered > 0:
        found = f"sells {leg.ratio:g} calls a lot, of which {covered:g} are covered"
    elif shorter:
        how = "is written again on its own and would outlive" if leg.roll is not None else "may outlive"
        found = f"sells a call that {how} `{shorter[0]}`, the call that would cover it"
    else:
        found = "sells a call that nothing covers"
    return Loose(("legs", leg.name), "uncovered-call", found, allowed)


def _covers(parts: Parts, bought: Leg, sold: Leg) -> bool:
    """Whether the bought call is there for as long as the sold one can be."""
    if bought.add_when is not None and bought.add_when != sold.add_when:
        return False
    with_legs = {name: expiry.with_leg for name, expiry in parts.expiries.items()}
    roots = expiry_root(bought.name, with_legs), expiry_root(sold.name, with_legs)
    if sold.roll is not None:
        again = bought.roll is not None and bought.roll.at_expiry
        return roots[0] == roots[1] and (again or not sold.roll.at_expiry)
    if roots[0] == roots[1]:
        return True
    ends = [parts.expiries.get(root) for root in roots]
    return all(ends) and outlasts(ends[0], ends[1])


def outlasts(longer: Expiry | None, shorter: Expiry | None) -> bool:
    """Whether one rule's expiry can never come before the other's, chosen on the same day.

    Rules of one cycle choose in the order of their days. Otherwise the worst cases are compared: each may
    miss its days by the gap between expiries listed that far out, and by four days around holidays.
    """
    if longer is None or shorter is None or longer.days is None or shorter.days is None:
        return False
    if longer.listed == shorter.listed and longer.choose in (shorter.choose, "at_least"):
        return longer.days >= shorter.days
    early = 0 if longer.choose == "at_least" else _gap_days(longer)
    return longer.days - early >= shorter.days + _gap_days(shorter) + 4


def _gap_days(expiry: Expiry) -> int:
    """The longest gap between listed expiries around a rule's days, at most what the walk tolerates."""
    days = expiry.days or 0
    gap = 98  # a quarter
    if expiry.listed != "quarterly":
        from_here = _GAPS[[name for name, _, _ in _GAPS].index(expiry.listed) :]
        gap = next((gap for _, gap, ahead in from_here if days + gap <= ahead), 371)  # Januaries alone
    return min(gap, max(LEAST_TOLERANCE_DAYS, days // 2 + 1))


def _stop_side(parts: Parts) -> Iterator[Loose]:
    stop = parts.section("stop")
    if not stop:
        return
    if parts.shares == "none":
        yield Loose(
            ("stop",), "stop", "is an order in shares, and the strategy holds none", "", "take it out"
        )
    wrong, right = ("below_entry", "above_entry")
    if parts.shares == "long":
        wrong, right = right, wrong
    if wrong in stop and parts.shares != "none":
        found = f"is on the wrong side for `shares: {parts.shares}`"
        yield Loose(("stop", wrong), "stop", found, f"allowed: `{right}`")
