"""How often tests of many rules reject pure noise: `python tests/benchmarks/selection.py --json`.

Over simulated studies of rules no better than their yardstick (`simulated_rules`), the share in which each
test rejects at the level .1; and the share in which a planted better rule is found.
"""

from __future__ import annotations

import argparse
import json
import sys
from pathlib import Path

sys.path.insert(0, str(Path(__file__).parents[1]))

from hedgerow.evidence.seeds import Resampling
from hedgerow.evidence.selection import superior_to_yardstick
from simulated_rules import LEVEL, NAMES, rules, study


def main() -> None:
    """Measure and print."""
    parser = argparse.ArgumentParser(description=__doc__)
    parser.add_argument("--json", action="store_true", help="print one JSON object")
    parser.add_argument("--studies", type=int, default=400)
    parser.add_argument("--days", type=int, default=500)
    parser.add_argument("--replications", type=int, default=799)
    asked = parser.parse_args()
    outcomes = [study(seed, asked.days, asked.replications) for seed in range(asked.studies)]
    figures: dict[str, object] = {"studies": asked.studies, "level": LEVEL}
    figures |= {name: sum(one[name] for one in outcomes) / len(outcomes) for name in outcomes[0]}
    found = 0
    for seed in range(asked.studies // 4):
        yardstick, returns = rules(seed, planted=0.0008, days=asked.days)
        known = Resampling(seed, asked.replications)
        found += "rule 3" in superior_to_yardstick(returns, yardstick, NAMES, known, LEVEL).better
    figures["planted_found"] = found / (asked.studies // 4)
    print(json.dumps(figures) if asked.json else "\n".join(f"{k:16} {v}" for k, v in figures.items()))


if __name__ == "__main__":
    main()
