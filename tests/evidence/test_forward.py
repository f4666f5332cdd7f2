"""The year ahead from resampled sessions, and where its days come from."""

from __future__ import annotations

import json
import math
from dataclasses import replace

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as some

from hedgerow.events.log import EventLog
from hedgerow.evidence.forward import Outlook, Work, forward_view, one_year_paths
from hedgerow.evidence.seeds import Resampling
from hedgerow.ledger import Ledger
from hedgerow.ledger.positions import capital_tied_up
from hedgerow.rules.load import load_strategy
from hedgerow.study.one import Bench
from hedgerow.walk.account import DEFAULT_COSTS, Account
from hedgerow.walk.run import Window
from random_logs import random_log_builder
from walks import RULES, SURFACE, lively_market

QUICK = Resampling(seed=2, replications=400)


def noise(days: int = 1500, mean: float = 0.001, deviation: float = 0.01, held: int = 1) -> Work:
    """Work of independent normal days, `held` positions at a time."""
    results = np.random.default_rng(1).normal(mean, deviation, days) * held
    return Work("noise", results, np.full(days, held))


def most_held(ledger: Ledger) -> list[int]:
    """The most positions open at one time a session, counted event by event."""
    events, book = ledger.log.events, ledger.postings
    opening, closing = set(book.opened.tolist()), set(book.closed.tolist())
    now, most = 0, []
    for session in ledger.log.days["session"]:
        top = now
        for row in np.flatnonzero(events["session"] == session).tolist():
            now += (row in opening) - (row in closing)
            top = max(top, now)
        most.append(top)
    return most


@settings(max_examples=15)
@given(some.integers(0, 10**6))
def test_days_of_work_add_up_to_the_trades(seed: int) -> None:
    """Compares the sum of all days with the sum of every trade's result on what it tied up.

    Trades round the marks of what is still open to whole cents, a few parts in a million of what is tied up.
    """
    ledger = Ledger(random_log_builder(seed, sessions=30).log())
    work = Work.of(ledger)
    assert work.results.sum() == pytest.approx(ledger.trades["return_on_debit"].sum(), abs=1e-4)
    assert work.held.tolist() == most_held(ledger)


def test_a_day_of_work_by_marks() -> None:
    """Compares one day with the change of each position's gain, as its marks say, on what it tied up."""
    ledger = Ledger(random_log_builder(11, sessions=30).log())
    work, tied = Work.of(ledger), capital_tied_up(ledger.log)
    marks = ledger.marks.pivot(index="date", columns="position", values="gain")
    days = ledger.equity["date"].tolist()
    for today, before in zip(days[1:], days[:-1], strict=True):
        if before not in marks.index or today not in marks.index:
            continue
        now, then = marks.loc[today], marks.loc[before]
        if now.notna().ge(then.notna()).all():  # nothing was closed today
            change = (now - then.fillna(0.0)).dropna()
            wanted = sum(value / tied[int(str(place))] for place, value in change.items())
            assert work.results[days.index(today)] == pytest.approx(wanted, abs=1e-9)


def test_log_without_marks_is_refused() -> None:
    """Compares a log that marks only its last close with a refusal that says what to do."""
    log = random_log_builder(3).log()
    bare = EventLog(log.meta, log.events, log.terms, log.days, log.marks[:0])
    with pytest.raises(ValueError, match="keep marks"):
        Work.of(Ledger(bare))


def test_year_of_independent_days() -> None:
    """Compares the year with its closed form for normal days: log result normal, 252 times mean and variance.

    4,000 years from 1,500 days; the days' own mean and deviation are used, so what is left is the error of
    drawing, 1.6 % of a deviation and .8 points of a chance, taken threefold.
    """
    work, share = noise(), 0.5
    view = forward_view(work, Outlook((share,), 0.1, 0.2), Resampling(2, 4000))[0]
    logs = np.log1p(share * work.results)
    middle, deviation = 252 * logs.mean(), math.sqrt(252) * logs.std()
    assert math.log1p(view.median) == pytest.approx(middle, abs=0.06 * deviation)
    assert math.log1p(view.low) == pytest.approx(middle - 1.645 * deviation, abs=0.12 * deviation)
    assert math.log1p(view.high) == pytest.approx(middle + 1.645 * deviation, abs=0.12 * deviation)
    chance = 0.5 * math.erfc((middle - 0.0) / deviation / math.sqrt(2.0))
    assert view.chance_of_loss == pytest.approx(chance, abs=0.025)
    over = 0.5 * math.erfc((math.log1p(0.1) - middle) / deviation / math.sqrt(2.0))
    assert view.chance_of_target == pytest.approx(over, abs=0.025)
    assert view.years_drawn == 4000


def test_paths_by_hand() -> None:
    """Compares three days with pencil and paper: the share is cut where more is held than can be paid for."""
    work = Work("hand", np.array([0.10, -0.40, 0.2]), np.array([1, 4, 0]))
    path = one_year_paths(work, np.array([[0, 1, 2, 1]]), 0.5)[0]
    assert path == pytest.approx([1.05, 1.05 * 0.9, 1.05 * 0.9 * 1.1, 1.05 * 0.9 * 1.1 * 0.9])
    half = one_year_paths(work, np.array([[1]]), 0.5, most_invested=0.5)[0]
    assert half == pytest.approx([0.95])


