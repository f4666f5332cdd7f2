"""The few figures of a variant that a large study keeps, read off the log's arrays without frames.

Each equals the figure of the same name in `evidence.figures.Summary` or `Curve`; the tests hold that. The
money of every variant is checked too: its postings must sum to the account's cash at every close.
"""

from __future__ import annotations

import dataclasses
import math
from dataclasses import dataclass, field
from typing import Any

import numpy as np
from numpy.typing import NDArray

from hedgerow.errors import ReconcileError
from hedgerow.events.kinds import KIND_WORDS
from hedgerow.events.log import EventLog
from hedgerow.evidence import odds, ratios
from hedgerow.evidence.described import says
from hedgerow.evidence.drawdown import drawdowns
from hedgerow.kernels import layout as at
from hedgerow.ledger.marks import rows_of
from hedgerow.units import CENTS, to_cents

__all__ = ["FIGURES", "STILL", "Brief", "brief_of", "curve_from"]

Floats = NDArray[np.float64]
Ints = NDArray[np.int64]

HALF_CENT = 0.005
STILL = 1e-6
"""Standard deviation of session returns below which an account counts as still: cash that earns interest, and
whose only risk is the rounding to cents. Its Sharpe ratio is huge and says nothing: it is never the best."""
KINDS = len(KIND_WORDS)
IS_TRADE = np.isin(
    np.arange(KINDS),
    (at.KIND_SHARES, at.KIND_LEG, at.KIND_EXPIRED, at.KIND_EXERCISED, at.KIND_ASSIGNED),
)


@dataclass(frozen=True, slots=True)
class Brief:
    """A variant in figures; wins and losses are of positions that are over, both positive."""

    last_value: float = field(metadata=says("money", "value at the last close"))
    whole_growth: float = field(metadata=says("fraction", "last value over first value, less one"))
    growth_a_year: float = field(metadata=says("fraction a year", "constant yearly growth"))
    volatility_a_year: float = field(metadata=says("fraction a year", "of session returns, times root 252"))
    sharpe: float = field(metadata=says("ratio a year", "mean return above interest over its deviation"))
    sortino: float = field(metadata=says("ratio a year", "mean return above interest over what fell short"))
    deepest_drawdown: float = field(metadata=says("fraction", "largest fall from a highest value so far"))
    positions: float = field(metadata=says("positions", "positions opened"))
    positions_open: float = field(metadata=says("positions", "positions still open at the last session"))
    win_rate: float = field(metadata=says("fraction", "winners of positions over"))
    break_even_win_rate: float = field(metadata=says("fraction", "what the win rate must be above to earn"))
    average_win: float = field(metadata=says("fraction of net debit", "mean result of winners"))
    average_loss: float = field(metadata=says("fraction of net debit", "mean loss of losers"))
    expectancy: float = field(metadata=says("fraction of net debit", "mean result of positions over"))
    profit_factor: float = field(metadata=says("ratio", "money won over money lost"))
    average_sessions: float = field(metadata=says("sessions", "mean from opening to end"))
    time_invested: float = field(metadata=says("fraction", "sessions that closed with a position open"))
    capital_at_work: float = field(metadata=says("fraction", "mean share of equity in stock and options"))
    dividends: float = field(metadata=says("money", "dividends received less dividends owed"))
    interest: float = field(metadata=says("money", "interest on cash less the cost of borrowed shares"))
    costs: float = field(metadata=says("money", "spread, slippage, commissions and fees; positive is paid"))


FIGURES = tuple(one.name for one in dataclasses.fields(Brief))


def curve_from(closes: Floats, opening_cash: float) -> Floats:
    """Equity at each close with the opening cash in the first one's place, as growth is counted from it."""
    curve = np.array(closes, dtype=np.float64, order="C")
    if curve.shape[-1]:
        curve[..., 0] = opening_cash
    return curve


