"""What the models of the rule and study languages share: closed words, frozen values, all faults at once."""

from __future__ import annotations

import math
from collections.abc import Iterator, Mapping
from functools import cache
from typing import Any, ClassVar, Self

from pydantic import (
    BaseModel,
    ConfigDict,
    GetJsonSchemaHandler,
    ModelWrapValidatorHandler,
    ValidationError,
    model_validator,
)
from pydantic_core import CoreSchema

from hedgerow.rules.words import (
    Loose,
    Path,
    Scalar,
    WordsError,
    listed,
    refuse,
    refuse_all,
    shown,
    unknown_word,
)

END_WORDS = ("at_least", "at_most", "between")

__all__ = ["END_WORDS", "Between", "Bounds", "Words", "gathered", "loosened"]

_KINDS = {
    "missing": ("missing", "is missing", ""),
    "list_type": ("shape", "", "allowed: a list"),
    "tuple_type": ("shape", "", "allowed: a list"),
    "dict_type": ("shape", "", "allowed: a mapping"),
}


def loosened(error: ValidationError) -> list[Loose]:
    """The faults of a pydantic error, each with its path; tags of unions are left out of the path."""
    faults: list[Loose] = []
    for item in error.errors(include_url=False):
        path = tuple(part for part in item["loc"] if not str(part).startswith("<"))
        cause = item.get("ctx", {}).get("error")
        if isinstance(cause, WordsError):
            faults.extend(fault.under(*path) for fault in cause.faults)
            continue
        code, found, allowed = _KINDS.get(item["type"], ("value", "", f"allowed: {item['msg']}"))
        faults.append(Loose(path, code, found or f"is {shown(item['input'])}", allowed))
    return faults


class Words(BaseModel):
    """A mapping of the language: unknown words refused, values frozen, every fault gathered.

    `one_of` holds words of which exactly one must stand. Making one raises pydantic's
    ValidationError; `loosened` turns it into faults.
    """

    model_config = ConfigDict(frozen=True, strict=True, extra="forbid", validate_default=False)

    one_of: ClassVar[tuple[str, ...]] = ()

    @classmethod
    def words(cls) -> tuple[str, ...]:
        """The words that may stand in the mapping, in the order of the language."""
        names = (field.alias or name for name, field in cls.model_fields.items())
        return tuple(name for name in names if not name.startswith("<"))

    @classmethod
    def stranger(cls, key: object) -> Loose:
        """The fault of a key that is no word of this mapping."""
        return unknown_word((str(key),), key, cls.words())

    @classmethod
    def judge(cls, raw: Mapping[Any, Any], made: Self | None) -> list[Loose]:
        """Faults that need more than one word to see; `made` is None when the words alone are wrong."""
        return []

    @model_validator(mode="wrap")
    @classmethod
    def _read(cls, value: Any, handler: ModelWrapValidatorHandler[Self]) -> Self:
        if isinstance(value, cls):
            return value
        words, inner = _words_of(cls)
        if not isinstance(value, Mapping):
            refuse("shape", f"is {shown(value)}", f"allowed: a mapping of {listed(words)}")
        known = {key: item for key, item in value.items() if key in words or key in inner}
        faults = [cls.stranger(key) for key in value if key not in known]
        if cls.one_of:
            faults += _exactly_one(cls.one_of, known)
        made: Self | None = None
        try:
            made = handler(known)
        except ValidationError as error:
            faults += loosened(error)
        faults += cls.judge(known, made)
        if faults or made is None:
            refuse_all(dict.fromkeys(faults))  # the outer schema of a union asks twice
        return made

    @classmethod
    def __get_pydantic_json_schema__(
        cls, schema: CoreSchema, handler: GetJsonSchemaHandler
    ) -> dict[str, Any]:
        reference = handler(schema)
        model = handler.resolve_ref_schema(reference)
        if cls.one_of:
            model["oneOf"] = [{"required": [word]} for word in cls.one_of]
        return reference

    def plain(self) -> dict[str, Any]:
        """The words again, as a mapping that reads back to an equal value; defaults are left out."""
        return dict(_lists(self.model_dump(by_alias=True, exclude_defaults=True, exclude_none=True)))


@cache
def _words_of(model: type[Words]) -> tuple[tuple[str, ...], frozenset[str]]:
    """The words of a mapping, and the names that only its own code writes."""
    aliases = (field.alias or "" for field in model.model_fields.values())
    return model.words(), frozenset(alias for alias in aliases if alias.startswith("<"))


