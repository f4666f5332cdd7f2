"""The evidence in a terminal: it fits, says what the evidence says, and ends with the verdict."""

from __future__ import annotations

from functools import cache
from typing import Any

import pytest

from hedgerow.evidence.findings import Evidence
from hedgerow.report.cautions import Basis, cautions
from hedgerow.report.text import Comparison, text_of
from hedgerow.study.compare import StudyResult, run_study
from hedgerow.study.declare import load_study
from walks import RULES, lively_market

NAMES = (
    "collar",
    "a variant whose name is as long as the language allows it to",
    "married put",
    "cut at 2%",
    "x",
)


@cache
def result(count: int = 3, **words: Any) -> StudyResult:
    """A study of so many variants on a lively market."""
    rules = [RULES[name] for name in ("collar", "rolled call", "married put")]
    longer = [{**rules[0], "enter": {"cool_down": {"sessions": days}}} for days in range(1, count)]
    names = [*NAMES, *(f"cool down {days}" for days in range(20))]
    plain = {
        "name": "Study",
        "market": ".",
        "pricing": {"volatility": {"blend": [{"close": 10}]}},
        "variants": {
            name: {"strategy": {"name": "rule", **rule}}
            for name, rule in zip(names, (rules + longer)[:count], strict=False)
        },
        "evidence": {"draws": 100},
        **words,
    }
    return run_study(load_study(plain, "."), market=lively_market(sessions=300))


def evidence_of(found: StudyResult) -> Evidence:
    """Its evidence, which is there."""
    assert found.evidence is not None
    return found.evidence


def page(found: StudyResult) -> str:
    """The whole comparison as text."""
    summaries = [one.summary for one in found.results]
    basis = cautions(Basis(evidence_of(found).tries.count.in_all))
    return text_of(Comparison(summaries, "Study", "Which?", basis, found.evidence))


@pytest.mark.parametrize("count", [1, 2, 3, 5, 9])
def test_never_wider_than_100_columns(count: int) -> None:
    """Every line, with names as long as they may be, one variant and nine."""
    text = page(result(count))
    assert max(len(line) for line in text.splitlines()) <= 100
    assert not any(line != line.rstrip() for line in text.splitlines())


def test_the_verdict_is_last_and_the_cautions_stand_before_it() -> None:
    """Each of its sentences in order, each of the cautions, nothing after."""
    found = result(3)
    words = " ".join(page(found).split())
    paragraph = " ".join(evidence_of(found).verdict.paragraph.split())
    assert words.endswith(paragraph)
    for caution in cautions(Basis(3)):
        assert 0 < words.index(" ".join(caution.split())) < words.index(paragraph)


def test_rows_are_those_of_the_evidence() -> None:
    """Pairs with growth, interval, verdict and flip; starts; the year ahead; win rates; odds."""
    found = result(3)
    evidence, words = evidence_of(found), " ".join(page(found).split())
    for pair in (*evidence.pairs, *evidence.against_yardstick):
        growth = pair.comparison.growth
        interval = f"{growth.low * 100:+.1f}% to {growth.high * 100:+.1f}%"
        assert f"{growth.difference * 100:+.1f}% {interval} {pair.verdict}" in words
    for starts in evidence.timing:
        cells = f"{starts.lowest * 100:+.1f}% {starts.highest * 100:+.1f}% {starts.laddered * 100:+.1f}%"
        assert cells in words
    for one in evidence.prospects:
        assert one.own is not None
        assert f"{one.own.low * 100:+.1f}% {one.own.median * 100:+.1f}%" in words
        assert one.win_rate is not None
        assert f"{one.win_rate.achieved * 100:.1f}% {one.win_rate.low * 100:.1f}% to" in words
        if one.odds is not None:
            assert f"Brier score {one.odds.brier:.3f}" in words


def test_lists_of_findings_are_shown_from_three_variants_on() -> None:
    """Better and worse than the yardstick, as the evidence has them; not for two."""
    heading = "Against buy and hold, at most 10% of findings false"
    assert heading not in page(result(2))
    found = result(3)
    tries, words = evidence_of(found).tries, " ".join(page(found).split())
    for word, names in (("better", tries.better), ("worse", tries.worse)):
        assert f"{word}: {'; '.join(names) or 'none'}" in words
    assert heading in words


def test_what_was_left_out_is_said() -> None:
    """The notes of a study of nine variants, and of odds that are not checked."""
    found = result(9)
    words = " ".join(page(found).split())
    assert evidence_of(found).notes
    for note in evidence_of(found).notes:
        assert " ".join(note.split()) in words


def test_without_evidence_nothing_is_shown_of_it() -> None:
    """The comparison as it is; no heading of the evidence."""
    summaries = [one.summary for one in result(2).results]
    text = text_of(Comparison(summaries, "Study"))
    for heading in ("Verdict", "Timing luck", "Who grew faster"):
        assert heading not in text
