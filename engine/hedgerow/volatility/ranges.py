"""Volatility from highs and lows.

Parkinson, Garman-Klass and Rogers-Satchell see the session only: what happens between a close and the next
open is not in them, so they read low where prices jump overnight. Yang-Zhang holds the overnight move.
Here u, d, c are ln high, low, close over the open of the session and o is ln open over the previous close.
"""

from __future__ import annotations

import math

import numpy as np

from hedgerow.kernels.layout import Floats
from hedgerow.kernels.rolling import trailing_moments
from hedgerow.volatility.registry import Bars, Estimate, estimator

__all__ = ["garman_klass", "parkinson", "rogers_satchell", "yang_zhang", "yang_zhang_k"]


def _trailing_mean(values: Floats, horizon: float) -> Estimate:
    counts, means, _ = trailing_moments(values, round(horizon))
    return Estimate(counts, means)


@estimator("parkinson")
def parkinson(bars: Bars, horizon: float) -> Estimate:
    """Mean of (u - d)^2 / (4 ln 2). Source: Parkinson 1980, Journal of Business 53, 61-65."""
    span = bars.up - bars.down
    return _trailing_mean(span * span / (4.0 * math.log(2.0)), horizon)


@estimator("garman_klass")
def garman_klass(bars: Bars, horizon: float) -> Estimate:
    """Mean of .511 (u - d)^2 - .019 (c (u + d) - 2 u d) - .383 c^2.

    Source: Garman & Klass 1980, Journal of Business 53, 67-78, their best analytic estimator (equation 19).
    """
    u, d, c = bars.up, bars.down, bars.within
    span = u - d
    return _trailing_mean(0.511 * span * span - 0.019 * (c * (u + d) - 2.0 * u * d) - 0.383 * c * c, horizon)


def _rogers_satchell_terms(bars: Bars) -> Floats:
    return bars.up * (bars.up - bars.within) + bars.down * (bars.down - bars.within)


@estimator("rogers_satchell")
def rogers_satchell(bars: Bars, horizon: float) -> Estimate:
    """Mean of u (u - c) + d (d - c), which no drift disturbs.

    Source: Rogers & Satchell 1991, Annals of Applied Probability 1, 504-512.
    """
    return _trailing_mean(_rogers_satchell_terms(bars), horizon)


def yang_zhang_k(sessions: Floats) -> Floats:
    """Weight of the open-to-close variance over n > 1 sessions: .34 / (1.34 + (n + 1) / (n - 1)).

    Source: Yang & Zhang 2000, Journal of Business 73, 477-491, equation 10.
    """
    return 0.34 / (1.34 + (sessions + 1.0) / (sessions - 1.0))


@estimator("yang_zhang")
def yang_zhang(bars: Bars, horizon: float) -> Estimate:
    """Overnight variance + k x open-to-close variance + (1 - k) x Rogers-Satchell.

    Blind to drift and whole across opening jumps. Source: Yang & Zhang 2000, equation 8. A session counts
    only with all its parts known.
    """
    parts = (bars.overnight, bars.within, _rogers_satchell_terms(bars))
    known = ~np.isnan(parts[0] + parts[1] + parts[2])
    sessions = round(horizon)
    overnight, within, steady = (np.where(known, part, np.nan) for part in parts)
    counts, _, overnight_squares = trailing_moments(overnight, sessions)
    _, _, within_squares = trailing_moments(within, sessions)
    _, steady_mean, _ = trailing_moments(steady, sessions)
    enough = np.maximum(counts, 2.0)
    k = yang_zhang_k(enough)
    jumps = (overnight_squares + k * within_squares) / (enough - 1.0)
    return Estimate(counts, jumps + (1.0 - k) * steady_mean)
