"""The words of a study that say what evidence is worked out, and how they are read."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from typing import Annotated, Any, Self

from pydantic import GetCoreSchemaHandler, GetJsonSchemaHandler
from pydantic_core import CoreSchema, core_schema

from hedgerow.evidence.seeds import Resampling
from hedgerow.rules.base import Words, gathered
from hedgerow.rules.figures import Number, Percent, Whole
from hedgerow.rules.words import Flag, Loose, Scalar, WordsError, refuse, shown

__all__ = ["Asked", "EvidenceOrNone", "EvidenceWords", "StressWords"]

MOST_VALUES = 25


@dataclass(frozen=True)
class Asked:
    """What evidence a study asks for; values of an assumption are increasing, none leaves it as it is.

    `level`, `target` (a year) and `drawdown` are fractions, `half_spreads` fractions of the premium. Skews
    nearer to 0 than the last default make prices of far strikes cross at the default curvature.
    """

    level: float = 0.9
    draws: int = 1000
    ratios: tuple[float, ...] = (0.8, 0.9, 1.0, 1.1, 1.2, 1.3, 1.4)
    skews: tuple[float, ...] = (-0.2, -0.11, -0.08)
    half_spreads: tuple[float, ...] = (0.0, 0.015, 0.03, 0.05, 0.08)
    timing: bool = True
    target: float = 0.08
    drawdown: float = 0.2

    def resampling(self, seed: int) -> Resampling:
        """How days are drawn again, with a study's seed."""
        return Resampling(seed, self.draws, self.level)


_D = Asked()


class Values(Scalar):
    """A list of values of one assumption, each read by `unit`; kept increasing, none twice."""

    __slots__ = ("unit",)

    def __init__(self, unit: Scalar) -> None:
        self.unit = unit

    def read(self, value: object) -> tuple[float, ...]:
        """The values, increasing. Raises WordsError with every fault of the list."""
        if not isinstance(value, list | tuple) or not 1 <= len(value) <= MOST_VALUES:
            refuse("shape", f"is {shown(value)}", f"allowed: a list of 1 to {MOST_VALUES} values")
        faults: list[Loose] = []
        found: set[float] = set()
        for at, item in enumerate(value):
            try:
                found.add(float(self.unit.read(item)))
            except WordsError as error:
                faults += [fault.under(at) for fault in error.faults]
        gathered(faults)
        return tuple(sorted(found))

    def write(self, value: tuple[float, ...]) -> list[Any]:
        """The list as a person writes it."""
        return [self.unit.write(one) for one in value]

    def json_schema(self) -> dict[str, Any]:
        """A list of what the unit allows."""
        return {"type": "array", "items": self.unit.json_schema(), "minItems": 1, "maxItems": MOST_VALUES}


class StressWords(Words):
    """The values over which every comparison is repeated."""

    ratio: Annotated[tuple[float, ...], Values(Number(0.2, 5.0))] = _D.ratios
    skew: Annotated[tuple[float, ...], Values(Number(-1.0, 1.0))] = _D.skews
    half_spread: Annotated[tuple[float, ...], Values(Percent(0.0, 0.5))] = _D.half_spreads


class _OrNone:
    """Reads a mapping of words, or `none`, which becomes `empty`."""

    def __init__(self, what: str) -> None:
        self._what = what

    def __get_pydantic_core_schema__(self, source: Any, handler: GetCoreSchemaHandler) -> CoreSchema:
        return core_schema.no_info_wrap_validator_function(
            self._read,
            handler(source),
            serialization=core_schema.plain_serializer_function_ser_schema(_write),
        )

    def __get_pydantic_json_schema__(
        self, schema: CoreSchema, handler: GetJsonSchemaHandler
    ) -> dict[str, Any]:
        return {"anyOf": [{"const": "none"}, handler(schema)]}

    def _read(self, value: Any, handler: Any) -> Any:
        if value == "none" or value is None:
            return None
        if not isinstance(value, Mapping | Words):
            refuse("shape", f"is {shown(value)}", f"allowed: `none`, or a mapping of {self._what}")
        return handler(value)


def _write(value: Words | None) -> Any:
    return "none" if value is None else value.model_dump(by_alias=True)


EvidenceOrNone = _OrNone("the words of evidence")


class EvidenceWords(Words):
    """What the evidence of a study is made with."""

    level: Annotated[float, Percent(0.5, 0.999)] = _D.level
    draws: Annotated[int, Whole(100, 100_000, "resampled records")] = _D.draws
    stress: Annotated[StressWords | None, _OrNone("`ratio`, `skew`, `half_spread`")] = StressWords()
    timing: Annotated[bool, Flag()] = _D.timing
    target: Annotated[float, Percent(-0.5, 10.0)] = _D.target
    drawdown: Annotated[float, Percent(0.0, 1.0, open_ends=True)] = _D.drawdown

    def asked(self) -> Asked:
        """The evidence that these words ask for."""
        stress = self.stress
        values = ((), (), ()) if stress is None else (stress.ratio, stress.skew, stress.half_spread)
        return Asked(self.level, self.draws, *values, self.timing, self.target, self.drawdown)

    @classmethod
    def of(cls, asked: Asked) -> Self:
        """The words that ask for it."""
        stress = None
        if asked.ratios:
            stress = StressWords.model_construct(
                ratio=asked.ratios, skew=asked.skews, half_spread=asked.half_spreads
            )
        named = {name: getattr(asked, name) for name in ("level", "draws", "timing", "target", "drawdown")}
        return cls.model_construct(stress=stress, **named)
