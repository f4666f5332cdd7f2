"""The JSON Schemas: shipped fresh, wide enough for the models, and of use to an editor."""

from __future__ import annotations

import json
import re
from pathlib import Path
from typing import Any

import pytest
import yaml
from hypothesis import given, settings

from hedgerow.errors import RulesError
from hedgerow.rules.load import load_strategy
from hedgerow.rules.publish import as_text, strategy_schema
from hedgerow.study.publish import study_schema
from json_schema import errors
from random_strategies import strategies
from rule_words import collar, leg, with_leg

ROOT = Path(__file__).parents[2]
SCHEMA = strategy_schema()
STUDY = study_schema()


@pytest.mark.parametrize(
    ("path", "schema"), [("strategies/schema.json", SCHEMA), ("configs/schema.json", STUDY)]
)
def test_shipped_copies_are_fresh(path: str, schema: dict[str, Any]) -> None:
    """Compares the shipped file, byte for byte, with the schema of the models of today."""
    told = f"write it anew: hedgerow rules schema {'strategy' if 'strategies' in path else 'study'} > {path}"
    assert (ROOT / path).read_text(encoding="utf-8") == as_text(schema), told


def test_the_same_language_gives_the_same_bytes() -> None:
    """Sorted keys, no clock: two runs agree."""
    assert as_text(strategy_schema()) == as_text(SCHEMA)
    assert json.loads(as_text(SCHEMA)) == json.loads(json.dumps(SCHEMA))


@pytest.mark.parametrize("path", sorted((ROOT / "strategies").glob("*.yaml")), ids=lambda path: path.name)
def test_shipped_strategies_fit(path: Path) -> None:
    """Read as an editor reads YAML 1.2, in which `on` is a word and no flag, each fits its schema."""
    assert errors(yaml.load(path.read_text(encoding="utf-8"), Loader=_loader("bool")), SCHEMA) == []  # safe


@pytest.mark.parametrize("path", sorted((ROOT / "configs").glob("*.yaml")), ids=lambda path: path.name)
def test_shipped_studies_fit(path: Path) -> None:
    """The studies too; their dates are text in an editor's eyes."""
    loader = _loader("timestamp")
    assert errors(yaml.load(path.read_text(encoding="utf-8"), Loader=loader), STUDY) == []  # a safe loader


def _loader(kind: str) -> Any:
    """PyYAML's safe loader without one kind of plain value; of flags `true` and `false` stay."""
    found = yaml.SafeLoader.yaml_implicit_resolvers
    kept = {key: [pair for pair in pairs if not pair[0].endswith(kind)] for key, pairs in found.items()}
    loader: Any = type("Loader", (yaml.SafeLoader,), {"yaml_implicit_resolvers": kept})
    if kind == "bool":
        loader.add_implicit_resolver("tag:yaml.org,2002:bool", re.compile("^(?:true|false)$"), list("tf"))
    return loader


@settings(max_examples=60)
@given(strategies())
def test_whatever_the_models_accept_the_schema_accepts(words: dict[str, Any]) -> None:
    """Compares with the models on random strategies, as drawn and as written back."""
    assert errors(words, SCHEMA) == []
    assert errors(load_strategy(words).plain(), SCHEMA) == []


@pytest.mark.parametrize(
    "words",
    [
        {},
        {"name": "a", "share": "long"},
        {"name": "a", "shares": "lng"},
        {"name": "a", "fill": True},
        with_leg("put", sell="put"),
        with_leg("put", strike={"from_spot": -4}),
        with_leg("put", strike={"from_spot": "-4%", "delta": 0.3}),
        with_leg("put", strike={}),
        with_leg("put", strike={"delta": 1}),
        with_leg("put", expiry={"days": 0}),
        with_leg("put", expiry={"days": 30, "with": "call"}),
        with_leg("put", ratio=9),
        with_leg("put", roll={"at": "friday"}),
        {"name": "a", "legs": {f"l{at}": leg("buy", "put") for at in range(5)}},
        collar(accept={"net_credit": False}),
        collar(accept={"net_debit": {"at_least": "1%"}}),
        collar(accept={"odds_of_best": {"between": ["1%"]}}),
        collar(enter={"when": {"all": []}}),
        collar(enter={"when": {"signal": "close_over_maen", "sessions": 20}}),
        collar(enter={"when": {"signal": "close_over_mean"}}),
        collar(enter={"when": {"signal": "close_over_mean", "sessions": 20, "at_least": 3}}),
        collar(enter={"when": {"signal": "rsi"}}),
        collar(enter={"when": {"signal": "rsi", "at_least": 3, "at_most": 9}}),
        collar(enter={"when": {"signal": "weekday", "is": ["mon"]}}),
        collar(enter={"rank": {"by": {"signal": "macd_positive"}}}),
        collar(exit=[{"if": {"held": {"at_least": 3}}}]),
        collar(exit=[{"name": "a", "if": {"held": {"at_least": 3}, "gain": {"at_least": "3%"}}}]),
        collar(exit={"name": "a", "if": {"held": {"at_least": 3}}}),
        collar(stop={}),
        collar(stop={"below_entry": 0.07}),
    ],
)
def test_what_an_editor_can_see(words: dict[str, Any]) -> None:
    """Negative controls: each of these faults is one that both the schema and the models refuse."""
    assert errors(words, SCHEMA) != []
    with pytest.raises(RulesError):
        load_strategy(words)


@pytest.mark.parametrize(
    "words",
    [
        {"name": "a"},
        {"name": "a", "market": "m", "acount": {}},
        {"name": "a", "market": "m", "account": {"per_position": 0.3}},
        {"name": "a", "market": "m", "costs": "free"},
        {"name": "a", "market": "m", "costs": {"half_spread": 3}},
        {"name": "a", "market": "m", "window": {"from": "2011"}},
        {"name": "a", "market": "m", "symbols": []},
        {"name": "a", "market": "m", "variants": {"x": 5}},
        {"name": "a", "market": "m", "strategy": {"name": "x", "shares": "lng"}},
        {"name": "a", "market": "m", "pricing": {"volatility": {"skwe": 0}}},
        {"name": "a", "market": "m", "pricing": {"volatility": "plain"}},
        {"name": "a", "market": "m", "grid": {"legs.call.expiry.days": 7}},
        {"name": "a", "market": "m", "grid": {"legs.call.expiry.days": {"from": 7, "to": 14}}},
        {"name": "a", "market": "m", "grid": {"stop.below_entry": ["2%", "2%"]}},
        {"name": "a", "market": "m", "sample": {"random": 5, "latin_hypercube": 5}},
        {"name": "a", "market": "m", "walk_forward": {"choose": "4 years", "judge": "a year"}},
        {"name": "a", "market": "m", "held_out": {"to": "2020-01-01"}},
    ],
)
def test_what_an_editor_can_see_of_a_study(words: dict[str, Any]) -> None:
    """Negative controls of the study's schema."""
    assert errors(words, STUDY) != []


def test_no_python_shows() -> None:
    """Neither the names of models nor words in angle brackets nor nulls are in the published text."""
    for schema in (SCHEMA, STUDY):
        text = as_text(schema)
        assert '"<' not in text
        assert '"null"' not in text
        assert schema["$schema"].startswith("https://json-schema.org/")


def test_every_reference_leads_somewhere() -> None:
    """Each $ref names a definition that is there."""
    for schema in (SCHEMA, STUDY):
        text = as_text(schema)
        named = {part.split('"')[0] for part in text.split("#/$defs/")[1:]}
        assert named <= set(schema["$defs"])
