"""A large study from its words to its findings: every variant of it in shards, and what they say together."""

from __future__ import annotations

import hashlib
import json
from collections.abc import Mapping
from dataclasses import dataclass
from pathlib import Path
from typing import Any

import numpy as np
from numpy.typing import NDArray

from hedgerow.errors import StudyError
from hedgerow.evidence.deflated import BestOfMany
from hedgerow.evidence.ratios import excess_returns, returns_of
from hedgerow.evidence.seeds import Resampling
from hedgerow.evidence.selection import Superiority, superior_to_yardstick
from hedgerow.market import Market
from hedgerow.study.batches import LONGEST, Job, batch_size
from hedgerow.study.brief import curve_from
from hedgerow.study.cluster import versions
from hedgerow.study.compare import StudyResult, bench_of
from hedgerow.study.declare import Study
from hedgerow.study.held_out import Look, Looks, parted
from hedgerow.study.one import Bench, Result
from hedgerow.study.places import told_in_place
from hedgerow.study.pool import Pool, Progress, Threads, fill
from hedgerow.study.shards import Contents, Shards
from hedgerow.study.trials import Trials, trials_of
from hedgerow.study.walk_forward import LEAST_MONEY, Forward, gap_sessions, walk_forward
from hedgerow.study.worth import Neighbourhood, Tally, neighbourhood, spread_evenly
from hedgerow.study.yardstick import buy_and_hold
from hedgerow.units import SESSIONS_A_YEAR
from hedgerow.walk.run import Window

__all__ = ["Aside", "Findings", "LargeResult", "Stage", "finish", "run_large", "stage"]

Floats = NDArray[np.float64]
Ints = NDArray[np.int64]

REPLICATIONS = 499


@dataclass(frozen=True, eq=False)
class Stage:
    """A large study made ready: what is walked, the part kept aside, and the fingerprint of its content."""

    study: Study
    job: Job
    aside: Window | None
    key: str
    contents: Contents

    @property
    def trials(self) -> Trials:
        """What is tried."""
        return self.job.trials


@dataclass(frozen=True, eq=False)
class Aside:
    """A look at the part kept aside: its window, and what the best variant did there.

    `looks` and `looks_of_all` count looks of this study, and of every study in the folder of runs.
    """

    window: Window
    looks: int
    looks_of_all: int
    result: Result


@dataclass(frozen=True, eq=False)
class Findings:
    """What the variants say together. `figures` (V,) by name; `best` is the number of the best Sharpe ratio.

    `superiority` tests `tested` variants, spread evenly over all, against the yardstick.
    """

    figures: Mapping[str, Floats]
    best: int
    worth: BestOfMany
    neighbourhood: Neighbourhood | None
    superiority: Superiority | None
    tested: int
    forward: Forward | None


@dataclass(frozen=True, eq=False)
class LargeResult:
    """A large study that is done: its findings, and the best variant with every ledger."""

    stage: Stage
    findings: Findings
    best: Result

    @property
    def whole(self) -> StudyResult:
        """The best variant as the result of an ordinary study: its assumptions, cautions and record."""
        return StudyResult(self.stage.study, self.stage.job.bench, (self.best,))

    def record(self) -> dict[str, Any]:
        """Everything needed to repeat the run, plain values."""
        return self.whole.record()


def stage(study: Study, market: Market | None = None) -> Stage:
    """A large study made ready, every variant's words checked. Raises DataError, StudyError or RulesError."""
    bench, window = bench_of(study, market)
    aside = None
    with told_in_place(study.path):
        if study.held_out is not None:
            window, aside = parted(bench.market, window, study.held_out)
        trials = trials_of(study)
        _check_axes(study, bench, trials)
    key = _key(study, bench.market)
    job = Job(
        key=key,
        market=bench.market,
        surface=study.surface,
        listings=study.listings,
        symbols=study.symbols,
        account=study.account,
        costs=StudyResult(study, bench, ()).costs,
        window=window,
        trials=trials,
        extensions=tuple((one.source, one.sha256) for one in study.extensions),
    )
    sessions = window.stop - window.start
    contents = Contents(
        study=key,
        data=bench.market.fingerprint,
        versions=versions(),
        variants=len(trials),
        batch=batch_size(len(trials), sessions * len(bench.market.symbols)),
        sessions=sessions,
    )
    return Stage(study, job, aside, key, contents)


def run_large(
    study: Study,
    folder: str | Path,
    *,
    market: Market | None = None,
    pool: Pool | None = None,
    progress: Progress | None = None,
) -> LargeResult:
    """Run every variant of a large study; its shards go to `folder`, where an unfinished run goes on.

    The results do not depend on the pool, threads when None. The part kept aside is not looked at. Raises
    DataError, StudyError, RulesError, PlaceError or RunError.
    """
    ready = stage(study, market)
    shards = Shards.begin(Path(folder), ready.contents)
    if not shards.done:
        ready.trials.check(str(study.path or "the study"))
    with told_in_place(study.path):
        fill(ready.job, shards, pool or Threads(), progress)
        return finish(ready, shards)


def finish(ready: Stage, shards: Shards, tried: int = 0) -> LargeResult:
    """What the shards say together. The part kept aside is not looked at.

    `tried` counts different variants ever evaluated on these prices, those of the study among them. Raises
    StudyError when no variant ever moved.
    """
    findings = _findings(ready, shards, tried)
    study, job = ready.study, ready.job
    name = job.trials.name(findings.best)
    strategy = job.trials.strategy(findings.best)
    beside = study.yardstick != "none"
    best = job.bench.run(strategy, study.account, study.costs, job.window, name, beside=beside)
    return LargeResult(ready, findings, best)


