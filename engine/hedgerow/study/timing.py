"""Timing luck: every variant begun on each session of its cycle, all measured over the same days.

The cycle is that of a rule's longest regular clock: the calendar days of its longest-dated leg as sessions
(five in seven days), or the week, month or quarter its entries are tied to. The k-th start may open a
position in a symbol k sessions later than the first session at which it could; nothing else is changed.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass, replace

import numpy as np

from hedgerow.evidence.starts import Starts, starts_of
from hedgerow.kernels.layout import Floats, Ints
from hedgerow.rules.program import Program
from hedgerow.rules.schema import Strategy
from hedgerow.study.crew import Tell, together
from hedgerow.study.declare import Study
from hedgerow.study.one import Bench
from hedgerow.study.stress import costs_of
from hedgerow.walk.run import Terms, Window, walk_program

__all__ = ["MOST_STARTS", "cycle_sessions", "first_sessions", "held_back", "offsets_of", "walked_starts"]

MOST_STARTS = 25
"""Starts walked at most; of a longer cycle so many, evenly spread."""

_SESSIONS_A_WEEK, _DAYS_A_WEEK = 5.0, 7.0
_SESSIONS = {"week": 5, "month": 21, "quarter": 63, "weekly": 5, "monthly": 21, "quarterly": 63}


@dataclass(frozen=True)
class _Start:
    """One start to walk: which variant, and by how many sessions it waits."""

    variant: int
    offset: int


def cycle_sessions(strategy: Strategy) -> int:
    """Return the sessions of a rule's longest regular cycle; 1 for a rule that has none."""
    days = [leg.expiry.days for leg in strategy.legs if leg.expiry.days is not None]
    clocks = [round(count * _SESSIONS_A_WEEK / _DAYS_A_WEEK) for count in days]
    on = strategy.enter.on if strategy.enter is not None else None
    if on is not None:
        clocks += [_SESSIONS[word] for word in (on.first_session_of, on.expiry_of) if word is not None]
        clocks += [_SESSIONS["week"]] if on.weekday else []
    return max([1, *clocks])


def offsets_of(cycle: int) -> tuple[int, ...]:
    """Return by how many sessions each start waits: 0 to cycle - 1, or MOST_STARTS of them evenly spread."""
    count = min(cycle, MOST_STARTS)
    return tuple(start * cycle // count for start in range(count))


def walked_starts(
    bench: Bench,
    study: Study,
    window: Window,
    workers: int,
    progress: Callable[[int], None] | None = None,
) -> tuple[Starts, ...]:
    """Walk every variant from every start; return what the starts make of each, over the days all share.

    Those days begin when the last start of any variant may have entered. Empty where they are fewer than two.
    """
    cycles = [cycle_sessions(strategy) for _, strategy in study.variants]
    plans = [_Start(n, at) for n, cycle in enumerate(cycles) for at in offsets_of(cycle)]
    programs = [bench.program(strategy) for _, strategy in study.variants]
    ready = first_sessions(bench, window)
    shared = int(ready[bench.traded.astype(bool)].min()) + max(plan.offset for plan in plans)
    if window.stop - shared < 2:
        return ()

    def walk(piece: int, tell: Tell) -> Floats:
        plan = plans[piece]
        program = held_back(programs[plan.variant], ready + plan.offset)
        terms = Terms(study.account, costs_of(study), window, study.listings, marks=False)
        log = walk_program(bench.market, bench.tape, program, terms, study.variants[plan.variant][0], tell)
        return np.array(log.days["equity"][shared - window.start :])

    found = together(walk, range(len(plans)), workers, progress)
    dates = bench.market.dates[shared : window.stop]
    made = []
    for number, (name, _) in enumerate(study.variants):
        mine = [(plan.offset, one) for plan, one in zip(plans, found, strict=True) if plan.variant == number]
        curves = np.array([one for _, one in mine])
        if (curves > 0.0).all():
            made.append(starts_of(name, cycles[number], [at for at, _ in mine], curves, dates))
    return tuple(made)


def first_sessions(bench: Bench, window: Window) -> Ints:
    """Return each symbol's first session (N,) with a price and a known volatility; the last without one."""
    known = ~np.isnan(bench.tape.surface.level) & ~np.isnan(bench.market.close)
    known[: window.start] = False
    known[window.stop :] = False
    return np.where(known.any(axis=0), known.argmax(axis=0), window.stop - 1)


def held_back(program: Program, first: Ints) -> Program:
    """Return the program with no entry in a symbol before its first session (N,)."""
    sessions = np.arange(program.may_enter.shape[0])[:, np.newaxis]
    return replace(program, may_enter=np.ascontiguousarray(program.may_enter & (sessions >= first)))
