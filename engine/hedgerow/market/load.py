"""From files or frames to a Market: read everything, refuse what is wrong, tell what should be known."""

from __future__ import annotations

from dataclasses import dataclass, field, replace
from pathlib import Path
from typing import Any

import numpy as np
import pandas as pd

from hedgerow.errors import DataError, Fault, nearest_word
from hedgerow.kernels.layout import Floats
from hedgerow.market import actions as acts
from hedgerow.market import adjust
from hedgerow.market.bars import Axis, Bars, grid, read_bars
from hedgerow.market.check import market_findings
from hedgerow.market.dataset import Dataset, Known
from hedgerow.market.places import EXTRAS, Tables, for_symbol, gather
from hedgerow.market.rates import Series, on_sessions, read_rates
from hedgerow.market.recovery import Closes, missing_column, recovered
from hedgerow.market.reports import read_reports
from hedgerow.market.table import EPOCH_ORDINAL, Finding, Market, Report, bar_range
from hedgerow.market.usable import order_findings, usable, without_repeats
from hedgerow.textfile import capped

PRICES = ("open", "high", "low", "close")


def load_market(place: str | Path | pd.DataFrame, *, symbol: str = "", **words: Any) -> Market:
    """Return the market of a CSV or Parquet file, a folder, a frame, or a `sample:` by name, checked.

    `symbol` names the symbol of a table that has no such column. `dividends`, `splits`, `reports` and `rates`
    may be frames; every other keyword is a word of dataset.yaml (`adjustment="splits"`) and goes before the
    file's; a sample has words of its own. Raises DataError with every fault of the input.
    """
    if isinstance(place, str | Path) and str(place).startswith("sample:"):
        return _sample(str(place), symbol, words)
    frames = {name: words.pop(name) for name in EXTRAS if isinstance(words.get(name), pd.DataFrame)}
    tables = gather(place, frames, words)
    return _built(_read(for_symbol(tables, symbol) if symbol else tables))


def _sample(place: str, symbol: str, words: dict[str, Any]) -> Market:
    """Return a sample of real prices; raises DataError for an unknown one and for words beside it."""
    from hedgerow.market.samples import named_sample  # it is made with load_market itself

    if symbol or words:
        found = "a sample of real prices has words of its own, and others were given"
        raise DataError.one(place, "words", found, "", "leave them out")
    market = named_sample(place)
    assert market is not None
    return market


@dataclass
class _Draft:
    """What has been read, before it is laid out."""

    source: str
    dataset: Dataset
    bars: Bars
    actions: acts.Actions = field(default_factory=acts.Actions.none)
    reports: tuple[Report, ...] = ()
    rates: Series = field(default_factory=lambda: (np.empty(0, dtype=np.int64), np.empty(0)))
    findings: list[Finding] = field(default_factory=list)
    faults: list[Fault] = field(default_factory=list)


def _read(tables: Tables) -> _Draft:
    """Return the draft of the tables; raises DataError with every fault of every table."""
    bars, faults, unused = read_bars(tables.prices, tables.dataset.words)
    order = order_findings(bars, tables.prices)
    bars, conflicts, repeats = without_repeats(bars, tables.prices)
    kept, dropped = usable(bars)
    draft = _Draft(tables.source, tables.dataset, kept)
    draft.findings = [*tables.findings, *unused, *order, *repeats, *dropped]
    draft.faults = [*tables.faults, *faults, *conflicts]
    if len(kept) == 0 and not draft.faults:
        found = f"no row can be used; {dropped[0].text}" if dropped else "no row can be used"
        draft.faults.append(Fault(tables.source, 0, 0, "no-row", found, remedy="check the columns of prices"))
    names = tuple(bars.names[i] for i in np.flatnonzero(np.bincount(kept.symbol, minlength=len(bars.names))))
    draft.bars, whole = _renumbered(kept, names), _renumbered(bars, names)
    _read_actions(tables, whole, draft)
    _read_extras(tables, names, draft)
    _known_symbols(draft)
    if draft.faults:
        raise DataError(capped(_in_order(draft.faults)))
    return draft


def _in_order(faults: list[Fault]) -> list[Fault]:
    """Return faults file by file, as the files came, and line by line."""
    files = {where: place for place, where in enumerate(dict.fromkeys(fault.where for fault in faults))}
    return sorted(faults, key=lambda fault: (files[fault.where], fault.line == 0, fault.line, fault.column))


def _renumbered(bars: Bars, names: tuple[str, ...]) -> Bars:
    place = {name: index for index, name in enumerate(names)}
    symbol = np.array([place.get(name, -1) for name in bars.names] + [-1], dtype=np.int64)[bars.symbol]
    rows = replace(bars, names=names, symbol=symbol)
    return rows if (symbol >= 0).all() else rows.take(symbol >= 0)


def _read_actions(tables: Tables, bars: Bars, draft: _Draft) -> None:
    draft.actions, faults = acts.from_bars(bars, tables.prices)
    draft.faults += faults
    for name, read in (("dividends", acts.read_dividends), ("splits", acts.read_splits)):
        if name not in tables.extras:
            continue
        source = tables.extras[name]
        actions, faults, findings = read(source, bars.names, tables.dataset.words)
        draft.faults += faults
        draft.findings += findings
        if np.isin(draft.actions.kind, np.unique(actions.kind)).any():
            found = f"{name} stand here and in a column of the prices"
            draft.faults.append(Fault(source.where, 0, 0, "two-places", found, "one place is read"))
        draft.actions = draft.actions.joined(actions)


