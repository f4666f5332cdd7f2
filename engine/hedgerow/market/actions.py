"""Splits and dividends: read, put on the sessions they work on, and used to undo adjusted prices."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from hedgerow.errors import Fault, nearest_word
from hedgerow.kernels.layout import Floats, Ints
from hedgerow.market.bars import Bars, Words, symbol_codes
from hedgerow.market.columns import DIVIDENDS, SPLITS, assign
from hedgerow.market.dates import iso, to_ordinals
from hedgerow.market.numbers import Cells, to_floats
from hedgerow.market.sources import Source
from hedgerow.market.table import Finding, bar_range

KINDS = ("dividend", "special", "split")


@dataclass(frozen=True)
class Actions:
    """What happened to some symbols, arrays of shape (n,): `kind` is an index into `KINDS`.

    `symbol` indexes the market's symbols, `ordinal` is the ex-date, `value` is cash per share as paid, or new
    shares for one old.
    """

    symbol: Ints
    ordinal: Ints
    kind: Ints
    value: Floats

    @classmethod
    def none(cls) -> Actions:
        """Return no action at all."""
        nothing = np.empty(0, dtype=np.int64)
        return cls(nothing, nothing, nothing, np.empty(0))

    def __len__(self) -> int:
        return len(self.value)

    def take(self, rows: NDArray[np.bool_] | Ints) -> Actions:
        """Return some of the actions."""
        return Actions(self.symbol[rows], self.ordinal[rows], self.kind[rows], self.value[rows])

    def joined(self, other: Actions) -> Actions:
        """Return these actions and others."""
        pairs = (
            (getattr(self, name), getattr(other, name)) for name in ("symbol", "ordinal", "kind", "value")
        )
        return Actions(*(np.concatenate(pair) for pair in pairs))


def from_bars(bars: Bars, sources: Sequence[Source]) -> tuple[Actions, list[Fault]]:
    """Return the actions that stand in columns of the price tables; raises nothing, faults are returned.

    A split of 0 means none there, as some tables have it.
    """
    actions, faults = Actions.none(), []
    for kind, role in enumerate(KINDS):
        if role not in bars.values:
            continue
        values = bars.values[role]
        acts = ~np.isnan(values) & (values != 0.0) & ((values != 1.0) if role == "split" else True)
        wrong = np.flatnonzero(values < 0.0)
        for row in wrong[:20]:
            source = sources[int(bars.source[row])]
            line = int(source.lines_of(bars.row[[row]])[0])
            faults.append(Fault(source.where, line, 0, f"negative-{role}", *_negative(role, values[row])))
        count = int(acts.sum())
        kinds = np.full(count, kind, dtype=np.int64)
        actions = actions.joined(Actions(bars.symbol[acts], bars.ordinal[acts], kinds, values[acts]))
    return actions, faults


def _negative(role: str, value: float) -> tuple[str, str, str]:
    if role == "split":
        return (
            f"a split ratio of {value:g}",
            "new shares for one old, above 0",
            "2 is two for one, 0.1 one for ten",
        )
    return f"a dividend of {value:g}", "cash per share, above 0", "leave the cell empty for none"


def read_dividends(
    source: Source, symbols: Sequence[str], words: Words
) -> tuple[Actions, list[Fault], list[Finding]]:
    """Return the dividends of a table (symbol, date, amount, kind), its faults, and what was left out."""
    roles, faults = assign(source.names, DIVIDENDS, {}, source.where)
    if faults:
        return Actions.none(), faults, []
    actions, faults, findings = _read(source, symbols, words, roles, "amount")
    if "kind" in roles and len(actions):
        kinds, wrong = _kinds(source.cells(roles["kind"]))
        faults += wrong
        actions = Actions(actions.symbol, actions.ordinal, kinds, actions.value)
    return _told_apart(actions, source, symbols, faults, findings)


def read_splits(
    source: Source, symbols: Sequence[str], words: Words
) -> tuple[Actions, list[Fault], list[Finding]]:
    """Return the splits of a table (symbol, date, ratio), its faults, and what was left out."""
    roles, faults = assign(source.names, SPLITS, {}, source.where)
    if faults:
        return Actions.none(), faults, []
    actions, faults, findings = _read(source, symbols, words, roles, "ratio")
    kinds = np.full(len(actions), KINDS.index("split"), dtype=np.int64)
    actions = Actions(actions.symbol, actions.ordinal, kinds, actions.value)
    return _told_apart(actions, source, symbols, faults, findings)


def _read(
    source: Source, symbols: Sequence[str], words: Words, roles: dict[str, str], role: str
) -> tuple[Actions, list[Fault], list[Finding]]:
    """Return a table's rows as actions of kind 0, symbol -1 where the market does not know it."""
    symbol, faults, findings = known_symbols(source, roles, symbols)
    ordinal, wrong = to_ordinals(source.cells(roles["date"]), words.dates)
    faults += wrong
    cells = source.cells(roles[role])
    value, wrong = to_floats(cells, words.decimal_comma)
    faults += wrong
    faults += cells.faults(
        cells.blank(), f"no-{role}", lambda _: (f"the {role} is missing", "a number is wanted", "")
    )
    what = "split" if role == "ratio" else "dividend"
    faults += cells.faults(
        value <= 0.0, f"bad-{role}", lambda cell: _negative(what, float(cell.replace(",", ".")))
    )
    kind = np.zeros(len(value), dtype=np.int64)
    return Actions(symbol, ordinal, kind, value), faults, findings


