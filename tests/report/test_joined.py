"""Several runs on one page: what they share, what they say, and what stands in the way of comparing them."""

from __future__ import annotations

from pathlib import Path

import numpy as np
import pytest

from hedgerow.errors import PlaceError
from hedgerow.evidence.resample import Track, compare
from hedgerow.evidence.seeds import Resampling
from hedgerow.report.build import write_comparison
from hedgerow.report.folder import read_folder
from hedgerow.report.joined import join_runs
from pages import run_folder

ONE = {"variants": {"short": {}}, "evidence": "none"}
OTHER = {"name": "Further out", "variants": {"short": {"legs.call.expiry.days": 21}}, "evidence": "none"}


@pytest.fixture(scope="module")
def folders(tmp_path_factory: pytest.TempPathFactory) -> list[Path]:
    """Two runs, each of a variant named `short`, the second of fewer days."""
    place = tmp_path_factory.mktemp("joined")
    window = {"window": {"from": "2015-03-02"}}
    return [run_folder(place / "a", ONE, report=False), run_folder(place / "b", OTHER | window, report=False)]


def test_curves_hold_what_all_share(folders: list[Path]) -> None:
    """Dates and equity beside those of the second run, which is the shorter; names told apart by study."""
    runs = [read_folder(one) for one in folders]
    whole = join_runs(runs)
    assert whole.names == ("Short or long: short", "Further out: short")
    assert np.array_equal(whole.dates, runs[1].dates)
    assert np.array_equal(whole.equity[1], runs[1].equity[0])
    assert np.array_equal(whole.equity[0], runs[0].equity[0][-len(whole.dates) :])


def test_the_answer_is_that_of_the_shared_days(folders: list[Path]) -> None:
    """The sentence beside that of `compare` on the shared days, faster grower first."""
    whole = join_runs([read_folder(one) for one in folders])
    tracks = [Track(name, value) for name, value in zip(whole.names, whole.equity, strict=True)]
    tracks.sort(key=lambda one: -one.equity[-1] / one.equity[0])
    wanted = compare(*tracks, whole.dates, None, Resampling(replications=1000)).sentence
    assert whole.evidence is not None
    assert whole.evidence["verdict"]["headline"].lower() == wanted.lower()


def test_what_differs_stands_first_among_the_cautions(tmp_path: Path, folders: list[Path]) -> None:
    """Other prices, costs and days are told, each where it is so; one run twice is accused of none."""
    strange = run_folder(tmp_path, ONE | {"costs": "none"}, symbols="AC", report=False)
    unlike = join_runs([read_folder(folders[0]), read_folder(strange)]).about["cautions"]
    assert "different prices" in unlike[0]
    assert "different premiums or costs" in unlike[1]
    days = join_runs([read_folder(one) for one in folders]).about["cautions"]
    assert "different days" in days[0]
    assert days[1].startswith("Hypothetical")
    assert join_runs([read_folder(folders[0])] * 2).about["cautions"][0].startswith("Hypothetical")


def test_runs_of_other_days_are_refused(tmp_path: Path) -> None:
    """One run ends before the other begins: a sentence with both spans, and no file."""
    windows = [{"window": {"from": "2015-03-02", "to": "2015-05-01"}}, {"window": {"from": "2015-08-03"}}]
    apart = [run_folder(tmp_path / str(at), ONE | one, report=False) for at, one in enumerate(windows)]
    with pytest.raises(PlaceError, match="no two sessions in common"):
        write_comparison(apart, tmp_path / "page.html")
    assert not (tmp_path / "page.html").exists()


def test_the_page_is_written(tmp_path: Path, folders: list[Path]) -> None:
    """Both names stand on it, and the same page comes twice."""
    place = write_comparison(folders, tmp_path / "page.html")
    text = place.read_text(encoding="utf-8")
    assert "Short or long and Further out" in text
    assert write_comparison(folders, tmp_path / "again.html").read_text(encoding="utf-8") == text
