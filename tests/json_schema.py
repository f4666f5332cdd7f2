"""A small reader of JSON Schema, written from its specification for the words that the shipped schemas use.

It is independent of the models that the schemas are made from. A word of a schema that it does not know is an
error, so nothing is checked by being passed over.
"""

from __future__ import annotations

import re
from collections.abc import Callable, Iterator
from typing import Any

Schema = dict[str, Any]
TYPES: dict[str, tuple[type, ...]] = {
    "object": (dict,),
    "array": (list,),
    "string": (str,),
    "integer": (int,),
    "number": (int, float),
    "boolean": (bool,),
}
SAYS_NOTHING = {"$schema", "$defs", "title", "description", "default"}
TOGETHER = {"required", "additionalProperties", "properties"}


def errors(value: Any, schema: Schema, root: Schema | None = None) -> list[str]:
    """Everything that is wrong with a value; empty when it is valid."""
    root = root or schema
    found: list[str] = []
    for word, said in schema.items():
        if word in SAYS_NOTHING:
            continue
        if word not in CHECKS:
            raise AssertionError(f"the schema says `{word}`, which this reader does not know")
        found.extend(CHECKS[word](value, said, schema, root))
    return found


def _type(value: Any, said: Any, schema: Schema, root: Schema) -> Iterator[str]:
    kinds = TYPES[said]
    if not isinstance(value, kinds) or (isinstance(value, bool) and said != "boolean"):
        yield f"{value!r} is no {said}"


def _properties(value: Any, said: Any, schema: Schema, root: Schema) -> Iterator[str]:
    if isinstance(value, dict):
        for key in value.keys() & said.keys():
            yield from (f"{key}: {error}" for error in errors(value[key], said[key], root))


def _additional(value: Any, said: Any, schema: Schema, root: Schema) -> Iterator[str]:
    if isinstance(value, dict):
        for key in value.keys() - schema.get("properties", {}).keys():
            if said is False:
                yield f"{key} is not known"
            elif isinstance(said, dict):
                yield from (f"{key}: {error}" for error in errors(value[key], said, root))


def _required(value: Any, said: Any, schema: Schema, root: Schema) -> Iterator[str]:
    if isinstance(value, dict):
        yield from (f"{key} is missing" for key in said if key not in value)


def _items(value: Any, said: Any, schema: Schema, root: Schema) -> Iterator[str]:
    for at, item in enumerate(value if isinstance(value, list) else []):
        yield from (f"{at}: {error}" for error in errors(item, said, root))


def _reference(value: Any, said: Any, schema: Schema, root: Schema) -> Iterator[str]:
    yield from errors(value, root["$defs"][said.removeprefix("#/$defs/")], root)


def _any_of(value: Any, said: Any, schema: Schema, root: Schema) -> Iterator[str]:
    if all(errors(value, option, root) for option in said):
        yield f"{value!r} fits none of {len(said)} options"


def _one_of(value: Any, said: Any, schema: Schema, root: Schema) -> Iterator[str]:
    fitting = sum(not errors(value, option, root) for option in said)
    if fitting != 1:
        yield f"{value!r} fits {fitting} of {len(said)} options"


def _sizes(count: Callable[[Any, int], bool], kind: type) -> Callable[..., Iterator[str]]:
    def check(value: Any, said: Any, schema: Schema, root: Schema) -> Iterator[str]:
        if isinstance(value, kind) and not count(value, said):
            yield f"{value!r} is out of bounds"

    return check


def _ends(fits: Callable[[float, float], bool]) -> Callable[..., Iterator[str]]:
    def check(value: Any, said: Any, schema: Schema, root: Schema) -> Iterator[str]:
        if isinstance(value, int | float) and not isinstance(value, bool) and not fits(value, said):
            yield f"{value!r} is out of range"

    return check


def _equal(value: Any, other: Any) -> bool:
    return bool(value == other) and isinstance(value, bool) == isinstance(other, bool)


def _enum(value: Any, said: Any, schema: Schema, root: Schema) -> Iterator[str]:
    if not any(_equal(value, word) for word in said):
        yield f"{value!r} is none of {said}"


def _const(value: Any, said: Any, schema: Schema, root: Schema) -> Iterator[str]:
    if not _equal(value, said):
        yield f"{value!r} is not {said!r}"


def _pattern(value: Any, said: Any, schema: Schema, root: Schema) -> Iterator[str]:
    if isinstance(value, str) and not re.search(said, value):
        yield f"{value!r} does not match {said}"


def _unique(value: Any, said: Any, schema: Schema, root: Schema) -> Iterator[str]:
    if isinstance(value, list) and len({repr(item) for item in value}) != len(value):
        yield "an item stands twice"


CHECKS: dict[str, Callable[..., Iterator[str]]] = {
    "type": _type,
    "properties": _properties,
    "additionalProperties": _additional,
    "required": _required,
    "items": _items,
    "$ref": _reference,
    "anyOf": _any_of,
    "oneOf": _one_of,
    "enum": _enum,
    "const": _const,
    "pattern": _pattern,
    "uniqueItems": _unique,
    "minItems": _sizes(lambda value, said: len(value) >= said, list),
    "maxItems": _sizes(lambda value, said: len(value) <= said, list),
    "minLength": _sizes(lambda value, said: len(value) >= said, str),
    "minProperties": _sizes(lambda value, said: len(value) >= said, dict),
    "maxProperties": _sizes(lambda value, said: len(value) <= said, dict),
    "minimum": _ends(lambda value, said: value >= said),
    "maximum": _ends(lambda value, said: value <= said),
    "exclusiveMinimum": _ends(lambda value, said: value > said),
    "exclusiveMaximum": _ends(lambda value, said: value < said),
}
