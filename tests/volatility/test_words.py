"""The words of a study's volatility: what they mean, and what is told when they are wrong."""

from __future__ import annotations

import pytest

from hedgerow.errors import StudyError
from hedgerow.volatility import SurfaceModel, surface_words
from hedgerow.volatility.blend import Term
from hedgerow.volatility.model import PRESETS
from hedgerow.yamltext import load

FULL = """
blend: [{close: 10}, {close: 63, weight: 2}, {ewma: 0.94}]
history: 40
ratio: 1.1
points: 1%
pull: 2
anchor: 500
skew: -0.1
curvature: 0.04
skew_decay: 0.2
wing: 2
report_moves: 4
floor: 5%
cap: 300%
"""


def test_every_word_reaches_the_model() -> None:
    """All words of a YAML text, percents as fractions."""
    assert surface_words(load(FULL, "study.yaml")) == SurfaceModel(
        terms=(Term("close", 10), Term("close", 63, 2.0), Term("ewma", 0.94)),
        history=40,
        ratio=1.1,
        points=0.01,
        pull=2.0,
        anchor=500,
        skew=-0.1,
        curvature=0.04,
        skew_decay=0.2,
        wing=2.0,
        report_moves=4.0,
        floor=0.05,
        cap=3.0,
    )


def test_text_and_numbers_read_alike() -> None:
    """A mapping of Python values means what the same YAML text means."""
    words = {"blend": [{"close": 21}], "ratio": 1.1, "points": 0, "pull": 2, "floor": "4.5%"}
    text = "blend: [{close: 21}]\nratio: 1.1\npoints: 0\npull: 2\nfloor: 4.5%\n"
    assert surface_words(words) == surface_words(load(text, "study.yaml"))


def test_presets_by_name_alone_or_as_a_beginning() -> None:
    """No words, a name, and a name with words laid over it."""
    assert surface_words(None) == SurfaceModel() == PRESETS["default"]
    assert surface_words("plain-21") == PRESETS["plain-21"]
    assert surface_words({"preset": "plain-21", "skew": -0.1}).terms == (Term("close", 21),)
    assert surface_words({"preset": "plain-21", "skew": -0.1}).skew == -0.1


def test_an_observed_level_holds_the_reports_already() -> None:
    """With an observed level no report is added unless the words say so."""
    assert surface_words({"observed": "column"}).report_moves == 1.0
    assert surface_words({"observed": "VOL", "report_moves": 3}).report_moves == 3.0


@pytest.mark.parametrize(
    ("words", "told"),
    [
        ("plain", "`plain` is no preset; allowed: `default`, `plain-21`"),
        ({"blend": [{"closse": 10}]}, "`closse` is no estimator of volatility"),
        ({"blend": [{"closse": 10}]}, "did you mean `close`?"),
        ({"blend": [{"close": 1}]}, "`1` is out of range; allowed: a whole number from 2 to 1260"),
        ({"blend": [{"close": 10.5}]}, "`10.5` is no whole number"),
        ({"blend": [{"ewma": 94}]}, "a number from 0.5 to 0.995"),
        ({"blend": [{"close": 10, "ewma": 0.9}]}, "a term names one estimator"),
        ({"blend": {"close": 10}}, "has the wrong shape; allowed: a list of terms"),
        ({"blend": []}, "the blend has no term"),
        ({"rato": 1.1}, "volatility.rato is not a known word"),
        ({"rato": 1.1}, "did you mean `ratio`?"),
        ({"floor": 0.05}, "`0.05` is a bare number; allowed: a percent from 0.1% to 100%, with its % sign"),
        ({"floor": "five"}, "`five` is no percent"),
        ({"floor": "40%", "cap": "20%"}, "the floor 0.4 is above the cap 0.2"),
        ({"ratio": "much"}, "`much` is no plain number"),
        ({"ratio": True}, "`True` is no plain number"),
        ({"ratio": float("nan")}, "out of range"),
        ({"ratio": "1e99"}, "out of range"),
        ({"history": 0}, "`0` is out of range"),
        ({"observed": 3}, "put it in quotes"),
        ([1, 2], "volatility has the wrong shape; allowed: a mapping of words"),
    ],
)
def test_wrong_words_are_told(words: object, told: str) -> None:
    """What was found, what is allowed, and the nearest right word, in one message."""
    with pytest.raises(StudyError) as caught:
        surface_words(words)
    assert told in str(caught.value)


def test_all_faults_come_in_one_pass_with_their_places() -> None:
    """Line and column of every fault of a YAML text."""
    text = "blend: [{close: 10}, {cloze: 63}]\nratio: 99\nskw: -0.1\nfloor: 5\n"
    with pytest.raises(StudyError) as caught:
        surface_words(load(text, "study.yaml"), "study.yaml")
    places = {(fault.line, fault.column) for fault in caught.value.faults}
    assert places == {(1, 22), (2, 1), (3, 1), (4, 1)}
    with pytest.raises(StudyError, match=r"^study.yaml:2:1: pricing.volatility.floor: the floor"):
        surface_words(load("cap: 20%\nfloor: 40%\n", "study.yaml"), "study.yaml")
    assert all(str(fault).startswith("study.yaml:") for fault in caught.value.faults)


def test_a_model_made_in_python_is_checked_too() -> None:
    """All faults of the numbers at once; an unknown term names the nearest."""
    with pytest.raises(StudyError) as caught:
        SurfaceModel(terms=(Term("parkinsen", 10), Term("close", 0, -1.0)), ratio=0.0, wing=float("nan"))
    codes = [fault.where for fault in caught.value.faults]
    assert len(codes) == 5
    assert "did you mean `parkinson`?" in str(caught.value)