def known_symbols(
    source: Source, roles: dict[str, str], symbols: Sequence[str]
) -> tuple[Ints, list[Fault], list[Finding]]:
    """Return the market's index of each row's symbol, -1 for one it does not know (a finding), and faults."""
    names, codes, faults = symbol_codes(source, roles)
    place = {name: index for index, name in enumerate(symbols)}
    index = np.array([place.get(name, -1) for name in names] + [-1], dtype=np.int64)[codes]
    strange = [name for name in names if name not in place]
    findings = []
    if strange:
        same = {name.lower(): name for name in symbols}.get(strange[0].lower(), "")
        near = f"did you mean `{same}`?" if same else nearest_word(strange[0], symbols)
        listed = ", ".join(strange[:8]) + (" and others" if len(strange) > 8 else "")
        text = f"{source.name} has rows of symbols without prices, left out: {listed}"
        findings.append(Finding("unknown-symbol", "warning", "", "", text + (f"; {near}" if near else "")))
    return index, faults, findings


def _kinds(cells: Cells) -> tuple[Ints, list[Fault]]:
    """Return the index of each dividend's kind in `KINDS`; nothing written means regular."""
    words = [str(cell or "").strip().lower() for cell in cells.column.to_pylist()]
    known = {"": 0, "regular": 0, "ordinary": 0, "cash": 0, "special": 1, "extra": 1}
    kinds = np.array([known.get(word, -1) for word in words], dtype=np.int64)
    told = ("`regular` or `special` is allowed", "an empty cell means regular")
    faults = cells.faults(kinds < 0, "bad-kind", lambda cell: (f"`{cell}` is no kind of dividend", *told))
    return kinds, faults


def _told_apart(
    actions: Actions, source: Source, symbols: Sequence[str], faults: list[Fault], findings: list[Finding]
) -> tuple[Actions, list[Fault], list[Finding]]:
    """Return the actions of known symbols, each repeated row once; two splits a day are a fault."""
    actions = actions.take((actions.symbol >= 0) & (actions.ordinal > 0) & (actions.value > 0.0))
    rows = np.column_stack([actions.symbol, actions.ordinal, actions.kind, actions.value])
    if len(rows) == 0:
        return actions, faults, findings
    _, first = np.unique(rows, axis=0, return_index=True)
    if len(first) < len(rows):
        text = (
            f"{source.name}: rows repeated word for word, {len(rows) - len(first)} times; each was kept once"
        )
        findings.append(Finding("repeated-row", "warning", "", "", text))
    actions = actions.take(np.sort(first))
    _, counts_at, counts = np.unique(rows[np.sort(first), :3], axis=0, return_index=True, return_counts=True)
    for place in counts_at[counts > 1]:
        name, day = symbols[int(actions.symbol[place])], iso(actions.ordinal[place])
        if KINDS[int(actions.kind[place])] == "split":
            told = ("a symbol has one split a day", "take away the wrong one")
            faults.append(Fault(source.where, 0, 0, "split-twice", f"{name} has two splits on {day}", *told))
        else:
            text = "several dividends of one kind on one day; they are added up"
            findings.append(Finding("dividends-added", "note", name, day, text))
    return actions, faults, findings


@dataclass(frozen=True)
class Placed:
    """Actions on their sessions: `dividend` and `special` (T, N) cash per share, `split` (T, N) ratios."""

    dividend: Floats
    special: Floats
    split: Floats


def placed(
    actions: Actions, ordinals: Ints, symbols: Sequence[str], close: Floats
) -> tuple[Placed, list[Finding]]:
    """Return the actions on sessions with a bar, moved to the symbol's next bar where needed, with findings.

    What lies before the first bar or after the last one is left out.
    """
    sessions, count = close.shape
    laid = Placed(np.zeros(close.shape), np.zeros(close.shape), np.ones(close.shape))
    if len(actions) == 0:
        return laid, []
    has = ~np.isnan(close)
    next_bar = np.where(has, np.arange(sessions)[:, None], sessions)
    next_bar = np.minimum.accumulate(next_bar[::-1], axis=0)[::-1]
    next_bar = np.vstack([next_bar, np.full(count, sessions)])
    first, _ = bar_range(close)
    wanted = np.searchsorted(ordinals, actions.ordinal)
    session = next_bar[wanted, actions.symbol]
    starts = np.append(ordinals, np.iinfo(np.int64).max)[np.minimum(first, sessions)][actions.symbol]
    outside = (session == sessions) | (actions.ordinal < starts)
    inside = ~outside
    moved = inside & (np.append(ordinals, 0)[session] != actions.ordinal)
    at, who, value = session[inside], actions.symbol[inside], actions.value[inside]
    for kind, target in enumerate((laid.dividend, laid.special)):
        mine = actions.kind[inside] == kind
        np.add.at(target, (at[mine], who[mine]), value[mine])
    mine = actions.kind[inside] == KINDS.index("split")
    np.multiply.at(laid.split, (at[mine], who[mine]), value[mine])
    findings = _left_out(actions.take(outside), symbols, "action-outside", _OUTSIDE, "note")
    return laid, findings + _left_out(actions.take(moved), symbols, "action-moved", _MOVED, "warning")


_OUTSIDE = "{count} outside the symbol's prices, left out"
_MOVED = "{count} on a day without a price, moved to the symbol's next session"


def _left_out(actions: Actions, symbols: Sequence[str], code: str, text: str, severity: str) -> list[Finding]:
    findings = []
    for index in np.unique(actions.symbol):
        mine = actions.take(actions.symbol == index)
        splits = int((mine.kind == KINDS.index("split")).sum())
        parts = [(splits, "split"), (len(mine) - splits, "dividend")]
        count = " and ".join(f"{n} {word}{'s' if n > 1 else ''}" for n, word in parts if n)
        day = iso(mine.ordinal.min())
        findings.append(Finding(code, severity, symbols[int(index)], day, text.format(count=count)))
    return findings
