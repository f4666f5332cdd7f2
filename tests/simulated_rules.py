"""Small studies of rules that are no better than their yardstick, but for one that may be planted."""

from __future__ import annotations

import numpy as np

from hedgerow.evidence.seeds import Resampling
from hedgerow.evidence.selection import indistinguishable_from_best, superior_to_yardstick

NAMES = tuple(f"rule {number}" for number in range(8))
LEVEL = 0.1


def rules(seed: int, planted: float = 0.0, days: int = 500, count: int = 8) -> tuple[np.ndarray, np.ndarray]:
    """Log returns of a yardstick (days,) and of rules (days, count) that hold it and differ by noise.

    The noise is shared by half between rules, clusters with the market, and differs in size by rule.
    `planted` is what rule 3 earns more a day.
    """
    random = np.random.default_rng(seed)
    calm = np.exp(0.5 * np.convolve(random.standard_normal(days + 19), np.ones(20) / np.sqrt(20), "valid"))
    yardstick = 0.0003 + 0.01 * calm * random.standard_normal(days)
    shared, own = random.standard_normal((days, 1)), random.standard_normal((days, count))
    sizes = np.linspace(0.002, 0.006, count)
    returns = yardstick[:, None] + sizes * calm[:, None] * (shared + own) / np.sqrt(2.0)
    returns[:, 3] += planted
    return yardstick, returns


def study(seed: int, days: int, replications: int) -> dict[str, bool]:
    """Whether each test rejects a study of noise: better ones claimed, or some thrown out of the best set."""
    yardstick, returns = rules(seed, days=days)
    known = Resampling(seed, replications)
    found = superior_to_yardstick(returns, yardstick, NAMES, known, LEVEL)
    best = indistinguishable_from_best(returns, NAMES, known, 1.0 - LEVEL)
    return {
        "superior": found.p_consistent <= LEVEL,
        "stepwise": bool(found.better),
        "best set": len(best.members) < len(NAMES),
    }
