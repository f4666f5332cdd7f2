"""Running the walk: buffers, chunks, progress, and the log that comes out."""

from __future__ import annotations

import datetime as dt
from collections.abc import Callable, Iterator
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from hedgerow.errors import Fault, StudyError
from hedgerow.events.log import EventLog, LegName, LogMeta
from hedgerow.kernels.layout import KIND_DEPOSIT, NO_ROW, Costs, Floats, Records
from hedgerow.kernels.state import COSTS, POSITION, SMILE, TOTALS, World
from hedgerow.market.sessions import CLOSE_STRIKES_FROM, Regime
from hedgerow.market.table import Market
from hedgerow.rules.program import Program
from hedgerow.walk.account import MARGINS, Account
from hedgerow.walk.inputs import Tape
from hedgerow.walk.tables import Tables

__all__ = ["Terms", "Window", "walk_program"]

CHUNK_SESSIONS = 256  # between two looks at the keyboard and the progress bar

Progress = Callable[[int, int], None]


def _outside(day: str | None, dates: NDArray[np.datetime64]) -> Iterator[tuple[str, str]]:
    """The code and words of what is wrong with one end of a window."""
    if day is None:
        return
    try:
        dt.date.fromisoformat(day)
    except ValueError:
        yield "date", f"is `{day}`, which is no such date"
        return
    if not dates[0] <= np.datetime64(day, "D") <= dates[-1]:
        yield "outside", f"is {day}, which lies outside the data"


@dataclass(frozen=True, slots=True)
class Window:
    """The sessions walked: from `start` up to and without `stop`, numbers on the market's axis."""

    start: int
    stop: int

    @classmethod
    def of(cls, market: Market, first: str | None = None, last: str | None = None) -> Window:
        """The window of two ISO dates, both included; None is the market's own end.

        Raises StudyError when it holds no session, or for each end that is no date or outside the data.
        """
        dates = market.dates
        span = f"the data hold {dates[0]} to {dates[-1]}"
        ends = {"window.from": first, "window.to": last}
        faults = [
            Fault(where, 0, 0, *fault, span) for where, day in ends.items() for fault in _outside(day, dates)
        ]
        if faults:
            raise StudyError(faults)
        start = 0 if first is None else int(np.searchsorted(dates, np.datetime64(first, "D")))
        stop = len(dates) if last is None else int(np.searchsorted(dates, np.datetime64(last, "D"), "right"))
        if stop <= start:
            found = f"holds no session from {first or dates[0]} to {last or dates[-1]}"
            raise StudyError.one("window", "empty", found, span, "give two dates in their order")
        return cls(start, stop)


@dataclass(frozen=True, slots=True)
class Terms:
    """What a walk is run with; `marks` keeps one mark a position and close, not only those of the last.

    `at_once` is how many sessions go by between two looks at the keyboard, 0 for the usual number. The log
    does not depend on it.
    """

    account: Account
    costs: Costs
    window: Window
    regime: Regime = "modern"
    marks: bool = True
    at_once: int = 0


def _plan(program: Program, account: Account, regime: str, marks: bool) -> Records:
    """The program's plan with the account's part filled in."""
    plans = program.plan.copy()
    plan = plans[0]
    plan["opening_cash"] = account.cash
    plan["per_position"] = account.per_position / plan["ladder"]
    plan["most_positions"], plan["most_new"] = account.most_positions, account.most_new_a_day
    plan["most_sector"], plan["margin"] = account.most_per_sector, MARGINS[account.margin]
    plan["interest"], plan["marks"] = int(account.interest), int(marks)
    plan["modern_from"] = 0 if regime == "modern" else CLOSE_STRIKES_FROM
    return plans


def _records(size: int | tuple[int, int], layout: np.dtype[np.void]) -> Records:
    """Zeroed records with fields as attributes, which uncompiled kernels need."""
    return np.zeros(size, layout).view(np.recarray)


def _sessions(tape: Tape, program: Program) -> Records:
    """The tape's sessions with the expiry chosen for each leg at each close."""
    sessions = tape.sessions.copy()
    for leg in range(program.expiries.shape[0]):
        sessions["expiry"][:, leg] = program.expiries[leg]
    return sessions.view(np.recarray)


