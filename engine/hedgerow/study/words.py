"""The words of a study file as frozen models: account, window, pricing, costs, variants."""

from __future__ import annotations

import datetime as dt
from collections.abc import Mapping
from typing import Annotated, Any, Self

from pydantic import Field, GetCoreSchemaHandler, GetJsonSchemaHandler
from pydantic_core import CoreSchema, core_schema

from hedgerow.errors import StudyError
from hedgerow.extend.costs import COST_MODELS, CostModel, named_costs
from hedgerow.kernels.layout import Costs
from hedgerow.rules.base import Words
from hedgerow.rules.figures import Number, Percent, Share, Whole
from hedgerow.rules.words import Choice, Flag, Loose, Scalar, Text, WordsError, refuse, shown
from hedgerow.study.evidence_words import EvidenceOrNone, EvidenceWords
from hedgerow.study.extending import extension_faults
from hedgerow.study.gridwords import SampleWords, WalkForwardWords, grid_faults
from hedgerow.walk.account import COST_RANGES, DEFAULT_COSTS, MARGINS, NO_COSTS, Account

__all__ = ["AccountWords", "CostWords", "Day", "HeldOutWords", "PricingWords", "StudyWords", "WindowWords"]

_D = DEFAULT_COSTS
_MOST = COST_RANGES
_MONEY = Number(*_MOST["contract_fee"], "money")


class Day(Scalar):
    """A date as YYYY-MM-DD; read as that text."""

    __slots__ = ()

    allowed = "allowed: a date such as 2011-01-03, between 1900 and 2199"

    def read(self, value: object) -> str:
        """The date as ISO text. Raises WordsError for what is no date of the calendar."""
        if isinstance(value, dt.date) and not isinstance(value, dt.datetime):
            value = value.isoformat()
        try:
            day = dt.date.fromisoformat(value) if isinstance(value, str) and len(value) == 10 else None
        except ValueError:
            day = None
        if day is None or not 1900 <= day.year <= 2199:
            refuse("date", f"is {shown(value)}, which is no such date", self.allowed)
        return day.isoformat()

    def json_schema(self) -> dict[str, Any]:
        """A string of the form of a date."""
        return {"type": "string", "pattern": "^[0-9]{4}-[0-9]{2}-[0-9]{2}$"}


class WindowWords(Words):
    """The sessions that are walked, both ends included; an end left out is that of the data."""

    first: Annotated[str, Day()] | None = Field(default=None, alias="from")
    last: Annotated[str, Day()] | None = Field(default=None, alias="to")

    @classmethod
    def judge(cls, raw: Mapping[Any, Any], made: Self | None) -> list[Loose]:
        """A window that ends before it begins."""
        if made is None or made.first is None or made.last is None or made.first <= made.last:
            return []
        found = f"is {made.last}, before `from`, which is {made.first}"
        return [Loose(("to",), "reversed", found, "allowed: a later date", "swap them")]


class AccountWords(Words):
    """The money and how it is shared out among positions."""

    cash: Annotated[float, Number(1.0, 1e12, "money")] = 100_000.0
    per_position: Annotated[float, Share()] = 1.0 / 3.0
    most_positions: Annotated[int, Whole(1, 10_000, "positions at once")] = 1000
    most_new_a_day: Annotated[int, Whole(1, 10_000, "positions a day")] = 1000
    most_per_sector: Annotated[int, Whole(1, 10_000, "positions of one sector")] = 1000
    interest: Annotated[bool, Flag()] = True
    margin: Annotated[str, Choice(tuple(MARGINS))] = "cash"

    def account(self) -> Account:
        """The account these words describe."""
        return Account(**{name: getattr(self, name) for name in type(self).model_fields})


class CostWords(Words):
    """What trading takes away; the reasons of the defaults stand at `DEFAULT_COSTS`."""

    half_spread: Annotated[float, Percent(*_MOST["half_spread"])] = _D.half_spread
    spread_rise: Annotated[float, Number(*_MOST["spread_rise"])] = _D.spread_rise
    floor_ticks: Annotated[float, Number(*_MOST["floor_ticks"], "ticks")] = _D.floor_ticks
    whole_ticks: Annotated[bool, Flag()] = bool(_D.use_ticks)
    contract_fee: Annotated[float, _MONEY] = _D.contract_fee
    share_fee: Annotated[float, _MONEY] = _D.share_fee
    trade_fee: Annotated[float, _MONEY] = _D.trade_fee
    assignment_fee: Annotated[float, _MONEY] = _D.assignment_fee
    slippage: Annotated[float, Percent(*_MOST["slippage"])] = _D.slippage
    borrow: Annotated[float, Percent(*_MOST["borrow"])] = _D.borrow

    @classmethod
    def of(cls, costs: Costs) -> CostWords:
        """The words that describe costs."""
        given = costs._asdict()
        return cls.model_construct(whole_ticks=bool(given.pop("use_ticks")), **given)

    def costs(self) -> Costs:
        """The costs as the walk takes them."""
        named = {name: float(getattr(self, name)) for name in Costs._fields if name != "use_ticks"}
        return Costs(use_ticks=float(self.whole_ticks), **named)


