"""What the benchmarks run on: a market of random walks, a weekly collar, the same inputs for every loop."""

from __future__ import annotations

import datetime as dt
from dataclasses import dataclass, replace
from pathlib import Path

import numpy as np

from hedgerow.kernels.layout import Bytes, Costs, Floats, Ints, SmileModel
from hedgerow.market.calendar import sessions_between
from hedgerow.market.table import EPOCH_ORDINAL, Market
from hedgerow.rules.load import load_strategy
from hedgerow.rules.program import Program, compile_strategy
from hedgerow.rules.schema import SignalValue
from hedgerow.volatility.surface import SurfaceModel, build
from hedgerow.walk.account import DEFAULT_COSTS, Account
from hedgerow.walk.inputs import Tape, make_tape
from hedgerow.walk.run import Terms, Window, walk_program

__all__ = ["COLLAR", "PUT_DISTANCE", "Inputs", "Stage", "make_market", "make_stage", "run_walk", "with_rule"]

PUT_DISTANCE = -0.04
STRATEGIES = Path(__file__).parents[2] / "strategies"
COLLAR = {
    "name": "Weekly collar",
    "legs": {
        "call": {
            "sell": "call",
            "expiry": {"days": 7, "listed": "weekly"},
            "strike": {"from_spot": "0%", "snap": "up"},
        },
        "put": {"buy": "put", "expiry": {"with": "call"}, "strike": {"from_spot": "-4%", "snap": "down"}},
    },
}


@dataclass(frozen=True)
class Inputs:
    """What the single-purpose loops read. T sessions, N symbols; prices per share, ordinals proleptic."""

    open: Floats  # (T, N)
    close: Floats
    level: Floats  # volatility, annual fraction, NaN unknown
    anchor: Floats
    allowed: Bytes  # (T, N)
    ordinal: Ints  # (T,)
    expiry: Ints  # (T,) of a position decided at that close, 0 none
    rate: Floats
    low_tick: Floats
    high_tick: Floats
    threshold: Floats
    account: Account
    costs: Costs
    smile: SmileModel

    @property
    def shape(self) -> tuple[int, int]:
        """Sessions and symbols."""
        sessions, symbols = self.close.shape
        return sessions, symbols


@dataclass(frozen=True)
class Stage:
    """The same job, prepared for the walk (market, tape, program) and for the other loops (inputs)."""

    market: Market
    tape: Tape
    program: Program
    inputs: Inputs


def make_market(sessions: int, symbols: int, seed: int = 1, rate: float = 0.03) -> Market:
    """Prices that wander around where they began; neither dividends, splits nor reports."""
    rng = np.random.default_rng(seed)
    first = dt.date(2000, 1, 3).toordinal()
    ordinals = np.asarray(sessions_between(first, first + 2 * sessions + 30), np.int64)[:sessions]
    shape = (sessions, symbols)
    deviation = rng.uniform(0.15, 0.45, symbols) / np.sqrt(252.0)
    start = np.log(rng.uniform(20.0, 300.0, symbols))
    logs, now = np.empty(shape), np.zeros(symbols)
    for t in range(sessions):
        now = 0.999 * now + deviation * rng.standard_normal(symbols)
        logs[t] = start + now
    close = np.round(np.exp(logs), 2)
    gap = np.exp(0.4 * deviation * rng.standard_normal(shape))
    opens = np.round(np.vstack([close[:1], close[:-1]]) * gap, 2)
    reach = np.exp(0.5 * deviation * np.abs(rng.standard_normal(shape)))
    zeros, ones = np.zeros(shape), np.ones(shape)
    return Market(
        symbols=tuple(f"S{n:04d}" for n in range(symbols)),
        kinds=("stock",) * symbols,
        sectors=("",) * symbols,
        dates=(ordinals - EPOCH_ORDINAL).astype("datetime64[D]"),
        ordinals=ordinals,
        open=opens,
        high=np.maximum(opens, close) * reach,
        low=np.minimum(opens, close) / reach,
        close=close,
        volume=ones,
        dividend=zeros,
        special=zeros,
        split=ones,
        rate=np.full(sessions, rate),
        reports=(),
        implied=np.full(shape, np.nan),
        first_bar=np.zeros(symbols, np.int64),
        last_bar=np.full(symbols, sessions - 1, np.int64),
        currency="USD",
        adjustment="none",
        source="random walks",
        findings=(),
    )


def _no_signal(test: SignalValue) -> Floats:
    """The collar asks for no signal; raises LookupError if it does."""
    raise LookupError(f"the benchmark's collar should look at no signal, but asks for {test.signal}")


def make_stage(sessions: int, symbols: int, seed: int = 1, *, rate: float = 0.03) -> Stage:
    """Prepare one market and one account, large enough that every symbol can hold a position."""
    market = make_market(sessions, symbols, seed, rate)
    surface = build(SurfaceModel(), market, (1, 14))
    tape = make_tape(market, surface)
    program = compile_strategy(load_strategy(COLLAR), _no_signal, market.ordinals, symbols, "modern")
    account = Account(cash=200_000.0 * symbols, per_position=1.0 / symbols)
    plain = np.ascontiguousarray
    inputs = Inputs(
        open=plain(tape.bars["open"]),
        close=plain(tape.bars["close"]),
        level=plain(tape.bars["level"]),
        anchor=plain(tape.bars["anchor"]),
        allowed=plain(program.may_enter),
        ordinal=market.ordinals,
        expiry=plain(program.expiries[0]),
        rate=market.rate,
        low_tick=plain(tape.sessions["low_tick"]),
        high_tick=plain(tape.sessions["high_tick"]),
        threshold=plain(tape.sessions["exercise_threshold"]),
        account=account,
        costs=DEFAULT_COSTS,
        smile=surface.smile,
    )
    return Stage(market, tape, program, inputs)


def with_rule(stage: Stage, file: str) -> Stage:
    """The same market and account for a shipped strategy; only the walk can run it."""
    strategy = load_strategy(STRATEGIES / file)
    ordinals, symbols = stage.market.ordinals, stage.inputs.shape[1]
    return replace(stage, program=compile_strategy(strategy, _no_signal, ordinals, symbols, "modern"))


def run_walk(stage: Stage) -> tuple[Floats, int]:
    """Equity at every close (T,) and how many positions were opened, by the walk."""
    window = Window(0, stage.inputs.shape[0])
    terms = Terms(account=stage.inputs.account, costs=stage.inputs.costs, window=window, marks=False)
    log = walk_program(stage.market, stage.tape, stage.program, terms)
    return np.array(log.days["equity"]), len(log.terms)
