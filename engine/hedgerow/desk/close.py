"""One close of the walk itself: what it orders from an account's state, and the figures of every structure.

Orders are not worked out here. The compiled walk is run over the one session, from the state given, on two
rows of the tape; what it writes is read back. `kernels.probe` then measures the same structures.
"""

from __future__ import annotations

from dataclasses import dataclass, replace
from typing import Any

import numpy as np

from hedgerow.events.log import EventLog, LegName, LogMeta
from hedgerow.kernels.layout import MAX_LEGS, PAYS, SPLITS, Costs, Floats, Records
from hedgerow.kernels.state import OPEN, ORDERED, POSITION, SMILE, WANTED, World
from hedgerow.rules.program import Program
from hedgerow.study.one import Bench
from hedgerow.walk.account import Account
from hedgerow.walk.inputs import Tape
from hedgerow.walk.run import Terms, Window, _one, _step, make_world
from hedgerow.walk.tables import Tables

__all__ = ["Close", "Evening", "State", "probed", "triggers"]


@dataclass(frozen=True, eq=False)
class State:
    """An account at a close before anything is decided: cash (money), positions held (P,), cooling symbols.

    `lost` maps a column of the market to the sessions since a losing position in it ended.
    """

    cash: float
    held: Records
    lost: dict[int, int]


@dataclass(frozen=True, eq=False)
class Evening:
    """What the walk did at one close: its log, the orders (slots of new positions), and every slot after."""

    log: EventLog
    ordered: Records  # (K,) new positions in the order in which they are filled
    after: Records  # (P,) the positions held, as the close left them
    equity: float
    cash: float
    free: float  # cash not set aside for what could be owed


@dataclass(frozen=True, eq=False)
class Close:
    """A bench whose market ends at the close looked at, a program, and what it is traded with."""

    bench: Bench
    program: Program
    account: Account
    costs: Costs

    @property
    def session(self) -> int:
        """The session looked at: the last of the market."""
        return len(self.bench.market.dates) - 1

    @property
    def rows(self) -> int:
        """How many of the last sessions are looked at: two, where there are two."""
        return min(2, self.session + 1)

    def world(self, account: Account | None = None, tape: Tape | None = None) -> World:
        """The walk's world, of the last two sessions alone."""
        tape = tape or self.bench.tape
        slots = tape.bars.shape[1] * int(self.program.plan[0]["ladder"])
        terms = Terms(account or self.account, self.costs, Window(self.session, self.session + 1))
        terms = replace(terms, regime=self.bench.listings, marks=False)
        return _last(make_world(tape, self.program, terms, Tables(slots, 1, False)), self.rows)

    def evening(self, state: State) -> Evening:
        """Run the walk over the session's close from a state."""
        world = self.world(replace(self.account, cash=max(state.cash, 1e-9)))
        world.totals[0].cash = world.totals[0].equity = state.cash
        slots = _place(world, state, self.rows - 1)
        _only_the_close(world)
        queue = np.zeros(world.positions.shape[0] + 1)
        _step(world, self.rows - 1, self.rows, 0, queue)
        return self._read(world, slots, queue, len(state.held))

    def _read(self, world: World, slots: list[int], queue: Floats, held: int) -> Evening:
        """What the walk wrote."""
        totals, positions = world.totals[0], world.positions
        log = EventLog(
            self._meta(),
            **{name: np.array(getattr(world, name)[: int(totals[name])]) for name in ("events", "terms")},
            days=np.array(world.days[: int(totals.days)]),
            marks=np.array(world.marks[:0]),
            known=True,
        )
        waiting = [int(queue[n]) for n in range(int(totals.waiting))]
        filled = np.flatnonzero((positions["status"] == OPEN) & (positions["position"] >= held))
        filled = filled[np.argsort(positions["position"][filled])]
        assert all(positions[slot].status == ORDERED for slot in waiting)
        ordered = np.array(positions[[*waiting, *filled.tolist()]])
        return Evening(
            log,
            ordered,
            np.array(positions[slots]),
            float(totals.equity),
            float(totals.cash),
            float(totals.cash - totals.reserved),
        )

    def _meta(self) -> LogMeta:
        """What the codes of the evening's log stand for."""
        market, strategy = self.bench.market, self.program.strategy
        legs = tuple(LegName(leg.name, "sell" if leg.sold else "buy", leg.right) for leg in strategy.legs)
        return LogMeta(
            symbols=market.symbols,
            dates=market.dates[-self.rows :],
            legs=legs,
            exits=tuple(rule.name for rule in strategy.exit),
            strategy=strategy.name,
            variant="",
            opening_cash=0.0,
            currency=market.currency,
        )


