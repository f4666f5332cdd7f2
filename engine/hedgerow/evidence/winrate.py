"""The win rate that a target return needs, and the one achieved with its intervals."""

from __future__ import annotations

import math
from dataclasses import dataclass, field
from typing import Any

import numpy as np

from hedgerow.evidence.clusters import Positions, clustered_share, exact_share, overlap_of
from hedgerow.evidence.described import described, says
from hedgerow.evidence.odds import break_even_win_rate

__all__ = ["WinRate", "win_rate_needed", "win_rate_of"]


@dataclass(frozen=True, slots=True)
class WinRate:
    """How often positions won, how often they must, at a share of equity and a yearly target."""

    positions: int = field(metadata=says("positions", "positions that are over"))
    wins: int = field(metadata=says("positions", "positions with a result above nothing"))
    achieved: float = field(metadata=says("fraction", "wins of positions over"))
    exact_low: float = field(metadata=says("fraction", "lower end, positions taken as independent"))
    exact_high: float = field(metadata=says("fraction", "upper end, positions taken as independent"))
    low: float = field(metadata=says("fraction", "lower end, positions of a week taken together"))
    high: float = field(metadata=says("fraction", "upper end, positions of a week taken together"))
    confidence: float = field(metadata=says("fraction", "how often such an interval holds the true rate"))
    average_win: float = field(metadata=says("fraction of net debit", "mean result of winners"))
    average_loss: float = field(metadata=says("fraction of net debit", "mean loss of the others, positive"))
    positions_a_year: float = field(metadata=says("positions a year", "positions over, a year of record"))
    break_even: float = field(metadata=says("fraction", "win rate at which nothing is earned on average"))
    needed: float = field(
        metadata=says("fraction", "win rate that reaches the target; none where no rate would do")
    )
    share: float = field(metadata=says("fraction", "share of equity a position takes"))
    target: float = field(metadata=says("fraction a year", "the target"))

    @property
    def enough(self) -> bool | None:
        """Whether the rate achieved is above the one needed by more than chance; None: it cannot be told."""
        if math.isnan(self.low):
            return None
        if self.low > self.needed:
            return True
        if self.high < self.needed or math.isnan(self.needed):
            return False
        return None

    def as_dict(self) -> dict[str, Any]:
        """Return every figure as {value, unit, meaning}, ready for JSON."""
        return described(self)


def win_rate_needed(target: float, positions_a_year: float, win: float, loss: float, share: float) -> float:
    """Return the win rate at which positions one after the other compound to a yearly target, fraction.

    Solves n (p log(1 + share x win) + (1 - p) log(1 - share x loss)) = log(1 + target) for p; 0 when no win
    is needed, NaN when all winning is not enough or one loss takes the whole account.
    """
    if not positions_a_year > 0.0 or not share * loss < 1.0 or not target > -1.0:
        return math.nan
    up, down = math.log1p(share * win), math.log1p(-share * loss)
    if not up > down:
        return math.nan
    rate = (math.log1p(target) / positions_a_year - down) / (up - down)
    return max(rate, 0.0) if rate <= 1.0 else math.nan


def win_rate_of(
    positions: Positions, years: float, share: float, target: float, confidence: float = 0.9
) -> WinRate:
    """Return the win rate of positions over so many years, and the one that a target needs.

    A position at nothing counts with the losers. The clustered interval takes positions entered in one week
    together, and those of neighbouring weeks where positions outlive their week.
    """
    won = positions.results > 0.0
    times, trials = int(won.sum()), int(won.size)
    win = _mean(positions.results[won])
    loss = -_mean(positions.results[~won]) if times < trials else 0.0
    exact = exact_share(times, trials, confidence)
    clustered = clustered_share(won, positions.weeks, confidence, overlap_of(positions.sessions))
    pace = trials / years if years > 0.0 else math.nan
    return WinRate(
        positions=trials,
        wins=times,
        achieved=times / trials if trials else math.nan,
        exact_low=exact[0],
        exact_high=exact[1],
        low=clustered[0],
        high=clustered[1],
        confidence=confidence,
        average_win=win,
        average_loss=loss,
        positions_a_year=pace,
        break_even=break_even_win_rate(win, loss),
        needed=win_rate_needed(target, pace, win, loss, share),
        share=share,
        target=target,
    )


def _mean(values: np.ndarray[Any, np.dtype[np.float64]]) -> float:
    return float(np.mean(values)) if values.size else 0.0
