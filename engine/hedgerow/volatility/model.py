"""The assumptions of a surface, checked when they are made, and the presets with a name."""

from __future__ import annotations

import math
from dataclasses import dataclass
from typing import NamedTuple

from hedgerow.errors import Fault, StudyError, nearest_word
from hedgerow.kernels.layout import SmileModel
from hedgerow.volatility.blend import Term
from hedgerow.volatility.observed import NONE
from hedgerow.volatility.registry import ESTIMATORS

__all__ = ["PRESETS", "RANGES", "Range", "SurfaceModel", "default_history"]

LONGEST_HISTORY_BY_DEFAULT = 63


class Range(NamedTuple):
    """What a number of the model may be; `percent` numbers are written with their % sign."""

    least: float
    most: float
    percent: bool = False
    whole: bool = False


RANGES: dict[str, Range] = {
    "history": Range(2, 1260, whole=True),
    "ratio": Range(0.2, 5.0),
    "points": Range(-0.5, 0.5, percent=True),
    "pull": Range(0.0, 50.0),
    "anchor": Range(63, 2520, whole=True),
    "skew": Range(-1.0, 1.0),
    "curvature": Range(-1.0, 1.0),
    "skew_decay": Range(0.0, 1.0),
    "wing": Range(0.1, 6.0),
    "report_moves": Range(1.0, 20.0),
    "floor": Range(0.001, 1.0, percent=True),
    "cap": Range(0.1, 10.0, percent=True),
    "observed_scale": Range(0.0001, 100.0),
}


def default_history(terms: tuple[Term, ...]) -> int:
    """Sessions of history before a level is known: the longest term, but at most a quarter."""
    return min(LONGEST_HISTORY_BY_DEFAULT, math.ceil(max(term.horizon_sessions for term in terms)))


@dataclass(frozen=True)
class SurfaceModel:
    """What is assumed about volatility; the reasons for the default stand in `volatility.surface`.

    Raises StudyError with every fault when a number is out of its range, a term is unknown, or the floor is
    above the cap. `history` 0 means the default.
    """

    terms: tuple[Term, ...] = (Term("close", 10), Term("close", 63), Term("close", 252))
    history: int = 0  # sessions with a return before a level is known
    ratio: float = 1.0  # implied over the blend
    points: float = 0.0  # added to the volatility, fraction
    pull: float = 0.0  # to the anchor, per year
    anchor: int = 756  # sessions of the long-run level
    skew: float = -0.11  # per standardized log-moneyness
    curvature: float = 0.05
    skew_decay: float = 0.0
    wing: float = 2.5  # standardized log-moneyness beyond which the smile is flat
    report_moves: float = 5.0  # a report's move in ordinary daily moves
    floor: float = 0.05
    cap: float = 3.0
    observed: str = NONE
    observed_scale: float = 1.0  # what an observed value is multiplied by to be a fraction

    def __post_init__(self) -> None:
        faults = self._faults_of_terms() + self._faults_of_numbers()
        if self.floor > self.cap:
            found = f"the floor {self.floor:.4g} is above the cap {self.cap:.4g}"
            faults.append(_fault("floor", "range", found, "the floor is at most the cap"))
        if faults:
            raise StudyError(faults)

    def _faults_of_terms(self) -> list[Fault]:
        faults = [] if self.terms else [_fault("blend", "empty", "the blend has no term", "at least one")]
        for term in self.terms:
            known = ESTIMATORS.get(term.estimator)
            if known is None:
                allowed = "known estimators: " + ", ".join(f"`{word}`" for word in sorted(ESTIMATORS))
                found = f"`{term.estimator}` is no estimator of volatility"
                near = nearest_word(term.estimator, ESTIMATORS)
                faults.append(_fault("blend", "unknown", found, allowed, near))
            elif not known.least <= term.parameter <= known.most:
                found = f"{term.estimator} over {term.parameter:g} ({known.parameter})"
                faults.append(_fault("blend", "range", found, f"from {known.least:g} to {known.most:g}"))
            if not 0.0 < term.weight <= 100.0:
                found = f"the weight of {term.estimator} is {term.weight:g}"
                faults.append(_fault("blend", "range", found, "above 0 and at most 100"))
        return faults

    def _faults_of_numbers(self) -> list[Fault]:
        faults = []
        for name, limits in RANGES.items():
            value = getattr(self, name)
            if name == "history" and value == 0:
                continue
            if not limits.least <= value <= limits.most:
                found = f"{name} is {value:g}"
                faults.append(_fault(name, "range", found, f"from {limits.least:g} to {limits.most:g}"))
        return faults

    @property
    def history_sessions(self) -> int:
        """Sessions with a return before a level is known."""
        return self.history or default_history(self.terms)

    @property
    def smile(self) -> SmileModel:
        """The numbers that the compiled smile needs."""
        return SmileModel(
            kappa=float(self.pull),
            ratio=float(self.ratio),
            points=float(self.points),
            skew=float(self.skew),
            curvature=float(self.curvature),
            skew_decay=float(self.skew_decay),
            wing=float(self.wing),
            report_moves=float(self.report_moves),
            floor=float(self.floor),
            cap=float(self.cap),
        )


def _fault(name: str, code: str, found: str, allowed: str = "", remedy: str = "") -> Fault:
    return Fault(f"pricing.volatility.{name}", 0, 0, code, found, allowed, remedy)


PRESETS: dict[str, SurfaceModel] = {
    "default": SurfaceModel(),
    "plain-21": SurfaceModel(terms=(Term("close", 21),), skew=0.0, curvature=0.0, report_moves=1.0),
}
