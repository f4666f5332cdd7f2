"""`hedgerow rules`: what it prints and with which code it ends."""

from __future__ import annotations

import json
import subprocess
import sys
from pathlib import Path

import pytest
from typer.testing import CliRunner

from hedgerow.cli.rules import WIDTH, app
from hedgerow.rules.glossary import sections
from hedgerow.rules.vocabulary import signal_names

ROOT = Path(__file__).parents[2]
STRATEGIES = sorted((ROOT / "strategies").glob("*.yaml"))
STUDIES = sorted((ROOT / "configs").glob("*.yaml"))
BAD = "name: a\nshares: lng\nlegs:\n  call: {sell: call, expiry: {days: 30}, strike: {from_spot: 4}}\n"


def run(*words: str | Path) -> tuple[int, str, str]:
    """The exit code and what went to standard output and to standard error."""
    result = CliRunner().invoke(app, [str(word) for word in words])
    assert result.exception is None or isinstance(result.exception, SystemExit)
    return result.exit_code, result.stdout, result.stderr


def test_right_files_have_a_line_each() -> None:
    """Strategies with their legs, studies with their variants; exit code 0."""
    code, out, _ = run("check", *STRATEGIES, *STUDIES)
    lines = out.splitlines()
    assert code == 0
    assert len(lines) == len(STRATEGIES) + len(STUDIES)
    assert all(line.startswith("ok  ") for line in lines)
    assert any(line.endswith("collar-weekly.yaml: strategy `Weekly collar`, 2 legs") for line in lines)
    assert any(line.endswith("covered-call.yaml: strategy `Covered call`, 1 leg") for line in lines)
    assert any("study `One week or three`, 2 variants" in line for line in lines)


def test_every_fault_of_every_file(tmp_path: Path) -> None:
    """One line a fault when piped, right files among them still told; exit code 2."""
    bad = tmp_path / "bad.yaml"
    bad.write_text(BAD, encoding="utf-8")
    code, out, _ = run("check", bad, STRATEGIES[0], tmp_path / "none.yaml")
    lines = out.splitlines()
    assert code == 2
    assert [line.split(" ")[0] for line in lines] == [
        f"{bad}:2:9:",
        f"{bad}:4:62:",
        "ok",
        f"{tmp_path / 'none.yaml'}:",
    ]
    assert "did you mean `long`?" in lines[0]


def test_faulty_study(tmp_path: Path) -> None:
    """A study is known by its words, and its faults are told with those of its strategy."""
    study = tmp_path / "study.yaml"
    study.write_text(
        "name: a\nmarket: nowhere\nstrategy:\n" + BAD.replace("\n", "\n  ").join(["  ", "\n"]), "utf-8"
    )
    code, out, _ = run("check", study)
    assert code == 2
    assert [line.split(":")[1] for line in out.splitlines()] == ["2", "5", "7"]


def test_no_file_named() -> None:
    """A usage message, exit code 2."""
    assert run("check")[0] == 2
    assert run()[0] in (0, 2)


@pytest.mark.parametrize("path", [*STRATEGIES, *STUDIES], ids=lambda path: path.name)
def test_explain_keeps_to_the_width(path: Path) -> None:
    """Paragraphs within a hundred columns, beginning with the name."""
    code, out, _ = run("explain", path)
    assert code == 0
    assert max(map(len, out.splitlines())) <= WIDTH == 100
    assert "Position. Nothing" in out if path.name == "cash.yaml" else "Position. For each lot" in out


def test_explain_a_study_tells_every_variant() -> None:
    """Each under its own name."""
    _, out, _ = run("explain", ROOT / "configs" / "one-week-or-three.yaml")
    assert "one week (Weekly collar)" in out
    assert "three weeks (Weekly collar)" in out
    assert "nearest to 21 days away" in " ".join(out.split())


def test_explain_a_faulty_file(tmp_path: Path) -> None:
    """The faults go to standard error; nothing to standard output; exit code 2."""
    bad = tmp_path / "bad.yaml"
    bad.write_text(BAD, encoding="utf-8")
    code, out, err = run("explain", bad)
    assert (code, out) == (2, "")
    assert len(err.splitlines()) == 2


@pytest.mark.parametrize(("kind", "folder"), [("strategy", "strategies"), ("study", "configs")])
def test_schema_is_the_shipped_one(kind: str, folder: str) -> None:
    """Compares what is printed, byte for byte, with the shipped copy."""
    code, out, _ = run("schema", kind)
    assert code == 0
    assert out == (ROOT / folder / "schema.json").read_text(encoding="utf-8")
    assert json.loads(out)["type"] == "object"


def test_unknown_kind_of_schema() -> None:
    """Refused with the kinds there are."""
    code, _, err = run("schema", "market")
    assert code == 2
    assert "strategy" in err


def test_words_at_a_glance() -> None:
    """Every section, every word and every signal, within the width."""
    code, out, _ = run("words")
    lines = out.splitlines()
    assert code == 0
    assert max(map(len, lines)) <= WIDTH
    assert [line for line in lines if line and not line.startswith(" ")] == [
        part.title for part in sections()
    ]
    first = {line.split()[0] for line in lines if line.startswith("  ") and line[2] != " "}
    assert {row.word for part in sections() for row in part.rows} <= first
    assert set(signal_names()) <= first


def test_help_is_light() -> None:
    """The commands are listed without loading what compiles, reads or draws."""
    code = (
        "import sys; from hedgerow.cli import rules; heavy = {'numba', 'pandas', 'pydantic', 'numpy'}; "
        "print(sorted(heavy & set(sys.modules)))"
    )
    done = subprocess.run([sys.executable, "-c", code], capture_output=True, text=True, check=True)
    assert done.stdout.strip() == "[]"
