"""A whole study: variants side by side, one market, whatever the number of threads."""

from __future__ import annotations

import threading
import time
from dataclasses import replace
from pathlib import Path
from typing import Any

import pytest

import hedgerow as hr
from hedgerow.errors import RulesError, RunError, StudyError
from hedgerow.study import compare
from hedgerow.study.compare import run_study
from hedgerow.study.declare import load_study
from hedgerow.study.evidence_of import sessions_of_evidence
from hedgerow.study.one import Bench, Result
from hedgerow.walk.run import Window
from walks import RULES, lively_market

MARKET = lively_market(sessions=130)


@pytest.fixture
def folder(tmp_path: Path) -> Path:
    """A folder in which a market's name exists, though the market is given."""
    (tmp_path / "prices.csv").write_text("symbol,date,close\n", encoding="utf-8")
    return tmp_path


def study(folder: Path, **words: Any) -> hr.Study:
    """A study of the collar over one week and over three, with other words."""
    plain = {
        "name": "weeks",
        "market": "prices.csv",
        "pricing": {"volatility": {"blend": [{"close": 10}]}},
        "strategy": {"name": "collar", **RULES["collar"]},
        "variants": {"one": {}, "three": {"legs.call.expiry.days": 21}, "six": {"legs.call.expiry.days": 42}},
        "evidence": "none",
    }
    return load_study({**plain, **words}, folder)


def test_each_variant_is_its_own_run(folder: Path) -> None:
    """In the order of the file, each the same log as when it is run alone."""
    declared = study(folder)
    result = run_study(declared, market=MARKET)
    assert [one.log.meta.variant for one in result.results] == ["one", "three", "six"]
    for (_, strategy), one in zip(declared.variants, result.results, strict=True):
        alone = hr.run(
            MARKET, strategy, pricing=declared.surface, costs=declared.costs, account=declared.account
        )
        assert alone.log.events.tobytes() == one.log.events.tobytes()
        assert alone.summary.account == one.summary.account


def test_threads_change_nothing(folder: Path) -> None:
    """One, two and five."""
    logs = [
        [one.log for one in run_study(study(folder), market=MARKET, workers=n).results] for n in (1, 2, 5)
    ]
    for other in logs[1:]:
        assert all(mine.same_as(theirs) for mine, theirs in zip(logs[0], other, strict=True))


def test_progress_counts_every_session_of_every_variant(folder: Path) -> None:
    """Pieces that add up to three times 130, and with evidence to what it was said to be besides."""
    for words, more in (({}, 0), ({"evidence": {"draws": 100}}, None)):
        told: list[int] = []
        declared = study(folder, **words)
        run_study(declared, market=MARKET, progress=told.append)
        if more is None:
            more = sessions_of_evidence(declared, Window.of(MARKET))
            assert more > 3 * 130
        assert sum(told) == 3 * 130 + more
        assert min(told) >= 1


def test_a_fault_in_one_variant_stops_the_others(folder: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    """What it raises is raised; variants under way give up at their next look."""
    given_up: list[str] = []
    begun = threading.Event()
    whole = Bench.run

    def run(self: Bench, *given: Any) -> Result:
        name, tell = given[4], given[5]
        if name == "three":
            begun.wait(10)
            raise RulesError.one("strategy", "made-up", "this variant cannot be run at all")
        if name == "six":
            begun.set()
            try:
                for _ in range(10_000):
                    tell(0, 1)
                    time.sleep(0.001)
            except RunError:
                given_up.append(name)
                raise
        return whole(self, *given)

    monkeypatch.setattr(Bench, "run", run)
    with pytest.raises(RulesError, match="cannot be run at all"):
        run_study(study(folder), market=MARKET, workers=3)
    assert given_up == ["six"]


def test_no_yardstick(folder: Path) -> None:
    """`yardstick: none` leaves it out of every summary."""
    with_it = run_study(study(folder), market=MARKET).results[0].summary
    without = run_study(study(folder, yardstick="none"), market=MARKET).results[0].summary
    assert with_it.yardstick is not None
    assert without.yardstick is None


def test_the_record_holds_all_that_is_needed(folder: Path) -> None:
    """The study resolved, the data by its fingerprint, the versions."""
    result = run_study(study(folder), market=MARKET)
    record = result.record()
    assert record["data"]["fingerprint"] == MARKET.fingerprint
    assert (record["data"]["first"], record["data"]["last"]) == (str(MARKET.dates[0]), str(MARKET.dates[-1]))
    assert load_study(record["study"], folder).variants == result.study.variants
    assert set(record["versions"]) == {*compare.VERSIONED, "python"}


def test_assumptions_are_those_of_the_study(folder: Path) -> None:
    """Volatility, premium, skew, costs and listings in words."""
    words = {"volatility": {"blend": [{"close": 10}], "ratio": 1.2}, "listings": "historical"}
    result = run_study(study(folder, pricing=words, costs={"contract_fee": 1.5}), market=MARKET)
    told = "; ".join(result.assumptions)
    for part in ("close 10", "1.2", "1.5 a contract", "historical listings"):
        assert part in told


def test_histories_that_ended_are_counted(folder: Path) -> None:
    """Of the symbols traded only."""
    long = lively_market()
    assert run_study(study(folder), market=long).ended == 1
    assert run_study(study(folder, symbols=["S00"]), market=long).ended == 0


def test_no_symbol_in_the_window(folder: Path) -> None:
    """The one symbol asked for has ended before the window; another beside it would do."""
    long = lively_market()
    window = {"from": str(long.dates[230])}
    with pytest.raises(StudyError, match="no symbol with a price in the window"):
        run_study(study(folder, symbols=["S02"], window=window), market=long)
    assert len(run_study(study(folder, symbols=["S02", "S03"], window=window), market=long).results) == 3


def test_faults_come_together(folder: Path) -> None:
    """Symbols and both ends of the window in one pass."""
    wrong = study(folder, symbols=["S00", "S9"], window={"from": "2001-01-01", "to": "2031-01-01"})
    with pytest.raises(StudyError) as caught:
        run_study(wrong, market=MARKET)
    assert [fault.where for fault in caught.value.faults] == ["symbols.2", "window.from", "window.to"]


def test_a_study_without_a_file_is_told_without_places(folder: Path) -> None:
    """With a file the same fault has its line and column."""
    path = folder / "study.yaml"
    path.write_text(
        f"name: a\nmarket: prices.csv\nstrategy: {Path(__file__).parents[2] / 'strategies' / 'collar.yaml'}\n"
        "window:\n  to: 2031-01-01\n",
        encoding="utf-8",
    )
    declared = load_study(path)
    with pytest.raises(StudyError, match=r"study.yaml:5:7: `window.to` is 2031-01-01"):
        run_study(declared, market=MARKET)
    with pytest.raises(StudyError, match=r"^window.to: is 2031-01-01"):
        run_study(replace(declared, path=None), market=MARKET)
