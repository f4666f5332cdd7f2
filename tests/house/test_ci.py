"""The script that tests a commit from an empty folder: which command it takes, what it runs, how it ends."""

from __future__ import annotations

import os
import shutil
import subprocess
from pathlib import Path

import pytest

ROOT = Path(__file__).parents[2]
SCRIPT = ROOT / ".ci" / "run"
WANTED = "python3 -m venv .venv && .venv/bin/pip install -q -e '.[test]' && .venv/bin/pytest"


def run(*arguments: str | Path, script: Path = SCRIPT, **extra: str) -> subprocess.CompletedProcess[str]:
    """Run the script and keep what it prints."""
    command = ["bash", str(script), *map(str, arguments)]
    return subprocess.run(command, capture_output=True, text=True, env={**os.environ, **extra}, check=False)


def command_in(folder: Path, text: str) -> subprocess.CompletedProcess[str]:
    """Ask the script for the test command of a README with this text."""
    readme = folder / "README.md"
    readme.write_text(text, encoding="utf-8")
    return run("--command", readme)


@pytest.mark.parametrize(
    "text",
    [
        f"# Title\n\nTests:\n\n```bash\n{WANTED}\n```\n",
        f"Tests:\n\n    {WANTED}\n",
        f"Tests:\n\n\t{WANTED}\n",
        f"- in a list\n\n  ~~~\n  $ {WANTED}  \n  ~~~\nRun pytest\n",
        f"Words that end in pytest\n\n```\nhedgerow run x\n{WANTED}\n```",
        f"```\r\n{WANTED}\r\n```\r\n",
    ],
)
def test_the_command_is_the_one_code_line_that_ends_in_pytest(tmp_path: Path, text: str) -> None:
    """Fenced or indented code as Markdown knows it (CommonMark 4.4 and 4.5); prose is never taken."""
    answer = command_in(tmp_path, text)
    assert (answer.returncode, answer.stdout, answer.stderr) == (0, WANTED + "\n", "")


@pytest.mark.parametrize(
    ("text", "complaint"),
    [
        ("", "holds no line of code"),
        (f"In prose: {WANTED}\n", "holds no line of code"),
        ("```\npytest tests/market\nmypytest\n```\n", "holds no line of code"),
        (f"```\n{WANTED}\n```\n\n    .venv/bin/pytest\n", "holds 2 lines of code"),
    ],
)
def test_no_command_or_several_is_a_clear_failure(tmp_path: Path, text: str, complaint: str) -> None:
    """A README that does not say which command to run ends with status 2 and one sentence why."""
    answer = command_in(tmp_path, text)
    assert (answer.returncode, answer.stdout) == (2, "")
    assert complaint in answer.stderr
    assert "exactly one is wanted" in answer.stderr


def test_a_missing_readme_is_a_clear_failure(tmp_path: Path) -> None:
    """A README that is not there is named."""
    answer = run("--command", tmp_path / "README.md")
    assert answer.returncode == 2
    assert "README.md does not exist" in answer.stderr


@pytest.fixture
def project(tmp_path: Path) -> Path:
    """A small repository with the script and one commit, whose test command runs `check.sh`."""
    root = tmp_path / "project"
    (root / ".ci").mkdir(parents=True)
    shutil.copy(SCRIPT, root / ".ci" / "run")
    (root / "README.md").write_text("    bash ./check.sh pytest\n", encoding="utf-8")
    commit(root, "pwd; cat note; exit 7", note="committed")
    return root


def commit(root: Path, check: str, note: str = "") -> None:
    """Commit `check.sh` with these lines, and a note beside it."""
    (root / "check.sh").write_text(check, encoding="utf-8")
    (root / "note").write_text(note, encoding="utf-8")
    names = ["-c", "user.name=A", "-c", "user.email=a@example.org", "-c", "commit.gpgsign=false"]
    for words in (["init", "-q"], ["add", "."], [*names, "commit", "-q", "-m", "one"]):
        subprocess.run(["git", *words], cwd=root, check=True)


def test_it_runs_the_commit_and_hands_on_the_status(project: Path) -> None:
    """The commit is tested, not the working tree, in a folder that is gone afterwards; status handed on."""
    (project / "note").write_text("not committed", encoding="utf-8")
    answer = run(script=project / ".ci" / "run")
    assert answer.returncode == 7
    assert "running: bash ./check.sh pytest" in answer.stdout
    assert "\ncommitted" in answer.stdout
    assert "finished with status 7" in answer.stdout
    (clone,) = [line for line in answer.stdout.splitlines() if line.endswith("/clone")]
    assert not Path(clone).exists()
    assert Path(clone) != project


def test_a_passing_command_passes(project: Path) -> None:
    """Status 0 is handed on too, and the caller's virtual environment and import path are not."""
    commit(project, 'echo "set: ${VIRTUAL_ENV-none} ${PYTHONPATH-none} ${PYTEST_ADDOPTS-none}"')
    answer = run(script=project / ".ci" / "run", VIRTUAL_ENV="x", PYTHONPATH="y", PYTEST_ADDOPTS="-x")
    assert answer.returncode == 0
    assert "set: none none none" in answer.stdout


def test_a_commit_without_a_command_is_not_tested(project: Path) -> None:
    """The README of the commit decides; when it holds no command nothing runs and the status is 2."""
    (project / "README.md").write_text("nothing here\n", encoding="utf-8")
    commit(project, "echo ran")
    answer = run(script=project / ".ci" / "run")
    assert answer.returncode == 2
    assert "holds no line of code" in answer.stderr
    assert "ran" not in answer.stdout.split()


def test_a_command_that_hangs_is_stopped(project: Path) -> None:
    """Past the limit, here one second, the command is stopped and the script says so, with status 124."""
    commit(project, "sleep 60")
    answer = run(script=project / ".ci" / "run", CI_SECONDS="1")
    assert answer.returncode == 124
    assert "stopped after 1 seconds" in answer.stderr
