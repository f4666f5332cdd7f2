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
from hedgerow.events.log import EventLog
from hedgerow.evidence import odds, ratios
from hedgerow.evidence.described import says
from hedgerow.evidence.drawdown import drawdowns
from hedgerow.kernels import layout as at
from hedgerow.ledger.marks import rows_of
from hedgerow.units import CENTS

__all__ = ["FIGURES", "STILL", "Brief", "brief_of", "curve_from"]

Floats = NDArray[np.float64]

HALF_CENT = 0.005
STILL = 1e-6
"""Standard deviation of session returns below which an account counts as still: cash that earns interest, and
whose only risk is the rounding to cents. Its Sharpe ratio is huge and says nothing: it is never the best."""


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
    from hedgerow.kernels.totals import SUMS, add_up  # loads compiled code, so only when it is to run

    days = log.days
    posted, sums, closed = np.zeros(days.size), np.zeros(SUMS), np.zeros((log.terms.size, 3))
    over = add_up(log.events.view(np.recarray), days.view(np.recarray), posted, sums, closed)
    _check_money(log, posted)
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
        **_trades(log, closed[:over]),
        **_money(sums),
    )


def _check_money(log: EventLog, posted: Floats) -> None:
    """Raise ReconcileError at the first close whose cash is not its postings, or equity not its parts."""
    days = log.days
    whole = days["cash"] + days["stock"] + days["options"]
    wrong = ~(np.abs(days["cash"] - posted / CENTS) < HALF_CENT)
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


def _trades(log: EventLog, closed: Floats) -> dict[str, float]:
    """Figures of positions: `closed` (P, 3) has number, result in cents and last session of those over."""
    terms = log.terms
    row = rows_of(terms["position"], closed[:, 0].astype(np.int32))
    result = closed[:, 1] / CENTS
    tied = (terms["net_debit"] + terms["reserve"])[row]
    fraction = np.divide(result, tied, out=np.full(result.size, math.nan), where=tied > 0)
    win, loss = result > 0, result < 0
    average_win, average_loss = _mean(fraction[win]), -_mean(fraction[loss])
    sizes = (0.0 if math.isnan(size) else size for size in (average_win, average_loss))
    return {
        "positions": float(terms.size),
        "positions_open": float(terms.size - len(closed)),
        "win_rate": float(win.sum()) / len(closed) if len(closed) else math.nan,
        "break_even_win_rate": odds.break_even_win_rate(*sizes),
        "average_win": average_win,
        "average_loss": average_loss,
        "expectancy": _mean(fraction),
        "profit_factor": odds.profit_factor(float(result[win].sum()), -float(result[loss].sum())),
        "average_sessions": _mean(closed[:, 2] - terms["session"][row]),
    }


def _money(sums: Floats) -> dict[str, float]:
    """Dividends, interest and costs of the whole run, from the sums of `kernels.totals`."""
    return {
        "dividends": float(sums[at.KIND_DIVIDEND]) / CENTS,
        "interest": float(sums[at.KIND_INTEREST] + sums[at.KIND_BORROW]) / CENTS,
        "costs": float(sums[-1]) / CENTS,
    }


def _mean(values: Any) -> float:
    known = values[~np.isnan(values)]
    return float(known.mean()) if known.size else math.nan
