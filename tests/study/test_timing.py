"""Timing luck against walking every start by itself, and the length of a cycle."""

from __future__ import annotations

from dataclasses import replace
from typing import Any

import numpy as np
import pytest

from array_market import random_market
from hedgerow.evidence.ratios import growth_a_year
from hedgerow.rules.load import load_strategy
from hedgerow.study.declare import load_study
from hedgerow.study.one import Bench
from hedgerow.study.timing import (
    MOST_STARTS,
    cycle_sessions,
    first_sessions,
    held_back,
    offsets_of,
    walked_starts,
)
from hedgerow.walk.run import Window
from walks import RULES

PUT = {"buy": "put", "strike": {"from_spot": "-5%"}}
CALL = {"sell": "call", "strike": {"from_spot": "0%"}}


def rule(**words: Any) -> Any:
    """A strategy of one call with other words."""
    plain = {"name": "rule", "legs": {"call": {**CALL, "expiry": {"days": 21, "listed": "weekly"}}}}
    return load_strategy({**plain, **words})


@pytest.mark.parametrize(
    ("words", "sessions"),
    [
        ({}, 15),
        ({"legs": {"call": {**CALL, "expiry": {"days": 7, "listed": "weekly"}}}}, 5),
        ({"legs": {"call": {**CALL, "expiry": {"days": 30}}, "put": {**PUT, "expiry": {"days": 90}}}}, 64),
        ({"legs": {}}, 1),
        ({"legs": {}, "enter": {"on": {"first_session_of": "quarter"}}}, 63),
        ({"enter": {"on": {"weekday": ["monday"]}}}, 15),
        ({"enter": {"on": {"expiry_of": "monthly"}}}, 21),
    ],
)
def test_the_cycle_of_a_rule(words: dict[str, Any], sessions: int) -> None:
    """By hand: five sessions in seven calendar days, 21 a month, 63 a quarter; the longest counts."""
    assert cycle_sessions(rule(**words)) == sessions


def test_long_cycles_are_thinned_evenly() -> None:
    """All sessions up to 25; 25 of 64 at distances of two or three."""
    assert offsets_of(15) == tuple(range(15))
    assert offsets_of(1) == (0,)
    long = offsets_of(64)
    assert len(long) == MOST_STARTS
    assert long[0] == 0
    assert set(np.diff(long)) == {2, 3}
    assert long[-1] < 64


def brute_force(bench: Bench, study: Any, first: int, offset: int, shared: int) -> np.ndarray:
    """Equity from the shared session on of a walk that simply begins so many sessions later."""
    window = Window(first + offset, len(bench.market.dates))
    strategy = study.variants[0][1]
    log = bench.run(strategy, study.account, study.costs, window, "late").log
    return np.array(log.days["equity"][shared - window.start :])


@pytest.mark.parametrize("name", ["collar", "married put", "rolled call"])
def test_starts_are_walks_that_begin_later(name: str) -> None:
    """Every start against a window that begins so many sessions later: no interest, volatility known before.

    Growth of each over the shared days, the worst, the best and the ladder, which is worked out here too.
    """
    market = replace(random_market(21, sessions=330, symbols=3), rate=np.zeros(330))
    plain = {
        "name": "study",
        "market": ".",
        "pricing": {"volatility": {"blend": [{"close": 10}]}},
        "window": {"from": str(market.dates[100])},
        "strategy": {"name": name, **RULES[name]},
    }
    study = load_study(plain, ".")
    bench, window = Bench(market, study.surface), Window(100, 330)
    (starts,) = walked_starts(bench, study, window, 2)
    assert starts.starts == cycle_sessions(study.variants[0][1]) or starts.starts == MOST_STARTS
    shared = 100 + starts.offsets[-1]
    days = int((market.dates[-1] - market.dates[shared]).astype(int))
    curves = [brute_force(bench, study, 100, offset, shared) for offset in starts.offsets]
    growths = [growth_a_year(curve[0], curve[-1], days) for curve in curves]
    assert starts.growths == pytest.approx(growths, abs=1e-12)
    assert (starts.lowest, starts.highest) == pytest.approx((min(growths), max(growths)))
    assert starts.spread > 0.0
    folds = np.mean([curve[-1] / curve[0] for curve in curves])
    assert starts.laddered == pytest.approx(growth_a_year(1.0, folds, days))
    assert starts.first_date == str(market.dates[shared])


def test_a_symbol_that_is_listed_later_waits_from_its_own_first_session() -> None:
    """The k-th start enters it k sessions after its volatility is known, whatever the others do."""
    market = random_market(22, sessions=200, symbols=2)
    arrays = {name: getattr(market, name).copy() for name in ("open", "high", "low", "close")}
    for array in arrays.values():
        array[:80, 1] = np.nan
    market = replace(market, first_bar=np.array([0, 80]), **arrays)
    plain = {
        "name": "study",
        "market": ".",
        "pricing": {"volatility": {"blend": [{"close": 10}]}},
        "strategy": {"name": "held", "shares": "long", "legs": {}},
    }
    study = load_study(plain, ".")
    bench, window = Bench(market, study.surface), Window.of(market)
    ready = first_sessions(bench, window)
    assert ready.tolist() == [10, 90]
    program = bench.program(study.variants[0][1])
    for offset in (0, 3):
        late = held_back(program, ready + offset)
        assert late.may_enter.argmax(axis=0).tolist() == [10 + offset, 90 + offset]
