"""Choosing on one window and judging on the next: nothing of the future gets into a choice."""

from __future__ import annotations

from dataclasses import replace
from pathlib import Path
from typing import Any

import numpy as np
import pytest

import hedgerow as hr
from hedgerow.errors import StudyError
from hedgerow.evidence.ratios import excess_returns, returns_of, sharpe, sortino
from hedgerow.market.table import Market
from hedgerow.study import walk_forward as module
from hedgerow.study.gridwords import WalkForwardWords
from hedgerow.study.large import run_large
from hedgerow.study.one import Bench
from hedgerow.study.trials import trials_of
from hedgerow.study.walk_forward import Forward, chosen, folds, gap_sessions, measured
from hedgerow.walk.run import Window
from large_runs import large_study, small_market

MARKET = small_market(260)
WORDS = {"choose": "3 months", "judge": "1 month", "gap": "10 sessions"}
GAP = 10


def words(**changes: Any) -> WalkForwardWords:
    """The words of a walk forward."""
    return WalkForwardWords.model_validate(WORDS | changes)


def ran(folder: Path, market: Market = MARKET, **changes: Any) -> Forward:
    """The record out of sample of the twelve collars."""
    folder.mkdir(exist_ok=True)
    study = large_study(folder, walk_forward=WORDS | changes, yardstick="none")
    forward = run_large(study, folder / "shards", market=market).findings.forward
    assert forward is not None
    return forward


def altered(market: Market, session: int) -> Market:
    """The market with everything after a session turned upside down: falls for rises, and twice as wild."""
    turned = {}
    for name in ("open", "high", "low", "close"):
        values = np.array(getattr(market, name))
        anchor = market.close[session]
        later = values[session + 1 :]
        values[session + 1 :] = np.where(np.isnan(anchor), later, anchor * (anchor / later) ** 2)
        turned[name] = values
    turned["high"], turned["low"] = (
        np.maximum(turned["high"], turned["low"]),
        np.minimum(turned["high"], turned["low"]),
    )
    return replace(market, **turned)


def test_windows_follow_on_one_another() -> None:
    """Worked by hand: 260 sessions, 63 to choose on, 10 between, 21 to judge on."""
    cuts = folds(Window(0, 260), words(), GAP)
    assert cuts[0] == module.Fold(Window(0, 63), Window(73, 94))
    assert cuts[1] == module.Fold(Window(21, 84), Window(94, 115))
    assert [cut.judge.start for cut in cuts[1:]] == [cut.judge.stop for cut in cuts[:-1]]
    assert all(cut.judge.start - cut.choose.stop == GAP for cut in cuts)
    assert cuts[-1].judge == Window(220, 241)  # 19 sessions are left, too few to judge on
    anchored = folds(Window(5, 260), words(anchored=True), GAP)
    assert {cut.choose.start for cut in anchored} == {5}
    assert anchored[1].choose.stop == 5 + 63 + 21


def test_too_short_a_window_is_told() -> None:
    """With the sessions there are and the sessions it takes."""
    with pytest.raises(StudyError, match="the window has 80 sessions: choosing takes 63, the gap 20"):
        folds(Window(0, 80), words(), 20)


def test_the_gap_is_as_long_as_the_longest_leg() -> None:
    """31 calendar days are 22 sessions (31 x 252 / 365 = 21.4); a declared gap is taken as it is."""
    plain = WalkForwardWords.model_validate({"choose": "3 months", "judge": "1 month"})
    assert gap_sessions(plain, 31.0) == 22
    assert gap_sessions(words(), 31.0) == GAP


@pytest.mark.parametrize("by", ["sharpe", "sortino", "growth"])
def test_measures_are_those_of_a_curve_alone(by: str) -> None:
    """Beside the ratios of `evidence.ratios` on the same window, its first close's return included."""
    rng = np.random.default_rng(2)
    curves = 1e5 * np.cumprod(1.0 + rng.normal(0.0002, 0.01, (3, 200)), axis=1)
    rate = np.full(200, 0.03)
    found = measured(curves, rate, Window(50, 120), by)
    for curve, value in zip(curves, found, strict=True):
        part = curve[49:120]
        excess = excess_returns(returns_of(part), rate[49:120])
        grown = (part[-1] / part[0]) ** (252 / 70) - 1
        expected = {"sharpe": sharpe(excess), "sortino": sortino(excess), "growth": grown}[by]
        assert value == pytest.approx(expected, rel=1e-10)


