"""One row a position: its terms, how it ended, and its result under every heading, to the cent."""

from __future__ import annotations

from typing import Any

import numpy as np
import pandas as pd
from numpy.typing import NDArray

from hedgerow.events import kinds
from hedgerow.events.log import EventLog, frame_of, words_by_code
from hedgerow.kernels import layout as at
from hedgerow.ledger.marks import last_values
from hedgerow.ledger.postings import COSTS, DIVIDENDS, INTEREST, LEG, STOCK, Postings
from hedgerow.units import CENTS, to_cents

__all__ = ["TRADE_COLUMNS", "capital_tied_up", "outcomes", "ran_to_first_expiry", "trades_frame"]

Ints = NDArray[np.int64]
Floats = NDArray[np.float64]

TRADE_COLUMNS = [
    "variant",
    "symbol",
    "position",
    "opened",
    "closed",
    "sessions",
    "lots",
    "shares",
    "stock_in",
    "stock_out",
    "net_debit",
    "best_gain",
    "worst_loss",
    "break_even",
    "odds_of_best",
    "reason",
    "outcome",
    "stock_pnl",
    "option_pnl",
    "dividends",
    "interest",
    "costs",
    "pnl",
    "return_on_debit",
]

TOLERANCE_CENTS_A_SHARE = 0.5
"""How near a bound counts as having reached it; fills are rounded to whole cents."""


def trades_frame(postings: Postings) -> pd.DataFrame:
    """Return one row a position, in the order of the terms, with the columns TRADE_COLUMNS.

    opened, closed: dates (NaT while open). sessions: from the first to the last. shares: at entry, signed.
    stock_in, stock_out: average price per share at which shares came and went, fills, in shares of the
    first day. net_debit, best_gain, worst_loss (positive), pnl: money of the whole position. stock_pnl and
    option_pnl are at mid, with the intrinsic value of a delivery counted on the option; pnl = stock_pnl +
    option_pnl + dividends + interest - costs. An open position is valued at its last mark, NaN without one.
    return_on_debit: pnl over `capital_tied_up`, fraction. reason and outcome: words, see `kinds.OUTCOMES`.
    """
    log, terms = postings.log, postings.log.terms
    money = _money(postings)
    is_open = postings.closed < 0
    dates = log.meta.dates.astype("datetime64[s]")
    last = np.where(
        is_open, log.days["session"][-1] if log.days.size else 0, log.events["session"][postings.closed]
    )
    closed = dates[last]
    closed[is_open] = np.datetime64("NaT")
    stock_in, stock_out = _stock_prices(postings)
    columns: dict[str, Any] = {
        "variant": np.full(terms.size, log.meta.variant, dtype=object),
        "symbol": words_by_code(log.meta.symbols, terms["symbol"], 0),
        "position": terms["position"].astype(np.int64),
        "opened": dates[terms["session"]],
        "closed": closed,
        "sessions": last.astype(np.int64) - terms["session"],
        "stock_in": stock_in,
        "stock_out": stock_out,
        "reason": _reasons(postings),
        "outcome": outcomes(postings),
        **money,
        "return_on_debit": money["pnl"] / capital_tied_up(log),
    }
    for name in ("lots", "shares", "net_debit", "best_gain", "worst_loss", "break_even", "odds_of_best"):
        columns[name] = np.array(terms[name])
    return frame_of(columns)[TRADE_COLUMNS]


def capital_tied_up(log: EventLog) -> Floats:
    """Return the money (P,) a position ties up: what a return is a fraction of.

    The net debit and what is set aside for what could be owed: for shares that are paid for the net debit,
    for a cash-secured put the strike less the premium. For shares sold short at least their price, since what
    their sale brought in is no capital of one's own. NaN when it is not positive.
    """
    terms = log.terms
    sold = np.maximum(-terms["shares"], 0.0) * terms["stock_price"]
    tied = np.maximum(terms["net_debit"] + terms["reserve"], np.where(sold > 0.0, sold, -np.inf))
    return np.asarray(np.where(tied > 0, tied, np.nan))


def outcomes(postings: Postings) -> NDArray[np.object_]:
    """Return the outcome word (P,) of every position (`kinds.OUTCOMES`).

    A position that ran to its end reached a bound when its result per share, before fees, dividends and the
    cost of leaving, is within half a cent of it. The result counts from the fills at entry, as the terms do.
    """
    reason = _codes(postings)
    result, tolerance = _result_cents(postings)
    terms = postings.log.terms
    best = result >= terms["best_gain"] * CENTS - tolerance
    floor = result <= -terms["worst_loss"] * CENTS + tolerance
    words = np.where(best, kinds.BEST_GAIN, np.where(floor, kinds.FLOOR, kinds.BETWEEN)).astype(object)
    words[reason >= at.WHY_EXIT_RULE] = kinds.CUT
    words[(reason == at.WHY_STOP) | (reason == at.WHY_STOP_GAP)] = kinds.STOP
    words[(reason == at.WHY_ASSIGNED_EARLY) | _ended_by_early_assignment(postings, reason)] = kinds.ASSIGNED
    words[reason == at.WHY_GONE] = kinds.GONE
    words[reason == at.WHY_OPEN_AT_END] = kinds.OPEN
    return words


