"""JSON Schema of the study language, for editors."""

from __future__ import annotations

from typing import Any

from hedgerow.rules.publish import with_signals
from hedgerow.rules.schema import Strategy
from hedgerow.study.extending import extension_schema
from hedgerow.study.gridwords import grid_schema
from hedgerow.study.words import StudyWords
from hedgerow.volatility.model import PRESETS, RANGES, Range
from hedgerow.volatility.registry import ESTIMATORS

__all__ = ["study_schema"]


def study_schema() -> dict[str, Any]:
    """The schema of a study file; a strategy may stand in it, written out."""
    schema = StudyWords.model_json_schema(by_alias=True)
    strategy = Strategy.model_json_schema(by_alias=True)
    definitions = schema.setdefault("$defs", {})
    definitions |= strategy.pop("$defs")
    definitions["Strategy"] = strategy
    properties = schema["properties"]
    named: dict[str, Any] = {"anyOf": [{"type": "string", "minLength": 1}, {"$ref": "#/$defs/Strategy"}]}
    properties["strategy"] = named
    changes = {"type": "object", "properties": {"strategy": named}}
    properties["variants"] = {"type": "object", "additionalProperties": changes, "minProperties": 1}
    symbols = {"type": "array", "items": {"type": "string"}, "minItems": 1, "uniqueItems": True}
    properties["symbols"] = {"anyOf": [{"const": "all"}, symbols]}
    properties["extensions"] = extension_schema()
    properties["grid"] = grid_schema()
    definitions["PricingWords"]["properties"]["volatility"] = _volatility()
    return with_signals(schema, "Study file")


def _volatility() -> dict[str, Any]:
    properties: dict[str, Any] = {name: _number(limits) for name, limits in RANGES.items()}
    presets = {"enum": list(PRESETS)}
    term = {
        "type": "object",
        "properties": {name: {"type": "number"} for name in (*sorted(ESTIMATORS), "weight")},
    }
    properties["blend"] = {"type": "array", "items": term | {"additionalProperties": False}, "minItems": 1}
    properties |= {"preset": presets, "observed": {"type": "string"}}
    return {"anyOf": [presets, {"type": "object", "properties": properties, "additionalProperties": False}]}


def _number(limits: Range) -> dict[str, Any]:
    if limits.percent:
        return {"type": "string", "pattern": r"^[+-]?([0-9]+(\.[0-9]*)?|\.[0-9]+) ?%$"}
    kind = "integer" if limits.whole else "number"
    return {"type": kind, "minimum": limits.least, "maximum": limits.most}
