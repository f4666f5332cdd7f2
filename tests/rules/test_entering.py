"""When a position may be opened: days, ranking by figures, cool-down, ladder, and faults in them."""

from __future__ import annotations

from typing import Any

import pytest

from hedgerow.rules.explain import paragraphs
from hedgerow.rules.load import load_strategy
from hedgerow.rules.schema import Enter, FigureValue, SignalValue
from rule_words import codes_of, collar, faults_of, leg, only_fault


def entering(**words: Any) -> Enter:
    """The words of `enter` in a collar that is right."""
    made = load_strategy(collar(enter=words)).enter
    assert made is not None
    return made


def told(**words: Any) -> str:
    """The paragraph about the entry."""
    return dict(paragraphs(load_strategy(collar(enter=words))))["Entry"]


@pytest.mark.parametrize(
    ("on", "sentence"),
    [
        ({"weekday": "monday"}, "At the close of every Monday, if the stock has no open position."),
        ({"weekday": ["monday", "wednesday"]}, "At the close of every Monday and Wednesday, if"),
        ({"first_session_of": "month"}, "At the close of the first session of every month, if"),
        ({"expiry_of": "quarterly"}, "At the close of every session on which a quarterly expiry falls, if"),
    ],
)
def test_days_of_entry(on: dict[str, Any], sentence: str) -> None:
    """Each reads, is told, and comes back as it was written."""
    made = entering(on=on)
    assert made.plain() == {"on": on}
    assert told(on=on).startswith(sentence)


def test_one_weekday_in_a_list_is_that_weekday() -> None:
    """Compares the list of one with the word alone."""
    assert entering(on={"weekday": ["friday"]}) == entering(on={"weekday": "friday"})


@pytest.mark.parametrize(
    ("on", "code", "place"),
    [
        ({}, "one-of", "enter.on"),
        ({"weekday": "monday", "expiry_of": "weekly"}, "one-of", "enter.on.expiry_of"),
        ({"weekday": "sunday"}, "choice", "enter.on.weekday"),
        ({"weekday": ["monday", "moonday"]}, "choice", "enter.on.weekday.2"),
        ({"weekday": ["monday", "friday", "monday"]}, "repeated", "enter.on.weekday.3"),
        ({"weekday": []}, "choice", "enter.on.weekday"),
        ({"weekday": 1}, "choice", "enter.on.weekday"),
        ({"first_session_of": "year"}, "choice", "enter.on.first_session_of"),
        ({"expiry_of": "daily"}, "choice", "enter.on.expiry_of"),
        ("monday", "shape", "enter.on"),
    ],
)
def test_wrong_days(on: Any, code: str, place: str) -> None:
    """Each is told where it stands."""
    fault = only_fault(collar(enter={"on": on}))
    assert (fault.code, fault.found.split("`")[1]) == (code, place)


def test_pause_and_ladder() -> None:
    """Compares the models and the sentences with the words."""
    words = {"cool_down": {"sessions": 10}, "ladder": {"positions": 3, "spacing": 21}}
    made = entering(**words)
    assert made.cool_down is not None
    assert made.ladder is not None
    assert (made.cool_down.sessions, made.ladder.positions, made.ladder.spacing) == (10, 3, 21)
    text = told(**words)
    assert "the stock has fewer than 3 open positions, each opened 21 sessions ago or more." in text
    assert "Each takes 1/3 of the money that one position alone would take." in text
    assert "After a position in a stock has lost money, none is opened in it for 10 sessions." in text


@pytest.mark.parametrize(
    ("words", "code"),
    [
        ({"cool_down": {"sessions": 0}}, "range"),
        ({"cool_down": 10}, "shape"),
        ({"cool_down": {}}, "missing"),
        ({"ladder": {"positions": 1, "spacing": 5}}, "range"),
        ({"ladder": {"positions": 3}}, "missing"),
        ({"ladder": {"positions": 3, "spacing": 0}}, "range"),
        ({"ladder": {"positions": 3, "spacing": 5, "gap": 1}}, "unknown-word"),
    ],
)
def test_wrong_pauses_and_ladders(words: dict[str, Any], code: str) -> None:
    """Counts out of range, left out, or of no meaning."""
    assert codes_of(collar(enter=words)) == [code]


def test_ranking_by_a_figure_or_a_signal() -> None:
    """The word that stands says which; both come back."""
    figure = entering(rank={"by": {"figure": "odds_of_best"}}).rank
    signal = entering(rank={"by": {"signal": "rsi"}, "order": "low"}).rank
    assert figure is not None
    assert signal is not None
    assert isinstance(figure.by, FigureValue)
    assert isinstance(signal.by, SignalValue)
    assert figure.plain() == {"by": {"figure": "odds_of_best"}}
    assert signal.plain() == {"by": {"signal": "rsi"}, "order": "low"}
    assert "the lowest come first by the worst loss, of the net debit" in told(
        rank={"by": {"figure": "worst_loss"}, "order": "low"}
    )


@pytest.mark.parametrize(
    ("by", "code", "remedy"),
    [
        ({"figure": "odds_of_bst"}, "choice", "did you mean `odds_of_best`?"),
        ({"figure": "odds_of_best", "sessions": 3}, "unknown-word", ""),
        ({"signal": "rsi", "figure": "odds_of_best"}, "unknown-word", ""),
        ({"sessions": 3}, "missing", ""),
        ({}, "missing", ""),
        ("odds_of_best", "shape", ""),
    ],
)
def test_wrong_ranks(by: Any, code: str, remedy: str) -> None:
    """A figure that is none, words beside it, both, neither, a bare name."""
    fault = only_fault(collar(enter={"rank": {"by": by}}))
    assert (fault.code, fault.remedy if remedy else "") == (code, remedy)


def test_figures_that_no_candidate_has() -> None:
    """A married put has no best gain, shares sold short no worst loss, shares alone no premium."""
    rank = {"rank": {"by": {"figure": "best_over_worst"}}}
    put = {"name": "a", "legs": {"put": leg("buy", "put", 180)}, "enter": rank}
    assert codes_of(put) == ["unbounded"]
    assert codes_of({"name": "a", "shares": "short", "enter": rank}) == ["unbounded"]
    credit = {"rank": {"by": {"figure": "net_credit"}}}
    assert codes_of({"name": "a", "enter": credit}) == ["no-legs"]
    assert codes_of(put | {"enter": credit}) == []
    assert faults_of(collar(enter=rank)) == []
