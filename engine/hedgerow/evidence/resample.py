"""Two variants on the same days: whether the difference of their daily records is more than luck.

Days are drawn again in blocks, the same days for both (stationary bootstrap, automatic block length), so that
what both owe to the market cancels and what clusters stays together. Intervals are studentised and symmetric:
the difference of every replication is set against that replication's own standard error, as in Ledoit & Wolf
2008, "Robust Performance Hypothesis Testing with the Sharpe Ratio", Journal of Empirical Finance 15.
"""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass, replace
from typing import Any

import numpy as np
from numpy.typing import NDArray

from hedgerow.evidence.difference import DRAWDOWN, Difference, Span, years_to_tell
from hedgerow.evidence.drawdown import deepest
from hedgerow.evidence.longrun import block_lengths, long_run_variance, resampled_days
from hedgerow.evidence.paired import SMOOTH, Pair, Replication, gaps_of
from hedgerow.evidence.seeds import Resampling, generator_of
from hedgerow.units import DAYS_A_CALENDAR_YEAR

__all__ = ["Comparison", "Track", "compare"]

Floats = NDArray[np.float64]

LEAST_SESSIONS = 60
"""Returns below which no interval is given: the worst twentieth would be fewer than three sessions."""

LEAST_BLOCKS = 10
"""Blocks that a record holds at least; fewer say nothing about how blocks differ."""
SAME = 1e-9
"""Share of a value below which a difference that never moves is rounding."""


@dataclass(frozen=True, eq=False)
class Track:
    """A variant's name and its equity (T,) at each close, money, on sessions that it shares with others."""

    name: str
    equity: Floats


@dataclass(frozen=True, slots=True)
class Comparison:
    """The differences of two variants on the same sessions, and the mean block that days were drawn in."""

    growth: Difference
    sharpe: Difference
    tail_loss: Difference
    drawdown: Difference
    sessions: int
    block_sessions: int

    @property
    def differences(self) -> tuple[Difference, ...]:
        """Every difference, growth first."""
        return self.growth, self.sharpe, self.tail_loss, self.drawdown

    @property
    def verdict(self) -> str:
        """What the growth of the first allows to be said against the second."""
        return self.growth.verdict

    @property
    def sentence(self) -> str:
        """That verdict in a plain sentence."""
        return self.growth.sentence

    def as_dict(self) -> dict[str, Any]:
        """Return every figure with unit and meaning, ready for JSON."""
        named = ("growth", "sharpe", "tail_loss", "drawdown")
        figures: dict[str, Any] = {name: getattr(self, name).as_dict() for name in named}
        return figures | {"sessions": self.sessions, "block_sessions": self.block_sessions}


def compare(
    first: Track,
    second: Track,
    dates: NDArray[np.datetime64],
    rate: Floats | None = None,
    resampling: Resampling | None = None,
) -> Comparison:
    """Return the differences, first less second, with intervals, p-values and verdicts.

    dates (T,) are the closes of both; rate (T,) is annual interest, continuously compounded. The draws depend
    on the seed and the two names only, and not on their order: swapping the two swaps the signs. Raises
    ValueError when the records differ in length, hold fewer than two closes, or are not above nothing.
    """
    _check(first, second, dates)
    known = resampling or Resampling()
    days = int((dates[-1] - dates[0]).astype("timedelta64[D]").astype(np.int64))
    span = Span(first.name, second.name, days / DAYS_A_CALENDAR_YEAR, known.confidence)
    pair = Pair.of(first.equity, second.equity, span.years, rate)
    values = pair.values(pair.means)
    depths = [deepest(track.equity).depth for track in (first, second)]
    growth, sharpe, tail_loss = (
        Difference.unknown(measure, span, *values[:, place]) for place, measure in enumerate(SMOOTH)
    )
    drawdown = Difference.unknown(DRAWDOWN, span, *depths)
    sessions = len(pair.columns)
    if sessions < LEAST_SESSIONS:
        return Comparison(growth, sharpe, tail_loss, drawdown, sessions, block_sessions=0)
    block = _block(pair)
    random = generator_of(known.seed, "compare", *sorted((first.name, second.name)))
    draws = [pair.replicate(drawn) for drawn in resampled_days(sessions, block, known.replications, random)]
    gaps, far = _distances(values, draws)
    error = np.sqrt(long_run_variance(pair.influence, block) / sessions)
    falls = np.array([draw.drawdown for draw in draws])
    return Comparison(
        growth=_judged(growth, gaps[0], error[0], far[:, 0]),
        sharpe=_judged(sharpe, gaps[1], error[1], far[:, 1]),
        tail_loss=_judged(tail_loss, gaps[2], error[2], far[:, 2]),
        drawdown=_judged_by_depth(drawdown, np.abs(falls - np.median(falls))),
        sessions=sessions,
        block_sessions=block,
    )


