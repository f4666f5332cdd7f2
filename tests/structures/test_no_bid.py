"""A leg that is to be sold later and finds no bid: nothing is done, and the log says so."""

from __future__ import annotations

from typing import Any

import numpy as np

import hedgerow as hr
from hedgerow.events.narrate import story
from properties.markets import one_stock
from structures.hand_case import PRICING

FAR: dict[str, Any] = {
    "sell": "call",
    "expiry": {"days": 10, "listed": "weekly"},
    "strike": {"from_spot": "60%"},
    "add_when": {"held": {"at_least": 2}},
}


def test_a_far_call_is_not_added() -> None:
    """A call 60 % above a stock at 50, ten days out at 30 %, is worth nothing: half a tick has no bid."""
    market = one_stock(np.full(10, 50.0), implied=[0.3] * 10)
    rule = {"name": "Far call", "legs": {"far": FAR}}
    result = hr.run(market, rule, account=hr.Account(per_position=1.0), pricing=PRICING)
    events = result.events
    declined = events[events["kind"] == "declined"]
    assert len(declined) >= 5  # asked again at each close
    assert set(declined["reason"]) == {"no bid for a leg to be sold"}
    assert set(declined["leg"]) == {"far"}
    assert (declined["position"] == 0).all()
    assert result.legs.empty
    assert result.summary.declined == {}  # the entry itself was made
    told = [line for line in story(result.log, 0) if "was left as it is" in line]
    assert len(told) == len(declined)
    assert "The leg `far` of HILL" in told[0]