def _lists(value: Any) -> Any:
    """Tuples as lists, as a file would hold them."""
    if isinstance(value, dict):
        return {key: _lists(item) for key, item in value.items()}
    return [_lists(item) for item in value] if isinstance(value, list | tuple) else value


def _exactly_one(group: tuple[str, ...], raw: Mapping[Any, Any]) -> Iterator[Loose]:
    there = [word for word in group if raw.get(word) is not None]
    if not there and not any(word in raw for word in group):
        yield Loose(
            (), "one-of", "has none of the words of which one must stand", f"allowed: {listed(group)}"
        )
    for word in there[1:]:
        found = f"stands beside `{there[0]}`"
        yield Loose((word,), "one-of", found, f"allowed: exactly one of {listed(group)}")


def gathered(faults: list[Loose]) -> None:
    """Raise WordsError when there is any fault."""
    if faults:
        refuse_all(faults)


class Bounds(BaseModel):
    """A closed range of a number; an end that was not given is infinite."""

    model_config = ConfigDict(frozen=True, strict=True, extra="forbid")

    low: float = -math.inf
    high: float = math.inf

    def holds(self, value: float) -> bool:
        """Whether the value lies in the range, its ends included."""
        return self.low <= value <= self.high


class Between(Scalar):
    """Reads {at_least: x}, {at_most: x} or {between: [x, y]} as Bounds; `unit` reads the numbers.

    `words` are those of the three that may stand.
    """

    __slots__ = ("unit", "words")

    def __init__(self, unit: Scalar, words: tuple[str, ...] = END_WORDS) -> None:
        self.unit = unit
        self.words = words

    def read(self, value: object) -> Bounds:
        """The bounds. Raises WordsError with every fault of the mapping."""
        if isinstance(value, Bounds):
            return value
        if not isinstance(value, Mapping):
            example = f"such as {{{self.words[0]}: ...}}"
            allowed = f"allowed: a mapping of one of {listed(self.words)}, {example}"
            refuse("shape", f"is {shown(value)}", allowed)
        faults = [unknown_word((str(key),), key, self.words) for key in value if key not in self.words]
        faults += _exactly_one(self.words, value)
        bounds = self.ends(value, faults)
        gathered(faults)
        return bounds

    def ends(self, value: Mapping[Any, Any], faults: list[Loose]) -> Bounds:
        """The bounds of the three words as far as they stand; what is wrong with them goes to `faults`."""
        low, high = -math.inf, math.inf
        if "at_least" in value:
            low = self._number(value["at_least"], ("at_least",), faults)
        elif "at_most" in value:
            high = self._number(value["at_most"], ("at_most",), faults)
        elif "between" in value:
            low, high = self._pair(value["between"], faults)
        return Bounds(low=low, high=high)

    def _number(self, value: object, path: Path, faults: list[Loose]) -> float:
        try:
            return float(self.unit.read(value))
        except WordsError as refusal:
            faults += [fault.under(*path) for fault in refusal.faults]
            return 0.0

    def _pair(self, pair: object, faults: list[Loose]) -> tuple[float, float]:
        if not isinstance(pair, list | tuple) or len(pair) != 2:
            allowed = "allowed: a list of two, the lower first, such as [x, y]"
            faults.append(Loose(("between",), "shape", f"is {shown(pair)}", allowed))
            return 0.0, 0.0
        before = len(faults)
        low, high = (self._number(item, ("between", at), faults) for at, item in enumerate(pair))
        if len(faults) == before and low > high:
            found = f"runs from {pair[0]} down to {pair[1]}"
            faults.append(Loose(("between",), "reversed", found, "allowed: the lower end first", "swap them"))
        return low, high

    def write(self, value: Bounds) -> dict[str, Any]:
        """The words of the bounds."""
        if value.low == -math.inf:
            return {"at_most": self.unit.write(value.high)}
        if value.high == math.inf:
            return {"at_least": self.unit.write(value.low)}
        return {"between": [self.unit.write(value.low), self.unit.write(value.high)]}

    def json_schema(self) -> dict[str, Any]:
        """A mapping of one of the three words."""
        unit = self.unit.json_schema()
        pair = {"type": "array", "items": unit, "minItems": 2, "maxItems": 2}
        return {
            "type": "object",
            "properties": {word: pair if word == "between" else unit for word in self.words},
            "additionalProperties": False,
            "minProperties": 1,
            "maxProperties": 1,
        }
