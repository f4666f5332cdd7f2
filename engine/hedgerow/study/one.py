"""One rule on one market: everything prepared, walked, checked and summed up."""

from __future__ import annotations

from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass, field
from functools import cached_property
from pathlib import Path
from typing import Any

import numpy as np
import pandas as pd
from numpy.typing import NDArray
from pydantic import ValidationError

from hedgerow.errors import Fault, StudyError, nearest_word
from hedgerow.events.log import EventLog
from hedgerow.evidence import Summary, summarise
from hedgerow.extend.costs import CostModel, named_costs
from hedgerow.extend.load import load_extensions
from hedgerow.kernels.layout import Bytes, Costs, Floats
from hedgerow.ledger import Ledger
from hedgerow.market import load_market
from hedgerow.market.sessions import Regime
from hedgerow.market.table import Market
from hedgerow.rules.base import loosened
from hedgerow.rules.document import tree_of_mapping
from hedgerow.rules.load import load_strategy
from hedgerow.rules.program import Chosen, Program, compile_strategy
from hedgerow.rules.schema import SignalValue, Strategy
from hedgerow.signals.panel import Panel
from hedgerow.study.words import AccountWords, CostWords
from hedgerow.study.yardstick import buy_and_hold
from hedgerow.volatility.surface import SurfaceModel, build
from hedgerow.volatility.words import surface_words
from hedgerow.walk.account import NO_COSTS, Account
from hedgerow.walk.inputs import Tape, make_tape
from hedgerow.walk.run import Terms, Window, walk_program

__all__ = ["Bench", "Result", "run"]

Progress = Callable[[int, int], None]


@dataclass(frozen=True, eq=False)
class Result:
    """What a rule did: the log, and everything that is read off it.

    `events`, `trades`, `legs`, `equity` are frames; `summary` holds every figure with its unit and meaning.
    """

    log: EventLog = field(repr=False)
    rate: Floats = field(repr=False)
    yardstick: Floats | None = field(repr=False)

    def __repr__(self) -> str:
        """One line: the variant, its span, positions and last equity."""
        meta, days = self.log.meta, self.log.days
        span = (
            f"{meta.dates[days['session'][0]]} to {meta.dates[days['session'][-1]]}"
            if days.size
            else "no day"
        )
        end = f", equity {days['equity'][-1]:,.2f} {meta.currency}".rstrip() if days.size else ""
        return f"<Result {meta.variant!r}: {span}, {self.log.terms.size:,} positions{end}>"

    @cached_property
    def ledger(self) -> Ledger:
        """The ledger of the log, money and quantities checked. Raises ReconcileError when they are off."""
        return Ledger.checked(self.log)

    @property
    def events(self) -> pd.DataFrame:
        """Every event in words, one a row."""
        return self.log.to_frame()

    @property
    def trades(self) -> pd.DataFrame:
        """One row a position."""
        return self.ledger.trades

    @property
    def legs(self) -> pd.DataFrame:
        """One row a life of a leg."""
        return self.ledger.legs

    @property
    def equity(self) -> pd.DataFrame:
        """One row a session."""
        return self.ledger.equity

    @cached_property
    def summary(self) -> Summary:
        """Every figure of the run, beside buy and hold of the same universe on the same days."""
        return summarise(self.ledger, rate=self.rate, yardstick=self.yardstick)


