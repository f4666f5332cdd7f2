"""Scalars of the rule and study languages that are words, and how a fault in one is told.

Every reader takes the text of a file (`"2%"`, `"7"`) or the Python value of a mapping (`7`, `True`) and gives
the typed value, or raises `WordsError` with what was found and what is allowed. Percents become fractions.
"""

from __future__ import annotations

import re
from collections.abc import Iterable, Mapping
from dataclasses import dataclass, replace
from typing import Any, NoReturn

from pydantic import GetCoreSchemaHandler, GetJsonSchemaHandler
from pydantic_core import CoreSchema, core_schema

from hedgerow.errors import nearest_word

__all__ = [
    "UNKNOWN_WORD",
    "Choice",
    "Choices",
    "Flag",
    "Loose",
    "Name",
    "Path",
    "Scalar",
    "Text",
    "WordsError",
    "listed",
    "refuse",
    "refuse_all",
    "shown",
    "unknown_name",
    "unknown_word",
]

Path = tuple[str | int, ...]
UNKNOWN_WORD = "unknown-word"


@dataclass(frozen=True, slots=True)
class Loose:
    """A fault not yet tied to a file: `path` leads to the value; `found` goes on after the value's name."""

    path: Path
    code: str
    found: str
    allowed: str = ""
    remedy: str = ""

    def under(self, *prefix: str | int) -> Loose:
        """The same fault seen from further up the tree."""
        return replace(self, path=(*prefix, *self.path))


class WordsError(ValueError):
    """A value that the language does not allow; `faults` holds everything found wrong with it."""

    def __init__(self, faults: Iterable[Loose]) -> None:
        self.faults: tuple[Loose, ...] = tuple(faults)
        super().__init__("; ".join(f"{_dotted(f.path)} {f.found} {f.allowed}".strip() for f in self.faults))


def refuse(code: str, found: str, allowed: str = "", remedy: str = "") -> NoReturn:
    """Raise WordsError for the value itself, with a single fault."""
    refuse_all([Loose((), code, found, allowed, remedy)])


def refuse_all(faults: Iterable[Loose]) -> NoReturn:
    """Raise WordsError with several faults."""
    raise WordsError(faults)


def _dotted(path: Path) -> str:
    return ".".join(str(part) for part in path)


def shown(value: object) -> str:
    """A found value as it stands in a message: short, in backticks, or its shape."""
    if isinstance(value, Mapping):
        return "a mapping"
    if isinstance(value, list | tuple):
        return "a list"
    if value is None or value == "":
        return "empty"
    text = str(value).lower() if isinstance(value, bool) else str(value)
    text = " ".join(text.split())
    return f"`{text if len(text) <= 40 else text[:37] + '...'}`"


def listed(words: Iterable[str]) -> str:
    """Allowed words as one phrase, in their order."""
    return ", ".join(f"`{word}`" for word in words)


def unknown_word(path: Path, word: object, words: Iterable[str], owner: str = "") -> Loose:
    """The fault of a key that is not in the list, with the nearest right one."""
    allowed = list(words)
    return Loose(
        path,
        UNKNOWN_WORD,
        "is not a word of " + (owner or "this mapping"),
        f"allowed: {listed(allowed)}" if allowed else "nothing may stand here",
        nearest_word(str(word), allowed),
    )


def unknown_name(path: Path, name: object, names: Iterable[str], what: str) -> Loose:
    """The fault of a value that names nothing known, with the nearest right name."""
    allowed = list(names)
    told = f"allowed: {listed(allowed)}" if allowed else f"there is no other {what}"
    return Loose(
        path, "unknown-name", f"is `{name}`, which is no {what}", told, nearest_word(str(name), allowed)
    )


class Scalar:
    """Glue between a reader of one kind of scalar and pydantic: annotate a field with an instance."""

    __slots__ = ()

    def read(self, value: object) -> Any:
        """The typed value. Raises WordsError for what is not allowed; each kind has its own."""
        return value

    def write(self, value: Any) -> Any:
        """The value as a person writes it; reads back to the same."""
        return value

    def json_schema(self) -> dict[str, Any]:
        """What an editor may check of it."""
        return {}

    def __get_pydantic_core_schema__(self, source: Any, handler: GetCoreSchemaHandler) -> CoreSchema:
        return core_schema.no_info_plain_validator_function(
            self.read, serialization=core_schema.plain_serializer_function_ser_schema(self.write)
        )

    def __get_pydantic_json_schema__(
        self, schema: CoreSchema, handler: GetJsonSchemaHandler
    ) -> dict[str, Any]:
        return self.json_schema()