def _last(world: World, rows: int) -> World:
    """The world with the last rows of every table of sessions; bars as a copy that may be changed."""
    cut = {name: getattr(world, name)[-rows:] for name in ("actions", "sessions", "may_enter")}
    for name in ("words", "rank"):
        table = getattr(world, name)
        cut[name] = np.ascontiguousarray(table[-rows:]) if table.shape[0] > 1 else table
    bars = np.array(world.bars[-rows:]).view(np.recarray)
    cut = {name: np.ascontiguousarray(table) for name, table in cut.items()}
    cut["actions"], cut["sessions"] = (cut[name].view(np.recarray) for name in ("actions", "sessions"))
    return world._replace(bars=bars, **cut)


def _only_the_close(world: World) -> None:
    """Let nothing happen before the close: the state given is that at the close already."""
    world.bars[-1]["signs"] &= ~(PAYS | SPLITS)
    world.plan[0].interest = 0
    world.costs[0].borrow = 0.0


def _place(world: World, state: State, session: int) -> list[int]:
    """Put what is held, and what is cooling, into the slots; return the slots of the positions held."""
    ladder, totals = int(world.plan[0].ladder), world.totals[0]
    taken: dict[int, int] = {}
    slots = []
    for number, held in enumerate(state.held):
        symbol = int(held["symbol"])
        slot = symbol * ladder + taken.get(symbol, 0)
        taken[symbol] = taken.get(symbol, 0) + 1
        world.positions[slot] = held
        world.positions[slot].position = number
        totals.reserved += held["reserve"]
        slots.append(slot)
    totals.open = totals.next_position = len(slots)
    for symbol, ago in state.lost.items():
        for slot in range(symbol * ladder, (symbol + 1) * ladder):
            world.positions[slot].lost, world.positions[slot].left = 1, session - ago
    return slots


def fresh(count: int) -> Records:
    """So many empty positions."""
    return np.zeros(count, POSITION).view(np.recarray)


def lot_of(order: Any) -> Records:
    """One position of one lot whose legs are those an order wants, to be valued."""
    out = fresh(1)
    out[0].symbol = order["symbol"]
    for k in range(MAX_LEGS):
        leg = order["legs"][k]
        out[0].legs[k] = leg
        if leg["quantity"] != 0.0:
            scale = order["lots"] if order["status"] == OPEN else 1.0
            out[0].legs[k].quantity = leg["quantity"] / scale
            out[0].legs[k].status = WANTED
    return out


def probed(world: World, session: int, positions: Records, task: int) -> Records:
    """What a close says of positions (P,), PROBED (P,); legs are chosen or valued on the positions given."""
    from hedgerow.kernels.probe import PROBED, probe

    out = np.zeros(len(positions), PROBED).view(np.recarray)
    if len(positions):
        probe(world, session, positions, out, task)
    return out


def triggers(world: World, session: int, positions: Records) -> Floats:
    """The number each operation of the rule compares, (P, operations), of positions probed as held."""
    from hedgerow.kernels.probe import trigger_figures

    out = np.full((len(positions), world.ops.shape[0]), np.nan)
    if len(positions):
        trigger_figures(world, session, positions, out)
    return out


def with_ratio(world: World, tape: Tape, ratio: float) -> World:
    """The world under another ratio of implied over realized volatility."""
    return world._replace(smile=_one(tape.surface.smile._replace(ratio=ratio), SMILE))