def _block(pair: Pair) -> int:
    """Return the mean block length in sessions: the longest automatic one of what must stay together.

    That is what each session adds to a measure, and how far apart the two were on it, either way: wild times
    cluster far longer than their signs, and the tail is made in them.
    """
    wildness = np.abs(pair.gaps - pair.gaps.mean())
    longest = float(block_lengths(np.column_stack([pair.influence, wildness])).max())
    return min(math.ceil(longest), max(len(pair.columns) // LEAST_BLOCKS, 1))


def _distances(values: Floats, draws: Sequence[Replication]) -> tuple[Floats, Floats]:
    """Return the gaps (3,), and how far (B, 3) replications lie from them in their own standard errors."""
    gaps = gaps_of(values)
    far = np.abs(np.array([draw.gaps for draw in draws]) - gaps)
    own = np.array([draw.errors for draw in draws])
    return gaps, np.divide(far, own, out=np.full(far.shape, np.inf), where=own > 0.0)


def _judged(base: Difference, gap: float, error: float, surprises: Floats) -> Difference:
    """Return a difference with its interval, p-value and years needed.

    `surprises` (B,) are how far replications lie from the gap, in their own standard errors; the interval is
    as wide as all but 1 - confidence of them, and leaves out 0 when the p-value is at most that.
    """
    if not math.isfinite(base.difference):
        return base
    count = len(surprises) + 1
    if not error > 0.0:
        same = abs(base.difference) <= SAME * max(abs(base.first), abs(base.second))
        edge = 0.0 if same else base.difference
        return replace(base, low=edge, high=edge, p_value=1.0 if same else 1.0 / count)
    reach = _reach(surprises, base.confidence) * error
    low, high = gap - reach, gap + reach
    if base.measure.relative:
        low, high = float(np.expm1(low)), float(np.expm1(high))
    needed = years_to_tell(gap, error, base.years, base.confidence)
    p_value = _p_value(surprises, abs(gap) / error)
    return replace(base, low=float(low), high=float(high), p_value=p_value, years_needed=needed)


def _judged_by_depth(base: Difference, distances: Floats) -> Difference:
    """Return the difference of deepest drawdowns with its interval and p-value.

    `distances` (B,) of replications are from their own middle: resampled falls are on the whole less deep
    than the real one, so only their spread is used. What it is an interval for is the middle difference over
    records of this length; a longer record is another question, so there are no years needed.
    """
    reach = _reach(distances, base.confidence)
    if not reach > 0.0:
        return replace(base, low=base.difference, high=base.difference, p_value=float(base.difference == 0.0))
    p_value = _p_value(distances, abs(base.difference))
    return replace(base, low=base.difference - reach, high=base.difference + reach, p_value=p_value)


def _reach(distances: Floats, confidence: float) -> float:
    """Return the distance that all but 1 - confidence of the replications stay within."""
    ranked = np.sort(np.where(np.isnan(distances), np.inf, distances))
    place = min(math.ceil(confidence * (ranked.size + 1) - SAME), ranked.size)
    return float(ranked[place - 1])


def _p_value(distances: Floats, distance: float) -> float:
    """Return the share of replications at least so far out, the record itself counted as one of them."""
    return float(1 + np.sum(~(distances < distance))) / (distances.size + 1)


def _check(first: Track, second: Track, dates: NDArray[np.datetime64]) -> None:
    """Raise ValueError when two records cannot be compared."""
    for track in (first, second):
        if track.equity.shape != dates.shape or dates.ndim != 1 or len(dates) < 2:
            raise ValueError(
                f"the equity of `{track.name}` has shape {track.equity.shape}, but the closes have shape "
                f"{dates.shape}; both must be flat, of one length, and hold at least two"
            )
        if not (track.equity > 0.0).all():
            raise ValueError(
                f"the equity of `{track.name}` is not above nothing at every close, so its growth is unknown"
            )
