"""The handbook of studies: every word and default in it is that of the models."""

from __future__ import annotations

import re
from pathlib import Path
from typing import Any

import pytest

from hedgerow.rules.document import tree_of_text
from hedgerow.study.declare import read_study
from hedgerow.study.evidence_words import Asked, EvidenceWords
from hedgerow.study.gridwords import WalkForwardWords
from hedgerow.study.trials import trials_of
from hedgerow.study.words import AccountWords, CostWords, PricingWords, StudyWords, WindowWords
from hedgerow.volatility.model import PRESETS, RANGES
from rule_words import collar

CONFIGS = Path(__file__).parents[2] / "configs"
HANDBOOK = (CONFIGS / "README.md").read_text(encoding="utf-8")
ROWS = {
    cells[1].strip("` "): [cell.strip() for cell in cells[2:-1]]
    for cells in (line.split("|") for line in HANDBOOK.splitlines())
    if len(cells) > 4 and cells[1].startswith(" `")
}
FIRST, VARIANTS, GRIDS = re.findall(r"```yaml\n(.*?)```", HANDBOOK, flags=re.DOTALL)


@pytest.mark.parametrize("model", [StudyWords, AccountWords, CostWords, EvidenceWords, WalkForwardWords])
def test_every_word_has_a_row(model: Any) -> None:
    """Tables hold every word of the models."""
    assert set(model.words()) <= set(ROWS)


def test_every_word_of_pricing_is_there() -> None:
    """The words of the surface have their rows, those of pricing and of the window are in the text."""
    assert {*RANGES, "preset", "blend", "observed"} <= set(ROWS)
    assert all(f"`{word}" in HANDBOOK for word in PricingWords.words())
    assert all(f"{word}: " in HANDBOOK for word in WindowWords.words())
    assert all(f"`{name}`" in HANDBOOK for name in PRESETS)


@pytest.mark.parametrize("model", [AccountWords, CostWords, EvidenceWords])
def test_defaults_in_the_tables(model: Any) -> None:
    """Compares the column of defaults with the defaults of the models, as they are written."""
    written = model().model_dump()
    for word in set(model.words()) - {"stress"}:
        value = written[word]
        shown = str(value).lower() if isinstance(value, bool) else f"{value}"
        assert ROWS[word][1].strip("`") == shown, word


def test_defaults_of_the_stress() -> None:
    """The values that the text names are those of the model; the example reads."""
    told = re.search(
        r"ratios from (\S+) to (\S+), skews of (.*?), half-spreads of (.*?)%\.", HANDBOOK, re.DOTALL
    )
    assert told is not None
    ends, asked = [float(told[1]), float(told[2])], Asked()
    assert ends == [asked.ratios[0], asked.ratios[-1]]
    for text, values in ((told[3], asked.skews), (told[4], [100.0 * one for one in asked.half_spreads])):
        numbers = [float(part) for part in re.findall(r"-?\d+(?:\.\d+)?", text)]
        assert numbers == pytest.approx(list(values))
    line = next(line for line in HANDBOOK.splitlines() if line.strip().startswith("evidence: {"))
    study, faults = read_study(tree_of_text(f"{FIRST}{line.strip()}\n", "README.md"), CONFIGS)
    assert [str(fault) for fault in faults] == []
    assert study is not None
    assert study.evidence is not None
    assert (study.evidence.draws, study.evidence.ratios) == (2000, (0.8, 1.0, 1.2, 1.4))


@pytest.mark.parametrize("name", sorted(set(RANGES) - {"history"}))
def test_defaults_of_the_surface(name: str) -> None:
    """Compares with the default preset; percents as percents."""
    value = getattr(PRESETS["default"], name)
    assert ROWS[name][1] == (f"{value * 100:g}%" if RANGES[name].percent else f"{value:g}")


def test_first_example_is_right() -> None:
    """Read as if it stood beside the shipped studies."""
    study, faults = read_study(tree_of_text(FIRST, "README.md"), CONFIGS)
    assert [str(fault) for fault in faults] == []
    assert study is not None
    assert [name for name, _ in study.variants] == ["one week", "three weeks"]


def test_example_of_variants_is_right() -> None:
    """Every kind of change in it can be made on the weekly collar with an exit called `cut`."""
    base = collar(exit=[{"name": "cut", "if": {"loss": {"at_least": "2%"}}}])
    tree = tree_of_text("name: a\nmarket: ../datasets/orchard-bay\n" + VARIANTS, "README.md")
    tree.plain["strategy"] = base
    study, faults = read_study(tree, CONFIGS)
    assert [str(fault) for fault in faults] == []
    assert study is not None
    assert len(study.variants) == 8


def test_example_of_a_grid_is_right() -> None:
    """Its 54 combinations can be made on the weekly collar, and 18 drawn of them."""
    tree = tree_of_text("name: a\nmarket: ../datasets/orchard-bay\n" + GRIDS, "README.md")
    tree.plain["strategy"] = "../strategies/collar-weekly.yaml"
    study, faults = read_study(tree, CONFIGS)
    assert [str(fault) for fault in faults] == []
    assert study is not None
    assert study.grid is not None
    assert study.grid.size == 54
    trials_of(study).check()
    assert 9 < len(trials_of(study)) <= 18
