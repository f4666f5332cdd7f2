"""report.html as a file: made from a folder alone, the same every time, asking nothing of anyone."""

from __future__ import annotations

import re
from pathlib import Path

import pytest

from hedgerow.errors import PlaceError
from hedgerow.report.answer import _flip_key
from hedgerow.report.build import write_report
from hedgerow.report.folder import read_folder
from pages import run_folder


@pytest.fixture(scope="module")
def folder(tmp_path_factory: pytest.TempPathFactory) -> Path:
    """A run of three variants on two symbols."""
    return run_folder(tmp_path_factory.mktemp("built"))


def test_two_builds_are_the_same_bytes(folder: Path) -> None:
    """A second report of the same folder beside the first."""
    first = (folder / "report.html").read_bytes()
    assert write_report(folder).read_bytes() == first


def test_nothing_is_fetched(folder: Path) -> None:
    """No address of another file in the page; its policy allows its own style and script alone."""
    text = (folder / "report.html").read_text(encoding="utf-8")
    assert re.findall(r"(?:src|href)=[\"'](?!#)", text) == []
    assert len(re.findall(r'href="#', text)) > 5
    assert "@import" not in text
    assert "url(" not in text
    policy = re.search(r'Content-Security-Policy" content="([^"]*)"', text)
    assert policy is not None
    assert "default-src &#39;none&#39;" in policy[1] or "default-src 'none'" in policy[1]
    assert "unsafe" not in policy[1]


def test_figures_come_back_from_summary_json(folder: Path) -> None:
    """Summaries read back from the folder say what summary.json says, curves included."""
    run = read_folder(folder)
    assert [one.variant for one in run.summaries] == ["short", "long", "cut"]
    assert run.summaries[0].account.growth_a_year != run.summaries[1].account.growth_a_year
    assert run.yardstick is not None
    assert len(run.yardstick) == len(run.equity[0]) == len(run.dates)


@pytest.mark.parametrize("missing", ["events.parquet", "about.json", "run.yaml"])
def test_a_folder_that_lacks_something_is_refused(tmp_path: Path, folder: Path, missing: str) -> None:
    """One sentence that names the file, or says that no run lies there."""
    for path in folder.iterdir():
        if path.name != missing:
            (tmp_path / path.name).write_bytes(path.read_bytes())
    with pytest.raises(PlaceError, match="no finished run" if missing == "run.yaml" else missing):
        write_report(tmp_path)


def test_a_large_study_is_told_apart(tmp_path: Path) -> None:
    """A folder with the table of a grid: the sentence does not ask to run it again."""
    (tmp_path / "variants.parquet").write_bytes(b"")
    with pytest.raises(PlaceError, match="a large study") as caught:
        write_report(tmp_path)
    assert "again" not in str(caught.value)


def test_a_damaged_file_is_told(tmp_path: Path, folder: Path) -> None:
    """about.json cut short: a sentence, no traceback, and no report."""
    for path in folder.iterdir():
        (tmp_path / path.name).write_bytes(path.read_bytes())
    (tmp_path / "report.html").unlink()
    (tmp_path / "about.json").write_text('{"name": ', encoding="utf-8")
    with pytest.raises(PlaceError, match="cannot be read"):
        write_report(tmp_path)
    assert not (tmp_path / "report.html").exists()


def test_two_that_are_the_same_are_so_at_every_ratio() -> None:
    """A flip that was not found says so only of two that differ; twins are equal everywhere."""
    flip = {"value": None, "least": 0.8, "most": 1.4, "assumed": 1.0, "low": None, "high": None}
    assert "no ratio from 0.80 to 1.40" in _flip_key(flip, "90%", same=False).remark
    assert "the same at every ratio" in _flip_key(flip, "90%", same=True).remark
