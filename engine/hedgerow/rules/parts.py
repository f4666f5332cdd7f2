"""The parts of a strategy that are valid by themselves, so that checks across parts run on faulty files."""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from dataclasses import dataclass
from typing import Any, TypeVar

from pydantic import BaseModel, TypeAdapter, ValidationError

from hedgerow.rules.condition import Condition
from hedgerow.rules.legs import Expiry, Leg, Strike
from hedgerow.rules.words import Path

__all__ = ["Asked", "Parts", "parts_of"]

_Model = TypeVar("_Model", bound=BaseModel)
_CONDITION: TypeAdapter[Any] = TypeAdapter(Condition)


@dataclass(frozen=True, slots=True)
class Asked:
    """One condition without others inside, and where it stands."""

    path: Path
    test: Condition


@dataclass(frozen=True)
class Parts:
    """What could be read: `names` of all legs, the legs and parts that are valid, all simple conditions."""

    raw: Mapping[Any, Any]
    shares: str | None
    names: tuple[str, ...]
    legs: dict[str, Leg]
    expiries: dict[str, Expiry]
    strikes: dict[str, Strike]
    asked: tuple[Asked, ...]

    @property
    def whole(self) -> bool:
        """Whether shares and every leg are valid, so that the structure can be judged."""
        return self.shares is not None and len(self.legs) == len(self.names)

    @property
    def keeps(self) -> bool:
        """Whether shares that an assignment brings are kept."""
        return self.raw.get("after_assignment") == "keep"

    @property
    def at_entry(self) -> list[Leg]:
        """The valid legs that are opened with the position."""
        return [leg for leg in self.legs.values() if leg.add_when is None]

    @property
    def rise(self) -> float:
        """Shares gained a lot for each point the stock rises far above every strike, in lots, at entry."""
        held = {"long": 1.0, "short": -1.0}.get(self.shares or "none", 0.0)
        return held + sum(leg.sign * leg.ratio for leg in self.at_entry if leg.right == "call")

    def section(self, name: str) -> Mapping[Any, Any]:
        """A mapping of the strategy, empty when it is not there or not a mapping."""
        value = self.raw.get(name)
        return value if isinstance(value, Mapping) else {}


def parts_of(raw: Mapping[Any, Any], legs: dict[str, Leg], share_words: tuple[str, ...]) -> Parts:
    """Read what can be read of a strategy's mapping; `legs` are those valid by themselves."""
    written = raw.get("legs")
    mapping: Mapping[Any, Any] = written if isinstance(written, Mapping) else {}
    shares = raw.get("shares", "long")
    return Parts(
        raw,
        shares if shares in share_words else None,
        tuple(str(name) for name in mapping),
        legs,
        dict(_valid(mapping, "expiry", Expiry)),
        dict(_valid(mapping, "strike", Strike)),
        tuple(_asked(raw, mapping)),
    )


def _valid(mapping: Mapping[Any, Any], word: str, model: type[_Model]) -> Iterator[tuple[str, _Model]]:
    for name, leg in mapping.items():
        try:
            if isinstance(leg, Mapping):
                yield str(name), model.model_validate(leg.get(word))
        except ValidationError:
            continue  # told where the leg is read


def _asked(raw: Mapping[Any, Any], legs: Mapping[Any, Any]) -> Iterator[Asked]:
    for path, condition in _outer(raw, legs):
        for inner, simple in _simple(condition, path):
            try:
                yield Asked(inner, _CONDITION.validate_python(simple))
            except ValidationError:
                continue  # told where the condition is read


def _outer(raw: Mapping[Any, Any], legs: Mapping[Any, Any]) -> Iterator[tuple[Path, Any]]:
    """The places where a condition may stand."""
    for name, leg in legs.items():
        if isinstance(leg, Mapping):
            yield ("legs", str(name), "add_when"), leg.get("add_when")
            roll = leg.get("roll")
            if isinstance(roll, Mapping):
                yield ("legs", str(name), "roll", "if"), roll.get("if")
    enter = raw.get("enter")
    if isinstance(enter, Mapping):
        yield ("enter", "when"), enter.get("when")
    exits = raw.get("exit")
    for at, rule in enumerate(exits if isinstance(exits, list | tuple) else ()):
        if isinstance(rule, Mapping):
            yield ("exit", at, "if"), rule.get("if")


def _simple(condition: Any, path: Path) -> Iterator[tuple[Path, Mapping[Any, Any]]]:
    """The conditions inside one that hold no others."""
    if not isinstance(condition, Mapping):
        return
    nested = [word for word in ("all", "any", "not") if word in condition]
    if not nested:
        yield path, condition
    for word in nested:
        inner = condition[word]
        if word == "not":
            yield from _simple(inner, (*path, word))
            continue
        for at, item in enumerate(inner if isinstance(inner, list | tuple) else ()):
            yield from _simple(item, (*path, word, at))