def _read_extras(tables: Tables, names: tuple[str, ...], draft: _Draft) -> None:
    if "reports" in tables.extras:
        draft.reports, faults, findings = read_reports(tables.extras["reports"], names, tables.dataset.words)
        draft.faults += faults
        draft.findings += findings
    if "rates" in tables.extras:
        draft.rates, faults = read_rates(tables.extras["rates"], tables.dataset.words)
        draft.faults += faults
        if tables.dataset.rate is not None:
            found = "rates stand here, and `rate` in the words of the dataset"
            where = tables.extras["rates"].where
            draft.faults.append(Fault(where, 0, 0, "two-places", found, "one of both is read"))
    elif tables.dataset.rate is not None:
        draft.rates = (np.array([1], dtype=np.int64), np.array([tables.dataset.rate]))


def _known_symbols(draft: _Draft) -> None:
    for name in draft.dataset.symbols:
        if name not in draft.bars.names and len(draft.bars):
            near = nearest_word(name, draft.bars.names)
            text = f"dataset.yaml describes {name}, which has no prices" + (f"; {near}" if near else "")
            draft.findings.append(Finding("unknown-symbol", "warning", "", "", text))


def _built(draft: _Draft) -> Market:
    """Return the market of a draft: laid out, adjustments undone, findings sorted."""
    axis = Axis.of(draft.bars)
    names, dataset = draft.bars.names, draft.dataset
    prices = {role: grid(draft.bars, axis, role) for role in (*PRICES, "volume", "implied")}
    if dataset.recover is not None:
        adjusted = grid(draft.bars, axis, "adjusted_close")
        _add_recovered(draft, axis, prices["close"], adjusted)
    laid, moved = acts.placed(draft.actions, axis.ordinals, names, prices["close"])
    laid, notes = _as_traded(prices, laid, dataset)
    first, last = bar_range(prices["close"])
    known = [dataset.symbols.get(name, Known()) for name in names]
    market = Market(
        symbols=names,
        kinds=tuple(one.kind for one in known),
        sectors=tuple(one.sector for one in known),
        dates=(axis.ordinals - EPOCH_ORDINAL).astype("datetime64[D]"),
        ordinals=axis.ordinals,
        **prices,
        dividend=laid.dividend,
        special=laid.special,
        split=laid.split,
        rate=on_sessions(draft.rates, axis.ordinals, dataset.compounding == "annual"),
        reports=draft.reports,
        first_bar=first,
        last_bar=last,
        currency=dataset.currency,
        adjustment=dataset.adjustment or "none",
        source=dataset.source or dataset.name or draft.source,
        findings=(),
    )
    checked = market_findings(market, dataset.calendar)
    return replace(market, findings=tuple(sorted([*draft.findings, *moved, *notes, *checked], key=_rank)))


def _rank(finding: Finding) -> tuple[bool, Finding]:
    return finding.severity != "warning", finding


def _add_recovered(draft: _Draft, axis: Axis, close: Floats, adjusted: Floats) -> None:
    """Add to the draft what the adjusted close holds; raises DataError when it cannot be recovered."""
    if np.isnan(adjusted).all():
        raise DataError([missing_column(draft.source)])
    closes = Closes(close, adjusted, axis.ordinals, draft.bars.names)
    found, findings = recovered(closes, draft.actions, draft.dataset)
    if np.isin(draft.actions.kind, np.unique(found.kind)).any():
        raise DataError.one(
            draft.source,
            "two-places",
            "dividends or splits are given, and also to be recovered from the adjusted close",
            "one place is read",
            "take the table away, or say `splits: false` or `dividends: false` under `recover`",
        )
    draft.actions = draft.actions.joined(found)
    draft.findings += findings


def _as_traded(
    prices: dict[str, Floats], laid: acts.Placed, dataset: Dataset
) -> tuple[acts.Placed, list[Finding]]:
    """Undo the adjustment of the prices in place; return the actions as paid, and what should be known."""
    if dataset.adjustment == "":
        text = "the adjustment of the prices is not stated; they are taken as traded (`adjustment: none`)"
        return laid, [Finding("adjustment-not-stated", "note", "", "", text)]
    if dataset.amounts == "split adjusted":
        later = adjust.later_splits(laid.split)
        laid = replace(laid, dividend=laid.dividend * later, special=laid.special * later)
    if dataset.adjustment == "none":
        return laid, []
    later = adjust.later_splits(laid.split)
    factor, findings = 1.0 / later, []
    paid = laid.dividend + laid.special
    if dataset.adjustment == "splits and dividends":
        if paid.any():
            factor = adjust.undo_dividends(prices["close"], paid, laid.split, dataset.reinvested)
        else:
            text = "prices are adjusted for dividends but none is given: only splits were undone"
            findings.append(Finding("dividends-not-undone", "warning", "", "", text))
    for role in PRICES:
        prices[role] = prices[role] / factor
    prices["volume"] = prices["volume"] / later
    return laid, findings
