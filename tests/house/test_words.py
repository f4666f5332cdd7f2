"""What no file of the project may say: where somebody's machine keeps it."""

from __future__ import annotations

import re
import subprocess
from pathlib import Path

import pytest

ROOT = Path(__file__).parents[2]

# A folder of somebody's machine, put together here so that this file does not hold one itself.
HOMES = "|".join(("home", "root", "Users", "work", "mnt", "media", "private"))
MACHINE_PATH = re.compile(rf"(?<![\w.~:/-])/(?:{HOMES})/[\w.]|\b[A-Z]:\\{{1,2}}Users\b")
SECRET = re.compile(
    "-----BEGIN [A-Z ]*PRIVATE" + " KEY-----|\\bAKIA[0-9A-Z]{16}\\b|\\bgh[pousr]_[A-Za-z0-9]{36}\\b"
)
UNMERGED = re.compile(r"^(?:<{7}|>{7}) ", re.MULTILINE)


def tracked_files() -> list[Path]:
    """Every file of the git tree that is there."""
    command = ["git", "ls-files", "-z", "--cached"]
    listed = subprocess.run(command, cwd=ROOT, capture_output=True, text=True, check=True).stdout
    return [ROOT / name for name in listed.split("\0") if name and (ROOT / name).is_file()]


def wrong_lines(text: str) -> list[str]:
    """Lines that hold a machine's path, a secret key, or the mark of an unfinished merge."""
    found = (
        pattern.search(line) for line in text.splitlines() for pattern in (MACHINE_PATH, SECRET, UNMERGED)
    )
    return [match.string for match in found if match]


def test_no_file_says_where_it_was_made() -> None:
    """Every tracked text file, line by line."""
    files = tracked_files()
    texts = {path: path.read_bytes() for path in files}
    wrong = {
        str(path.relative_to(ROOT)): wrong_lines(content.decode("utf-8", "replace"))
        for path, content in texts.items()
        if b"\0" not in content
    }
    assert {name: lines for name, lines in wrong.items() if lines} == {}
    assert len(files) > 10


def test_no_file_lies_outside_its_place() -> None:
    """Nothing that is made while working is tracked: caches, built packages, environments, results."""
    made = re.compile(r"(^|/)(__pycache__|\.venv|build|dist|runs|\.[a-z]+_cache|[^/]+\.egg-info)/|\.pyc$")
    assert [str(path) for path in tracked_files() if made.search(str(path.relative_to(ROOT)))] == []


@pytest.mark.parametrize(
    ("line", "wrong"),
    [
        ("see /" + "home/ann/notes.txt", True),
        ('open("/' + 'Users/ann/prices.csv")', True),
        ("C:\\" + "Users\\ann", True),
        ("(/" + "root/.cache)", True),
        ("<" * 7 + " HEAD", True),
        ("https://example.org/" + "home/page", False),
        ("market: ../" + "work/orchard-bay", False),
        ("paid up/" + "down", False),
    ],
)
def test_the_check_knows_a_machine_path_when_it_sees_one(line: str, wrong: bool) -> None:
    """Negative controls: absolute paths of three systems are caught, links and relative paths are not."""
    assert bool(wrong_lines(line)) is wrong
