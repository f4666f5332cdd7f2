"""Today's sheet: what a rule says at one close, from nothing that came after it."""

from __future__ import annotations

import datetime as dt
from collections.abc import Iterator, Mapping
from dataclasses import dataclass, replace
from functools import cached_property
from pathlib import Path
from typing import Any

import numpy as np

from hedgerow.desk.book import Book, book_of
from hedgerow.desk.close import Close, Evening, State, fresh, probed
from hedgerow.desk.conditions import Sight, Test, failing, tests_of
from hedgerow.desk.held import held_lines
from hedgerow.desk.positions import read_positions
from hedgerow.desk.record import Record, record_of
from hedgerow.desk.sheet import DECLINED, HOLDING, OPEN, QUIET, Look, Plan, Sheet
from hedgerow.desk.structure import accept_tests, plans_of
from hedgerow.errors import Fault, StudyError, nearest_word
from hedgerow.events.kinds import reason_word
from hedgerow.events.log import EventLog
from hedgerow.extend.costs import CostModel
from hedgerow.kernels import layout as at
from hedgerow.kernels.layout import LOT_SHARES, Records
from hedgerow.kernels.state import OPEN as HELD_SLOT
from hedgerow.ledger import Ledger
from hedgerow.market import load_market
from hedgerow.market.calendar import is_session, next_session, why_closed
from hedgerow.market.table import Market
from hedgerow.report.cautions import Basis, cautions
from hedgerow.rules.entering import Enter
from hedgerow.rules.occasions import occasions
from hedgerow.rules.phrases import condition_phrase
from hedgerow.rules.schema import Strategy
from hedgerow.study.declare import Study, load_study, study_of_strategy
from hedgerow.study.evidence_words import Asked
from hedgerow.study.one import Bench
from hedgerow.study.places import told_in_place
from hedgerow.units import money_text, percent_text
from hedgerow.walk.run import Terms, Window, walk_program

__all__ = ["chosen", "market_at", "sheet_of", "today"]

LONGEST_WAIT_SESSIONS = 400  # how far ahead the next session of entry is looked for


def today(
    source: Study | str | Path | Mapping[str, Any],
    market: Market | str | Path | None = None,
    *,
    as_of: str | None = None,
    variant: str | None = None,
    positions: str | Path | Mapping[str, Any] | None = None,
) -> Sheet:
    """Return what a rule says at the close of `as_of`, an ISO date; None is the last session of the data.

    `source` is a study, its file or its words; with a `market` it is a strategy's file or words, or a study
    that is then looked at on that market. Of a study with several variants `variant` names one. `positions`
    are those held, a file or its words; None is an account of the study's cash with nothing held. Raises
    DataError, StudyError, RulesError or DeskError.
    """
    prices = market if isinstance(market, Market) else None
    if isinstance(source, Study):
        study = replace(source, market=Path(market)) if isinstance(market, str | Path) else source
    elif market is None:
        study = load_study(source)
    else:
        study = study_of_strategy(source, "." if prices is not None else str(market))
    return sheet_of(study, prices, as_of=as_of, variant=variant, positions=positions)


def sheet_of(
    study: Study,
    market: Market | None = None,
    *,
    as_of: str | None = None,
    variant: str | None = None,
    positions: str | Path | Mapping[str, Any] | None = None,
) -> Sheet:
    """Return the sheet of a study's variant; see `today`."""
    name, strategy = chosen(study, variant)
    cut = market_at(load_market(Path(study.market)) if market is None else market, as_of)
    bench = Bench(cut, study.surface, study.listings, study.symbols)
    costs = study.costs.costs(cut) if isinstance(study.costs, CostModel) else study.costs
    with told_in_place(study.path):
        close = Close(bench, bench.program(strategy), study.account, costs)
        return _Desk(study, name, strategy, close, positions).sheet()


def chosen(study: Study, variant: str | None) -> tuple[str, Strategy]:
    """The variant of a study that is asked for. Raises StudyError when it is not there, or none is named."""
    names = [name for name, _ in study.variants]
    where = study.name if study.path is None else str(study.path)
    if study.grid is not None:
        found, remedy = (
            "tries a grid of rules, and a sheet is about one",
            "write the one you chose as a strategy",
        )
        raise StudyError.one(where, "grid", found, remedy=remedy)
    if variant is None and len(names) == 1:
        return study.variants[0]
    allowed = f"allowed: {', '.join(f'`{name}`' for name in names)}"
    if variant is None:
        found = f"has {len(names)} variants, and a sheet is about one"
        raise StudyError.one(where, "which-variant", found, allowed, f'add --variant "{names[0]}"')
    if variant not in names:
        found, near = f"has no variant `{variant}`", nearest_word(variant, names)
        raise StudyError([Fault(where, 0, 0, "unknown-variant", found, allowed, near)])
    return study.variants[names.index(variant)]


