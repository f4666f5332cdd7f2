"""The evidence of a study: its verdict, its mirror, its seeds, and what it leaves out."""

from __future__ import annotations

import json
import re
from dataclasses import replace
from functools import cache
from pathlib import Path
from typing import Any

import numpy as np
import pytest

import hedgerow as hr
from array_market import array_market
from hedgerow.evidence.difference import BETTER, CANNOT_TELL, WORSE
from hedgerow.evidence.findings import Evidence
from hedgerow.market.table import Market
from hedgerow.study.compare import StudyResult, run_study
from hedgerow.study.declare import load_study
from hedgerow.study.one import Bench
from walks import RULES, lively_market

FAST = {"draws": 200}
NUMBER = re.compile(r"[+-]?\d[\d,]*(?:\.\d+)?%?")


@cache
def lively() -> Market:
    """Random walks with dividends, a split and all that, a little over a year of them."""
    return lively_market(sessions=300)


def drifting_market(drift: float, deviation: float = 0.008, sessions: int = 700) -> Market:
    """Four stocks with their own noise and one drift a session."""
    rng = np.random.default_rng(5)
    return array_market(60.0 * np.exp(np.cumsum(rng.normal(drift, deviation, (sessions, 4)), axis=0)))


def studied(market: Market, variants: dict[str, Any], workers: int = 2, **words: Any) -> StudyResult:
    """A study of variants, each a rule of `walks` by name or a strategy's words, on a market."""
    named = {
        name: {"strategy": {"name": name, **(RULES[rule] if isinstance(rule, str) else rule)}}
        for name, rule in variants.items()
    }
    plain = {
        "name": "study",
        "market": ".",
        "pricing": {"volatility": {"blend": [{"close": 10}]}},
        "variants": named,
        "evidence": FAST,
        **words,
    }
    return run_study(load_study(plain, "."), market=market, workers=workers)


@cache
def weighed() -> Evidence:
    """Three rules on the lively market, weighed once."""
    variants = {"collar": "collar", "rolled call": "rolled call", "married put": "married put"}
    evidence = studied(lively(), variants).evidence
    assert evidence is not None
    return evidence


SHARES = {"shares": "long", "legs": {}}
CASH = {
    "shares": "long",
    "legs": {},
    "enter": {"when": {"signal": "momentum", "sessions": 5, "at_least": "900%"}},
}


def walked_to(plain: Any, steps: list[Any]) -> Any:
    """What stands at the end of the steps."""
    for step in steps:
        plain = plain[step]
    return plain["value"] if isinstance(plain, dict) and "value" in plain else plain


def forms(value: float) -> set[str]:
    """The ways in which a number may be written in a paragraph."""
    signs = ("", "+")
    plain = {f"{value:{sign},.{places}f}" for sign in signs for places in (0, 1, 2)}
    percents = {f"{value * 100:{sign},.{places}f}%" for sign in signs for places in (0, 1, 2)}
    return (
        {text.replace("-0.00%", "0.00%").replace("+0.00%", "0.00%") for text in plain | percents}
        | plain
        | percents
    )


def test_every_number_of_the_verdict_is_in_the_summary() -> None:
    """Each number that stands in the paragraph, names left out, against the value it says it comes from."""
    plain = json.loads(json.dumps(weighed().as_dict(), allow_nan=False))
    text = plain["verdict"]["paragraph"]
    for name in ("collar", "rolled call", "married put"):
        text = re.sub(name, "", text, flags=re.IGNORECASE)
    found = NUMBER.findall(text)
    told = {number["text"]: number for number in plain["verdict"]["numbers"]}
    assert len(found) > 12
    for number in found:
        value = walked_to(plain, told[number]["at"])
        assert value == told[number]["value"]
        assert number in forms(value), (number, value)


def test_the_check_of_numbers_finds_one_that_was_made_up() -> None:
    """Negative control: a number that is nowhere in the summary has no place."""
    told = {number["text"] for number in weighed().verdict.numbers}
    assert "12.34%" not in told
    assert NUMBER.findall("grew by 12.34% a year, -0.5 to +1,204 in 3 starts") == [
        "12.34%",
        "-0.5",
        "+1,204",
        "3",
    ]


def test_the_verdict_says_what_an_adviser_asks() -> None:
    """Difference, interval, years, premium, timing, tries and the yardstick are all spoken of."""
    text = weighed().verdict.paragraph
    for words in ("90% interval", "years", "premium", "Timing luck", "Tries: 3 variants", "buy and hold"):
        assert words in text