def brief_of(log: EventLog, rate: Floats) -> Brief:
    """The figures of a log; `rate` (T,) by session of its dates, annual. Raises ReconcileError.

    ReconcileError: the cash of some close is not the sum of the postings before it, or equity not its parts.
    """
    days, kind = log.days, np.array(log.events["kind"], np.int64)
    cents = np.rint(log.events["cash"] * CENTS)  # cash is in whole cents, which doubles sum exactly
    _check_money(log, cents)
    interest = rate[days["session"]]
    curve = curve_from(days["equity"], log.meta.opening_cash)
    returns = ratios.returns_of(curve)
    excess = ratios.excess_returns(returns, interest)
    dates = log.meta.dates[days["session"][[0, -1]]]
    span = int((dates[1] - dates[0]).astype("timedelta64[D]").astype(np.int64))
    first, last = float(curve[0]), float(curve[-1])
    return Brief(
        last_value=last,
        whole_growth=last / first - 1.0 if first > 0 else math.nan,
        growth_a_year=ratios.growth_a_year(first, last, span),
        volatility_a_year=ratios.volatility_a_year(returns),
        sharpe=ratios.sharpe(excess),
        sortino=ratios.sortino(excess),
        deepest_drawdown=float(drawdowns(curve).max()),
        time_invested=float(np.mean(days["positions"] > 0)),
        capital_at_work=_at_work(log),
        **_trades(log, kind),
        **_money(log, kind, cents),
    )


def _check_money(log: EventLog, cents: Floats) -> None:
    """Raise ReconcileError at the first close whose cash is not its postings, or equity not its parts."""
    days = log.days
    posted = np.concatenate(([0.0], np.cumsum(cents)))
    until = np.searchsorted(np.ascontiguousarray(log.events["session"]), days["session"], side="right")
    whole = days["cash"] + days["stock"] + days["options"]
    wrong = ~(np.abs(days["cash"] - posted[until] / CENTS) < HALF_CENT)
    wrong |= ~(np.abs(days["equity"] - whole) <= HALF_CENT + 1e-9 * np.abs(whole))
    if wrong.any():
        session = int(days["session"][int(np.argmax(wrong))])
        raise ReconcileError(
            f"the log of this run does not add up at {log.meta.dates[session]}: run the variant by itself to "
            "see at which posting"
        )


def _at_work(log: EventLog) -> float:
    held, equity = log.days["stock"] + log.days["options"], log.days["equity"]
    return _mean((held / equity)[equity > 0] if (equity <= 0).any() else held / equity)


def _trades(log: EventLog, kind: Ints) -> dict[str, float]:
    """Figures of positions: a closed event carries the whole result of its position."""
    terms = log.terms
    closed = log.events[np.flatnonzero(kind == at.KIND_CLOSED)]
    row = rows_of(terms["position"], closed["position"])
    result = to_cents(closed["price"]) / CENTS
    tied = (terms["net_debit"] + terms["reserve"])[row]
    fraction = np.divide(result, tied, out=np.full(result.size, math.nan), where=tied > 0)
    win, loss = result > 0, result < 0
    average_win, average_loss = _mean(fraction[win]), -_mean(fraction[loss])
    sizes = (0.0 if math.isnan(size) else size for size in (average_win, average_loss))
    return {
        "positions": float(terms.size),
        "positions_open": float(terms.size - closed.size),
        "win_rate": float(win.sum()) / closed.size if closed.size else math.nan,
        "break_even_win_rate": odds.break_even_win_rate(*sizes),
        "average_win": average_win,
        "average_loss": average_loss,
        "expectancy": _mean(fraction),
        "profit_factor": odds.profit_factor(float(result[win].sum()), -float(result[loss].sum())),
        "average_sessions": _mean((closed["session"] - terms["session"][row]).astype(np.float64)),
    }


def _money(log: EventLog, kind: Ints, cents: Floats) -> dict[str, float]:
    """Dividends, interest and costs of the whole run, each from the events that post it."""
    by_kind = np.bincount(kind, weights=cents, minlength=KINDS)
    trade = np.flatnonzero(IS_TRADE[kind])
    size, mid = log.events["quantity"][trade], log.events["mid"][trade]
    lost = int(to_cents(-size * mid).sum()) - by_kind[IS_TRADE].sum()
    return {
        "dividends": float(by_kind[at.KIND_DIVIDEND]) / CENTS,
        "interest": float(by_kind[at.KIND_INTEREST] + by_kind[at.KIND_BORROW]) / CENTS,
        "costs": float(lost) / CENTS,
    }


def _mean(values: Any) -> float:
    known = values[~np.isnan(values)]
    return float(known.mean()) if known.size else math.nan
