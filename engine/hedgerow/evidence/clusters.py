"""Positions entered in one week share its market: means, differences and shares that allow for it.

Positions are not independent draws. What counts is the sum over each entry week, and, where positions outlive
their week, what neighbouring weeks have in common.
"""

from __future__ import annotations

import math
from dataclasses import dataclass, replace
from typing import Self

import numpy as np
import pandas as pd
from numpy.typing import NDArray

from hedgerow.events import kinds
from hedgerow.evidence.difference import TRADE_RESULT, Difference, Span, years_to_tell

__all__ = [
    "Positions",
    "clustered_error",
    "clustered_share",
    "entry_weeks",
    "exact_share",
    "overlap_of",
    "trade_difference",
]

Floats = NDArray[np.float64]
Ints = NDArray[np.int64]
Dates = NDArray[np.datetime64]

SESSIONS_A_WEEK = 5.0
LEAST_WEEKS = 3
"""Entry weeks below which no interval is given."""

ROUNDING = 1e-12
"""Share of a result below which a difference is rounding."""


@dataclass(frozen=True, eq=False)
class Positions:
    """A variant's positions that are over: results (P,) on what they tied up, entry days, sessions held."""

    name: str
    results: Floats
    opened: Dates
    sessions: Ints

    @classmethod
    def of(cls, trades: pd.DataFrame, name: str) -> Self:
        """Return the positions of a ledger's trades; those open or without a result are left out."""
        known = trades["return_on_debit"].notna() & (trades["outcome"] != kinds.OPEN)
        over = trades[known.to_numpy()]
        return cls(
            name,
            over["return_on_debit"].to_numpy(dtype=np.float64),
            over["opened"].to_numpy().astype("datetime64[D]"),
            over["sessions"].to_numpy(dtype=np.int64),
        )

    @property
    def weeks(self) -> Ints:
        """The entry weeks (P,)."""
        return entry_weeks(self.opened)


def entry_weeks(dates: Dates) -> Ints:
    """Return the calendar week, Monday to Sunday, of dates (P,), counted from that of 1 January 1970."""
    days = dates.astype("datetime64[D]").astype(np.int64)
    return np.asarray((days + 3) // 7)


def clustered_error(parts: Floats, weeks: Ints, overlap_weeks: int = 0) -> tuple[float, int]:
    """Return the standard error of a sum of parts (P,) by entry week (P,), and the number of weeks.

    Parts of one week add up before they are squared, times G / (G - 1) for G weeks (Cameron & Miller 2015,
    "A Practitioner's Guide to Cluster-Robust Inference", J. Human Resources 50). Positions that outlive their
    week by `overlap_weeks` share days with those of as many later weeks: sums so far apart count fully
    together, farther ones with weights that fall to nothing at twice as far (Driscoll & Kraay 1998, Review of
    Economics and Statistics 80, with the flat-topped weights of Politis & Romano 1995, Journal of Time Series
    Analysis 16). What overlaps is never taken to make a sum surer. NaN below two weeks.
    """
    seen = np.unique(weeks).size
    if seen < 2:
        return math.nan, int(seen)
    sums = np.bincount(weeks - weeks.min(), weights=parts)
    variance = float(sums @ sums)
    shared = 0.0
    for lag in range(1, min(2 * overlap_weeks, sums.size)):
        weight = min(1.0, 2.0 - lag / overlap_weeks)
        shared += 2.0 * weight * float(sums[lag:] @ sums[:-lag])
    return math.sqrt((variance + max(shared, 0.0)) * seen / (seen - 1.0)), int(seen)


def trade_difference(
    first: Positions, second: Positions, years: float, confidence: float = 0.9
) -> Difference:
    """Return the difference of mean results a position, clustered by the entry week of both variants.

    Neighbouring weeks count together as far as positions of the longer-held variant outlive their week. The
    interval is Student's with one degree of freedom fewer than there are weeks; none below three weeks.
    """
    from scipy import stats

    span = Span(first.name, second.name, years, confidence)
    means = [float(np.mean(one.results)) if one.results.size else math.nan for one in (first, second)]
    base = Difference.unknown(TRADE_RESULT, span, *means)
    parts = [
        sign * (one.results - mean) / max(one.results.size, 1)
        for sign, one, mean in zip((1.0, -1.0), (first, second), means, strict=True)
    ]
    weeks = np.concatenate([first.weeks, second.weeks])
    overlap = max(overlap_of(first.sessions), overlap_of(second.sessions))
    error, seen = clustered_error(np.concatenate(parts), weeks, overlap)
    if seen < LEAST_WEEKS or not math.isfinite(base.difference):
        return base
    if not error > ROUNDING * float(np.abs(first.results).max()):
        same = abs(base.difference) <= ROUNDING * abs(base.first)
        edge = 0.0 if same else base.difference
        return replace(base, low=edge, high=edge, p_value=float(same))
    half = float(stats.t.ppf(0.5 + confidence / 2.0, seen - 1)) * error
    return replace(
        base,
        low=base.difference - half,
        high=base.difference + half,
        p_value=float(2.0 * stats.t.sf(abs(base.difference) / error, seen - 1)),
        years_needed=years_to_tell(base.difference, error, years, confidence),
    )


def exact_share(times: float, trials: float, confidence: float = 0.9) -> tuple[float, float]:
    """Return the exact binomial interval (low, high) of a share seen so many times in so many trials.

    Clopper & Pearson 1934, "The Use of Confidence or Fiducial Limits", Biometrika 26, by quantiles of the
    beta distribution, so that trials need not be whole. (NaN, NaN) without trials.
    """
    from scipy.stats import beta

    if not trials > 0.0:
        return math.nan, math.nan
    tail = 0.5 - confidence / 2.0
    low = float(beta.ppf(tail, times, trials - times + 1.0)) if times > 0.0 else 0.0
    high = float(beta.ppf(1.0 - tail, times + 1.0, trials - times)) if times < trials else 1.0
    return low, high


def clustered_share(
    hits: NDArray[np.bool_], weeks: Ints, confidence: float = 0.9, overlap_weeks: int = 0
) -> tuple[float, float]:
    """Return the interval (low, high) of the share of hits (P,) whose entry weeks (P,) they have in common.

    The exact interval of as many independent trials as the clustered ones are worth, at most as many as there
    are: Korn & Graubard 1998, "Confidence Intervals for Proportions with Small Expected Number of Positive
    Counts Estimated from Survey Data", Survey Methodology 24. Where all or none hit, each week is one trial.
    (NaN, NaN) below two weeks.
    """
    from scipy.stats import t

    trials = hits.size
    share = float(np.mean(hits)) if trials else math.nan
    error, seen = clustered_error((hits - share) / max(trials, 1), weeks, overlap_weeks)
    if seen < 2:
        return math.nan, math.nan
    worth = float(seen)
    if error > 0.0:
        fewer = float(t.ppf(0.5 + confidence / 2.0, trials - 1) / t.ppf(0.5 + confidence / 2.0, seen - 1))
        worth = min(share * (1.0 - share) / error**2 * fewer**2, float(trials))
    return exact_share(share * worth, worth, confidence)


def overlap_of(sessions: Ints) -> int:
    """Return the weeks by which the mean of holding times (P,), in sessions, outlives the week of entry."""
    if not sessions.size:
        return 0
    return max(math.ceil(float(np.mean(sessions)) / SESSIONS_A_WEEK) - 1, 0)