def test_identical_rules_cannot_be_told_apart() -> None:
    """`cannot tell`, nothing between them, and no flip of premium or spread anywhere."""
    evidence = studied(lively(), {"one": "collar", "other": "collar"}).evidence
    assert evidence is not None
    pair = evidence.headline
    assert pair is not None
    assert {one.verdict for one in pair.differences} == {CANNOT_TELL}
    assert pair.comparison.growth.difference == 0.0
    assert pair.stress is not None
    for flip in (pair.stress.premium, pair.stress.spread):
        assert flip is not None
        assert not flip.found
        assert np.isnan(flip.low)
    assert "they did the same on every day" in evidence.verdict.headline
    assert "turn the order" not in evidence.verdict.paragraph
    assert set(evidence.tries.best_set.members) == {"one", "other"}


def test_a_planted_better_rule_is_found() -> None:
    """Stocks that rise by .15 % a session with a deviation of .8 %: holding them against never entering.

    The true difference of growth is about exp(252 x .0015) - 1, 46 %; none of three shares could hide that.
    """
    evidence = studied(drifting_market(0.0015), {"never": CASH, "hold": SHARES}).evidence
    assert evidence is not None
    assert evidence.leader == "hold"
    assert evidence.headline is not None
    assert evidence.headline.verdict == BETTER
    assert evidence.verdict.headline.startswith("Hold is better than never")
    assert evidence.headline.comparison.growth.years_needed < 3.0
    against = {one.first: one.verdict for one in evidence.against_yardstick}
    assert against["never"] == WORSE


def test_a_market_without_drift_tells_nothing() -> None:
    """The same two rules where nothing is to be gained: `cannot tell`, with the years it would take."""
    evidence = studied(drifting_market(0.0, sessions=500), {"never": CASH, "hold": SHARES}).evidence
    assert evidence is not None
    assert evidence.headline is not None
    assert evidence.headline.verdict == CANNOT_TELL
    assert evidence.verdict.headline.startswith("Cannot tell from")


def test_the_order_of_variants_does_not_matter() -> None:
    """Swapped in the file, the pair and its verdict are the same, word for word."""
    one, other = {"collar": "collar"}, {"rolled call": "rolled call"}
    first = studied(lively(), one | other).evidence
    second = studied(lively(), other | one).evidence
    assert first is not None
    assert second is not None
    assert first.verdict.paragraph == second.verdict.paragraph
    assert first.as_dict()["pairs"] == second.as_dict()["pairs"]


def test_seeds_make_it_repeatable_and_threads_do_not_matter() -> None:
    """The same dictionary and stress from one thread and three; another seed gives other intervals."""
    variants = {"collar": "collar", "married put": "married put"}
    one, three = (studied(lively(), variants, workers=n).evidence for n in (1, 3))
    other = studied(lively(), variants, seed=2).evidence
    assert one is not None
    assert three is not None
    assert other is not None
    assert one.as_dict() == three.as_dict()
    assert one.stress.equals(three.stress)
    lows = [e.headline.comparison.growth.low for e in (one, other) if e.headline is not None]
    assert lows[0] != lows[1]


def test_the_base_cell_is_the_run_itself() -> None:
    """Growth in the stress at the study's own assumptions against that of the comparison, within 1e-9."""
    evidence = weighed()
    for pair in (*evidence.pairs, *evidence.against_yardstick):
        assert pair.stress is not None
        frame = pair.stress.frame
        base = evidence.basis
        mine = frame[
            (frame["ratio"] == base.ratio)
            & (frame["skew"] == base.skew)
            & (frame["half_spread"] == base.half_spread)
        ]
        assert len(mine) == 1
        growth = pair.comparison.growth
        assert mine["first_growth"].item() == pytest.approx(growth.first, abs=1e-9)
        assert mine["difference"].item() == pytest.approx(growth.difference, abs=1e-9)


