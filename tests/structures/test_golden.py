"""Every shipped strategy on the demo market: figures as they were when they were last looked at."""

from __future__ import annotations

import json
from typing import Any

import pytest

from structures import golden

KEPT: dict[str, dict[str, Any]] = json.loads(golden.GOLDEN.read_text(encoding="utf-8"))


def test_every_strategy_is_kept() -> None:
    """A strategy that is added gets its row: `python tests/structures/golden.py`."""
    assert sorted(KEPT) == golden.FILES


def test_figures_are_those_that_were_kept() -> None:
    """Counts, fractions to a hundredth of a percent and whole money, of all strategies, as kept.

    Sums of money may differ by one and fractions by their last place where another machine rounds otherwise.
    """
    for name, found in golden.figures().items():
        for figure, value in KEPT[name].items():
            slack = 1.0 if figure in golden.MONEY else 0.00011
            same = value is None and found[figure] is None
            assert same or found[figure] == pytest.approx(value, abs=slack), (name, figure)


def test_figures_say_something() -> None:
    """All but the yardsticks trade, ten times or more where a position can end, and no two rows are alike."""
    trading = {name: row for name, row in KEPT.items() if name != "cash"}
    assert all(row["positions"] >= 3 for row in trading.values())
    assert sum(row["positions"] >= 10 for row in trading.values()) >= 20
    assert len({json.dumps(row) for row in KEPT.values()}) == len(KEPT)
