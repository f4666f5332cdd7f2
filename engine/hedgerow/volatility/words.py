"""The words `pricing: {volatility: ...}` of a study file, and what is wrong with them, all in one pass."""

from __future__ import annotations

import math
import re
from collections.abc import Callable, Mapping
from dataclasses import replace
from typing import Annotated, Any

from pydantic import BaseModel, BeforeValidator, ConfigDict, ValidationError, create_model
from pydantic_core import PydanticCustomError

from hedgerow.errors import Fault, StudyError, nearest_word
from hedgerow.volatility.blend import Term
from hedgerow.volatility.model import PRESETS, RANGES, Range, SurfaceModel
from hedgerow.volatility.observed import NONE
from hedgerow.volatility.registry import ESTIMATORS
from hedgerow.yamltext import Node

__all__ = ["SurfaceWords", "surface_words"]

_NUMBER = re.compile(r"[+-]?(\d+(\.\d*)?|\.\d+)([eE][+-]?\d{1,2})?")
_PERCENT = re.compile(r"([+-]?(?:\d+(?:\.\d*)?|\.\d+)) ?%")
_PLACE = ("pricing", "volatility")


def _refusal(code: str, found: str, allowed: str, remedy: str = "") -> PydanticCustomError:
    told = {"code": code, "found": found, "allowed": allowed, "remedy": remedy}
    return PydanticCustomError("word", "{found}", told)


def _number_of(value: object) -> float | None:
    """Read a plain number, or None; true and false are none."""
    if isinstance(value, bool) or not isinstance(value, int | float | str):
        return None
    if isinstance(value, str) and not _NUMBER.fullmatch(value):
        return None
    return float(value)


def _allowed(limits: Range) -> str:
    if limits.percent:
        return f"allowed: a percent from {100 * limits.least:g}% to {100 * limits.most:g}%, with its % sign"
    kind = "a whole number" if limits.whole else "a number"
    return f"allowed: {kind} from {limits.least:g} to {limits.most:g}"


def _percent_of(value: object, limits: Range) -> float:
    number = _number_of(value)
    if number == 0.0:
        return 0.0
    if number is not None:
        raise _refusal("percent", f"`{value}` is a bare number", _allowed(limits), f"write {value}%")
    match = _PERCENT.fullmatch(value) if isinstance(value, str) else None
    if match is None:
        raise _refusal("percent", f"`{value}` is no percent", _allowed(limits))
    return float(match[1]) / 100.0


def _reader(limits: Range) -> Callable[[object], float]:
    def read(value: object) -> float:
        number = _percent_of(value, limits) if limits.percent else _number_of(value)
        if number is None or (limits.whole and not number.is_integer()):
            kind = "whole number" if limits.whole else "plain number"
            raise _refusal("number", f"`{value}` is no {kind}", _allowed(limits))
        if not (math.isfinite(number) and limits.least <= number <= limits.most):
            raise _refusal("range", f"`{value}` is out of range", _allowed(limits))
        return number

    return read


def _term(value: object) -> Term:
    """Read one term of a blend: {close: 63} or {close: 63, weight: 2}."""
    names = [key for key in value if key != "weight"] if isinstance(value, Mapping) else []
    if not isinstance(value, Mapping) or len(names) != 1:
        raise _refusal("term", "a term names one estimator and its horizon", "such as {close: 63, weight: 2}")
    known = ESTIMATORS.get(str(names[0]))
    if known is None:
        allowed = "allowed: " + ", ".join(f"`{word}`" for word in sorted(ESTIMATORS))
        near = nearest_word(str(names[0]), [*ESTIMATORS, "weight"])
        raise _refusal("unknown", f"`{names[0]}` is no estimator of volatility", allowed, near)
    parameter = _reader(Range(known.least, known.most, whole=known.parameter == "sessions"))(value[names[0]])
    weight = _reader(Range(0.001, 100.0))(value.get("weight", 1.0))
    return Term(known.name, parameter, weight)


def _preset(value: object) -> str:
    if value not in PRESETS:
        allowed = "allowed: " + ", ".join(f"`{word}`" for word in PRESETS)
        raise _refusal("unknown", f"`{value}` is no preset", allowed, nearest_word(str(value), PRESETS))
    return str(value)


def _symbol(value: object) -> str:
    if not isinstance(value, str) or not value.strip():
        raise _refusal("text", f"`{value}` is no text", "`none`, `column` or a symbol", "put it in quotes")
    return value.strip()