def test_a_measure_sees_nothing_outside_its_window() -> None:
    """Everything before and after it changed: the same. Its last session changed: another."""
    curves = 1e5 * np.cumprod(1.0 + np.random.default_rng(2).normal(0.0, 0.01, (3, 200)), axis=1)
    rate, within = np.zeros(200), Window(50, 120)
    other = curves.copy()
    other[:, :49] = 7.0
    other[:, 120:] = 9.0
    np.testing.assert_array_equal(
        measured(curves, rate, within, "sharpe"), measured(other, rate, within, "sharpe")
    )
    other[:, 119] *= 1.1
    assert (measured(curves, rate, within, "sharpe") != measured(other, rate, within, "sharpe")).all()


def test_what_stood_still_is_never_chosen() -> None:
    """The highest known measure, the first of equals; nothing when none is known."""
    assert chosen(np.array([np.nan, 1.0, 2.0, 2.0])) == 2
    assert chosen(np.array([np.nan, np.nan])) == -1


def test_a_choice_is_the_same_whatever_comes_after_its_window(tmp_path: Path) -> None:
    """The market turned upside down after the third choosing window: the first three choices stay.

    What they brought changes, so the future was really another one.
    """
    cuts = folds(Window(0, 260), words(), GAP)
    one, other = ran(tmp_path / "a"), ran(tmp_path / "b", altered(MARKET, cuts[2].choose.stop - 1))
    for mine, theirs in zip(one.judged[:3], other.judged[:3], strict=True):
        assert (mine.variant, mine.promised) == (theirs.variant, theirs.promised)
    assert one.judged[2].brought != other.judged[2].brought
    assert [fold.promised for fold in one.judged[3:]] != [fold.promised for fold in other.judged[3:]]
    start = cuts[2].choose.stop - one.window.start
    np.testing.assert_array_equal(one.equity[:start], other.equity[:start])


def test_a_look_ahead_planted_in_the_choice_is_caught(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    """Negative control: shown what it is judged on, the choice changes with the future and does too well."""
    honest = ran(tmp_path / "honest")
    real = module.folds

    def peeking(window: Window, given: WalkForwardWords, gap: int) -> tuple[module.Fold, ...]:
        return tuple(module.Fold(fold.judge, fold.judge) for fold in real(window, given, gap))

    monkeypatch.setattr(module, "folds", peeking)
    cuts = real(Window(0, 260), words(), GAP)
    session = cuts[2].choose.stop - 1
    one, other = ran(tmp_path / "one"), ran(tmp_path / "other", altered(MARKET, session))
    assert [fold.promised for fold in one.judged[:3]] != [fold.promised for fold in other.judged[:3]]
    assert one.mean_place == 1.0  # in every window the best there is: impossible without knowing
    assert honest.mean_place < 0.9
    assert one.account.sharpe > honest.account.sharpe


def test_only_judged_windows_count_and_each_is_walked_afresh(tmp_path: Path) -> None:
    """The record's equity beside ordinary runs of what was chosen, the money handed on."""
    forward = ran(tmp_path / "here")
    study = large_study(tmp_path)
    bench, money, parts = Bench(MARKET, study.surface), study.account.cash, []
    trials = trials_of(study)
    for one in forward.judged:
        run = bench.run(
            trials.strategy(one.variant), replace(study.account, cash=money), study.costs, one.fold.judge
        )
        parts.append(run.log.days["equity"])
        money = float(parts[-1][-1])
    np.testing.assert_array_equal(forward.equity, np.concatenate(parts))
    assert forward.account.last_value == money
    assert (forward.window.start, forward.window.stop) == (73, 241)


def test_variants_by_name_walk_forward_too(tmp_path: Path) -> None:
    """A study of two named variants, without a grid."""
    variants = {"short": {}, "long": {"legs.call.expiry.days": 21}}
    study: hr.Study = large_study(tmp_path, grid=None, variants=variants, walk_forward=WORDS)
    result = run_large(study, tmp_path / "shards", market=MARKET)
    assert result.findings.neighbourhood is None
    assert result.findings.forward is not None
    assert {one.variant for one in result.findings.forward.judged} <= {0, 1}
