"""Choosing on a window and judging on the next: the only record of a choice that was not made with hindsight.

    |---- choose ----| gap |-- judge --|
              |---- choose ----| gap |-- judge --|        rolling; anchored, each begins with the first

The judged windows follow on one another. Each is walked afresh, from cash, with the variant that was chosen
and the money that the record has come to, so that a judged window knows nothing of what was held before it.
"""

from __future__ import annotations

import math
from collections.abc import Iterable
from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import NDArray

from hedgerow.errors import StudyError
from hedgerow.evidence.figures import Curve
from hedgerow.evidence.summary import curve_of
from hedgerow.study.batches import Job
from hedgerow.study.brief import STILL, curve_from
from hedgerow.study.gridwords import WalkForwardWords
from hedgerow.study.shards import Shard
from hedgerow.study.yardstick import buy_and_hold
from hedgerow.units import DAYS_A_YEAR, SESSIONS_A_YEAR
from hedgerow.walk.run import Terms, Window, walk_program

__all__ = [
    "LEAST_MONEY",
    "Fold",
    "Forward",
    "Judged",
    "chosen",
    "folds",
    "gap_sessions",
    "measured",
    "walk_forward",
]

Floats = NDArray[np.float64]

LEAST_MONEY = 0.01  # an account that owes has no return; it counts as having lost all but a cent
LEAST_JUDGED = 21  # sessions of a last window that is shorter than the others


@dataclass(frozen=True, slots=True)
class Fold:
    """Two windows on the market's axis of sessions: chosen on the first, judged on the second."""

    choose: Window
    judge: Window


@dataclass(frozen=True, slots=True)
class Judged:
    """One fold's outcome. `variant` is its number, -1 where none could be chosen and cash was kept.

    `promised` and `brought` are the measure in the window it was chosen on and in the one it was judged on;
    `place` is the share of variants that did worse than it, or the same, in the judged window.
    """

    fold: Fold
    variant: int
    promised: float
    brought: float
    place: float
    growth: float


@dataclass(frozen=True, eq=False)
class Forward:
    """The record out of sample: every fold, equity (T,) over the judged windows, and its figures."""

    by: str
    gap_sessions: int
    judged: tuple[Judged, ...]
    window: Window
    equity: Floats
    account: Curve
    yardstick: Curve | None

    @property
    def mean_place(self) -> float:
        """The mean place of what was chosen among all variants: about a half when choosing knows nothing."""
        known = [one.place for one in self.judged if not math.isnan(one.place)]
        return sum(known) / len(known) if known else math.nan


def gap_sessions(words: WalkForwardWords, longest_leg_days: float) -> int:
    """Sessions between the windows: as declared, or the longest life of a leg of any variant.

    That life is read off the calendar of expiries, in calendar days, so it knows nothing of prices.
    """
    if words.gap_sessions is not None:
        return words.gap_sessions
    return math.ceil(longest_leg_days * SESSIONS_A_YEAR / DAYS_A_YEAR)


def folds(window: Window, words: WalkForwardWords, gap: int) -> tuple[Fold, ...]:
    """The folds of a window. Raises StudyError when it is too short for one."""
    first = window.start + words.choose_sessions + gap
    found: list[Fold] = []
    for start in range(first, window.stop, words.judge_sessions):
        stop = min(start + words.judge_sessions, window.stop)
        if stop - start < min(LEAST_JUDGED, words.judge_sessions):
            break
        end = start - gap
        begin = window.start if words.anchored else end - words.choose_sessions
        found.append(Fold(Window(begin, end), Window(start, stop)))
    if not found:
        have = f"the window has {window.stop - window.start:,} sessions"
        need = f"choosing takes {words.choose_sessions:,}, the gap {gap:,}, and nothing is left to judge on"
        raise StudyError.one(
            "walk_forward", "too-short", f"{have}: {need}", "", "choose on less, or widen the window"
        )
    return tuple(found)


