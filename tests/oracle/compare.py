"""Two lists of events side by side: the first difference in words, and a plain line for each event."""

from __future__ import annotations

import math
from collections.abc import Sequence
from typing import Any

from hedgerow.kernels import layout

Event = dict[str, Any]

KINDS = {value: name[5:].lower() for name, value in vars(layout).items() if name.startswith("KIND_")}
REASONS = {value: name[4:].lower() for name, value in vars(layout).items() if name.startswith("WHY_")}
EXACT = ("session", "symbol", "position", "kind", "leg", "reason", "expiry")
MEASURED = ("quantity", "price", "mid", "fee", "strike")
TOLD_ONLY = (layout.KIND_SIGNALLED, layout.KIND_INTEREST, layout.KIND_DEPOSIT)  # their quantities are free
RELATIVE = 1e-9


def rows_of(events: Any) -> list[Event]:
    """The records of a log as mappings of plain numbers."""
    names = (*EXACT, *MEASURED, "cash")
    return [dict(zip(names, row, strict=True)) for row in events[list(names)].tolist()]


def close_enough(mine: float, theirs: float, relative: float, absolute: float) -> bool:
    """Whether two numbers agree; what is unknown on both sides agrees."""
    if math.isnan(mine) or math.isnan(theirs):
        return math.isnan(mine) and math.isnan(theirs)
    return abs(mine - theirs) <= max(relative * max(abs(mine), abs(theirs)), absolute)


def differing(mine: Event, theirs: Event, slack: float) -> list[str]:
    """Names of the fields in which two events differ; `slack` is allowed on a premium, money a share."""
    out = [name for name in EXACT if mine[name] != theirs[name]]
    told_only = mine["kind"] in TOLD_ONLY
    premium = slack if mine["kind"] in (layout.KIND_LEG, layout.KIND_CLOSED) else 0.0
    for name in MEASURED:
        loose = premium if name in ("price", "mid") else 0.0
        if mine["kind"] == layout.KIND_CLOSED:
            loose = 0.005 + slack * 1e5
        if (not told_only or name == "strike") and not close_enough(
            mine[name], theirs[name], RELATIVE, max(1e-11, loose)
        ):
            out.append(name)
    cash = 0.0049 + slack * max(1.0, abs(mine["quantity"]))
    if not close_enough(mine["cash"], theirs["cash"], 0.0, cash):
        out.append("cash")
    return out


def first_difference(mine: Sequence[Event], theirs: Sequence[Event], slack: float = 0.0) -> str:
    """What differs first between two lists of events, with the events around it; nothing when they agree."""
    for place, (one, other) in enumerate(zip(mine, theirs, strict=False)):
        wrong = differing(one, other, slack)
        if wrong:
            before = [f"      both {describe(event)}" for event in mine[max(0, place - 6) : place]]
            after = [f"  expected {describe(event)}" for event in mine[place : place + 3]]
            after += [f"     found {describe(event)}" for event in theirs[place : place + 3]]
            numbers = [f"{name}: expected {one[name]!r}, found {other[name]!r}" for name in wrong]
            return "\n".join([f"event {place} differs in {', '.join(wrong)}", *before, *after, *numbers])
    if len(mine) != len(theirs):
        longer, whose = (mine, "expected") if len(mine) > len(theirs) else (theirs, "found")
        extra = describe(longer[min(len(mine), len(theirs))])
        return f"{len(mine)} events expected, {len(theirs)} found; first one {whose} only: {extra}"
    return ""


def describe(event: Event) -> str:
    """Every field of an event that says something, on one line."""
    kind, reason = (
        KINDS.get(event["kind"], "unknown"),
        REASONS.get(event["reason"], f"exit {event['reason'] - 100}"),
    )
    rest = [f"{name}={event[name]:.10g}" for name in (*MEASURED, "cash", "expiry") if event[name]]
    place = f"session {event['session']} symbol {event['symbol']} position {event['position']}"
    return " ".join([place, kind, reason, f"leg {event['leg']}", *rest])


def story(events: Sequence[Event], legs: Sequence[str]) -> list[str]:
    """One short line for each event of one symbol: session, reason, what, how many, at what, cash."""
    return [line for line in (_line(event, legs) for event in events) if line]


def _line(event: Event, legs: Sequence[str]) -> str:
    """The line of one event; none for the deposit."""
    event = event | {"cash": event["cash"] + 0.0}  # no negative nothing
    kind, row = event["kind"], event["leg"]
    reason = REASONS.get(event["reason"], f"exit {event['reason'] - 100}").replace("_", " ")
    start = f"{event['session']} {reason}:"
    what = legs[row] if row >= 0 else "shares"
    if kind == layout.KIND_DEPOSIT:
        return ""
    if kind in (layout.KIND_SHARES, layout.KIND_LEG, layout.KIND_DIVIDEND):
        verb = "dividend" if kind == layout.KIND_DIVIDEND else what
        return f"{start} {verb} {event['quantity']:+g} at {event['price']:.4f} = {event['cash']:+.2f}"
    if kind in (layout.KIND_EXPIRED, layout.KIND_EXERCISED, layout.KIND_ASSIGNED):
        return f"{start} {what} {KINDS[kind]}, {event['cash']:+.2f}"
    if kind == layout.KIND_CLOSED:
        return f"{start} over, {event['price']:+.2f}"
    if kind == layout.KIND_OPENED:
        return f"{start} {event['quantity']:g} lots opened"
    if kind == layout.KIND_INTEREST:
        return f"{event['session']} interest {event['cash']:+.2f}"
    return f"{start} {KINDS[kind]}" + (f" {what}" if row >= 0 else "")
