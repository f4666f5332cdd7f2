"""One batch of variants, walked and summed up to the bytes of its shard: the work that pools share."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass, fields, replace
from functools import cached_property
from threading import Lock
from typing import Any

import numpy as np

from hedgerow.errors import HedgerowError, InputError, RunError
from hedgerow.kernels.layout import Costs
from hedgerow.market.sessions import Regime
from hedgerow.market.table import Market
from hedgerow.study.brief import FIGURES, brief_of
from hedgerow.study.one import Bench
from hedgerow.study.shards import shard_bytes
from hedgerow.study.trials import Trials
from hedgerow.volatility.model import SurfaceModel
from hedgerow.walk.account import Account
from hedgerow.walk.run import Terms, Window, walk_program

__all__ = ["LONGEST", "Job", "batch_size", "ready", "run_batch", "terms_of"]

LONGEST = "longest_leg_days"  # calendar days: the longest life of a leg that the calendar of expiries gives

BATCH_CELLS = 2_000_000  # symbol-sessions: about a second and a half of walking
MOST_IN_BATCH = 64
LEAST_BATCHES = 16  # where there are as many variants, so that two workers share even a small study

Told = Callable[[int], None]


@dataclass(frozen=True, eq=False)
class Job:
    """Everything a worker needs to run any batch of a study; `key` is that of its market and surface."""

    key: str
    market: Market
    surface: SurfaceModel
    listings: Regime
    symbols: tuple[str, ...] | None
    account: Account
    costs: Costs
    window: Window
    trials: Trials
    extensions: tuple[tuple[str, str], ...] = ()  # files of a user's own code, with the hash of their content

    @cached_property
    def bench(self) -> Bench:
        """The market made ready, once for all variants."""
        return Bench(self.market, self.surface, self.listings, self.symbols)

    def copied(self) -> Job:
        """The same job with arrays of its own: what came over a wire may lie where sums differ in a bit."""
        arrays: dict[str, Any] = {
            one.name: np.array(getattr(self.market, one.name), order="C")
            for one in fields(self.market)
            if isinstance(getattr(self.market, one.name), np.ndarray)
        }
        return replace(self, market=replace(self.market, **arrays))


def batch_size(variants: int, cells: int) -> int:
    """How many variants a batch has, by their number and the symbol-sessions of one, not by the workers."""
    by_time = max(1, min(MOST_IN_BATCH, BATCH_CELLS // max(cells, 1)))
    return max(1, min(by_time, -(-variants // LEAST_BATCHES)))


_preparing = Lock()


def ready(job: Job) -> None:
    """Make, once, what the threads of this process share: records, and compiled code."""
    with _preparing:
        bench = job.bench
        program = bench.program(job.trials.strategy(0))
        window = Window(job.window.start, min(job.window.start + 2, job.window.stop))
        terms = Terms(job.account, job.costs, window, job.listings, marks=False)
        walk_program(job.market, bench.tape, program, terms)


def terms_of(job: Job) -> Terms:
    """How a variant is walked: all sessions in one call, so that threads seldom meet at the lock."""
    sessions = job.window.stop - job.window.start
    return Terms(job.account, job.costs, job.window, job.listings, marks=False, at_once=sessions)


def run_batch(job: Job, numbers: range, tell: Told | None = None) -> bytes:
    """Walk variants one after the other; return the bytes of their shard.

    `tell` is called with 1 after each. Raises StudyError, RulesError or ReconcileError, naming the variant.
    """
    sessions = job.window.stop - job.window.start
    figures = {name: np.empty(len(numbers)) for name in (*FIGURES, LONGEST)}
    equity = np.empty((len(numbers), sessions))
    terms = terms_of(job)
    for row, number in enumerate(numbers):
        try:
            program = job.bench.program(job.trials.strategy(number))
            log = walk_program(job.market, job.bench.tape, program, terms)
            brief = brief_of(log, job.market.rate)
        except HedgerowError as error:
            raise _named(error, number, job.trials.name(number)) from error
        for name in FIGURES:
            figures[name][row] = getattr(brief, name)
        lives = program.expiries - job.market.ordinals
        figures[LONGEST][row] = max(lives.max(initial=0), 0)
        equity[row] = log.days["equity"]
        if tell is not None:
            tell(1)
    return shard_bytes(numbers, figures, equity)


def _named(error: HedgerowError, number: int, name: str) -> HedgerowError:
    """The same error, said of the variant."""
    who = f"variant {number + 1:,} ({name})"
    if isinstance(error, InputError):
        return type(error)([replace(fault, found=f"{who}: {fault.found}") for fault in error.faults])
    return RunError(f"{who}: {error}")
