"""JSON Schema of the languages, for editors that complete and check YAML while it is written.

What a schema cannot say (legs that name each other, cover of a sold call) is left to `rules check`.
"""

from __future__ import annotations

import json
from typing import Any

from hedgerow.rules.base import END_WORDS
from hedgerow.rules.schema import Strategy
from hedgerow.rules.vocabulary import SignalWords, signal_names, signal_words
from hedgerow.rules.words import Scalar

__all__ = ["as_text", "strategy_schema", "with_signals"]

DIALECT = "https://json-schema.org/draft/2020-12/schema"


def strategy_schema() -> dict[str, Any]:
    """The schema of a strategy file."""
    return with_signals(Strategy.model_json_schema(by_alias=True), "Strategy file")


def with_signals(schema: dict[str, Any], title: str) -> dict[str, Any]:
    """A schema of models with the signals of the registry, and without what only Python sees."""
    definitions = schema.setdefault("$defs", {})
    definitions["SignalTest"] = {"oneOf": [_signal(name, bounded=True) for name in signal_names()]}
    numbers = [name for name in signal_names() if _words(name).unit is not None]
    definitions["SignalValue"] = {"oneOf": [_signal(name, bounded=False) for name in numbers]}
    definitions.pop("Bounds", None)
    cleaned: dict[str, Any] = _cleaned(schema)
    return {"$schema": DIALECT} | cleaned | {"title": title}


def as_text(schema: dict[str, Any]) -> str:
    """The schema as the text of a file; the same bytes for the same language."""
    return json.dumps(schema, indent=1, sort_keys=True, ensure_ascii=False) + "\n"


def _words(name: str) -> SignalWords:
    words = signal_words(name)
    if words is None:
        raise KeyError(f"no signal is registered under the name {name}, though it was listed a moment ago")
    return words


def _signal(name: str, bounded: bool) -> dict[str, Any]:
    """One signal: its parameters, and exactly one bound where it is a number."""
    words = _words(name)
    properties: dict[str, Any] = {"signal": {"const": name, "description": words.signal.phrase}}
    properties |= {item.name: item.scalar.json_schema() for item in words.parameters}
    properties["of"] = {"type": "string", "description": "the symbol whose signal is meant"}
    required = ["signal", *(item.name for item in words.parameters if item.default is None)]
    schema: dict[str, Any] = {"type": "object", "additionalProperties": False}
    if bounded and words.values:
        days = {"enum": list(words.values)}
        properties["is"] = {"anyOf": [days, {"type": "array", "items": days, "minItems": 1}]}
        required.append("is")
    elif bounded and words.unit is not None:
        properties |= _ends(words.unit)
        schema["oneOf"] = [{"required": [word]} for word in END_WORDS]
    return schema | {"properties": properties, "required": required}


def _ends(unit: Scalar) -> dict[str, Any]:
    one = unit.json_schema()
    pair = {"type": "array", "items": one, "minItems": 2, "maxItems": 2}
    return {word: pair if word == "between" else one for word in END_WORDS}


def _cleaned(value: Any) -> Any:
    """Without the words in angle brackets, nulls and titles that the models bring along."""
    if isinstance(value, list):
        return [_cleaned(item) for item in value]
    if not isinstance(value, dict):
        return value
    options = value.get("anyOf")
    if isinstance(options, list) and {"type": "null"} in options:
        rest = [item for item in options if item != {"type": "null"}]
        base = {key: item for key, item in value.items() if key not in ("anyOf", "default", "title")}
        return _cleaned((rest[0] | base) if len(rest) == 1 else {"anyOf": rest} | base)
    cleaned = {key: _cleaned(item) for key, item in value.items() if not _only_python(key, item)}
    if "required" in cleaned and isinstance(cleaned["required"], list):
        cleaned["required"] = [name for name in cleaned["required"] if not str(name).startswith("<")]
    return cleaned


def _only_python(key: str, item: Any) -> bool:
    return (
        key.startswith("<")
        or (key == "title" and isinstance(item, str))
        or (key == "default" and item is None)
    )
