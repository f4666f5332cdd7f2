"""How often the 90 % intervals hold the truth: `python tests/benchmarks/intervals.py --json`.

Over simulated markets with a known difference (`simulated_pairs`), the share of comparisons whose interval
holds it, by measure; between .86 and .94 is wanted. Beside them the same for positions by entry week.
"""

from __future__ import annotations

import argparse
import json
import sys
from pathlib import Path

sys.path.insert(0, str(Path(__file__).parents[1]))

from hedgerow.evidence.clusters import trade_difference
from hedgerow.evidence.resample import Track, compare
from hedgerow.evidence.seeds import Resampling
from simulated_pairs import curve, days_of, simulate, truth
from simulated_positions import TRUE_GAP, positions_pair

MEASURES = ("growth", "sharpe", "tail_loss", "drawdown")


def daily(markets: int, days: int, replications: int, seed: int) -> dict[str, float]:
    """Share of intervals that hold the truth, by measure, on so many markets of so many days."""
    known, both = truth(days), simulate(markets, days, seed)
    dates = days_of(days + 1)
    held = dict.fromkeys(MEASURES, 0)
    for path in range(markets):
        tracks = [Track(name, curve(both[k][:, path])) for k, name in enumerate(("first", "second"))]
        result = compare(*tracks, dates, resampling=Resampling(seed + path, replications))
        for name in MEASURES:
            one = getattr(result, name)
            held[name] += one.low <= getattr(known, name) <= one.high
    return {name: count / markets for name, count in held.items()}


def positions(studies: int, sessions: int, seed: int) -> float:
    """Share of intervals of the mean result a position that hold the truth."""
    held = 0
    for study in range(studies):
        one = trade_difference(*positions_pair(seed + study, sessions=sessions), years=6.0)
        held += one.low <= TRUE_GAP <= one.high
    return held / studies


def main() -> None:
    """Measure and print."""
    parser = argparse.ArgumentParser(description=__doc__)
    parser.add_argument("--json", action="store_true", help="print one JSON object")
    parser.add_argument("--markets", type=int, default=500)
    parser.add_argument("--days", type=int, default=2520)
    parser.add_argument("--replications", type=int, default=499)
    asked = parser.parse_args()
    figures: dict[str, object] = {
        "markets": asked.markets,
        "days": asked.days,
        "replications": asked.replications,
        **daily(asked.markets, asked.days, asked.replications, seed=5),
        "positions_of_a_week": positions(asked.markets, 5, seed=11),
        "positions_of_three_weeks": positions(asked.markets, 15, seed=12),
    }
    print(json.dumps(figures) if asked.json else "\n".join(f"{k:26} {v}" for k, v in figures.items()))


if __name__ == "__main__":
    main()
