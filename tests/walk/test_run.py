"""Running the walk: windows, chunks, tables that grow, marks, threads; the same inputs give the same bits."""

from __future__ import annotations

import os
import subprocess
import sys
from concurrent.futures import ThreadPoolExecutor
from pathlib import Path

import numpy as np
import pytest

import hedgerow.walk.run as run
import hedgerow.walk.tables as tables
from hedgerow.errors import StudyError
from hedgerow.kernels import layout as at
from hedgerow.rules.load import load_strategy
from hedgerow.study.one import Bench
from hedgerow.walk.account import NO_COSTS, Account
from hedgerow.walk.run import Window
from walks import RULES, SURFACE, digest, lively_market, moved_to, same_bits, walked

MARKET = lively_market()
TESTS = Path(__file__).parents[1]
ALONE = """
from walks import RULES, digest, lively_market, walked
for rule in RULES:
    log = walked(lively_market(sessions=130), rule)
    print(rule, len(log.events), digest(log))
"""


def kinds(rule: str) -> set[int]:
    """The kinds of events a rule's walk holds."""
    return set(walked(MARKET, rule).events["kind"].tolist())


def test_the_market_is_lively() -> None:
    """What is compared below holds something of everything: every kind of event but the cost of borrowing."""
    found = set().union(*(kinds(rule) for rule in RULES))
    assert found == set(range(at.KIND_GONE + 1)) - {at.KIND_BORROW}


@pytest.mark.parametrize("rule", list(RULES))
@pytest.mark.parametrize("sessions", [1, 7, 10_000])
def test_chunks_do_not_matter(monkeypatch: pytest.MonkeyPatch, rule: str, sessions: int) -> None:
    """Looked at every session, every week or once: the same log as with the usual chunks."""
    expected = walked(MARKET, rule)
    monkeypatch.setattr(run, "CHUNK_SESSIONS", sessions)
    assert walked(MARKET, rule).same_as(expected)


@pytest.mark.parametrize("rule", list(RULES))
def test_tables_that_have_to_grow_do_not_matter(monkeypatch: pytest.MonkeyPatch, rule: str) -> None:
    """Room for next to nothing at first, growing by a hundredth at a time."""
    expected = walked(MARKET, rule)
    monkeypatch.setattr(tables, "EVENTS_A_SESSION", 0)
    monkeypatch.setattr(tables, "TERMS_A_SESSION", 0.0)
    monkeypatch.setattr(tables, "GROWTH", 1.01)
    assert walked(MARKET, rule).same_as(expected)


@pytest.mark.parametrize("rule", list(RULES))
def test_marks_change_nothing_else(rule: str) -> None:
    """Without marks the events, terms and days are the same, and the last session still has its marks."""
    full, bare = walked(MARKET, rule), walked(MARKET, rule, marks=False)
    for name in ("events", "terms", "days"):
        assert same_bits(getattr(full, name), getattr(bare, name)), name
    last = full.marks[full.marks["session"] == len(MARKET.dates) - 1]
    assert same_bits(bare.marks, last)
    assert len(full.marks) > len(bare.marks)


def test_marks_add_up_to_the_account() -> None:
    """At each close shares at the close and legs at their value are what the day's record holds."""
    log = walked(MARKET, "collar")
    for session in (60, 130, 220):
        marks, day = log.marks[log.marks["session"] == session], log.days[session]
        legs = sum(marks[f"leg{k}"].sum() for k in range(4))
        assert day["stock"] == pytest.approx((marks["shares"] * marks["spot"]).sum())
        assert day["options"] == pytest.approx(legs)
        assert day["equity"] == pytest.approx(day["cash"] + day["stock"] + day["options"])
        assert day["positions"] == len(marks)


@pytest.mark.parametrize("rule", list(RULES))
def test_compiled_and_plain_python_agree_to_the_bit(rule: str) -> None:
    """Every record of a walk in a process that compiles nothing."""
    assert f"{rule} " in plain_python()
    log = walked(lively_market(sessions=130), rule)
    assert f"{rule} {len(log.events)} {digest(log)}\n" in plain_python()


_PLAIN: list[str] = []


def plain_python() -> str:
    """What the three walks come to as plain Python, worked out once."""
    if not _PLAIN:
        env = {**os.environ, "HEDGEROW_UNCOMPILED": "1", "PYTHONPATH": str(TESTS)}
        command = [sys.executable, "-W", "error", "-c", ALONE]
        _PLAIN.append(subprocess.run(command, env=env, capture_output=True, text=True, check=True).stdout)
    return _PLAIN[0]


def test_two_threads_are_one_after_the_other() -> None:
    """The rules walked at once, over and over, and in turn."""
    turn = [digest(walked(MARKET, rule)) for rule in RULES]
    with ThreadPoolExecutor(3) as pool:
        for _ in range(5):
            assert list(pool.map(lambda rule: digest(walked(MARKET, rule)), RULES)) == turn


