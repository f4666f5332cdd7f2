"""Ten-session markets worked out by hand: the replay and the walk must both tell the same story."""

from __future__ import annotations

from typing import Any

import pytest

from oracle import hand_more, hand_plain
from oracle.bridge import walked
from oracle.by_hand import COVERED_CALL, SURFACE, Case
from oracle.compare import rows_of, story
from oracle.replay import Replay

CASES = (*hand_plain.CASES, *hand_more.CASES)
PRICING = {"observed": "column", "skew": 0, "curvature": 0}


def told(events: list[dict[str, Any]], case: Case) -> list[str]:
    """The story of a list of events, without the entries that are only ordered."""
    lines = story(events, list(case.strategy.get("legs", {})))
    return [line for line in lines if not line.endswith("entry: signalled")]


@pytest.mark.parametrize("case", CASES, ids=lambda case: case.name)
def test_replay_tells_what_was_worked_out(case: Case) -> None:
    """The plain replay against events and last equity worked out by hand."""
    events, days = Replay(case.market, case.strategy, case.setting).run()
    assert told(events, case) == case.lines
    assert days[-1]["equity"] == pytest.approx(case.last_equity, abs=0.005)


@pytest.mark.parametrize("case", CASES, ids=lambda case: case.name)
def test_walk_tells_what_was_worked_out(case: Case) -> None:
    """The compiled walk against events and last equity worked out by hand."""
    log = walked(case.market, case.strategy, case.setting, PRICING)
    assert told(rows_of(log.events), case) == case.lines
    assert log.days["equity"][-1] == pytest.approx(case.last_equity, abs=0.005)


def test_equity_of_each_day() -> None:
    """Equity at each close of a covered call in a still market, each mark a Black-Scholes value by hand.

    The call is marked at 10, 9, 8, 7, 3, 2 and 1 days: .5788, .5316, .4821, .4302, .1871, .1143 and .0392.
    """
    case = next(case for case in CASES if case.name == "covered call, still")
    by_hand = [12000.0]
    for mark in (0.578788, 0.531595, 0.482187, 0.430236, 0.187056, 0.114336, 0.039191):
        by_hand.append(12000.0 + 118.25 - 200.0 * mark)
    by_hand += [12118.25, 12118.25]
    _, days = Replay(case.market, COVERED_CALL, case.setting).run()
    assert [day["equity"] for day in days] == pytest.approx(by_hand, abs=0.005)
    log = walked(case.market, COVERED_CALL, case.setting, PRICING)
    assert list(log.days["equity"]) == pytest.approx(by_hand, abs=0.005)


def test_a_wrong_cent_is_seen() -> None:
    """A negative control: one cent more in one line of a story worked out by hand does not pass."""
    case = CASES[0]
    events, _ = Replay(case.market, case.strategy, case.setting).run()
    spoiled = [line.replace("+118.25", "+118.26") for line in case.lines]
    assert told(events, case) != spoiled
    assert case.setting.surface == SURFACE
