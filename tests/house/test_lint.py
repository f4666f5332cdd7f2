"""Lint, format and types: each tool runs once, as a person would run it."""

from __future__ import annotations

import subprocess
import sys
from pathlib import Path

import pytest

ROOT = Path(__file__).parents[2]


@pytest.mark.parametrize(
    "words",
    [("ruff", "check", "."), ("ruff", "format", "--check", "."), ("mypy",)],
    ids=lambda words: " ".join(words),
)
def test_the_tools_find_nothing(words: tuple[str, ...]) -> None:
    """The rules of pyproject.toml on every file, and mypy's strict check of the package."""
    command = [sys.executable, "-m", *words]
    answer = subprocess.run(command, cwd=ROOT, capture_output=True, text=True, check=False)
    assert answer.returncode == 0, answer.stdout + answer.stderr


def test_the_tools_find_a_fault(tmp_path: Path) -> None:
    """Negative control: an unused import and a wrong type are found with the same settings."""
    bad = tmp_path / "bad.py"
    bad.write_text('"""Words."""\n\nimport os\n\nA: int = "x"\n', encoding="utf-8")
    config = ROOT / "pyproject.toml"
    checks = (
        ("F401", ["ruff", "check", "--config", str(config), str(bad)]),
        ("assignment", ["mypy", "--strict", "--config-file", "", str(bad)]),
    )
    for fault, words in checks:
        command = [sys.executable, "-m", *words]
        answer = subprocess.run(command, cwd=tmp_path, capture_output=True, text=True, check=False)
        assert answer.returncode == 1
        assert fault in answer.stdout
