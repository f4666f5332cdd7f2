"""Every trade as columns of the page: figures, legs, values by day, and what happened.

Positions are counted through all variants, in the order of the study and then of the terms. Events and values
by day lie in chunks of CHUNK positions, of which a page unpacks one when a trade is opened.
"""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from typing import Any

import numpy as np
import pandas as pd

from hedgerow.events.kinds import reason_words
from hedgerow.events.log import EventLog
from hedgerow.kernels import layout as at
from hedgerow.kernels.layout import Floats, Records
from hedgerow.ledger import Ledger
from hedgerow.ledger.marks import LEG_FIELDS, rows_of
from hedgerow.ledger.positions import TRADE_COLUMNS
from hedgerow.report.curves import days_since_1970
from hedgerow.report.pack import column, words

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
CENT, PRICE = 0.01, 1e-4
SAME_PRICE = 0.00005
"""Distance below which a fill counts as at the middle (`events.narrate`)."""
ORDINAL_OF_1970 = 719163
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
    """Return {size, variants, first_chunk, chunks}: what pictures of trades and stories are made from.

    variants: legs as [name, right] and the words of reasons, by variant. A chunk holds `marks` and `events`,
    counts by position; columns `mark` (`day`, `spot`, `gain`, one of each leg); and columns `event`, of which
    `pages/story.js` makes the sentences of `events.narrate`.
    """
    variants = {
        ledger.log.meta.variant: {
            "legs": [[leg.name, leg.right] for leg in ledger.log.meta.legs],
            "reasons": list(reason_words(ledger.log.meta.exits)),
        }
        for ledger in ledgers
    }
    chunks: list[dict[str, Any]] = []
    starts = []
    for ledger in ledgers:
        starts.append(len(chunks))
        chunks += _chunks(ledger.log)
    return {"size": CHUNK, "variants": variants, "first_chunk": starts, "chunks": chunks}


def _chunks(log: EventLog) -> Iterator[dict[str, Any]]:
    """Yield the chunks of one variant's positions, in the order of the terms."""
    marks, mark_edges = _grouped(log, log.marks)
    events, event_edges = _grouped(log, log.events[log.events["position"] >= 0])
    size = np.abs(log.terms["net_debit"]) + log.terms["reserve"]
    for start in range(0, log.terms.size, CHUNK):
        stop = min(start + CHUNK, log.terms.size)
        step = 10.0 ** np.floor(np.log10(max(float(np.median(size[start:stop])), 1.0) * DETAIL_DIGITS))
        yield {
            "marks": column(np.diff(mark_edges[start : stop + 1])),
            "events": column(np.diff(event_edges[start : stop + 1])),
            "mark": _mark_columns(log, marks[mark_edges[start] : mark_edges[stop]], float(step)),
            "event": _event_columns(log, events[event_edges[start] : event_edges[stop]]),
        }


def _grouped(log: EventLog, records: Records) -> tuple[Records, np.ndarray]:
    """Return records by position, in their order, and where each position's begin (P + 1,)."""
    owner = rows_of(log.terms["position"], records["position"])
    order = np.argsort(owner, kind="stable")
    return records[order], np.searchsorted(owner[order], np.arange(log.terms.size + 1))


def _mark_columns(log: EventLog, marks: Records, step: float) -> dict[str, Any]:
    columns = {
        "day": _days(log, marks),
        "spot": column(marks["spot"], CENT),
        "gain": column(marks["gain"], step),
    }
    for name in LEG_FIELDS[: len(log.meta.legs)]:
        columns[name] = column(marks[name], step)
    return columns


def _event_columns(log: EventLog, events: Records) -> dict[str, Any]:
    """Columns of events, prices as they are told.

    `mid` is unknown where it is told to be the price; `odd` are the cents by which cash differs from
    -(quantity x price) - fee.
    """
    price, fee, quantity = _told(events["price"], 4), _told(events["fee"], 2), _told(events["quantity"], 2)
    expected = np.floor((-quantity * price - fee) * 100.0 + 0.5)
    ends = np.isin(events["kind"], (at.KIND_EXPIRED, at.KIND_EXERCISED, at.KIND_ASSIGNED))
    same = np.abs(events["price"] - events["mid"]) < SAME_PRICE
    return {
        "day": _days(log, events),
        "kind": column(events["kind"]),
        "leg": column(events["leg"]),
        "reason": column(events["reason"]),
        "expiry": column(np.where(events["expiry"] > 0, events["expiry"] - ORDINAL_OF_1970, np.nan)),
        "quantity": column(quantity, CENT),
        "price": column(price, PRICE),
        "mid": column(np.where(same, np.nan, _told(events["mid"], 4)), PRICE),
        "fee": column(fee, CENT),
        "odd": column(np.rint(events["cash"] * 100.0) - expected),
        "strike": column(_told(events["strike"], 2), CENT),
        "spot": column(np.where(ends, _told(events["spot"], 2), 0.0), CENT),
    }


def _told(values: Floats, places: int) -> Floats:
    """Values rounded as they are written, each by its own decimals: a half seen in binary is often none."""
    return np.array([round(value, places) for value in values.tolist()], dtype=np.float64)


def _days(log: EventLog, records: Records) -> dict[str, Any]:
    """The days of records as a column, counted from 1970-01-01."""
    return column(days_since_1970(log.meta.dates[records["session"]]))