def _ended_by_early_assignment(postings: Postings, reason: Ints) -> NDArray[np.bool_]:
    """Which positions (P,) an early assignment took apart: what it left was closed for that alone."""
    events = postings.log.events
    early = (events["kind"] == at.KIND_ASSIGNED) & (events["reason"] == at.WHY_ASSIGNED_EARLY)
    early &= postings.row >= 0
    session = np.full(reason.size, -1, dtype=np.int64)
    session[postings.row[early]] = events["session"][early]
    closed = np.where(postings.closed >= 0, events["session"][postings.closed], -2)
    left = (reason == at.WHY_LEFT_OVER) & (session >= 0)
    return np.asarray(left | ((reason == at.WHY_EXPIRY) & (session == closed)))


def ran_to_first_expiry(postings: Postings) -> tuple[NDArray[np.bool_], NDArray[np.bool_]]:
    """Return which positions (P,) kept their first legs to the end, and which reached their best gain.

    Those assigned early count: their shares left at the strike. Positions rolled, cut, stopped, with legs
    added later, gone or open are out, because the odds at entry do not speak of them.
    """
    events = postings.log.events
    changed = np.zeros(postings.log.terms.size, dtype=bool)
    later = (events["kind"] == at.KIND_LEG) & (
        (events["reason"] == at.WHY_ROLL) | (events["reason"] == at.WHY_ADDED)
    )
    changed[postings.row[later & (postings.row >= 0)]] = True
    words = outcomes(postings)
    ended = np.isin(words, [kinds.BEST_GAIN, kinds.BETWEEN, kinds.FLOOR, kinds.ASSIGNED])
    result, tolerance = _result_cents(postings)
    best = result >= postings.log.terms["best_gain"] * CENTS - tolerance
    return ended & ~changed, best


def _result_cents(postings: Postings) -> tuple[Floats, Floats]:
    """Return the result (P,) at mid less the spread at entry, and the tolerance, both in cents."""
    cents = postings.by_position()
    result = cents[:, STOCK : LEG + at.MAX_LEGS].sum(axis=1) - postings.entry_spread()
    terms = postings.log.terms
    size = np.maximum(np.abs(terms["shares"]), terms["lots"] * at.LOT_SHARES)
    return result.astype(np.float64), np.asarray(size * TOLERANCE_CENTS_A_SHARE)


def _money(postings: Postings) -> dict[str, Floats]:
    cents = postings.by_position()
    value = last_values(postings.log)
    value[postings.closed >= 0] = 0.0
    legs = slice(LEG, LEG + at.MAX_LEGS)
    stock = cents[:, STOCK] + _marked(value[:, 0])
    options = cents[:, legs].sum(axis=1) + _marked(value[:, 1:]).sum(axis=1)
    rest = {name: cents[:, at_] for name, at_ in (("dividends", DIVIDENDS), ("interest", INTEREST))}
    cost = -cents[:, COSTS]
    pnl = stock + options + rest["dividends"] + rest["interest"] - cost
    return {
        "stock_pnl": stock / CENTS,
        "option_pnl": options / CENTS,
        "dividends": rest["dividends"] / CENTS,
        "interest": rest["interest"] / CENTS,
        "costs": cost / CENTS,
        "pnl": pnl / CENTS,
    }


def _marked(value: Floats) -> Floats:
    """Return money as whole cents in floats, NaN where not known."""
    return np.where(np.isnan(value), np.nan, to_cents(np.nan_to_num(value)))


def _codes(postings: Postings) -> Ints:
    reason = np.full(postings.closed.size, at.WHY_OPEN_AT_END, dtype=np.int64)
    over = postings.closed >= 0
    reason[over] = postings.log.events["reason"][postings.closed[over]]
    return reason


def _reasons(postings: Postings) -> NDArray[np.object_]:
    return words_by_code(kinds.reason_words(postings.log.meta.exits), _codes(postings), 0)


def _stock_prices(postings: Postings) -> tuple[Floats, Floats]:
    """Return the average price of shares coming and going; coming is the way the first shares went."""
    log, count = postings.log, postings.log.terms.size
    moves = np.flatnonzero((log.events["kind"] == at.KIND_SHARES) & (postings.row >= 0))
    row, quantity = postings.row[moves], postings.first_units()[moves]
    price = log.events["price"][moves] * postings.scale[moves]
    way = np.zeros(count)
    way[row[::-1]] = np.sign(quantity[::-1])
    size = np.abs(quantity)

    def average(chosen: NDArray[np.bool_]) -> Floats:
        shares = np.bincount(row[chosen], weights=size[chosen], minlength=count)
        money = np.bincount(row[chosen], weights=(size * price)[chosen], minlength=count)
        return np.asarray(np.divide(money, shares, out=np.full(count, np.nan), where=shares > 0))

    came = np.sign(quantity) == way[row]
    return average(came), average(~came)
