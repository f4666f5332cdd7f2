"""Small large studies for tests: a lively market, a collar, a grid of a few dozen variants."""

from __future__ import annotations

from pathlib import Path
from typing import Any

import hedgerow as hr
from hedgerow.market.table import Market
from hedgerow.study.declare import load_study
from walks import RULES, lively_market

GRID = {
    "legs.call.expiry.days": [7, 14, 21],
    "legs.put.strike.from_spot": {"from": "-8%", "to": "-2%", "step": "2%"},
}
"""Twelve variants."""


def large_study(folder: Path, **words: Any) -> hr.Study:
    """The collar over a grid, with other words; the market must be given, its name need only exist."""
    (folder / "prices.csv").touch()
    plain = {
        "name": "grid",
        "market": "prices.csv",
        "account": {"cash": 100_000, "per_position": "1/4"},
        "pricing": {"volatility": {"blend": [{"close": 10}]}},
        "strategy": {"name": "collar", **RULES["collar"]},
        "grid": GRID,
    }
    return load_study({name: value for name, value in (plain | words).items() if value is not None}, folder)


def small_market(sessions: int = 130) -> Market:
    """Four symbols with dividends, a split and holes."""
    return lively_market(sessions=sessions)


def shard_files(folder: Path) -> dict[str, bytes]:
    """The bytes of every file in a folder of shards."""
    return {path.name: path.read_bytes() for path in sorted(folder.iterdir())}