def _one(values: tuple[float, ...], layout: np.dtype[np.void]) -> Records:
    """One record of plain numbers."""
    assert layout.names is not None
    out = np.zeros(1, layout)
    for name, value in zip(layout.names, values, strict=False):  # what a walk adds for itself begins empty
        out[name] = value
    return out.view(np.recarray)


def make_world(tape: Tape, program: Program, terms: Terms, tables: Tables) -> World:
    """Everything one walk reads and writes, fresh."""
    account = terms.account
    plans = _plan(program, account, terms.regime, terms.marks)
    ladder = int(plans[0]["ladder"])
    slots = tape.bars.shape[1] * ladder
    totals = _records(1, TOTALS)
    totals[0].cash = account.cash
    totals[0].equity = account.cash
    positions = _records(slots, POSITION)
    positions["symbol"] = np.arange(slots) // ladder
    positions["left"] = -1
    return World(
        bars=tape.bars.view(np.recarray),
        actions=tape.actions.view(np.recarray),
        sessions=_sessions(tape, program),
        american=tape.american,
        sectors=tape.sectors,
        may_enter=program.may_enter,
        words=program.words,
        rank=program.rank,
        ops=program.ops.view(np.recarray),
        plan=plans.view(np.recarray),
        costs=_one(terms.costs, COSTS),
        smile=_one(tape.surface.smile, SMILE),
        totals=totals,
        positions=positions,
        events=tables.view("events"),
        terms=tables.view("terms"),
        days=tables.view("days"),
        marks=tables.view("marks"),
        scratch=np.zeros(64),
    )


def _deposit(world: World, session: int, cash: float) -> None:
    """Write the opening cash as the first event."""
    row, totals = world.events[0], world.totals[0]
    row.session, row.symbol, row.position = session, -1, -1
    row.kind, row.leg, row.cash = KIND_DEPOSIT, NO_ROW, cash
    totals.events = 1


def _step(world: World, begin: int, end: int, first: int, queue: Floats) -> int:
    """One call of the compiled walk, which is loaded, or compiled, by the first."""
    from hedgerow.kernels.loop import walk

    return int(walk(world, begin, end, first, queue))


def _meta(market: Market, program: Program, account: Account, variant: str) -> LogMeta:
    """What the codes of the log stand for."""
    strategy = program.strategy
    legs = tuple(LegName(leg.name, "sell" if leg.sold else "buy", leg.right) for leg in strategy.legs)
    return LogMeta(
        symbols=market.symbols,
        dates=market.dates,
        legs=legs,
        exits=tuple(rule.name for rule in strategy.exit),
        strategy=strategy.name,
        variant=variant,
        opening_cash=account.cash,
        currency=market.currency,
    )


def walk_program(
    market: Market,
    tape: Tape,
    program: Program,
    terms: Terms,
    variant: str = "",
    progress: Progress | None = None,
) -> EventLog:
    """Walk a program over a window; return its log. The same inputs give the same bytes.

    `progress` is called with sessions done and to do. The interpreter lock is released while walking.
    """
    account, window = terms.account, terms.window
    slots = tape.bars.shape[1] * int(program.plan[0]["ladder"])
    tables = Tables(slots, window.stop - window.start, terms.marks)
    world = make_world(tape, program, terms, tables)
    queue = np.zeros(world.positions.shape[0] + 1)
    _deposit(world, window.start, account.cash)
    session, chunk = window.start, terms.at_once or CHUNK_SESSIONS
    while session < window.stop:
        if session + chunk < window.stop:
            stop = session + chunk
        else:  # the last session is always marked, so that what is still open has a value
            stop = window.stop - 1 if session < window.stop - 1 else window.stop
            world.plan[0].marks = int(terms.marks or stop == window.stop)
        world = tables.extend(world)
        session = _step(world, session, stop, window.start, queue)
        if progress is not None:
            progress(session - window.start, window.stop - window.start)
    return EventLog(_meta(market, program, account, variant), **tables.cut(world.totals[0]), known=True)
