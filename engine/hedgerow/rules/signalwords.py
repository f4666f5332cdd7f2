"""The signal words of a condition: a signal by name, its parameters, and the bound a number needs."""

from __future__ import annotations

from collections.abc import Mapping
from typing import Any, Self

from pydantic import BaseModel, ConfigDict, ModelWrapValidatorHandler, model_serializer, model_validator

from hedgerow.errors import RulesError
from hedgerow.rules.base import END_WORDS, Between, Bounds, gathered
from hedgerow.rules.vocabulary import SignalWords, signal_names, signal_words
from hedgerow.rules.words import (
    Loose,
    Text,
    WordsError,
    listed,
    refuse,
    refuse_all,
    shown,
    unknown_name,
    unknown_word,
)

__all__ = ["SignalTest", "SignalValue"]


class SignalValue(BaseModel):
    """A signal with its parameters: `signal`, `params` (name, value; defaults filled in), `of` a symbol."""

    model_config = ConfigDict(frozen=True, strict=True, extra="forbid")

    signal: str
    params: tuple[tuple[str, int | float], ...] = ()
    of: str | None = None

    @classmethod
    def fields(cls, raw: Mapping[Any, Any], words: SignalWords, faults: list[Loose]) -> dict[str, Any]:
        """The model's fields from the words of a mapping; what is wrong goes to `faults`."""
        given: dict[str, Any] = {"signal": words.name, "params": _params(raw, words, faults)}
        if "of" in raw:
            given["of"] = _of(raw["of"], faults)
        faults += _unknown(raw, words, ())
        if words.unit is None:
            numbers = [name for name in signal_names() if takes_bounds(name)]
            found = f"is `{words.name}`, which is no number"
            faults.append(Loose(("signal",), "bound", found, f"allowed: {listed(numbers)}"))
        faults += [_no_bound(word, words) for word in (*END_WORDS, "is") if word in raw]
        return given

    @model_validator(mode="wrap")
    @classmethod
    def _read(cls, value: Any, handler: ModelWrapValidatorHandler[Self]) -> Self:
        if isinstance(value, cls):
            return value
        if not isinstance(value, Mapping):
            refuse("shape", f"is {shown(value)}", "allowed: a mapping such as {signal: NAME, ...}")
        if "params" in value:  # fields already read: made from Python
            return handler(value)
        name = value.get("signal")
        words = signal_words(name) if isinstance(name, str) else None
        if words is None:
            refuse_all([_no_signal(value, name)])
        faults: list[Loose] = []
        fields = cls.fields(value, words, faults)
        gathered(faults)
        return handler(fields)

    @property
    def arguments(self) -> dict[str, int | float]:
        """The parameters by name."""
        return dict(self.params)

    @model_serializer(mode="plain")
    def _write(self) -> dict[str, Any]:
        return self.plain()

    def plain(self) -> dict[str, Any]:
        """The words again; parameters that have their default are left out."""
        words = signal_words(self.signal)
        defaults = {} if words is None else {item.name: item.default for item in words.parameters}
        kept = {name: value for name, value in self.params if defaults.get(name) != value}
        return {"signal": self.signal} | kept | ({} if self.of is None else {"of": self.of})


class SignalTest(SignalValue):
    """A signal that must hold: yes-or-no signals alone, numbers within `bounds`, weekdays among `days`."""

    bounds: Bounds | None = None
    days: tuple[str, ...] = ()

    @classmethod
    def fields(cls, raw: Mapping[Any, Any], words: SignalWords, faults: list[Loose]) -> dict[str, Any]:
        """The model's fields from the words of a mapping; what is wrong goes to `faults`."""
        given: dict[str, Any] = {"signal": words.name, "params": _params(raw, words, faults)}
        if "of" in raw:
            given["of"] = _of(raw["of"], faults)
        ends = [word for word in END_WORDS if word in raw]
        if words.values:
            given["days"] = _days(raw, words, faults)
            faults += [Loose((word,), "bound", "stands where `is` is wanted") for word in ends]
        elif words.unit is None:
            faults += [_no_bound(word, words) for word in (*ends, *(["is"] if "is" in raw else []))]
        else:
            given["bounds"] = _bounds(raw, words, faults)
        faults += _unknown(raw, words, (*END_WORDS, "is"))
        return given

    def plain(self) -> dict[str, Any]:
        """The words again; parameters that have their default are left out."""
        words = signal_words(self.signal)
        tail: dict[str, Any] = {}
        if self.bounds is not None and words is not None and words.unit is not None:
            tail = Between(words.unit).write(self.bounds)
        if self.days:
            tail = {"is": list(self.days)}
        return super().plain() | tail


