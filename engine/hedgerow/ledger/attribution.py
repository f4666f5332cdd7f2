"""Where the money came from: stock, each leg, dividends, interest and costs, by position, day and month."""

from __future__ import annotations

import numpy as np
import pandas as pd
from numpy.typing import NDArray

from hedgerow.events.log import EventLog, frame_of, words_by_code
from hedgerow.kernels.layout import MAX_LEGS
from hedgerow.ledger.marks import LEG_FIELDS, complete, last_values
from hedgerow.ledger.postings import ACCOUNT, COSTS, DIVIDENDS, INTEREST, LEG, STOCK, Postings
from hedgerow.units import CENTS, to_cents

__all__ = ["by_day", "by_month", "by_position"]

Floats = NDArray[np.float64]


def by_position(postings: Postings) -> pd.DataFrame:
    """Return money by position: variant symbol position stock LEG... dividends interest costs pnl.

    One column a leg, named by the leg. costs are negative here, so that every row sums to its pnl, to the
    cent. An open position counts its last mark, NaN without one.
    """
    log = postings.log
    value = last_values(log)
    value[postings.closed >= 0] = 0.0
    whole = np.where(np.isnan(value), np.nan, to_cents(np.nan_to_num(value)))
    cents = postings.by_position().astype(np.float64)
    cents[:, STOCK : LEG + MAX_LEGS] += whole
    columns = {
        "variant": np.full(log.terms.size, log.meta.variant, dtype=object),
        "symbol": words_by_code(log.meta.symbols, log.terms["symbol"], 0),
        "position": log.terms["position"].astype(np.int64),
        **_parts(log, cents / CENTS, [LEG + number for number in range(len(log.meta.legs))]),
        "pnl": cents[:, :ACCOUNT].sum(axis=1) / CENTS,
    }
    return frame_of(columns)


def by_day(postings: Postings) -> pd.DataFrame:
    """Return money by session: variant date stock options-or-LEG... dividends interest costs deposits change.

    Stock and options are what was posted that day plus the change of their value at the close. Legs stand
    apart when every position is marked at every close, otherwise in one column `options`. costs are
    negative. deposits are no gain. The row sums to `change`, that day's change of equity (the first day
    counts from zero).
    """
    log = postings.log
    money = postings.by_day() / CENTS
    money[:, STOCK] += _change(log.days["stock"])
    if complete(log) and log.meta.legs:
        for number, value in enumerate(_leg_values(log)):
            money[:, LEG + number] += _change(value)
        parts = _parts(log, money, [LEG + number for number in range(len(log.meta.legs))])
    else:
        options = money[:, LEG : LEG + MAX_LEGS].sum(axis=1) + _change(log.days["options"])
        parts = _parts(log, money, [])
        parts = {"stock": parts.pop("stock"), "options": options, **parts}
    columns = {
        "variant": np.full(log.days.size, log.meta.variant, dtype=object),
        "date": log.meta.dates[log.days["session"]].astype("datetime64[s]"),
        **parts,
        "deposits": money[:, ACCOUNT],
        "change": _change(log.days["equity"]),
    }
    return frame_of(columns)


def by_month(postings: Postings) -> pd.DataFrame:
    """Return `by_day` summed by calendar month; `month` is the first day of it."""
    days = by_day(postings)
    days.insert(1, "month", days.pop("date").to_numpy().astype("datetime64[M]").astype("datetime64[s]"))
    return days.groupby(["variant", "month"], sort=True).sum().reset_index()


def _parts(log: EventLog, money: Floats, legs: list[int]) -> dict[str, Floats]:
    named = {log.meta.legs[heading - LEG].name: money[:, heading] for heading in legs}
    return {
        "stock": money[:, STOCK],
        **named,
        "dividends": money[:, DIVIDENDS],
        "interest": money[:, INTEREST],
        "costs": money[:, COSTS],
    }


def _change(level: Floats) -> Floats:
    return np.diff(level, prepend=0.0)


def _leg_values(log: EventLog) -> list[Floats]:
    """Return the value (T,) of each leg over all positions at every close."""
    rank = np.searchsorted(log.days["session"], log.marks["session"])
    return [
        np.asarray(np.bincount(rank, weights=log.marks[field], minlength=log.days.size))
        for field, _ in zip(LEG_FIELDS, log.meta.legs, strict=False)
    ]