@dataclass(frozen=True, eq=False)
class Bench:
    """A market made ready to run rules on: its surface, its records and its signals, each worked out once."""

    market: Market
    surface: SurfaceModel
    listings: Regime = "modern"
    symbols: tuple[str, ...] | None = None  # None: all stocks, or all where there is no stock

    @cached_property
    def tape(self) -> Tape:
        """The walk's records of market and surface."""
        return make_tape(self.market, build(self.surface, self.market), self.listings)

    @cached_property
    def _chosen(self) -> Chosen:
        """Expiries by rule, as they are met."""
        return {}

    @cached_property
    def panel(self) -> Panel:
        """The market as signals see it."""
        return Panel(self.market)

    @cached_property
    def traded(self) -> Bytes:
        """Which symbols may be traded, shape (N,). Raises StudyError for every one the market has not."""
        names = self.market.symbols
        if self.symbols is None:
            stocks = np.array([kind == "stock" for kind in self.market.kinds], np.uint8)
            return stocks if stocks.any() else np.ones(len(names), np.uint8)
        allowed = f"the market has {', '.join(names[:12])}{' and others' if len(names) > 12 else ''}"
        faults = [
            Fault(
                f"symbols.{at + 1}",
                0,
                0,
                "unknown-symbol",
                f"is `{name}`, which is no symbol of the market",
                allowed,
                nearest_word(name, names),
            )
            for at, name in enumerate(self.symbols)
            if name not in names
        ]
        if faults:
            raise StudyError(faults)
        return np.array([name in self.symbols for name in names], np.uint8)

    def values(self, wanted: SignalValue) -> NDArray[np.bool_] | Floats:
        """A signal's array of shape (T, N)."""
        return self.panel.evaluate(wanted.signal, wanted.arguments, wanted.of)

    def known(self, wanted: SignalValue) -> NDArray[np.bool_]:
        """Where a signal is known, shape (T, N)."""
        return self.panel.known(wanted.signal, wanted.arguments, wanted.of)

    def program(self, strategy: Strategy) -> Program:
        """A strategy as arrays for this market, entering only what may be traded."""
        market = self.market
        program = compile_strategy(
            strategy,
            self.values,
            market.ordinals,
            len(market.symbols),
            self.listings,
            self._chosen,
            self.known,
        )
        return program.entering(self.traded)

    def run(
        self,
        strategy: Strategy,
        account: Account,
        costs: Costs | CostModel,
        window: Window,
        variant: str = "",
        progress: Progress | None = None,
        beside: bool = True,
    ) -> Result:
        """Walk one strategy over a window, `beside` buy and hold of what may be traded.

        Raises RulesError when the strategy asks for what the market has not.
        """
        numbers = costs.costs(self.market) if isinstance(costs, CostModel) else costs
        terms = Terms(account, numbers, window, self.listings)
        log = walk_program(self.market, self.tape, self.program(strategy), terms, variant, progress)
        yardstick = buy_and_hold(self.market, self.traded, window, account.cash) if beside else None
        return Result(log, self.market.rate, yardstick)


def run(
    market: Market | str | Path,
    strategy: Strategy | Mapping[str, Any] | str | Path,
    *,
    account: Account | Mapping[str, Any] | None = None,
    pricing: SurfaceModel | Mapping[str, Any] | str | None = None,
    costs: Costs | CostModel | Mapping[str, Any] | str | None = None,
    first: str | None = None,
    last: str | None = None,
    extensions: Sequence[str | Path] = (),
) -> Result:
    """Run one strategy on a market.

    `market` is a market or the place of its prices; `strategy` a strategy, its words or its file; `account`
    an account or its words; `pricing` a surface model, its words or a preset's name;
    `costs` are costs, their words, the name of a model or "none"; `first` and `last` are ISO dates within the
    data; `extensions` are files of signals, estimators and costs of your own. Raises RulesError, StudyError,
    ExtensionError or ReconcileError.
    """
    load_extensions(extensions)
    rule = strategy if isinstance(strategy, Strategy) else load_strategy(strategy)
    model = pricing if isinstance(pricing, SurfaceModel) else surface_words(pricing)
    prices = market if isinstance(market, Market) else load_market(market)
    bench = Bench(prices, model)
    window = Window.of(prices, first, last)
    return bench.run(rule, _account(account), _costs(costs), window, rule.name)


def _account(account: Account | Mapping[str, Any] | None) -> Account:
    """The account as the walk takes it. Raises StudyError with every fault of its words."""
    if isinstance(account, Account):
        return account
    words = account or {}
    try:
        return AccountWords.model_validate(words).account()
    except ValidationError as error:
        raise StudyError(tree_of_mapping(words, "account").all_faults(loosened(error), "account")) from None


def _costs(costs: Costs | CostModel | Mapping[str, Any] | str | None) -> Costs | CostModel:
    """Costs as the walk takes them. Raises StudyError with every fault of their words."""
    if isinstance(costs, Costs | CostModel):
        return costs
    if costs == "none":
        return NO_COSTS
    if isinstance(costs, str) and costs:
        return named_costs(costs)
    if not isinstance(costs, Mapping | None):
        found = f"the costs are {costs!r}, which is neither `none` nor a mapping of costs"
        raise StudyError.one(
            "costs", "shape", found, "allowed: `none`, or a mapping of costs such as {contract_fee: 1}"
        )
    try:
        return CostWords.model_validate({} if costs is None else costs).costs()
    except ValidationError as error:
        raise StudyError(tree_of_mapping(costs or {}, "costs").all_faults(loosened(error), "costs")) from None
