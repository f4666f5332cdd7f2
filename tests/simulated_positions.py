"""Positions of two rules on one invented market, entered week by week, with a difference that is known."""

from __future__ import annotations

import numpy as np

from hedgerow.evidence.clusters import Positions

TRUE_GAP = 0.002
WEEKS = 300
SYMBOLS = 12


def positions_pair(seed: int, sessions: int = 5) -> tuple[Positions, Positions]:
    """Results of two rules that share the market of their weeks: the first earns .002 more on the mean.

    Each week every symbol may be entered, by either rule. A position's result is the market's over the weeks
    it is held (one, or three that overlap those of the neighbours), plus its own noise.
    """
    random = np.random.default_rng(seed)
    held = max(sessions // 5, 1)
    market = random.normal(0.0, 0.02, WEEKS + held)
    shared = np.array([market[week : week + held].sum() for week in range(WEEKS)])
    pair = []
    for name, share, extra in (("first", 1.0, TRUE_GAP), ("second", 0.2, 0.0)):
        entered = random.random((WEEKS, SYMBOLS)) < 0.4
        week = np.nonzero(entered)[0]
        results = extra + share * shared[week] + random.normal(0.0, 0.015, week.size)
        opened = np.datetime64("2015-01-05") + (7 * week).astype("timedelta64[D]")
        pair.append(Positions(name, results, opened, np.full(week.size, sessions)))
    return pair[0], pair[1]
