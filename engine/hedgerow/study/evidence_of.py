"""From a study's results to its evidence: comparisons, stress, timing, tries, and the year ahead."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from concurrent.futures import ThreadPoolExecutor
from dataclasses import dataclass, replace
from functools import cached_property

import numpy as np

from hedgerow.evidence import ratios
from hedgerow.evidence.clusters import Positions, trade_difference
from hedgerow.evidence.findings import Basis, Evidence, Pairing, Prospect
from hedgerow.evidence.forward import Forward, Outlook, Work, forward_view
from hedgerow.evidence.many import Records, tries_of
from hedgerow.evidence.odds_check import check_odds, forecasts_of
from hedgerow.evidence.resample import Track, compare
from hedgerow.evidence.seeds import Resampling
from hedgerow.evidence.starts import Starts, start_gap
from hedgerow.evidence.stress import Stressed, stress_frame, stress_of
from hedgerow.evidence.winrate import win_rate_of
from hedgerow.kernels.layout import Floats
from hedgerow.study.declare import Study
from hedgerow.study.evidence_words import Asked
from hedgerow.study.one import Bench, Result
from hedgerow.study.stress import Walked, base_cell, cells_of, walked_cells
from hedgerow.study.timing import cycle_sessions, offsets_of, walked_starts
from hedgerow.units import DAYS_A_CALENDAR_YEAR
from hedgerow.walk.run import Window

__all__ = ["LEAST_RETURNS", "MOST_IN_PAIRS", "evidence_of", "sessions_of_evidence"]

LEAST_RETURNS = 60
"""Daily returns below which a record is too short for any evidence."""
MOST_IN_PAIRS = 8
"""Variants up to which every pair is compared and stressed; of more only the leader, the first, and the
yardstick are."""
PAIR_PIECES = 4
"""How many walks one comparison counts as on the progress bar; about what it takes."""

YARDSTICK = "buy and hold"
SHARES = (0.05, 0.1, 0.2, 1.0 / 3.0)
"""Shares of equity a position at which the year ahead is shown, the account's own besides."""

Progress = Callable[[int], None]


@dataclass(frozen=True, eq=False)
class _Case:
    """A study's results ready to be judged; variants whose account fell to nothing are left out."""

    study: Study
    bench: Bench
    window: Window
    results: tuple[Result, ...]
    asked: Asked
    workers: int
    tell: Progress

    @property
    def known(self) -> Resampling:
        return self.asked.resampling(self.study.seed)

    @property
    def dates(self) -> np.ndarray:
        return self.bench.market.dates[self.window.start : self.window.stop]

    @property
    def rate(self) -> Floats:
        return self.bench.market.rate[self.window.start : self.window.stop]

    @property
    def years(self) -> float:
        return float((self.dates[-1] - self.dates[0]).astype(np.int64)) / DAYS_A_CALENDAR_YEAR

    @cached_property
    def tracks(self) -> dict[str, Track]:
        """Each variant's equity at every close, by name."""
        return {one.log.meta.variant: Track(one.log.meta.variant, _equity(one)) for one in self.results}

    @cached_property
    def yardstick(self) -> Track | None:
        """The yardstick's value at every close."""
        value = self.results[0].yardstick
        return None if value is None else Track(YARDSTICK, np.asarray(value, np.float64))

    @cached_property
    def ranked(self) -> list[str]:
        """Names by growth, the fastest first; those alike in the order of the study."""
        return sorted(
            self.tracks, key=lambda name: -self.tracks[name].equity[-1] / self.tracks[name].equity[0]
        )

    @property
    def many(self) -> bool:
        """Whether there are too many variants to compare every pair."""
        return len(self.tracks) > MOST_IN_PAIRS

    @cached_property
    def rival(self) -> str | None:
        """Whom the leader is held against: the study's first variant, or the next best."""
        first = next(iter(self.tracks))
        return first if self.ranked[0] != first else next(iter(self.ranked[1:]), None)

    @property
    def pairs(self) -> list[tuple[str, str]]:
        """The pairs to compare, the faster grower first; that of leader and rival in front."""
        if self.rival is None:
            return []
        ranked = [self.ranked[0], self.rival] if self.many else self.ranked
        head = (self.ranked[0], self.rival)
        every = [(one, other) for at, one in enumerate(ranked) for other in ranked[at + 1 :]]
        return [head, *(pair for pair in every if pair != head)]

    @property
    def stressed(self) -> list[str]:
        """The variants that are walked under other assumptions, in the order of the study."""
        chosen = {self.ranked[0], self.rival} if self.many else set(self.tracks)
        return [name for name in self.tracks if name in chosen]


