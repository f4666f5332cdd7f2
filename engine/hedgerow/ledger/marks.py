"""Values of open positions at a close, from the table of marks."""

from __future__ import annotations

import numpy as np
import pandas as pd
from numpy.typing import NDArray

from hedgerow.events.log import EventLog, frame_of, words_by_code
from hedgerow.kernels.layout import MAX_LEGS

__all__ = ["LEG_FIELDS", "complete", "last_values", "marks_frame", "position_rows", "rows_of"]

LEG_FIELDS = tuple(f"leg{number}" for number in range(MAX_LEGS))


def position_rows(log: EventLog) -> NDArray[np.int64]:
    """Return the row of the table of terms (M,) of every mark; -1 for a position without terms."""
    return rows_of(log.terms["position"], log.marks["position"])


def rows_of(known: NDArray[np.int32], wanted: NDArray[np.int32]) -> NDArray[np.int64]:
    """Return the row of each wanted number among the known ones (in any order), -1 where it is not."""
    if not known.size:
        return np.full(wanted.size, -1, dtype=np.int64)
    order = np.argsort(known, kind="stable")
    place = np.minimum(np.searchsorted(known[order], wanted), known.size - 1)
    rows = order[place]
    return np.where(known[rows] == wanted, rows, -1).astype(np.int64)


def complete(log: EventLog) -> bool:
    """Whether every open position is marked at every close."""
    return bool(log.marks.size == int(log.days["positions"].astype(np.int64).sum()))


def last_values(log: EventLog) -> NDArray[np.float64]:
    """Return money (P, 5) of shares and legs of every position at the last close; NaN where not marked."""
    values = np.full((log.terms.size, MAX_LEGS + 1), np.nan)
    if log.days.size and log.marks.size:
        now = log.marks["session"] == log.days["session"][-1]
        marks, rows = log.marks[now], position_rows(log)[now]
        marks, rows = marks[rows >= 0], rows[rows >= 0]
        values[rows, 0] = marks["shares"] * marks["spot"]
        for number, field in enumerate(LEG_FIELDS):
            values[rows, number + 1] = marks[field]
    return values


def marks_frame(log: EventLog) -> pd.DataFrame:
    """Return the marks with dates and names: variant date symbol position shares spot gain stock LEG...

    One column a leg, named by the leg: its value in money at the model's mid. stock is shares x spot, money.
    """
    marks, rows = log.marks, position_rows(log)
    columns = {
        "variant": np.full(marks.size, log.meta.variant, dtype=object),
        "date": log.meta.dates[marks["session"]].astype("datetime64[s]"),
        "symbol": words_by_code(log.meta.symbols, log.terms["symbol"][rows], 0),
        "position": marks["position"].astype(np.int64),
        "shares": np.array(marks["shares"]),
        "spot": np.array(marks["spot"]),
        "gain": np.array(marks["gain"]),
        "stock": marks["shares"] * marks["spot"],
    }
    for name, field in zip(log.meta.leg_names, LEG_FIELDS, strict=False):
        columns[name] = np.array(marks[field])
    return frame_of(columns)