class _Words(BaseModel):
    """Words that are not plain numbers; the numbers are added from their ranges below."""

    model_config = ConfigDict(strict=True, extra="forbid", frozen=True)

    preset: Annotated[str, BeforeValidator(_preset)] = "default"
    blend: list[Annotated[Any, BeforeValidator(_term)]] | None = None
    observed: Annotated[str, BeforeValidator(_symbol)] = NONE


_numbers: dict[str, Any] = {
    name: (Annotated[float, BeforeValidator(_reader(limits))] | None, None) for name, limits in RANGES.items()
}
SurfaceWords: type[BaseModel] = create_model("SurfaceWords", __base__=_Words, **_numbers)


def surface_words(words: object, where: str = ".".join(_PLACE)) -> SurfaceModel:
    """Return the model that a study's `volatility` words describe.

    `words` is the name of a preset, a mapping, or the node of a YAML tree (faults then carry line and
    column); nothing at all means the default. Raises StudyError with every fault found.
    """
    node = words if isinstance(words, Node) else None
    plain = node.plain() if node is not None else words
    if plain is None:
        return PRESETS["default"]
    if isinstance(plain, str):
        plain = {"preset": plain}
    try:
        read = SurfaceWords.model_validate(plain)
    except ValidationError as error:
        raise StudyError([_fault(dict(detail), node, where) for detail in error.errors()]) from None
    try:
        return _model(read)
    except StudyError as error:
        raise StudyError([_placed(fault, node, where) for fault in error.faults]) from None


def _model(read: BaseModel) -> SurfaceModel:
    """Lay the given words over their preset; an observed level holds the reports already."""
    given: dict[str, Any] = {name: getattr(read, name) for name in read.model_fields_set}
    base = PRESETS[given.pop("preset", "default")]
    terms = given.pop("blend", None)
    values = {name: getattr(base, name) for name in RANGES} | {"observed": NONE, "terms": base.terms}
    if given.get("observed", NONE) != NONE:
        values["report_moves"] = 1.0
    if terms is not None:
        values["terms"] = tuple(terms)
    values |= {name: value for name, value in given.items() if value is not None}
    for name in ("history", "anchor"):
        values[name] = int(values[name])
    return SurfaceModel(**values)


def _placed(fault: Fault, node: Node | None, where: str) -> Fault:
    """Give a fault of the finished model the place of its word."""
    name = fault.where.rpartition(".")[2]
    line, column = _place_of([name], node)
    return replace(
        fault, where=where, line=line, column=column, found=f"pricing.volatility.{name}: {fault.found}"
    )


def _fault(detail: dict[str, Any], node: Node | None, where: str) -> Fault:
    """Turn one fault of pydantic into a sentence at its place."""
    path = [part for part in detail["loc"] if isinstance(part, int) or part in _known_words(detail)]
    line, column = _place_of(path, node)
    name = ".".join(["pricing.volatility", *(str(part) for part in path)])
    told = detail.get("ctx", {})
    if detail["type"] == "word":
        found = f"{name}: {told['found']}"
        return Fault(where, line, column, told["code"], found, told["allowed"], told["remedy"])
    if detail["type"] == "extra_forbidden":
        allowed = "allowed: " + ", ".join(f"`{word}`" for word in SurfaceWords.model_fields)
        near = nearest_word(str(path[-1]), SurfaceWords.model_fields)
        return Fault(where, line, column, "unknown", f"{name} is not a known word", allowed, near)
    allowed = (
        "allowed: a list of terms such as [{close: 10}, {close: 63}]"
        if "blend" in path
        else "allowed: a mapping of words"
    )
    return Fault(where, line, column, "shape", f"{name} has the wrong shape", allowed)


def _known_words(detail: dict[str, Any]) -> set[str]:
    words = set(SurfaceWords.model_fields)
    if detail["type"] == "extra_forbidden":
        words.add(str(detail["loc"][-1]))
    return words


def _place_of(path: list[str | int], node: Node | None) -> tuple[int, int]:
    """Line and column of the key or item the path leads to, as far as the tree has it."""
    if node is None:
        return 0, 0
    place = (node.line, node.column)
    for part in path:
        if isinstance(node.value, dict) and part in node.value:
            place, node = node.keys[str(part)], node.value[str(part)]
        elif isinstance(node.value, list) and isinstance(part, int) and part < len(node.value):
            node = node.value[part]
            place = (node.line, node.column)
        else:
            break
    return place
