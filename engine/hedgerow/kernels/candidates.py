"""Candidates at a close: which symbols may enter, in which order, and how many of a sector are held."""

from __future__ import annotations

import math
from typing import Any

from hedgerow.kernels.entry import figure_of
from hedgerow.kernels.holding import close_clock
from hedgerow.kernels.jit import step
from hedgerow.kernels.layout import HAS_BAR, NO_SECTOR, RANK_NONE, Floats
from hedgerow.kernels.state import FLAT, OPEN, ORDERED, Desk, Scene, World

__all__ = ["list_candidates", "sector_is_full"]


@step
def _waits(world: World, plan: Any, session: int, slot: int) -> bool:
    """Whether a slot may not enter: busy, too soon after its symbol's last entry, or cooling after a loss."""
    position = world.positions[slot]
    if position.status != FLAT:
        return True
    first = slot - slot % plan.ladder
    for other in range(first, first + plan.ladder):
        held = world.positions[other]
        if plan.cooling > 0 and held.lost == 1 and session - held.left < plan.cooling:
            return True
        if plan.ladder == 1:
            return False
        if held.status == ORDERED or (held.status == OPEN and session - held.decided < plan.spacing):
            return True
    return False


@step
def _free_slot(world: World, plan: Any, session: int, symbol: int) -> int:
    """A slot of the symbol that may enter; -1 when there is none."""
    for slot in range(symbol * plan.ladder, (symbol + 1) * plan.ladder):
        if not _waits(world, plan, session, slot):
            return slot
    return -1


@step
def _score(world: World, desk: Desk, session: int, position: Any) -> float:
    """The number a candidate is ranked by, high first; 0 for all without ranking, NaN leaves it out."""
    symbol, before = position.symbol, max(session - 1, 0)
    if desk.plan.rank_figure != RANK_NONE:
        scene = Scene(
            session,
            world.american[symbol],
            world.bars[before, symbol],
            world.sessions[before],
            world.bars[session, symbol],
            world.sessions[session],
        )
        return figure_of(desk, position, scene, close_clock(scene))
    return world.rank[session, symbol] if world.rank.shape[0] > 1 else 0.0


@step
def list_candidates(world: World, desk: Desk, session: int, queue: Floats) -> int:
    """Write the slots that may enter into `queue`, best rank first, ties by symbol; return how many."""
    size = 0
    ranked = desk.plan.rank_figure != RANK_NONE or world.rank.shape[0] > 1
    for symbol in range(world.bars.shape[1]):
        if world.may_enter[session, symbol] == 0:
            continue
        slot = _free_slot(world, desk.plan, session, symbol)
        if slot < 0 or world.bars[session, symbol].signs & HAS_BAR == 0:
            continue
        at = size
        if ranked:
            position = world.positions[slot]
            position.score = _score(world, desk, session, position)
            if math.isnan(position.score):
                continue
            while at > 0 and world.positions[int(queue[at - 1])].score < position.score:
                queue[at] = queue[at - 1]
                at -= 1
        queue[at] = slot
        size += 1
    return size


@step
def sector_is_full(world: World, plan: Any, symbol: int) -> bool:
    """Whether as many positions of a symbol's sector are held or ordered as the account allows."""
    sector = world.sectors[symbol]
    if sector == NO_SECTOR:
        return False
    held = 0
    for slot in range(world.positions.shape[0]):
        if world.positions[slot].status != FLAT and world.sectors[world.positions[slot].symbol] == sector:
            held += 1
    return held >= plan.most_sector