def _no_signal(raw: Mapping[Any, Any], name: object) -> Loose:
    if "signal" not in raw:
        found = Loose((), "missing", "has no `signal`", f"allowed: {listed(signal_names())}")
    elif isinstance(name, str) and name:
        found = unknown_name(("signal",), name, signal_names(), "signal")
    else:
        found = Loose(("signal",), "text", f"is {shown(name)}", f"allowed: {listed(signal_names())}")
    return found


def _of(value: object, faults: list[Loose]) -> str | None:
    try:
        return str(Text(20).read(value))
    except WordsError as refusal:
        faults += [fault.under("of") for fault in refusal.faults]
        return None


def _params(
    raw: Mapping[Any, Any], words: SignalWords, faults: list[Loose]
) -> tuple[tuple[str, int | float], ...]:
    given: list[tuple[str, int | float]] = []
    for item in words.parameters:
        if item.name in raw:
            try:
                given.append((item.name, item.scalar.read(raw[item.name])))
            except WordsError as refusal:
                faults += [fault.under(item.name) for fault in refusal.faults]
        elif item.default is None:
            found = f"has no `{item.name}`, which signal `{words.name}` needs"
            faults.append(Loose((), "missing", found, item.allowed))
        else:
            given.append((item.name, item.default))
    if not faults:
        try:
            words.signal.checked(dict(given))
        except RulesError as error:
            faults += [Loose((), fault.code, f"has {fault.found}", fault.allowed) for fault in error.faults]
    return tuple(given)


def takes_bounds(name: str) -> bool:
    """Whether a signal of that name is a number that bounds and ranks can use."""
    words = signal_words(name)
    return words is not None and words.unit is not None


def _unknown(raw: Mapping[Any, Any], words: SignalWords, more: tuple[str, ...]) -> list[Loose]:
    known = ("signal", *(item.name for item in words.parameters), "of")
    passed = {*known, *END_WORDS, "is"}
    told = (*known, *(word for word in more if words.takes(word)))
    owner = f"signal `{words.name}`"
    return [unknown_word((str(key),), key, told, owner) for key in raw if key not in passed]


def _no_bound(word: str, words: SignalWords) -> Loose:
    if words.unit is None and not words.values:
        found = f"stands with signal `{words.name}`, which is true or false"
        return Loose((word,), "bound", found, "allowed: no bound", f"leave `{word}` out")
    found = f"stands with signal `{words.name}`, whose value alone is wanted here"
    return Loose((word,), "bound", found, "allowed: no bound", f"leave `{word}` out")


def _bounds(raw: Mapping[Any, Any], words: SignalWords, faults: list[Loose]) -> Bounds:
    if words.unit is None:
        return Bounds()
    ends = [word for word in END_WORDS if word in raw]
    if not ends:
        found = f"has no bound, and signal `{words.name}` is a number"
        faults.append(Loose((), "bound", found, f"allowed: one of {listed(END_WORDS)}"))
    for word in ends[1:]:
        found = f"stands beside `{ends[0]}`"
        faults.append(Loose((word,), "one-of", found, f"allowed: one of {listed(END_WORDS)}"))
    if "is" in raw:
        faults.append(Loose(("is",), "bound", "stands with a number", f"allowed: one of {listed(END_WORDS)}"))
    return Between(words.unit).ends(raw, faults)


def _days(raw: Mapping[Any, Any], words: SignalWords, faults: list[Loose]) -> tuple[str, ...]:
    given = raw.get("is")
    chosen = [given] if isinstance(given, str) else given
    if not isinstance(chosen, list | tuple) or not chosen:
        where: tuple[str, ...] = ("is",) if "is" in raw else ()
        found = f"is {shown(given)}" if where else f"has no `is`, which signal `{words.name}` needs"
        faults.append(Loose(where, "missing", found, f"allowed: a list of {listed(words.values)}"))
        return ()
    for at, day in enumerate(chosen):
        if day not in words.values:
            faults.append(unknown_name(("is", at), day, words.values, "weekday"))
        elif day in chosen[:at]:
            faults.append(Loose(("is", at), "repeated", "stands a second time", "", "take it out"))
    return tuple(str(day) for day in chosen)