def test_account_that_reaches_nothing_stays_there() -> None:
    """Compares a day that takes more than everything with nothing ever after, not with a negative account."""
    work = Work("ruin", np.array([-3.0, 0.5]), np.array([1, 1]))
    assert one_year_paths(work, np.array([[1, 0, 1, 0]]), 1.0)[0].tolist() == [1.5, 0.0, 0.0, 0.0]
    view = forward_view(work, Outlook((1.0,)), Resampling(2, 20))[0]
    assert (view.median, view.chance_of_loss, view.chance_of_drawdown) == (-1.0, 1.0, 1.0)


def test_more_at_stake_is_more_of_everything() -> None:
    """Compares growing shares: the spread and the chance of a deep fall grow, from the same sessions."""
    views = forward_view(noise(mean=0.0004), Outlook((0.1, 0.3, 0.6, 1.0), 0.05, 0.1), QUICK)
    spreads = [view.high - view.low for view in views]
    falls = [view.chance_of_drawdown for view in views]
    assert spreads == sorted(spreads)
    assert falls == sorted(falls)
    assert falls[-1] > falls[0]


def test_what_falls_together_is_kept_together() -> None:
    """Compares four positions that share their days with four times the diversified one: a wider year."""
    random = np.random.default_rng(4)
    market, own = random.normal(0.0, 0.01, 1500), random.normal(0.0, 0.01, (1500, 4)).sum(axis=1)
    together = Work("t", 4 * market, np.full(1500, 4))
    apart = Work("a", own, np.full(1500, 4))
    wide, narrow = (forward_view(work, Outlook((0.25,)), QUICK)[0] for work in (together, apart))
    assert (wide.high - wide.low) / (narrow.high - narrow.low) == pytest.approx(2.0, rel=0.15)


def test_clusters_make_deeper_falls() -> None:
    """Compares wild weeks in a row with the same days shuffled: longer blocks, more deep falls."""
    random = np.random.default_rng(5)
    wild = np.repeat(random.random(60) < 0.2, 25)
    results = random.normal(0.0, np.where(wild, 0.03, 0.005))
    clustered = Work("c", results, np.ones(1500, np.int64))
    shuffled = Work("s", random.permutation(results), np.ones(1500, np.int64))
    asked = Outlook((1.0,), 0.1, 0.4)
    one, other = (forward_view(work, asked, Resampling(1, 1500))[0] for work in (clustered, shuffled))
    assert one.block_sessions > 3 * other.block_sessions
    assert one.chance_of_drawdown > other.chance_of_drawdown


def test_short_record_still_makes_whole_years() -> None:
    """Compares a record of 30 sessions with years of 252 all the same; none at all is refused."""
    view = forward_view(Work("s", np.full(30, 0.001), np.ones(30, np.int64)), Outlook((1.0,)), QUICK)[0]
    assert view.median == pytest.approx(1.001**252 - 1.0)
    with pytest.raises(ValueError, match="no sessions"):
        forward_view(Work("none", np.zeros(0), np.zeros(0, np.int64)))


def test_same_answer_every_time() -> None:
    """Compares a second run with the first, another seed with another answer, and a view with its JSON."""
    views = forward_view(noise(), resampling=QUICK)
    assert views == forward_view(noise(), resampling=QUICK)
    assert views != forward_view(noise(), resampling=Resampling(3, 400))
    plain = views[0].as_dict()
    assert json.loads(json.dumps(plain, allow_nan=False)) == plain
    assert [view.share for view in views] == list(Outlook().shares)


@pytest.mark.parametrize("fill", ["open", "close"])
def test_the_middle_year_is_near_what_was_achieved(fill: str) -> None:
    """Compares years drawn from a weekly collar's own days with its growth; one position follows the other.

    All money is at work and in lots that hardly round, so the account of the walk and that of the drawn years
    hold the same. Both positions of a changeover counted as two would halve such days.
    """
    market = replace(lively_market(seed=3, sessions=520), rate=np.zeros(520))
    rule = {"name": "weekly", **RULES["collar"], "accept": {"net_debit": {"at_most": "90%"}}, "fill": fill}
    account = Account(cash=1e9, per_position=1.0 / 4.0, interest=False)
    bench = Bench(market, SURFACE)
    result = bench.run(load_strategy(rule), account, DEFAULT_COSTS, Window(0, 520))
    work = Work.of(result.ledger)
    equity = result.equity["equity"].to_numpy()
    first = int(np.flatnonzero(work.held)[0])
    achieved = 252.0 * math.log(equity[-1] / equity[first - 1]) / (equity.size - first)
    days = Work(work.name, work.results[first:], work.held[first:])
    view = forward_view(days, Outlook((0.25,)), Resampling(seed=2, replications=1500))[0]
    assert math.log1p(view.median) == pytest.approx(achieved, abs=0.02)
    assert work.held.max() == 4
