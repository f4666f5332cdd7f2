"""The import contract in pyproject.toml: kept by the package, and broken by trees that ought to break it."""

from __future__ import annotations

import os
import subprocess
import sys
import tomllib
from pathlib import Path

import pytest

ROOT = Path(__file__).parents[2]
RUN = "import sys, importlinter.cli as c; sys.exit(c.lint_imports(no_cache=True, no_logo=True))"
ROOMS = ("cli", "desk", "report", "study", "evidence", "ledger", "walk", "rules", "options")
ROOMS += ("volatility", "signals", "market", "events", "kernels", "errors")


def lint(root: Path, package_root: Path) -> subprocess.CompletedProcess[str]:
    """Check the contracts of the project at `root` for the package found under `package_root`."""
    env = {**os.environ, "PYTHONPATH": str(package_root)}
    command = [sys.executable, "-c", RUN]
    return subprocess.run(command, cwd=root, env=env, capture_output=True, text=True, check=False)


def test_the_package_keeps_its_import_contract() -> None:
    """The whole package against the contract, by import-linter."""
    answer = lint(ROOT, ROOT / "engine")
    assert answer.returncode == 0, answer.stdout + answer.stderr


def test_the_contract_covers_what_the_house_promises() -> None:
    """Three contracts: the rooms in order and complete, the log as the waist, and numba in one room."""
    settings = tomllib.loads((ROOT / "pyproject.toml").read_text(encoding="utf-8"))["tool"]["importlinter"]
    layers, waist, compiled = settings["contracts"]
    rooms = [room.strip(" ()") for layer in layers["layers"] for room in layer.replace(":", "|").split("|")]
    assert [room for room in rooms if room in ROOMS] == list(ROOMS)
    assert layers["exhaustive"]
    assert set(waist["source_modules"]) == {"hedgerow.events", "hedgerow.ledger", "hedgerow.evidence"}
    assert compiled["forbidden_modules"] == ["numba", "llvmlite"]


@pytest.fixture
def house(tmp_path: Path) -> Path:
    """A tree of empty rooms under the same contract."""
    (tmp_path / "pyproject.toml").write_text((ROOT / "pyproject.toml").read_text(encoding="utf-8"))
    for room in ("", *ROOMS):
        folder = tmp_path / "hedgerow" / room
        folder.mkdir(parents=True, exist_ok=True)
        (folder / "__init__.py").write_text("")
    return tmp_path


@pytest.mark.parametrize(
    ("file", "line", "kept"),
    [
        ("walk/__init__.py", "import hedgerow.rules", True),
        ("kernels/jit.py", "def f():\n    import numba", True),
        ("desk/__init__.py", "import hedgerow.report", True),
        ("report/__init__.py", "import hedgerow.desk", False),
        ("market/__init__.py", "import hedgerow.walk", False),
        ("signals/__init__.py", "import hedgerow.volatility", False),
        ("ledger/__init__.py", "import hedgerow.market", False),
        ("evidence/__init__.py", "def f():\n    from hedgerow.rules import x", False),
        ("events/__init__.py", "import hedgerow.kernels", True),
        ("events/__init__.py", "import hedgerow.walk", False),
        ("walk/__init__.py", "import numba", False),
        ("walk/run.py", "def f():\n    from numba.core import types", False),
        ("attic/__init__.py", "", False),  # a room that stands nowhere in the list
    ],
)
def test_the_contract_catches_what_it_should(house: Path, file: str, line: str, kept: bool) -> None:
    """Negative controls: one import in a tree of empty rooms is allowed or caught, wherever it hides."""
    place = house / "hedgerow" / file
    place.parent.mkdir(exist_ok=True)
    place.write_text(line + "\n")
    answer = lint(house, house)
    assert (answer.returncode == 0) is kept, answer.stdout
    assert "KEPT" in answer.stdout, answer.stdout
