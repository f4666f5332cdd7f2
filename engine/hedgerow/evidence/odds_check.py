"""The odds written down at entry against what happened: reliability table and Brier score."""

from __future__ import annotations

import math
from dataclasses import dataclass, field
from typing import Any

import numpy as np
from numpy.typing import NDArray

from hedgerow.evidence.clusters import clustered_share, entry_weeks, overlap_of
from hedgerow.evidence.described import described, says
from hedgerow.ledger import Ledger
from hedgerow.ledger.positions import ran_to_first_expiry

__all__ = ["Forecasts", "OddsCheck", "ReliabilityRow", "check_odds", "forecasts_of"]

Floats = NDArray[np.float64]
Ints = NDArray[np.int64]
Mask = NDArray[np.bool_]

BINS = 10
ROUNDING = 1e-9
"""How near below the edge of a bin odds count as in it."""


@dataclass(frozen=True, eq=False)
class Forecasts:
    """Odds given at entry (P,), fractions, what happened (P,), entry weeks (P,) and sessions held (P,)."""

    odds: Floats
    happened: Mask
    weeks: Ints
    sessions: Ints


@dataclass(frozen=True, slots=True)
class ReliabilityRow:
    """The forecasts of one bin against what happened."""

    least: float = field(metadata=says("fraction", "least odds of the bin"))
    most: float = field(metadata=says("fraction", "odds below which the bin ends; the last holds 1"))
    forecasts: int = field(metadata=says("positions", "positions in the bin"))
    forecast: float = field(metadata=says("fraction", "mean odds given"))
    observed: float = field(metadata=says("fraction", "share that happened"))
    low: float = field(metadata=says("fraction", "lower end of the interval, entry weeks taken together"))
    high: float = field(metadata=says("fraction", "upper end of the interval, entry weeks taken together"))

    @property
    def held(self) -> bool | None:
        """Whether the mean odds lie in the interval; None where there is none."""
        return None if math.isnan(self.low) else self.low <= self.forecast <= self.high

    def as_dict(self) -> dict[str, Any]:
        """Return every figure as {value, unit, meaning}, ready for JSON."""
        return described(self)


@dataclass(frozen=True, slots=True)
class OddsCheck:
    """How good the odds were: brier = reliability - resolution + uncertainty + grouping."""

    forecasts: int = field(metadata=says("positions", "positions with odds that ran to their end"))
    forecast: float = field(metadata=says("fraction", "mean odds given"))
    observed: float = field(metadata=says("fraction", "share that happened"))
    low: float = field(metadata=says("fraction", "lower end of its interval, entry weeks taken together"))
    high: float = field(metadata=says("fraction", "upper end of its interval, entry weeks taken together"))
    confidence: float = field(metadata=says("fraction", "how often such an interval holds the true share"))
    brier: float = field(metadata=says("squared fraction", "mean squared distance of odds from fact"))
    reliability: float = field(
        metadata=says("squared fraction", "mean squared distance of a bin's odds from its share; low is good")
    )
    resolution: float = field(
        metadata=says(
            "squared fraction", "mean squared distance of a bin's share from the whole's; high is good"
        )
    )
    uncertainty: float = field(metadata=says("squared fraction", "score of always saying the whole's share"))
    grouping: float = field(metadata=says("squared fraction", "what odds that differ within a bin add"))
    skill: float = field(
        metadata=says("fraction", "1 less score over uncertainty; below nothing the share alone does better")
    )
    rows: tuple[ReliabilityRow, ...] = field(metadata=says("table", "bins that hold forecasts"))

    def as_dict(self) -> dict[str, Any]:
        """Return every figure as {value, unit, meaning} and the table's rows, ready for JSON."""
        return described(self) | {"rows": [row.as_dict() for row in self.rows]}


def forecasts_of(ledger: Ledger) -> Forecasts:
    """Return the odds of the best gain of the positions that kept their first legs to the end, and the fact.

    Positions without odds, cut, rolled, stopped or open are left out: the odds do not speak of them. Where a
    rule cuts many, those left are a choice of its making, and the check says little.
    """
    counted, best = ran_to_first_expiry(ledger.postings)
    odds = ledger.log.terms["odds_of_best"]
    kept = counted & ~np.isnan(odds)
    trades = ledger.trades[kept]
    return Forecasts(
        np.array(odds[kept]),
        best[kept],
        entry_weeks(trades["opened"].to_numpy()),
        trades["sessions"].to_numpy(dtype=np.int64),
    )


def check_odds(forecasts: Forecasts, confidence: float = 0.9, bins: int = BINS) -> OddsCheck:
    """Return the reliability table in bins of equal width and the Brier score with its parts.

    Brier 1950, "Verification of Forecasts Expressed in Terms of Probability", Monthly Weather Review 78; the
    parts by Murphy 1973, "A New Vector Partition of the Probability Score", J. Applied Meteorology 12. They
    add up exactly when all odds of a bin are alike; `grouping` is the rest. Raises ValueError for odds
    outside 0 to 1.
    """
    odds, happened = forecasts.odds, forecasts.happened
    if not ((odds >= 0.0) & (odds <= 1.0)).all():
        raise ValueError("odds must be fractions from 0 to 1; some of the forecasts given are not")
    place = np.minimum((odds * bins + ROUNDING).astype(np.int64), bins - 1)
    used = [np.flatnonzero(place == number) for number in range(bins)]
    rows = tuple(
        _row(forecasts, index, (number / bins, (number + 1) / bins), confidence)
        for number, index in enumerate(used)
        if index.size
    )
    count = max(odds.size, 1)
    whole = float(np.mean(happened)) if odds.size else math.nan
    brier = float(np.mean((odds - happened) ** 2)) if odds.size else math.nan
    reliability = sum(row.forecasts * (row.forecast - row.observed) ** 2 for row in rows) / count
    resolution = sum(row.forecasts * (row.observed - whole) ** 2 for row in rows) / count
    uncertainty = whole * (1.0 - whole)
    low, high = _interval(forecasts, np.arange(odds.size), confidence)
    return OddsCheck(
        forecasts=int(odds.size),
        forecast=float(np.mean(odds)) if odds.size else math.nan,
        observed=whole,
        low=low,
        high=high,
        confidence=confidence,
        brier=brier,
        reliability=reliability,
        resolution=resolution,
        uncertainty=uncertainty,
        grouping=brier - (reliability - resolution + uncertainty),
        skill=1.0 - brier / uncertainty if uncertainty > 0.0 else math.nan,
        rows=rows,
    )


def _row(forecasts: Forecasts, index: Ints, edges: tuple[float, float], confidence: float) -> ReliabilityRow:
    low, high = _interval(forecasts, index, confidence)
    return ReliabilityRow(
        least=edges[0],
        most=edges[1],
        forecasts=int(index.size),
        forecast=float(np.mean(forecasts.odds[index])),
        observed=float(np.mean(forecasts.happened[index])),
        low=low,
        high=high,
    )


def _interval(forecasts: Forecasts, index: Ints, confidence: float) -> tuple[float, float]:
    overlap = overlap_of(forecasts.sessions[index])
    return clustered_share(forecasts.happened[index], forecasts.weeks[index], confidence, overlap)
