"""Falls of a curve from its highest value so far: the deepest, and the longest."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

__all__ = ["Fall", "deepest", "drawdowns", "longest"]

Floats = NDArray[np.float64]


@dataclass(frozen=True, slots=True)
class Fall:
    """One fall: depth (fraction of the peak, >= 0) and indices into the curve.

    `recovered` is where the curve is at or above the peak again, or -1 when it never is.
    """

    depth: float
    peak: int
    trough: int
    recovered: int

    def end(self, size: int) -> int:
        """Return the index at which the fall is over, or the last of a curve of that size."""
        return self.recovered if self.recovered >= 0 else size - 1


def drawdowns(curve: Floats) -> Floats:
    """Return how far below its highest value so far every value (T,) of a curve is, fraction >= 0."""
    return np.asarray(1.0 - curve / np.maximum.accumulate(curve))


def deepest(curve: Floats) -> Fall:
    """Return the deepest fall of a curve (T,); depth 0 at index 0 when it never fell."""
    if not curve.size:
        return Fall(0.0, 0, 0, 0)
    down = drawdowns(curve)
    trough = int(np.argmax(down))
    return _fall(curve, trough)


def longest(curve: Floats, dates: NDArray[np.datetime64]) -> tuple[Fall, int]:
    """Return the fall with the most calendar days from peak to recovery (or to the end), and the days."""
    best, most = Fall(0.0, 0, 0, 0), 0
    if not curve.size:
        return best, most
    under = drawdowns(curve) > 0.0
    starts = np.flatnonzero(under & ~np.concatenate(([False], under[:-1])))
    for start in starts:
        back = np.flatnonzero(~under[start:])
        end = int(start + back[0]) if back.size else curve.size - 1
        days = int((dates[end] - dates[start - 1]).astype("timedelta64[D]").astype(np.int64))
        if days > most:
            low = int(start + np.argmin(curve[start : end + 1]))
            best, most = _fall(curve, low), days
    return best, most


def _fall(curve: Floats, trough: int) -> Fall:
    peak = int(np.argmax(curve[: trough + 1]))
    depth = float(1.0 - curve[trough] / curve[peak])
    back = np.flatnonzero(curve[trough:] >= curve[peak])
    return Fall(depth, peak, trough, int(trough + back[0]) if back.size else -1)