def measured(curve: Floats, rate: Floats, within: Window, by: str) -> Floats:
    """The measure of account values (V, T) over sessions of their own axis, shape (V,); NaN where still.

    Only values inside `within`, and the close before it, are looked at. `rate` (T,) is annual interest.
    """
    start = max(within.start, 1)
    part = np.maximum(curve[:, start - 1 : within.stop], LEAST_MONEY)
    returns = part[:, 1:] / part[:, :-1] - 1.0
    if returns.shape[1] < 2:
        return np.full(len(curve), math.nan)
    excess = returns - np.expm1(rate[start - 1 : within.stop - 1] / SESSIONS_A_YEAR)
    moved = returns.std(axis=1, ddof=1) > STILL
    if by == "growth":
        grown = np.expm1(np.log(part[:, -1] / part[:, 0]) * SESSIONS_A_YEAR / returns.shape[1])
        return np.where(moved, grown, math.nan)
    if by == "sortino":
        spread = np.sqrt(np.mean(np.minimum(excess, 0.0) ** 2, axis=1))
    else:
        spread = excess.std(axis=1, ddof=1)
    known = moved & (spread > 0.0)
    ratio = np.divide(excess.mean(axis=1), spread, out=np.full(len(curve), math.nan), where=known)
    return np.asarray(ratio * math.sqrt(SESSIONS_A_YEAR))


def chosen(measures: Floats) -> int:
    """The number of the variant with the highest measure, the first of equals; -1 when none is known."""
    return -1 if np.isnan(measures).all() else int(np.nanargmax(measures))


def walk_forward(
    job: Job, words: WalkForwardWords, gap: int, shards: Iterable[Shard], beside: bool = True
) -> Forward:
    """Choose in every fold from the shards' daily equity, and judge by walking what was chosen afresh.

    Raises StudyError when the window is too short.
    """
    cuts = folds(job.window, words, gap)
    first, second = _measures(job, words.by, cuts, shards)
    money = job.account.cash
    judged: list[Judged] = []
    parts: list[Floats] = []
    for at, fold in enumerate(cuts):
        number = chosen(first[at])
        equity = _walked(job, number, fold.judge, money)
        curve = curve_from(equity, money)
        brought = measured(curve[np.newaxis], _rate(job, fold.judge), Window(0, len(curve)), words.by)[0]
        promised, place = (
            (math.nan, math.nan) if number < 0 else (first[at][number], _place(second[at], number))
        )
        judged.append(
            Judged(fold, number, float(promised), float(brought), place, float(equity[-1] / money - 1.0))
        )
        parts.append(equity)
        money = float(equity[-1])
    whole = Window(cuts[0].judge.start, cuts[-1].judge.stop)
    equity = np.concatenate(parts)
    dates, rate = job.market.dates[whole.start : whole.stop], _rate(job, whole)
    held = buy_and_hold(job.market, job.bench.traded, whole, job.account.cash) if beside else None
    return Forward(
        by=words.by,
        gap_sessions=gap,
        judged=tuple(judged),
        window=whole,
        equity=equity,
        account=curve_of(curve_from(equity, job.account.cash), dates, rate),
        yardstick=None if held is None else curve_of(held, dates, rate),
    )


def _measures(job: Job, by: str, cuts: tuple[Fold, ...], shards: Iterable[Shard]) -> tuple[Floats, Floats]:
    """The measure of every variant in the first and in the second window of each fold, (folds, variants)."""
    variants, start = len(job.trials), job.window.start
    out = np.full((2, len(cuts), variants), math.nan)
    rate = _rate(job, job.window)
    for shard in shards:
        curve = curve_from(shard.equity, job.account.cash)
        rows = slice(shard.numbers.start, shard.numbers.stop)
        for at, fold in enumerate(cuts):
            for side, window in enumerate((fold.choose, fold.judge)):
                within = Window(window.start - start, window.stop - start)
                out[side, at, rows] = measured(curve, rate, within, by)
    return out[0], out[1]


def _place(measures: Floats, number: int) -> float:
    """The share of the other variants that are not above one of them; NaN where it is unknown or alone."""
    known = measures[~np.isnan(measures)]
    if np.isnan(measures[number]) or known.size < 2:
        return math.nan
    return float(((known <= measures[number]).sum() - 1) / (known.size - 1))


def _walked(job: Job, number: int, window: Window, money: float) -> Floats:
    """Equity at every close of a window walked afresh with so much money; cash when there is no variant."""
    if number < 0:
        return np.full(window.stop - window.start, money)
    terms = Terms(replace(job.account, cash=money), job.costs, window, job.listings, marks=False)
    program = job.bench.program(job.trials.strategy(number))
    return np.array(walk_program(job.market, job.bench.tape, program, terms).days["equity"])


def _rate(job: Job, window: Window) -> Floats:
    return job.market.rate[window.start : window.stop]