def market_at(market: Market, as_of: str | None) -> Market:
    """The market as it was known at the close of a session. Raises StudyError when the day is none."""
    if as_of is None:
        return market.until(str(market.dates[-1]))
    span = f"the data hold {market.dates[0]} to {market.dates[-1]}"
    try:
        day = dt.date.fromisoformat(as_of)
    except ValueError:
        remedy = "a date is written like 2024-12-31"
        raise StudyError.one("as-of date", "date", f"`{as_of}` is no date", span, remedy) from None
    if not market.ordinals[0] <= day.toordinal() <= market.ordinals[-1]:
        raise StudyError.one("as-of date", "outside", f"{day} lies outside the data", span)
    if day.toordinal() not in market.ordinals:
        before = market.dates[np.searchsorted(market.ordinals, day.toordinal()) - 1]
        why = why_closed(day.toordinal())
        known = f" ({why})" if why and not is_session(day.toordinal()) else ""
        found = f"{day} is no session of the data{known}"
        raise StudyError.one("as-of date", "no-session", found, f"the session before it is {before}")
    return market.until(day)


@dataclass(frozen=True, eq=False)
class _Desk:
    """One sheet in the making."""

    study: Study
    variant: str
    strategy: Strategy
    close: Close
    positions: str | Path | Mapping[str, Any] | None

    @property
    def market(self) -> Market:
        return self.close.bench.market

    @cached_property
    def sight(self) -> Sight:
        return Sight(self.close.bench)

    @cached_property
    def book(self) -> Book | None:
        """What the account holds; None where nobody said."""
        if self.positions is None:
            return None
        words = read_positions(self.positions, self.market, self.strategy)
        return book_of(words, self.close, self.strategy)

    @cached_property
    def symbols(self) -> list[int]:
        """Columns that may be traded and have had a price."""
        return np.flatnonzero(self.close.bench.traded.astype(bool) & (self.market.last_bar >= 0)).tolist()

    @cached_property
    def chosen(self) -> tuple[Records, Records]:
        """One lot of every symbol of the sheet, its legs chosen, and what was found of it."""
        from hedgerow.kernels.probe import CHOOSE

        lots = fresh(len(self.symbols))
        lots["symbol"] = self.symbols
        return lots, probed(self.close.world(), self.close.rows - 1, lots, CHOOSE)

    @cached_property
    def trades(self) -> Any:
        """The rule's own positions up to the close, on the study's account; None outside its window."""
        first, last = self.study.first or str(self.market.dates[0]), str(self.market.dates[-1])
        if self.study.held_out is not None:  # the part kept aside is not looked at here either
            last = min(last, str(np.datetime64(self.study.held_out, "D") - 1))
        if not str(self.market.dates[0]) <= first <= last:
            return None
        window = Window.of(self.market, first, last)
        bench = self.close.bench
        terms = Terms(self.study.account, self.close.costs, window, bench.listings, marks=False)
        log = walk_program(self.market, bench.tape, self.close.program, terms)
        kept = log.events[log.events["kind"] != at.KIND_DECLINED]  # most of a log, and no money in it
        return Ledger.checked(EventLog(log.meta, kept, log.terms, log.days, log.marks, known=True)).trades

    @property
    def level(self) -> float:
        return (self.study.evidence or Asked()).level

    @property
    def ratios(self) -> tuple[float, ...]:
        """The premiums over which a structure is looked at again, the study's own among them."""
        asked = (self.study.evidence or Asked()).ratios or Asked().ratios
        return tuple(sorted({*asked, self.study.surface.ratio}))

    def record(self, symbol: str = "") -> Record | None:
        """What the rule earned before, on one symbol or on all."""
        return None if self.trades is None else record_of(self.trades, self.level, symbol)

    def sheet(self) -> Sheet:
        """The sheet."""
        book = self.book
        state = book.state if book is not None else State(self.study.account.cash, fresh(0), {})
        evening = self.close.evening(state)
        equity = state.cash if book is None else book.equity
        market, ratios = self.market, self.ratios
        return Sheet(
            name=self.strategy.name,
            variant=self.variant if self.variant.lower() != self.strategy.name.lower() else "",
            as_of=str(market.dates[-1]),
            next_session=dt.date.fromordinal(next_session(int(market.ordinals[-1]))).isoformat(),
            fill=self.strategy.fill,
            currency=market.currency,
            cash=state.cash,
            equity=equity,
            per_position=self.study.account.per_position,
            ratios=(ratios[0], ratios[-1]),
            record=self.record(),
            looks=tuple(self._looks(evening, state, equity)),
            held=() if book is None else held_lines(book, self.close, self.sight, evening),
            positions_known=book is not None,
            notes=tuple(self._notes(evening)),
            cautions=cautions(Basis(len(self.study.variants), self._assumed())),
        )

    def _assumed(self) -> tuple[str, ...]:
        surface, costs = self.study.surface, self.close.costs
        spread = f"half-spread {percent_text(costs.half_spread)} of the premium at the money"
        return (f"implied over realized volatility {surface.ratio:g}", spread)

    def _notes(self, evening: Evening) -> Iterator[str]:
        """What is said of the whole account and rule."""
        enter = self.strategy.enter or Enter()
        if enter.when is not None:
            yield f"Enters when {condition_phrase(enter.when)}."
        if enter.on is not None and not self._named():
            yield f"By this rule no session of entry; the next one is {self._next_named()}."
        if (evening.log.events["kind"] == at.KIND_MARGIN_CALL).any():
            yield "Equity is under the maintenance margin: the newest positions are to be closed."

    def _named(self) -> bool:
        """Whether this session is one at which the rule may enter."""
        enter = self.strategy.enter or Enter()
        return enter.on is None or bool(occasions(enter.on, self.market.ordinals)[-1])

    def _next_named(self) -> str:
        """The next session at which the rule may enter, by the exchange's calendar."""
        enter = self.strategy.enter or Enter()
        assert enter.on is not None
        days = [int(self.market.ordinals[-1])]
        for _ in range(LONGEST_WAIT_SESSIONS):
            days.append(next_session(days[-1]))
        named = np.flatnonzero(occasions(enter.on, np.array(days, np.int64))[1:])
        return dt.date.fromordinal(days[int(named[0]) + 1]).isoformat() if named.size else "not known"

    def _looks(self, evening: Evening, state: State, equity: float) -> Iterator[Look]:
        """Positions to be opened first, in the order of their rank, then all other symbols."""
        plans = plans_of(self.close, self.close.world(), evening.ordered, self.ratios)
        opened = [int(order["symbol"]) for order in evening.ordered]
        for symbol, plan in zip(opened, plans, strict=True):
            yield self._opening(symbol, plan)
        events = evening.log.events
        declined = {
            int(event["symbol"]): int(event["reason"]) for event in events[events["kind"] == at.KIND_DECLINED]
        }
        for row, symbol in enumerate(self.symbols):
            if symbol not in opened:
                yield self._other(row, declined, state, evening, equity)

    def _opening(self, symbol: int, plan: Plan) -> Look:
        """A position to be opened, with the conditions that brought it and what the rule earned there."""
        name, enter = self.market.symbols[symbol], self.strategy.enter or Enter()
        tests = [] if enter.when is None else tests_of(enter.when, self.sight, symbol)
        tests += self._accepted(self.symbols.index(symbol))
        return Look(name, plan.stock, OPEN, "", tuple(tests), plan, self.record(name))

    def _accepted(self, row: int) -> list[Test]:
        lots, found = self.chosen
        notional = LOT_SHARES * float(self.market.close[-1, int(lots[row]["symbol"])])
        return accept_tests(self.strategy.accept, found[row], notional)

    def _other(
        self, row: int, declined: dict[int, int], state: State, evening: Evening, equity: float
    ) -> Look:
        """A symbol in which nothing is opened, and why."""
        symbol = self.symbols[row]
        name, close = self.market.symbols[symbol], float(self.market.close[-1, symbol])
        if np.isnan(close):
            last = self.market.dates[self.market.last_bar[symbol]]
            return Look(name, close, QUIET, f"no price since {last}")
        if symbol in declined:
            return Look(name, close, DECLINED, *self._declined(row, declined[symbol], equity))
        if not self.close.program.may_enter[-1, symbol]:
            return Look(name, close, QUIET, *self._quiet(symbol))
        if (state.held["symbol"] == symbol).any() or (
            (evening.after["symbol"] == symbol) & (evening.after["status"] == HELD_SLOT)
        ).any():
            return Look(name, close, HOLDING, "held already")
        if symbol in state.lost:
            return Look(name, close, QUIET, f"cooling down: a loss {state.lost[symbol]} sessions ago")
        if -1 in declined:
            return Look(name, close, DECLINED, reason_word(declined[-1], ()))
        return Look(name, close, QUIET, "no figure known by which it is ranked")

    def _quiet(self, symbol: int) -> tuple[str, tuple[Test, ...]]:
        """Why a symbol may not be entered: the day, or the conditions that fail."""
        enter = self.strategy.enter or Enter()
        if self.strategy.holds_nothing:
            return "the rule holds nothing", ()
        tests = () if enter.when is None else tuple(failing(enter.when, self.sight, symbol))
        return ("" if self._named() else "no session of entry"), tests

    def _declined(self, row: int, reason: int, equity: float) -> tuple[str, tuple[Test, ...]]:
        """Why the walk declined an entry, with the figures that say by how much."""
        word, found = reason_word(reason, ()), self.chosen[1][row]
        if reason in (at.WHY_NO_LOT, at.WHY_NO_CASH):
            share = percent_text(self.study.account.per_position)
            most = money_text(self.study.account.per_position * equity, places=0)
            lot = money_text(float(found["capital"]), places=0)
            if reason == at.WHY_NO_LOT:
                return f"one lot ties up {lot}, and a position may take {most} ({share} of equity)", ()
            return f"{word}: one lot ties up {lot}", ()
        if at.WHY_NET_CREDIT <= reason <= at.WHY_SPREAD:
            return "", tuple(test for test in self._accepted(row) if not test.holds) or self._told(word)
        return word, ()

    def _told(self, word: str) -> tuple[Test, ...]:
        return (Test(word, False),)