def test_cells_are_what_a_run_under_those_assumptions_gives() -> None:
    """One ratio, one skew and one half-spread walked alone by `hr.run`, against the cells."""
    market, frame = lively(), weighed().stress
    pricing = {"blend": [{"close": 10}], "ratio": 1.3, "skew": -0.2}
    costs = {"half_spread": "8%"}
    for words, cell in (
        ({"pricing": pricing}, {"ratio": 1.3, "skew": -0.2}),
        (
            {"pricing": {"blend": [{"close": 10}]}, "costs": costs},
            {"ratio": 1.0, "skew": -0.11, "half_spread": 0.08},
        ),
    ):
        alone = hr.run(market, {"name": "collar", **RULES["collar"]}, **words)
        mine = frame[(frame["first"] == "collar") & (frame["second"] == "buy and hold")]
        for name, value in cell.items():
            mine = mine[mine[name] == value]
        assert len(mine) == 1
        assert mine["first_growth"].item() == pytest.approx(alone.summary.account.growth_a_year, abs=1e-9)


def test_none_is_worked_out_when_none_is_asked_for_or_the_record_is_short() -> None:
    """`evidence: none`; and 59 returns, where 60 have some."""
    assert studied(lively(), {"one": "collar"}, evidence="none").evidence is None
    window = {"from": str(lively().dates[100])}
    for count, there in ((60, False), (61, True)):
        ends = window | {"to": str(lively().dates[100 + count - 1])}
        assert (studied(lively(), {"one": "collar"}, window=ends).evidence is not None) is there


def test_stress_and_timing_can_be_left_out() -> None:
    """`stress: none` and `timing: false` leave their parts empty, and the verdict does not speak of them."""
    words = {**FAST, "stress": "none", "timing": False}
    evidence = studied(lively(), {"one": "collar", "two": "married put"}, evidence=words).evidence
    assert evidence is not None
    assert evidence.headline is not None
    assert evidence.headline.stress is None
    assert len(evidence.stress) == 0
    assert evidence.timing == ()
    assert "Timing" not in evidence.verdict.paragraph
    assert "premium" not in evidence.verdict.paragraph
    json.dumps(evidence.as_dict(), allow_nan=False)


def test_one_variant_is_held_against_the_yardstick() -> None:
    """No pair; the first sentence is about buy and hold. Without a yardstick there is nothing to tell."""
    alone = studied(lively(), {"collar": "collar"}).evidence
    assert alone is not None
    assert alone.headline is None
    assert alone.verdict.headline.startswith("Against buy and hold")
    bare = studied(lively(), {"collar": "collar"}, yardstick="none").evidence
    assert bare is not None
    assert bare.against_yardstick == ()
    assert bare.tries.superiority is None
    assert "nothing to tell apart" in bare.verdict.headline


def test_of_many_variants_only_leader_and_first_are_stressed(tmp_path: Path) -> None:
    """Nine variants: one pair, nine against the yardstick, two of them stressed, and a note that says so."""
    rules = {
        f"n{days}": {**RULES["collar"], "enter": {"cool_down": {"sessions": days}}} for days in range(1, 10)
    }
    evidence = studied(lively(), rules).evidence
    assert evidence is not None
    assert len(evidence.pairs) == 1
    assert len(evidence.against_yardstick) == 9
    stressed = {one.first for one in evidence.against_yardstick if one.stress is not None}
    assert stressed == {evidence.leader, evidence.pairs[0].second}
    assert any("9 variants only" in note for note in evidence.notes)


def test_a_skew_that_cannot_be_is_left_out_and_named() -> None:
    """A skew of .4 makes calls far out dearer than nearer ones; that of -.15 is as good as the default."""
    words = {**FAST, "stress": {"ratio": [0.9, 1.1], "skew": [0.4, -0.15]}, "timing": False}
    evidence = studied(lively(), {"one": "collar", "two": "married put"}, evidence=words).evidence
    assert evidence is not None
    assert set(evidence.stress["skew"]) == {-0.11, -0.15}
    assert any("skew 0.4 with every ratio" in note for note in evidence.notes)


def test_an_account_that_is_lost_is_left_out_and_said(monkeypatch: pytest.MonkeyPatch) -> None:
    """A result whose equity touches nothing has no growth; the others are still weighed."""
    whole = Bench.run

    def run(self: Bench, *given: Any) -> Any:
        result = whole(self, *given)
        if given[4] == "lost":
            days = result.log.days.copy()
            days["equity"][-1] = 0.0
            return replace(result, log=replace(result.log, days=days))
        return result

    monkeypatch.setattr(Bench, "run", run)
    evidence = studied(lively(), {"lost": "collar", "kept": "married put"}).evidence
    assert evidence is not None
    assert evidence.leader == "kept"
    assert evidence.pairs == ()
    assert any("lost is left out" in note for note in evidence.notes)
