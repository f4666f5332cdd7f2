"""Who may enter and in which order: ranking by figures, limits of a sector, cool-down over a ladder."""

from __future__ import annotations

import math
from typing import Any

import numpy as np
import pytest

from hedgerow.kernels import layout as at
from hedgerow.kernels.candidates import list_candidates, sector_is_full
from hedgerow.kernels.state import BAR, FLAT, OPEN, ORDERED, POSITION, World
from step_records import TODAY, desk, plan, records, session, spec

NOW = 20
SPOTS = (50.0, 100.0, 100.0)
EMPTY: Any = records(BAR, 1)


def world(
    slots: Any, sectors: tuple[int, ...] = (), rank: Any = None, level: tuple[float, ...] = ()
) -> World:
    """Three symbols of the same look but for price, sector, score and volatility."""
    bars = records(BAR, (NOW + 1, 3), signs=at.HAS_BAR | at.FRESH, level=0.25, anchor=0.25)
    for name in ("open", "high", "low", "close"):
        bars[name] = SPOTS
    if level:
        bars["level"] = bars["anchor"] = level
    days = np.array([session(*([TODAY + 30] * 4))] * (NOW + 1)).view(np.recarray)
    few = dict.fromkeys(World._fields, EMPTY)
    few |= {"bars": bars, "sessions": days, "american": np.zeros(3, np.uint8), "positions": slots}
    few |= {"sectors": np.array(sectors), "may_enter": np.ones((NOW + 1, 3), np.uint8)}
    few |= {"rank": np.zeros((1, 1)) if rank is None else np.tile(rank, (NOW + 1, 1))}
    return World(**few)


def slots(ladder: int = 1) -> Any:
    """Every slot flat, none used yet."""
    out = records(POSITION, 3 * ladder, left=-1)
    out["symbol"] = np.arange(3 * ladder) // ladder
    return out


def listed(place: World, rule: Any) -> list[int]:
    """The slots that may enter, in order."""
    queue = np.zeros(32)
    return [int(slot) for slot in queue[: list_candidates(place, desk(rule), NOW, queue)]]


def rule(**values: Any) -> Any:
    """Shares under a call two percent out of the money."""
    leg = spec(strike_rule=at.FROM_SPOT, strike_value=0.02, cycle=at.MONTHLY)
    return plan(leg, **({"legs": 1} | values))


def test_by_symbol_without_a_rank() -> None:
    """In the order of the symbols."""
    assert listed(world(slots()), rule()) == [0, 1, 2]


def test_by_score_high_first_and_ties_by_symbol() -> None:
    """3 before 1 and 1; one whose score is not known is left out."""
    assert listed(world(slots(), rank=[1.0, 3.0, 1.0]), rule()) == [1, 0, 2]
    assert listed(world(slots(), rank=[1.0, math.nan, 2.0]), rule()) == [2, 0]


@pytest.mark.parametrize("figure", [at.RANK_CREDIT, at.RANK_BEST, at.RANK_BEST_OVER_WORST])
def test_the_more_volatile_bring_more_premium(figure: int) -> None:
    """Calls two percent out at 20, 40 and 30 %: credit, best gain and its share of the worst rise with it."""
    place = world(slots(), level=(0.2, 0.4, 0.3))
    assert listed(place, rule(rank_figure=figure)) == [1, 2, 0]
    assert listed(place, rule(rank_figure=figure, rank_low=1)) == [0, 2, 1]


def test_by_the_odds_of_the_best() -> None:
    """The chance of ending above 102 %: N(d2) is .365, .415 and .400 at 20, 40 and 30 % (Hull)."""
    place = world(slots(), level=(0.2, 0.4, 0.3))
    assert listed(place, rule(rank_figure=at.RANK_ODDS)) == [1, 2, 0]
    assert listed(place, rule(rank_figure=at.RANK_ODDS, rank_low=1)) == [0, 2, 1]


def test_by_the_worst_loss() -> None:
    """All but the premium can be lost: the least of the stake is the smallest share for the dearest call."""
    place = world(slots(), level=(0.2, 0.4, 0.3))
    assert listed(place, rule(rank_figure=at.RANK_WORST)) == [0, 1, 2]  # each loses its whole stake: a tie


def test_without_volatility_there_is_no_figure() -> None:
    """A candidate whose figure is not known is left out."""
    place = world(slots())
    place.bars["signs"][NOW, 1] = at.HAS_BAR
    assert listed(place, rule(rank_figure=at.RANK_CREDIT)) == [0, 2]


def test_busy_slots_and_days_without_a_bar() -> None:
    """Held, ordered, or not traded that day: not listed."""
    some = slots()
    some[0].status, some[1].status = OPEN, ORDERED
    place = world(some)
    assert listed(place, rule()) == [2]
    place.bars["signs"][NOW, 2] = 0
    assert listed(place, rule()) == []


@pytest.mark.parametrize(("left", "lost", "free"), [(16, 1, True), (17, 1, False), (19, 0, True)])
def test_a_pause_after_a_loss(left: int, lost: int, free: bool) -> None:
    """Four sessions from the loss on: 16 is over, 17 is not; a gain needs no pause."""
    some = slots()
    some[1].left, some[1].lost = left, lost
    assert listed(world(some), rule(cooling=4)) == ([0, 1, 2] if free else [0, 2])


def test_a_loss_on_one_step_pauses_the_whole_ladder() -> None:
    """Three slots a symbol: a loss in the last of symbol 1 keeps its first ones out too."""
    some = slots(3)
    some[5].left, some[5].lost = 18, 1
    assert listed(world(some), rule(ladder=3, cooling=4)) == [0, 6]
    assert listed(world(some), rule(ladder=3, cooling=2)) == [0, 3, 6]


@pytest.mark.parametrize(("decided", "free"), [(15, True), (16, False)])
def test_steps_of_a_ladder_are_apart(decided: int, free: bool) -> None:
    """Five sessions between entries of a symbol; then the next slot is used. One order at a time."""
    some = slots(3)
    some[3].status, some[3].decided = OPEN, decided
    assert listed(world(some), rule(ladder=3, spacing=5)) == ([0, 4, 6] if free else [0, 6])
    some[3].status = ORDERED
    assert listed(world(some), rule(ladder=3, spacing=5)) == [0, 6]


def test_a_sector_fills() -> None:
    """Two symbols of sector 4, one unknown: at most one held or ordered closes the sector, not the others."""
    some = slots()
    place = world(some, sectors=(4, 4, at.NO_SECTOR))
    limit = rule(most_sector=1)
    assert [sector_is_full(place, limit, symbol) for symbol in range(3)] == [False, False, False]
    for status in (ORDERED, OPEN):
        some[0].status, some[2].status = status, status
        assert [sector_is_full(place, limit, symbol) for symbol in range(3)] == [True, True, False]
        assert not sector_is_full(place, rule(most_sector=2), 1)
    some[0].status = FLAT
    assert not sector_is_full(place, limit, 1)
