"""The record of variants tried on the same prices: what counts as the same, and what a broken line does."""

from __future__ import annotations

import json
from pathlib import Path
from typing import Any

import pytest

from hedgerow.study.declare import Study, load_study
from hedgerow.study.tries import RECORD, keys_of, record_tries, tried_before
from walks import RULES, lively_market, moved_to

MARKET = lively_market(sessions=130)


def study(**words: Any) -> Study:
    """One collar, with other words."""
    plain = {"name": "study", "market": ".", "strategy": {"name": "collar", **RULES["collar"]}}
    return load_study({**plain, **words}, ".")


def key(**words: Any) -> str:
    """The key of the one variant."""
    (found,) = keys_of(study(**words)).values()
    return found


@pytest.mark.parametrize(
    "words",
    [
        {"name": "another"},
        {"question": "why"},
        {"seed": 7},
        {"evidence": "none"},
        {"yardstick": "none"},
        {"strategy": {"name": "renamed", "about": "the same", **RULES["collar"]}},
        {"variants": {"called otherwise": {}}},
    ],
)
def test_what_changes_no_result_makes_no_new_variant(words: dict[str, Any]) -> None:
    """Names, questions, seeds and the evidence asked for."""
    assert key(**words) == key()


def test_a_number_is_the_same_with_and_without_a_point() -> None:
    """A run written out says 10.0 where a person wrote 10; repeating it is no new try."""
    whole, point = ({"volatility": {"blend": [{"close": sessions}]}} for sessions in (10, 10.0))
    assert key(pricing=whole) == key(pricing=point)
    assert key(pricing=whole) != key(pricing={"volatility": {"blend": [{"close": 11}]}})


@pytest.mark.parametrize(
    "words",
    [
        {"costs": {"half_spread": "4%"}},
        {"pricing": {"volatility": {"ratio": 1.1}}},
        {"account": {"per_position": "1/4"}},
        {"window": {"from": "2015-02-02"}},
        {"symbols": ["S00"]},
        {"strategy": {"name": "collar", **RULES["rolled call"]}},
        {"variants": {"longer": {"legs.call.expiry.days": 14}}},
    ],
)
def test_what_can_change_a_result_makes_another_variant(words: dict[str, Any]) -> None:
    """Costs, premiums, money, window, symbols and the rule."""
    assert key(**words) != key()


def test_each_variant_is_recorded_once(tmp_path: Path) -> None:
    """Twice the same study, then one with another variant: one line, then two; other prices have theirs."""
    assert tried_before(tmp_path, MARKET) == frozenset()
    for declared in (study(), study(), study(name="again")):
        assert record_tries(tmp_path, declared, MARKET)
    lines = (tmp_path / RECORD).read_text(encoding="utf-8").splitlines()
    assert len(lines) == 1
    assert json.loads(lines[0])["data"] == MARKET.fingerprint
    assert record_tries(tmp_path, study(variants={"a": {}, "b": {"legs.call.expiry.days": 14}}), MARKET)
    assert len(tried_before(tmp_path, MARKET)) == 2
    other = moved_to(MARKET, "2016-01-04")
    assert other.fingerprint != MARKET.fingerprint
    assert tried_before(tmp_path, other) == frozenset()


def test_every_variant_of_a_grid_counts(tmp_path: Path) -> None:
    """Two values of one parameter: two keys, one of which is that of the strategy run by itself."""
    whole = study(grid={"legs.call.expiry.days": [7, 14]})
    assert len(set(keys_of(whole).values())) == 2
    assert key() in keys_of(whole).values()
    record_tries(tmp_path, whole, MARKET)
    assert key() in tried_before(tmp_path, MARKET)


def test_broken_lines_are_passed_over(tmp_path: Path) -> None:
    """A line cut short, a list, bytes that are no text: the rest still counts, and lines can be added."""
    record_tries(tmp_path, study(), MARKET)
    whole = (tmp_path / RECORD).read_bytes()
    (tmp_path / RECORD).write_bytes(b'{"data": "ab\n[1, 2]\n\xff\xfe\n{}\n' + whole)
    assert tried_before(tmp_path, MARKET) == {key()}
    assert record_tries(tmp_path, study(seed=3), MARKET)
    assert (tmp_path / RECORD).read_bytes().endswith(whole)


def test_a_place_that_cannot_be_written_is_told(tmp_path: Path) -> None:
    """False, and nothing raised: where the folder's name is that of a file."""
    (tmp_path / "runs").write_text("a file", encoding="utf-8")
    assert not record_tries(tmp_path / "runs", study(), MARKET)
    assert tried_before(tmp_path / "runs", MARKET) == frozenset()