@dataclass(frozen=True, slots=True)
class Text(Scalar):
    """One line or paragraph of text, as written: `NO` stays NO and `12:30` stays 12:30."""

    most_letters: int = 80

    @property
    def allowed(self) -> str:
        """What may stand here."""
        return f"allowed: text of 1 to {self.most_letters} letters"

    def read(self, value: object) -> str:
        """The text with its blanks made single. Raises WordsError for anything but text."""
        if not isinstance(value, str):
            remedy = "put it in quotes" if isinstance(value, bool | int | float) else ""
            refuse("text", f"is {shown(value)} where text is wanted", self.allowed, remedy)
        text = " ".join(value.split())
        if not 1 <= len(text) <= self.most_letters or not text.isprintable():
            refuse("text", f"is {shown(value)}", self.allowed)
        return text

    def json_schema(self) -> dict[str, Any]:
        """A string."""
        return {"type": "string", "minLength": 1}


@dataclass(frozen=True, slots=True)
class Name(Scalar):
    """The name of a leg: small letters, digits, `_` and blanks, a letter first."""

    allowed = "allowed: small letters, digits, `_` and blanks, beginning with a letter, at most 30"
    pattern = r"[a-z][a-z0-9_ ]{0,29}"

    def read(self, value: object) -> str:
        """The name. Raises WordsError for anything but a leg's name."""
        if not isinstance(value, str) or not re.fullmatch(self.pattern, value) or value != value.strip():
            refuse("name", f"is {shown(value)}, which is no name of a leg", self.allowed)
        return value

    def json_schema(self) -> dict[str, Any]:
        """A string of the names' letters."""
        return {"type": "string", "pattern": f"^{self.pattern}$"}


@dataclass(frozen=True, slots=True)
class Choice(Scalar):
    """One of a few words."""

    words: tuple[str, ...]

    @property
    def allowed(self) -> str:
        """The words."""
        return f"allowed: {listed(self.words)}"

    def read(self, value: object) -> str:
        """The word. Raises WordsError for any other."""
        if isinstance(value, str) and value in self.words:
            return value
        near = nearest_word(value, self.words) if isinstance(value, str) else ""
        refuse("choice", f"is {shown(value)}", self.allowed, near)

    def json_schema(self) -> dict[str, Any]:
        """The words, for completion."""
        return {"enum": list(self.words)}


@dataclass(frozen=True, slots=True)
class Choices(Scalar):
    """One of a few words, or a list of several; read as a tuple."""

    words: tuple[str, ...]

    @property
    def allowed(self) -> str:
        """The words."""
        return f"allowed: {listed(self.words)}, or a list of them"

    def read(self, value: object) -> tuple[str, ...]:
        """The words in their order. Raises WordsError for any other, none, or one that stands twice."""
        one = Choice(self.words)
        if isinstance(value, str):
            return (one.read(value),)
        if not isinstance(value, list | tuple) or not value:
            refuse("choice", f"is {shown(value)}", self.allowed)
        faults: list[Loose] = []
        for at, item in enumerate(value):
            try:
                one.read(item)
            except WordsError as refusal:
                faults += [fault.under(at) for fault in refusal.faults]
            if item in value[:at]:
                faults.append(Loose((at,), "repeated", "stands a second time", "", "take it out"))
        if faults:
            refuse_all(faults)
        return tuple(value)

    def write(self, value: tuple[str, ...]) -> str | list[str]:
        """One word alone, several as a list."""
        return value[0] if len(value) == 1 else list(value)

    def json_schema(self) -> dict[str, Any]:
        """The words, for completion."""
        one = {"enum": list(self.words)}
        return {"anyOf": [one, {"type": "array", "items": one, "minItems": 1}]}


@dataclass(frozen=True, slots=True)
class Flag(Scalar):
    """true or false; `only_true` where the other is said by leaving the word out."""

    only_true: bool = False

    def read(self, value: object) -> bool:
        """The flag. Raises WordsError for `yes`, `NO`, 1 and the like."""
        if value is True or value == "true":
            return True
        if not self.only_true and (value is False or value == "false"):
            return False
        allowed = "allowed: `true`" if self.only_true else "allowed: `true`, `false`"
        remedy = "leave the word out where it is not wanted" if self.only_true else ""
        refuse("flag", f"is {shown(value)}", allowed, remedy)

    def json_schema(self) -> dict[str, Any]:
        """A boolean."""
        return {"const": True} if self.only_true else {"type": "boolean"}