class _CostsOrNone:
    """Reads a mapping of cost words, the name of a model of costs, or `none` for exact prices without any."""

    def __get_pydantic_core_schema__(self, source: Any, handler: GetCoreSchemaHandler) -> CoreSchema:
        return core_schema.no_info_wrap_validator_function(_read_costs, handler(source))

    def __get_pydantic_json_schema__(
        self, schema: CoreSchema, handler: GetJsonSchemaHandler
    ) -> dict[str, Any]:
        return {"anyOf": [{"enum": ["none", *sorted(COST_MODELS)]}, handler(schema)]}


def _read_costs(value: Any, handler: Any) -> Any:
    if value == "none":
        return CostWords.of(NO_COSTS)
    if isinstance(value, str) and value:
        try:
            return named_costs(value)
        except StudyError as error:
            fault = error.faults[0]
            refuse("unknown", f"is {shown(value)}, which is no model of costs", fault.allowed, fault.remedy)
    if not isinstance(value, Mapping | CostWords):
        refuse("shape", f"is {shown(value)}", "allowed: `none`, the name of a model, or a mapping of costs")
    return handler(value)


class PricingWords(Words):
    """How premiums are made: the surface of volatility, and whose listings hold."""

    volatility: Any = None
    listings: Annotated[str, Choice(("modern", "historical"))] = "modern"


class HeldOutWords(Words):
    """The last part of the window, kept aside: from a day to the end."""

    first: Annotated[str, Day()] = Field(alias="from")


class StudyWords(Words):
    """A study file. `strategy` is a path or the strategy itself; a variant is a mapping of dotted paths."""

    name: Annotated[str, Text(80)]
    question: Annotated[str, Text(2000)] | None = None
    market: Annotated[str, Text(400)]
    symbols: Any = "all"
    window: WindowWords = WindowWords()
    account: AccountWords = AccountWords()
    pricing: PricingWords = PricingWords()
    extensions: Any = None
    costs: Annotated[CostWords, _CostsOrNone()] = CostWords()
    strategy: Any = None
    variants: Any = None
    grid: Any = None
    sample: SampleWords | None = None
    walk_forward: WalkForwardWords | None = None
    held_out: HeldOutWords | None = None
    yardstick: Annotated[str, Choice(("buy and hold", "none"))] = "buy and hold"
    evidence: Annotated[EvidenceWords | None, EvidenceOrNone] = EvidenceWords()
    seed: Annotated[int, Whole(0, 2**31 - 1)] = 1

    @classmethod
    def judge(cls, raw: Mapping[Any, Any], made: Self | None) -> list[Loose]:
        """Symbols that are no list of text, variants that are no mappings, odd extensions, odd grids."""
        odd = extension_faults(raw.get("extensions"))
        return [*_symbol_faults(raw.get("symbols", "all")), *_variant_faults(raw), *odd, *grid_faults(raw)]

    @property
    def chosen_costs(self) -> Costs | CostModel:
        """The numbers written, or the model named."""
        given: Any = self.costs
        return given if isinstance(given, CostModel) else self.costs.costs()

    @property
    def chosen(self) -> tuple[str, ...] | None:
        """The symbols named, or None for all."""
        return None if self.symbols == "all" else tuple(self.symbols)


def _symbol_faults(symbols: Any) -> list[Loose]:
    if symbols == "all":
        return []
    if not isinstance(symbols, list | tuple) or not symbols:
        found = "is an empty list" if symbols == [] else f"is {shown(symbols)}"
        return [Loose(("symbols",), "shape", found, "allowed: `all`, or a list of symbols")]
    faults: list[Loose] = []
    for at, symbol in enumerate(symbols):
        try:
            Text(20).read(symbol)
        except WordsError as error:
            faults += [fault.under("symbols", at) for fault in error.faults]
        if symbol in symbols[:at]:
            faults.append(
                Loose(("symbols", at), "repeated", f"is {shown(symbol)} a second time", "", "take it out")
            )
    return faults


def _variant_faults(raw: Mapping[Any, Any]) -> list[Loose]:
    variants = raw.get("variants")
    if "variants" not in raw or variants is None:
        return []
    if not isinstance(variants, Mapping) or not variants:
        allowed = "allowed: a mapping of a name to the changes of each variant"
        return [Loose(("variants",), "shape", f"is {shown(variants)}", allowed)]
    faults: list[Loose] = []
    for name, changes in variants.items():
        try:
            Text(60).read(name)
        except WordsError as error:
            faults += [fault.under("variants", str(name)) for fault in error.faults]
        if not isinstance(changes, Mapping):
            allowed = "allowed: a mapping of dotted paths to values, or {} for the strategy as it is"
            faults.append(Loose(("variants", str(name)), "shape", f"is {shown(changes)}", allowed))
    return faults
