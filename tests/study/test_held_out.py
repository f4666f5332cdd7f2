"""The part kept aside: not in any figure, looked at once, and every look counted."""

from __future__ import annotations

from pathlib import Path

import numpy as np
import pytest

from hedgerow.errors import PlaceError, StudyError
from hedgerow.study.held_out import LOOKS, Look, Looks, parted
from hedgerow.study.large import look_aside, run_large, stage
from hedgerow.walk.run import Window
from large_runs import large_study, shard_files, small_market

MARKET = small_market(160)
FROM = str(MARKET.dates[120])


def test_no_figure_knows_of_the_part(tmp_path: Path) -> None:
    """The shards of a window that ends where the part begins: the same bytes."""
    study = large_study(tmp_path, held_out={"from": FROM})
    run_large(study, tmp_path / "aside", market=MARKET)
    short = large_study(tmp_path, window={"to": str(MARKET.dates[119])})
    run_large(short, tmp_path / "short", market=MARKET)
    one, other = shard_files(tmp_path / "aside"), shard_files(tmp_path / "short")
    del one["manifest.json"], other["manifest.json"]
    assert one == other


def test_a_second_look_is_refused_and_every_look_counted(tmp_path: Path) -> None:
    """The first is taken, the second refused in a sentence, with `again` taken and counted."""
    ready = stage(large_study(tmp_path, held_out={"from": FROM}), MARKET)
    looks = Looks(tmp_path / "runs")
    first = look_aside(ready, 3, looks, again=False)
    assert first.result is not None
    assert (first.looks, first.looks_of_all) == (1, 1)
    assert first.result.summary.first_date == FROM
    with pytest.raises(
        StudyError, match=r"looked at the part from \S+ on once already.*--look-again"
    ) as caught:
        look_aside(ready, 3, looks, again=False)
    assert "\n" not in str(caught.value)
    again = look_aside(ready, 3, looks, again=True)
    assert (again.looks, again.looks_of_all) == (2, 2)


def test_another_study_may_look_and_is_counted(tmp_path: Path) -> None:
    """A changed grid is another study: its look is taken, and both are told. Another name changes nothing."""
    looks = Looks(tmp_path / "runs")
    one = stage(large_study(tmp_path, held_out={"from": FROM}), MARKET)
    other = stage(
        large_study(tmp_path, held_out={"from": FROM}, grid={"legs.call.expiry.days": [7, 28]}), MARKET
    )
    renamed = stage(large_study(tmp_path, held_out={"from": FROM}, name="anew", question="Why?"), MARKET)
    look_aside(one, 0, looks, again=False)
    second = look_aside(other, 0, looks, again=False)
    assert (second.looks, second.looks_of_all) == (1, 2)
    with pytest.raises(StudyError, match="once already"):
        look_aside(renamed, 0, looks, again=False)


def test_a_look_is_written_down_before_it_is_taken(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    """Stopped while walking, the look counts all the same."""
    ready = stage(large_study(tmp_path, held_out={"from": FROM}), MARKET)

    def stopped(*_given: object, **_named: object) -> None:
        raise KeyboardInterrupt

    monkeypatch.setattr("hedgerow.study.one.walk_program", stopped)
    looks = Looks(tmp_path / "runs")
    with pytest.raises(KeyboardInterrupt):
        look_aside(ready, 0, looks, again=False)
    assert len(looks.read()) == 1


def test_a_record_that_cannot_be_read_is_told(tmp_path: Path) -> None:
    """One sentence, and no look."""
    (tmp_path / LOOKS).write_text("{", encoding="utf-8")
    with pytest.raises(PlaceError, match="cannot be read"):
        Looks(tmp_path).add(Look("d", FROM, "s", "n", "r"))
    assert (tmp_path / LOOKS).read_text(encoding="utf-8") == "{"


def test_the_part_lies_inside_the_window() -> None:
    """Cut at the first session on or after the day; a day at or outside the ends is refused."""
    before, aside = parted(MARKET, Window(0, 160), FROM)
    assert (before, aside) == (Window(0, 120), Window(120, 160))
    for day in (str(MARKET.dates[0]), "1999-01-01", str(np.datetime64(MARKET.dates[-1]) + 1)):
        with pytest.raises(StudyError, match="leaves nothing before it or nothing after it"):
            parted(MARKET, Window(0, 160), day)