def test_progress_is_told() -> None:
    """Sessions done, rising to all of them, after each chunk."""
    told: list[tuple[int, int]] = []
    bench_walk(told)
    assert told[-1] == (260, 260)
    assert [done for done, _ in told] == sorted({done for done, _ in told})


def bench_walk(told: list[tuple[int, int]]) -> None:
    """Walk the collar, writing down what progress says."""
    bench = Bench(MARKET, SURFACE)
    program = bench.program(load_strategy({"name": "collar", **RULES["collar"]}))
    terms = run.Terms(Account(), NO_COSTS, Window.of(MARKET))
    run.walk_program(MARKET, bench.tape, program, terms, "", lambda done, whole: told.append((done, whole)))


@pytest.mark.parametrize("rule", list(RULES))
def test_a_walk_stopped_early_is_the_beginning_of_the_whole(rule: str) -> None:
    """A window that ends sooner holds the same events and days up to there."""
    whole, part = walked(MARKET, rule), walked(MARKET, rule, window=Window(0, 170))
    upto = whole.events[whole.events["session"] < 170]
    assert same_bits(upto, part.events)
    assert same_bits(whole.days[:170], part.days)


def test_a_window_keeps_the_history_before_it() -> None:
    """Volatility and signals are warm at its first session; nothing happens before it."""
    log = walked(MARKET, "collar", window=Window(100, 150))
    assert log.days["session"].tolist() == list(range(100, 150))
    assert log.events["session"].min() == 100
    assert (log.events["kind"] == at.KIND_SIGNALLED)[log.events["session"] == 100].any()


def test_the_first_event_is_the_deposit() -> None:
    """The opening cash, which is also the first day's, as nothing is filled then at an open."""
    log = walked(MARKET, "collar", account=Account(cash=54_321.0))
    first = log.events[0]
    assert (first["kind"], first["cash"], first["position"]) == (at.KIND_DEPOSIT, 54_321.0, -1)
    assert log.days["cash"][0] == 54_321.0


def test_one_session_alone() -> None:
    """A window of a single session opens nothing that fills at the next open."""
    log = walked(MARKET, "collar", window=Window(100, 101))
    assert len(log.days) == 1
    assert not len(log.terms)


@pytest.mark.parametrize(
    ("first", "last", "where"),
    [
        ("2015-01-04", None, ["window.from"]),
        (None, "2030-01-01", ["window.to"]),
        ("1999-01-01", "2030-01-01", ["window.from", "window.to"]),
        ("2015-02-30", None, ["window.from"]),
        ("soon", "later", ["window.from", "window.to"]),
        ("2015-03-07", "2015-03-08", ["window"]),
        ("2015-05-04", "2015-05-01", ["window"]),
    ],
)
def test_windows_that_cannot_be(first: str | None, last: str | None, where: list[str]) -> None:
    """Every end that is wrong in one pass; the message says what the data hold."""
    with pytest.raises(StudyError) as caught:
        Window.of(MARKET, first, last)
    assert [fault.where for fault in caught.value.faults] == where
    assert all(
        f"the data hold 2015-01-05 to {MARKET.dates[-1]}" in str(fault) for fault in caught.value.faults
    )


def test_windows_that_can_be() -> None:
    """Both ends included; an end that is no session stands for the one within; without ends all."""
    assert Window.of(MARKET) == Window(0, 260)
    assert Window.of(MARKET, "2015-01-06", "2015-01-08") == Window(1, 4)
    assert Window.of(MARKET, "2015-01-10", "2015-01-18") == Window(5, 10)
    assert Window.of(MARKET, last="2015-01-05") == Window(0, 1)


def test_old_strikes_end_where_today_s_begin() -> None:
    """Historically strikes are 5 or 2.50 apart through 2014, and 1 or 0.50 from 2015 (80 FR 1559)."""
    market = moved_to(lively_market(sessions=120), "2014-10-13")
    bench = Bench(market, SURFACE, "historical")
    program = bench.program(load_strategy({"name": "collar", **RULES["collar"]}))
    terms = run.Terms(Account(per_position=0.2), NO_COSTS, Window.of(market), "historical")
    events = run.walk_program(market, bench.tape, program, terms).events
    entries = (events["kind"] == at.KIND_LEG) & (events["reason"] == at.WHY_ENTRY)
    written = events[entries & (events["symbol"] != 0)]  # the first symbol splits, and its strikes with it
    dates = market.dates[written["session"]]
    strikes = written["strike"]
    assert set(strikes[dates < np.datetime64("2014-12-31")] % 2.5) == {0.0}
    assert set(strikes[dates > np.datetime64("2015-01-02")] % 0.5) == {0.0}
    assert set(strikes[dates > np.datetime64("2015-01-02")] % 2.5) != {0.0}