def look_aside(ready: Stage, best: int, looks: Looks, again: bool) -> Aside:
    """The part kept aside, walked with the best variant, the look written down first.

    Raises StudyError when this study has looked there before and is not told to look `again`.
    """
    assert ready.aside is not None
    study, job = ready.study, ready.job
    data, first = job.market.fingerprint, study.held_out or ""
    name = job.trials.name(best)
    looks.may_look(ready.key, data, first, again)
    looks.add(Look(data, first, ready.key, study.name, name))
    known = looks.at_part(data, first)
    beside = study.yardstick != "none"
    strategy = job.trials.strategy(best)
    result = job.bench.run(strategy, study.account, study.costs, ready.aside, name, beside=beside)
    return Aside(ready.aside, sum(look.study == ready.key for look in known), len(known), result)


def _findings(ready: Stage, shards: Shards, tried: int) -> Findings:
    """One pass over the shards, a second one to walk forward."""
    job, study, window = ready.job, ready.study, ready.job.window
    rate = job.market.rate[window.start : window.stop]
    tally, tested = Tally(), spread_evenly(len(job.trials))
    columns: list[Mapping[str, Floats]] = []
    subset: list[Floats] = []
    for shard in shards.all():
        curve = np.maximum(curve_from(shard.equity, job.account.cash), LEAST_MONEY)
        returns = curve[:, 1:] / curve[:, :-1] - 1.0
        tally.add(returns - np.expm1(rate[:-1] / SESSIONS_A_YEAR))
        rows = tested[(tested >= shard.numbers.start) & (tested < shard.numbers.stop)] - shard.numbers.start
        subset.append(np.log1p(returns[rows]))
        columns.append(shard.figures)
    figures = {name: np.concatenate([part[name] for part in columns]) for name in columns[0]}
    figures["sharpe"] = np.where(np.isnan(tally.sharpe), np.nan, figures["sharpe"])
    best = _best(study, figures["sharpe"])
    equity = curve_from(_equity_of(shards, best), job.account.cash)
    excess = excess_returns(returns_of(np.maximum(equity, LEAST_MONEY)), rate)
    around = None
    if study.grid is not None and job.trials.picks is not None:
        around = neighbourhood(study.grid, job.trials.picks, figures["sharpe"], best)
    forward = None
    if study.walk_forward is not None:
        gap = gap_sessions(study.walk_forward, float(figures[LONGEST].max()))
        forward = walk_forward(job, study.walk_forward, gap, shards.all(), study.yardstick != "none")
    return Findings(
        figures=figures,
        best=best,
        worth=tally.judge(job.trials.name(best), excess, max(tried, len(job.trials))),
        neighbourhood=around,
        superiority=_superiority(ready, np.concatenate(subset).T, tested),
        tested=tested.size,
        forward=forward,
    )


def _best(study: Study, sharpe: Floats) -> int:
    """The number of the highest Sharpe ratio. Raises StudyError when no variant ever moved."""
    if np.isnan(sharpe).all():
        found = f"none of the {sharpe.size:,} variants ever moved, so there is no best one to judge"
        remedy = "run the strategy alone to see why nothing was opened"
        raise StudyError.one(study.name, "still", found, remedy=remedy)
    return int(np.nanargmax(sharpe))


def _equity_of(shards: Shards, number: int) -> Floats:
    shard = shards.read(number // shards.contents.batch)
    return np.asarray(shard.equity[number - shard.numbers.start])


def _superiority(ready: Stage, returns: Floats, tested: Ints) -> Superiority | None:
    """Whether any of the tested variants, log returns (T, N), beats the yardstick; None without one."""
    study, job = ready.study, ready.job
    if study.yardstick == "none" or study.evidence is None or len(returns) < 2:
        return None
    held = buy_and_hold(job.market, job.bench.traded, job.window, job.account.cash)
    names = [str(number + 1) for number in tested]
    return superior_to_yardstick(returns, np.diff(np.log(held)), names, Resampling(study.seed, REPLICATIONS))


def _check_axes(study: Study, bench: Bench, trials: Trials) -> None:
    """Ask the market for everything that single values of the grid need. Raises RulesError or StudyError.

    Numbers of one kind need the same of it, so one of an axis will do.
    """
    if study.grid is None or trials.picks is None:
        for _, strategy in study.variants:
            bench.program(strategy)
        return
    seen: set[int] = set()
    for at in range(len(study.grid.axes)):
        _, first = np.unique(trials.picks[:, at], return_index=True)
        seen |= set(first.tolist() if study.grid.axes[at].numbers is None else first[:1].tolist())
    for number in sorted(seen):
        try:
            strategy = trials.strategy(number)
        except StudyError:
            continue  # told with all the others
        bench.program(strategy)


def _key(study: Study, market: Market) -> str:
    """The fingerprint of everything that a study's results depend on; names and places do not count."""
    plain = study.plain() | {"data": market.fingerprint}
    for word in ("name", "question", "market", "evidence"):
        plain.pop(word, None)
    text = json.dumps(_settled(plain), sort_keys=True)
    return hashlib.sha256(text.encode("utf-8")).hexdigest()


def _settled(value: Any) -> Any:
    """A value with whole floats as whole numbers: 10 and 10.0 are the same words."""
    if isinstance(value, Mapping):
        return {name: _settled(item) for name, item in value.items()}
    if isinstance(value, list | tuple):
        return [_settled(item) for item in value]
    return int(value) if isinstance(value, float) and value.is_integer() else value
