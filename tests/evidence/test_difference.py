"""What an interval allows to be said, and in which words."""

from __future__ import annotations

import json
import math
from dataclasses import replace
from statistics import NormalDist

import numpy as np
import pytest

from hedgerow.evidence.difference import (
    BETTER,
    CANNOT_TELL,
    DRAWDOWN,
    GROWTH,
    TAIL_LOSS,
    WORSE,
    Difference,
    Measure,
    Span,
    years_to_tell,
)

SPAN = Span("one week", "three weeks", 14.0, 0.9)


def judged(measure: Measure, low: float, high: float) -> Difference:
    """A difference with an interval around its middle."""
    base = Difference.unknown(measure, SPAN, 0.08, 0.05)
    middle = (low + high) / 2.0
    return replace(base, difference=middle, low=low, high=high, p_value=0.04, years_needed=62.3)


@pytest.mark.parametrize(
    ("measure", "low", "high", "verdict"),
    [
        (GROWTH, 0.001, 0.04, BETTER),
        (GROWTH, -0.04, -0.001, WORSE),
        (GROWTH, -0.01, 0.04, CANNOT_TELL),
        (GROWTH, 0.0, 0.04, CANNOT_TELL),
        (DRAWDOWN, 0.01, 0.04, WORSE),
        (DRAWDOWN, -0.04, -0.01, BETTER),
        (TAIL_LOSS, 0.01, 0.04, WORSE),
        (GROWTH, math.nan, math.nan, CANNOT_TELL),
    ],
)
def test_verdict(measure: Measure, low: float, high: float, verdict: str) -> None:
    """Compares verdicts with the side of 0 the interval lies on, and with which way is good."""
    assert judged(measure, low, high).verdict == verdict


def test_sentence_that_can_tell() -> None:
    """Compares the whole sentence with the one a person would write."""
    assert judged(GROWTH, 0.01, 0.05).sentence == (
        "one week is better than three weeks in growth a year: +3.00% (90% interval +1.00% to +5.00%) "
        "over 14.0 years."
    )


def test_sentence_that_cannot_tell() -> None:
    """Compares the whole sentence: how long the record is, what fits it, and how long it would have to be."""
    assert judged(GROWTH, -0.01, 0.03).sentence == (
        "Cannot tell from 14.0 years whether one week or three weeks is better in growth a year: the "
        "difference is +1.00%, and -1.00% to +3.00% fits the record; to tell a difference of this size about "
        "62 years would be needed."
    )


@pytest.mark.parametrize(
    ("years", "words"),
    [(4000.0, "more than 200 years would be needed."), (math.nan, "fits the record.")],
)
def test_sentence_about_very_long_records(years: float, words: str) -> None:
    """Compares the end of the sentence where the years needed are absurd or not known."""
    assert replace(judged(GROWTH, -0.01, 0.03), years_needed=years).sentence.endswith(words)


def test_sentences_without_an_interval() -> None:
    """Compares what is said of a short record, and of two variants that did the same."""
    assert judged(GROWTH, math.nan, math.nan).sentence.endswith("the record is too short or too still.")
    assert judged(GROWTH, 0.0, 0.0).sentence.endswith("they did the same.")
    assert judged(GROWTH, 0.0, 0.0).sentence.startswith("Cannot tell from 14.0 years")


def test_relative_measure() -> None:
    """Compares a tail loss of 1.2 % against 1 % with 20 % more, and one against nothing with: not known."""
    assert Difference.unknown(TAIL_LOSS, SPAN, 0.012, 0.01).difference == pytest.approx(0.2)
    assert math.isnan(Difference.unknown(TAIL_LOSS, SPAN, 0.012, 0.0).difference)
    assert Difference.unknown(GROWTH, SPAN, 0.05, 0.08).difference == pytest.approx(-0.03)


def test_years_needed_against_simulated_tests() -> None:
    """Compares the years with how often a test of so long a record tells: 80 %, to 1 % of 20,000 draws.

    Yearly differences of mean .02 and deviation .07 are averaged over the years needed and tested at 10 %.
    """
    needed = years_to_tell(0.02, 0.07 / math.sqrt(10.0), 10.0, 0.9)
    assert needed == pytest.approx((1.6449 + 0.8416) ** 2 * 12.25, rel=1e-4)
    means = np.random.default_rng(1).normal(0.02, 0.07 / math.sqrt(needed), 20_000)
    told = np.abs(means) > NormalDist().inv_cdf(0.95) * 0.07 / math.sqrt(needed)
    assert told.mean() == pytest.approx(0.8, abs=0.01)


def test_no_years_for_no_difference() -> None:
    """Compares the years for a difference, or an error, of nothing with: not known."""
    assert math.isnan(years_to_tell(0.0, 0.1, 10.0, 0.9))
    assert math.isnan(years_to_tell(0.1, 0.0, 10.0, 0.9))


def test_as_dict_names_units() -> None:
    """Compares the units of the record with those of its measure; what is not known becomes null."""
    plain = Difference.unknown(TAIL_LOSS, SPAN, 0.012, 0.01).as_dict()
    assert plain["first"]["unit"] == "fraction a session"
    assert plain["difference"]["unit"] == "fraction of the second"
    assert plain["low"]["value"] is None
    assert plain["verdict"] == CANNOT_TELL
    assert json.loads(json.dumps(plain, allow_nan=False)) == plain
    assert all(figure["meaning"] for figure in plain.values() if isinstance(figure, dict))
    assert judged(GROWTH, 0.01, 0.05).as_dict()["low"]["unit"] == "fraction a year"