def _equity(result: Result) -> Floats:
    """Equity at every close of the walk; the first is what was paid in."""
    equity = np.array(result.log.days["equity"])
    equity[0] = result.log.meta.opening_cash or equity[0]
    return equity


def evidence_of(
    study: Study,
    bench: Bench,
    window: Window,
    results: Sequence[Result],
    *,
    workers: int = 2,
    progress: Progress | None = None,
    tried: int = 0,
) -> Evidence | None:
    """Return the evidence of a study's results, one a variant; None where it is not asked for or too short.

    `tried` counts the different variants ever evaluated on these prices, those of the study included.
    `progress` is called with sessions newly walked, or their equal in other work. Nothing depends on
    `workers`.
    """
    kept = tuple(one for one in results if bool((one.log.days["equity"] > 0.0).all()))
    if study.evidence is None or window.stop - window.start <= LEAST_RETURNS or not kept:
        return None
    case = _Case(study, bench, window, kept, study.evidence, workers, progress or (lambda sessions: None))
    walked = _stress(case)
    starts = walked_starts(bench, study, window, workers, case.tell) if study.evidence.timing else ()
    pairs, beside = _pairings(case, walked, starts)
    tries = tries_of(_records(case), max(tried, len(results)), case.known)
    return Evidence(
        basis=_basis(case),
        leader=case.ranked[0],
        pairs=tuple(pairs),
        against_yardstick=tuple(beside),
        headline=pairs[0] if pairs else None,
        tries=tries,
        timing=starts,
        prospects=tuple(_prospect(case, one) for one in kept),
        stress=stress_frame([one.stress for one in (*pairs, *beside) if one.stress is not None]),
        notes=tuple(_notes(case, results, walked, starts)),
    )


def sessions_of_evidence(study: Study, window: Window) -> int:
    """Return how much work the evidence of a study is, counted in sessions walked; for a progress bar."""
    if study.evidence is None:
        return 0
    count, span = len(study.variants), window.stop - window.start
    many = count > MOST_IN_PAIRS
    walks = len(cells_of(study)) * (min(count, 2) if many else count)
    if study.evidence.timing:
        walks += sum(len(offsets_of(cycle_sessions(strategy))) for _, strategy in study.variants)
    pairs = min(count - 1, 1) if many else count * (count - 1) // 2
    beside = count if study.yardstick != "none" else 0
    return span * (walks + PAIR_PIECES * (pairs + beside))


def _basis(case: _Case) -> Basis:
    base = base_cell(case.study)
    return Basis(
        level=case.asked.level,
        draws=case.asked.draws,
        seed=case.study.seed,
        years=case.years,
        sessions=len(case.dates) - 1,
        ratio=base.ratio,
        skew=base.skew,
        half_spread=base.half_spread,
        yardstick=YARDSTICK if case.yardstick is not None else "",
    )


def _stress(case: _Case) -> Walked | None:
    if not cells_of(case.study):
        return None
    strategies = dict(case.study.variants)
    chosen = [(name, strategies[name]) for name in case.stressed]
    return walked_cells(case.bench, case.study, case.window, chosen, case.workers, case.tell)


def _pairings(
    case: _Case, walked: Walked | None, starts: Sequence[Starts]
) -> tuple[list[Pairing], list[Pairing]]:
    """Every pair and every variant against the yardstick, worked out on the threads of the case."""
    begun = {one.variant: one for one in starts}
    tracks = case.tracks
    jobs = [(tracks[one], tracks[other]) for one, other in case.pairs]
    if case.yardstick is not None:
        jobs += [(track, case.yardstick) for track in tracks.values()]

    def pairing(job: tuple[Track, Track]) -> Pairing:
        made = _pairing(case, *job, walked)
        case.tell(PAIR_PIECES * len(case.dates))
        first, second = (begun.get(track.name) for track in job)
        if first is None or second is None or job[1] is case.yardstick:
            return made
        return replace(made, timing=start_gap(first, second))

    with ThreadPoolExecutor(max(case.workers, 1)) as pool:
        made = list(pool.map(pairing, jobs))
    return made[: len(case.pairs)], made[len(case.pairs) :]


