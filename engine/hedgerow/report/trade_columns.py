"""Every trade as columns of the page: figures, legs, values by day, and what happened as text.

Positions are counted through all variants, in the order of the study and then of the terms. Text and values
by day lie in chunks of CHUNK positions, of which a page unpacks one when a trade is opened.
"""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from typing import Any

import numpy as np
import pandas as pd

from hedgerow.events.log import EventLog
from hedgerow.events.narrate import sentence
from hedgerow.kernels.layout import Records
from hedgerow.ledger import Ledger
from hedgerow.ledger.marks import LEG_FIELDS, rows_of
from hedgerow.ledger.positions import TRADE_COLUMNS
from hedgerow.report.curves import days_since_1970
from hedgerow.report.pack import column, deflated, words

__all__ = ["CHUNK", "legs_of", "pictures_of", "trades_of"]

CHUNK = 64
"""Positions whose pictures are packed together."""

WORDS = ("variant", "symbol", "outcome", "reason")
QUANTA = {
    "position": 1.0,
    "opened": 1.0,
    "closed": 1.0,
    "sessions": 1.0,
    "lots": 0.01,
    "shares": 0.01,
    "stock_in": 0.0001,
    "stock_out": 0.0001,
    "break_even": 0.0001,
    "odds_of_best": 1e-5,
    "return_on_debit": 1e-6,
}
CENT = 0.01
DETAIL_DIGITS = 1e-4
"""Part of what a position ties up that its values by day are rounded to."""


def trades_of(ledgers: Sequence[Ledger]) -> dict[str, Any]:
    """Return the columns TRADE_COLUMNS of all trades by name; words as {words, codes}, dates as days."""
    frame = pd.concat([ledger.trades for ledger in ledgers], ignore_index=True)
    columns = {name: _column(frame[name], name) for name in TRADE_COLUMNS}
    return {"count": len(frame), "columns": columns}


def _column(values: pd.Series, name: str) -> dict[str, Any]:
    if name in WORDS:
        return words(values.tolist())
    if name in ("opened", "closed"):
        return column(days_since_1970(values.to_numpy()))
    return column(values.to_numpy(np.float64), QUANTA.get(name, CENT))


def legs_of(ledgers: Sequence[Ledger]) -> dict[str, Any]:
    """Return one row a life of a leg: the number of its trade, words, strike, dates, quantity and prices."""
    first, parts = 0, []
    for ledger in ledgers:
        terms = ledger.log.terms
        rows = rows_of(terms["position"], ledger.legs["position"].to_numpy(np.int32))
        parts.append(ledger.legs.assign(trade=rows + first))
        first += terms.size
    frame = pd.concat(parts, ignore_index=True).sort_values("trade", kind="stable")
    columns = {name: words(frame[name].tolist()) for name in ("leg", "side", "right", "ended")}
    for name in ("expiry", "opened", "closed"):
        columns[name] = column(days_since_1970(frame[name].to_numpy()))
    for name, quantum in (("trade", 1.0), ("life", 1.0), ("quantity", CENT)):
        columns[name] = column(frame[name].to_numpy(np.float64), quantum)
    for name in ("strike", "price_in", "price_out"):
        columns[name] = column(frame[name].to_numpy(np.float64), 0.0001)
    columns["pnl"] = column(frame["pnl"].to_numpy(np.float64), CENT)
    return columns


def pictures_of(ledgers: Sequence[Ledger]) -> dict[str, Any]:
    """Return the chunks of pictures: {size, legs, chunks}, the legs' names by variant.

    A chunk holds `count`, marks of each position, columns of the marks (`session` counted within the run,
    `spot`, `gain`, one of each leg), and `text`: positions apart by form feeds, events by line feeds.
    """
    chunks = [one for ledger in ledgers for one in _chunks(ledger)]
    legs = {ledger.log.meta.variant: list(ledger.log.meta.leg_names) for ledger in ledgers}
    starts, first = [], 0
    for ledger in ledgers:
        starts.append(first)
        first += -(-ledger.log.terms.size // CHUNK)
    return {"size": CHUNK, "legs": legs, "first_chunk": starts, "chunks": chunks}


def _chunks(ledger: Ledger) -> Iterator[dict[str, Any]]:
    """Yield the chunks of one variant's positions, in the order of the terms."""
    log = ledger.log
    marks, mark_edges = _grouped(log, log.marks)
    mine = np.flatnonzero(log.events["position"] >= 0)
    owner = rows_of(log.terms["position"], log.events["position"][mine])
    order = np.argsort(owner, kind="stable")
    numbers = mine[order]
    event_edges = np.searchsorted(owner[order], np.arange(log.terms.size + 1))
    size = np.abs(log.terms["net_debit"]) + log.terms["reserve"]
    for start in range(0, log.terms.size, CHUNK):
        stop = min(start + CHUNK, log.terms.size)
        stories = (
            "\n".join(sentence(log, int(row)) for row in numbers[event_edges[at] : event_edges[at + 1]])
            for at in range(start, stop)
        )
        text = "\f".join(stories)
        chosen = marks[mark_edges[start] : mark_edges[stop]]
        step = 10.0 ** np.floor(np.log10(max(float(np.median(size[start:stop])), 1.0) * DETAIL_DIGITS))
        yield {
            "count": column(np.diff(mark_edges[start : stop + 1])),
            "marks": _mark_columns(log, chosen, float(step)),
            "text": deflated(text.encode("utf-8")),
        }


def _grouped(log: EventLog, marks: Records) -> tuple[Records, np.ndarray]:
    """Return the marks by position, and where each position's begin (P + 1,)."""
    owner = rows_of(log.terms["position"], marks["position"])
    order = np.argsort(owner, kind="stable")
    return marks[order], np.searchsorted(owner[order], np.arange(log.terms.size + 1))


def _mark_columns(log: EventLog, marks: Records, step: float) -> dict[str, Any]:
    first = int(log.days["session"][0]) if log.days.size else 0
    columns = {
        "session": column(marks["session"] - first),
        "spot": column(marks["spot"], 0.01),
        "shares": column(marks["shares"], 0.01),
        "gain": column(marks["gain"], step),
    }
    for name in LEG_FIELDS[: len(log.meta.legs)]:
        columns[name] = column(marks[name], step)
    return columns
