"""Everything that the evidence of a study says, as one frozen value; its layout is that of summary.json."""

from __future__ import annotations

from dataclasses import dataclass, field
from functools import cached_property
from typing import Any

import pandas as pd

from hedgerow.evidence.described import described, says
from hedgerow.evidence.difference import Difference
from hedgerow.evidence.forward import Forward
from hedgerow.evidence.many import Tries
from hedgerow.evidence.odds_check import OddsCheck
from hedgerow.evidence.resample import Comparison
from hedgerow.evidence.starts import StartGap, Starts
from hedgerow.evidence.stress import Stress
from hedgerow.evidence.verdict import Verdict, verdict_of
from hedgerow.evidence.winrate import WinRate

__all__ = ["Basis", "Evidence", "Pairing", "Prospect"]


@dataclass(frozen=True, slots=True)
class Basis:
    """What all of the evidence rests on."""

    level: float = field(metadata=says("fraction", "confidence of every interval"))
    draws: int = field(metadata=says("draws", "resampled records"))
    seed: int = field(metadata=says("number", "seed of the draws"))
    years: float = field(metadata=says("years", "length of the record"))
    sessions: int = field(metadata=says("sessions", "returns in the record"))
    ratio: float = field(metadata=says("ratio", "implied over realized volatility that was assumed"))
    skew: float = field(metadata=says("a standard deviation", "skew of premiums that was assumed"))
    half_spread: float = field(metadata=says("fraction of the premium", "half-spread that was assumed"))
    yardstick: str = field(metadata=says("name", "what every variant is held against; empty without one"))

    def as_dict(self) -> dict[str, Any]:
        """Return every figure as {value, unit, meaning}, ready for JSON."""
        return described(self)


@dataclass(frozen=True, eq=False)
class Pairing:
    """Two variants, or a variant and the yardstick: first less second in every figure.

    `trades` is None against a yardstick, `stress` where assumptions were not changed, `timing` where starts
    were not.
    """

    first: str
    second: str
    comparison: Comparison
    trades: Difference | None = None
    stress: Stress | None = None
    timing: StartGap | None = None

    @property
    def verdict(self) -> str:
        """`better` or `worse`, the first against the second in growth, or `cannot tell`."""
        return self.comparison.verdict

    @property
    def differences(self) -> tuple[Difference, ...]:
        """Every difference, growth first, that of the trades last."""
        return (*self.comparison.differences, *([self.trades] if self.trades is not None else []))

    def as_dict(self) -> dict[str, Any]:
        """Return everything as plain values, ready for JSON."""
        stress = self.stress.as_dict() if self.stress else {"flip_premium": None, "flip_spread": None}
        return {
            "first": self.first,
            "second": self.second,
            "verdict": self.verdict,
            "sentence": self.comparison.sentence,
            **self.comparison.as_dict(),
            "trades": self.trades.as_dict() if self.trades else None,
            **stress,
            "timing": self.timing.as_dict() if self.timing else None,
        }


@dataclass(frozen=True, eq=False)
class Prospect:
    """The year ahead of one variant if days like the past ones come again, and the win rate it needs.

    `forward` has one row a share of equity, `own` is the row of the account's own share; both are empty where
    no position was ever held. `odds` is None where no position had odds of the best gain.
    """

    variant: str
    own: Forward | None
    forward: tuple[Forward, ...]
    win_rate: WinRate | None
    odds: OddsCheck | None

    def as_dict(self) -> dict[str, Any]:
        """Return everything as plain values, ready for JSON."""
        rows = {"own_share": self.own.as_dict() if self.own else None}
        return {
            "variant": self.variant,
            "forward": rows | {"by_share": [row.as_dict() for row in self.forward]},
            "win_rate": self.win_rate.as_dict() if self.win_rate else None,
            "odds": self.odds.as_dict() if self.odds else None,
        }


@dataclass(frozen=True, eq=False)
class Evidence:
    """What a study's results are worth.

    `pairs` hold the faster grower first, the fastest of all in front; `against_yardstick` every variant, in
    the order of the study. `leader` is the fastest grower, `headline` the pair that the verdict speaks of:
    the leader against the study's first variant, or against the next best when it is the first itself; None
    with one variant. `stress` has one row a pair and set of assumptions, fractions a year, columns
    `evidence.stress.STRESS_COLUMNS`. `notes` say what was left out, and why.
    """

    basis: Basis
    leader: str
    pairs: tuple[Pairing, ...]
    against_yardstick: tuple[Pairing, ...]
    headline: Pairing | None
    tries: Tries
    timing: tuple[Starts, ...]
    prospects: tuple[Prospect, ...]
    stress: pd.DataFrame
    notes: tuple[str, ...]

    @cached_property
    def _plain(self) -> dict[str, Any]:
        """Everything but the verdict, which is written from it."""
        headline = next((n for n, one in enumerate(self.pairs) if one is self.headline), None)
        return {
            "basis": self.basis.as_dict(),
            "leader": self.leader,
            "headline_pair": headline,
            "pairs": [one.as_dict() for one in self.pairs],
            "against_yardstick": [one.as_dict() for one in self.against_yardstick],
            "tries": self.tries.as_dict(),
            "timing": [one.as_dict() for one in self.timing],
            "variants": [one.as_dict() for one in self.prospects],
            "notes": list(self.notes),
        }

    @cached_property
    def verdict(self) -> Verdict:
        """The evidence in one paragraph, every number of which stands in `as_dict`."""
        return verdict_of(self._plain)

    def as_dict(self) -> dict[str, Any]:
        """Return all but the frame of the stress as plain values: the part `evidence` of summary.json."""
        return {"verdict": self.verdict.as_dict(), **self._plain}