def _pairing(case: _Case, first: Track, second: Track, walked: Walked | None) -> Pairing:
    comparison = compare(first, second, case.dates, case.rate, case.known)
    made = Pairing(first.name, second.name, comparison)
    if second is not case.yardstick:
        results = {one.log.meta.variant: one for one in case.results}
        both = [Positions.of(results[track.name].trades, track.name) for track in (first, second)]
        made = replace(made, trades=trade_difference(both[0], both[1], case.years, case.asked.level))
    if walked is None:
        return made
    sides = [_stressed(case, track, walked) for track in (first, second)]
    if sides[0] is None or sides[1] is None:
        return made
    block = max(comparison.block_sessions, 1)
    stress = stress_of(sides[0], sides[1], walked.cells, base_cell(case.study), case.years, block, case.known)
    return replace(made, stress=stress)


def _stressed(case: _Case, track: Track, walked: Walked) -> Stressed | None:
    """A track over the cells; None where it was not walked, or some account fell to nothing."""
    if track is case.yardstick:
        return Stressed(track.name, np.tile(track.equity, (len(walked.cells), 1)))
    equity = walked.equity.get(track.name)
    if equity is None or not (equity > 0.0).all():
        return None
    equity = equity.copy()
    equity[:, 0] = track.equity[0]
    return Stressed(track.name, equity)


def _records(case: _Case) -> Records:
    curves = [track.equity for track in case.tracks.values()]
    logs = np.column_stack([np.diff(np.log(curve)) for curve in curves])
    excess = np.column_stack([ratios.excess_returns(ratios.returns_of(curve), case.rate) for curve in curves])
    other = None if case.yardstick is None else np.diff(np.log(case.yardstick.equity))
    return Records(tuple(case.tracks), logs, excess, other)


def _prospect(case: _Case, result: Result) -> Prospect:
    asked, own = case.asked, case.study.account.per_position
    work, positions = Work.of(result.ledger), Positions.of(result.trades, result.log.meta.variant)
    forecasts = forecasts_of(result.ledger)
    rows: tuple[Forward, ...] = ()
    if work.held.any():
        shares = tuple(sorted({*SHARES, own}))
        rows = forward_view(work, Outlook(shares, asked.target, asked.drawdown), case.known)
    rate = (
        win_rate_of(positions, case.years, own, asked.target, asked.level) if positions.results.size else None
    )
    return Prospect(
        variant=result.log.meta.variant,
        own=next((row for row in rows if row.share == own), None),
        forward=rows,
        win_rate=rate,
        odds=check_odds(forecasts, asked.level) if forecasts.odds.size and _fair(result) else None,
    )


def _fair(result: Result) -> bool:
    """Whether so few positions left early that their odds can be held against what happened."""
    return result.summary.odds_observed == result.summary.odds_observed  # not NaN


def _notes(
    case: _Case, results: Sequence[Result], walked: Walked | None, starts: Sequence[Starts]
) -> list[str]:
    """What was left out, and why."""
    notes = [
        f"{one.log.meta.variant} is left out of the evidence: its account fell to nothing"
        for one in results
        if one not in case.results
    ]
    if case.many:
        chosen = " and ".join(case.stressed)
        notes.append(
            f"With {len(case.tracks)} variants only {chosen} are compared with each other and stressed; "
            "every variant is held against the yardstick"
        )
    if walked is not None and walked.left_out:
        skews = sorted({cell.skew for cell in walked.left_out}, reverse=True)
        told = ", ".join(f"skew {skew:g} with {_ratios(walked, skew)}" for skew in skews)
        notes.append(f"Not stressed, for a call would rise or a put fall with its strike: {told}")
    unfair = [one.log.meta.variant for one in case.results if one.summary.odds_positions and not _fair(one)]
    if unfair:
        notes.append(
            f"Odds are not checked where more than a tenth of positions left early: {', '.join(unfair)}"
        )
    long = [one for one in starts if one.starts < one.cycle_sessions]
    notes += [
        f"{one.variant}: {one.starts} of the {one.cycle_sessions} sessions of its cycle were walked as starts"
        for one in long
    ]
    return notes


def _ratios(walked: Walked, skew: float) -> str:
    """The ratios left out at a skew."""
    if all(cell.skew != skew for cell in walked.cells):
        return "every ratio"
    return " and ".join(f"{cell.ratio:g}" for cell in walked.left_out if cell.skew == skew)
