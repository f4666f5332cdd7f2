"""Figures of every shipped strategy on the demo market, kept in golden.json.

`python tests/structures/golden.py` makes the file again. Do so only after a change that is meant to move
them, and say in DEVELOPERS.md under "Changes" which moved, by how much and why.
"""

from __future__ import annotations

import json
from pathlib import Path
from typing import Any

from hedgerow.evidence import Summary
from hedgerow.market import load_market
from hedgerow.rules.load import load_strategy
from hedgerow.study.one import Bench
from hedgerow.study.words import AccountWords, CostWords
from hedgerow.volatility.words import surface_words
from hedgerow.walk.run import Window

ROOT = Path(__file__).parents[2]
GOLDEN = Path(__file__).with_name("golden.json")
FILES = sorted(path.stem for path in (ROOT / "strategies").glob("*.yaml"))
FIRST, LAST = "2012-01-03", "2016-12-30"
COUNTS = ("positions", "positions_open")
FRACTIONS = ("win_rate", "break_even_win_rate", "average_win", "average_loss")
MONEY = ("stock_pnl", "option_pnl", "dividends", "interest", "costs")


def rounded(summary: Summary) -> dict[str, Any]:
    """The figures that are kept: counts, fractions to a hundredth of a percent, whole money."""
    found: dict[str, Any] = {name: int(getattr(summary, name)) for name in COUNTS}
    values = {name: getattr(summary, name) for name in FRACTIONS}
    values["growth_a_year"] = summary.account.growth_a_year
    found |= {name: round(float(value), 4) if value == value else None for name, value in values.items()}
    return found | {name: round(float(getattr(summary, name))) for name in MONEY}


def figures() -> dict[str, dict[str, Any]]:
    """Every strategy over five years of Orchard Bay, with the default account, costs and surface."""
    market = load_market(ROOT / "datasets" / "orchard-bay")
    bench, window = Bench(market, surface_words(None)), Window.of(market, FIRST, LAST)
    out = {}
    for name in FILES:
        rule = load_strategy(ROOT / "strategies" / f"{name}.yaml")
        result = bench.run(rule, AccountWords().account(), CostWords().costs(), window, name, beside=False)
        out[name] = rounded(result.summary)
    return out


def main() -> None:
    """Write the file."""
    GOLDEN.write_text(json.dumps(figures(), indent=1) + "\n", encoding="utf-8")


if __name__ == "__main__":
    main()
