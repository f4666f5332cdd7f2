"""The summary of one run: trades, account and forecasts in figures."""

from __future__ import annotations

import math
from typing import Any

import numpy as np
import pandas as pd
from numpy.typing import NDArray

from hedgerow.events import kinds
from hedgerow.events.log import EventLog
from hedgerow.evidence import odds, ratios
from hedgerow.evidence.drawdown import deepest, longest
from hedgerow.evidence.figures import Curve, Summary
from hedgerow.kernels import layout as at
from hedgerow.ledger import Ledger
from hedgerow.ledger.positions import ran_to_first_expiry
from hedgerow.ledger.postings import INTEREST
from hedgerow.units import CENTS

__all__ = ["curve_of", "declined_entries", "summarise"]

LEAST_RUN_OUT = 0.9  # share of positions that must run to their end before odds and fact are compared: what
# is left when a rule cuts or rolls many is a choice of its making, mostly winners or mostly losers

Floats = NDArray[np.float64]
Dates = NDArray[np.datetime64]


def summarise(
    ledger: Ledger,
    rate: Floats | None = None,
    yardstick: Floats | pd.Series[float] | None = None,
    yardstick_name: str = "buy and hold",
) -> Summary:
    """Return the summary of a ledger.

    rate: annual continuously compounded interest (T,) by session of the log's days, or of all its dates; None
    counts excess over nothing. yardstick: account values on the same sessions, likewise, or a series by date.
    Raises ValueError when a rate or yardstick fits neither.
    """
    log = ledger.log
    dates = log.meta.dates[log.days["session"]]
    interest = None if rate is None else _on_days(log, rate, "rate")
    equity = np.array(log.days["equity"])
    if equity.size:
        equity[0] = log.meta.opening_cash or equity[0]
    other = None
    if yardstick is not None:
        other = curve_of(_on_days(log, yardstick, "yardstick"), dates, interest)
    return Summary(
        variant=log.meta.variant,
        strategy=log.meta.strategy,
        currency=log.meta.currency,
        first_date=str(dates[0]) if dates.size else "",
        last_date=str(dates[-1]) if dates.size else "",
        sessions=int(dates.size),
        **_trade_figures(ledger.trades),
        **_money_figures(ledger),
        **_odds_figures(ledger),
        time_invested=_mean(log.days["positions"] > 0),
        capital_at_work=_share_at_work(log),
        declined=declined_entries(log),
        account=curve_of(equity, dates, interest),
        yardstick=other,
        yardstick_name=yardstick_name if other is not None else "",
    )


def curve_of(values: Floats, dates: Dates, rate: Floats | None = None) -> Curve:
    """Return the figures of account values (T,) at closes; rate (T,) annual, continuously compounded."""
    if not values.size:
        nan = math.nan
        return Curve(nan, nan, nan, nan, nan, nan, nan, nan, "", "", 0, "")
    returns = ratios.returns_of(values)
    excess = ratios.excess_returns(returns, rate)
    days = int((dates[-1] - dates[0]).astype("timedelta64[D]").astype(np.int64))
    deep, (slow, slow_days) = deepest(values), longest(values, dates)
    first, last = float(values[0]), float(values[-1])
    return Curve(
        first_value=first,
        last_value=last,
        whole_growth=last / first - 1.0 if first > 0 else math.nan,
        growth_a_year=ratios.growth_a_year(first, last, days),
        volatility_a_year=ratios.volatility_a_year(returns),
        sharpe=ratios.sharpe(excess),
        sortino=ratios.sortino(excess),
        deepest_drawdown=deep.depth,
        deepest_from=str(dates[deep.peak]) if deep.depth > 0 else "",
        deepest_to=str(dates[deep.trough]) if deep.depth > 0 else "",
        longest_drawdown_days=slow_days,
        longest_from=str(dates[slow.peak]) if slow_days > 0 else "",
    )


def declined_entries(log: EventLog) -> dict[str, int]:
    """Return how many entries were not made, by reason, the most frequent first."""
    events = log.events
    declined = events[(events["kind"] == at.KIND_DECLINED) & (events["position"] < 0)]  # not of rolls
    counts = np.bincount(declined["reason"], weights=np.maximum(declined["quantity"], 1.0))
    codes = np.flatnonzero(counts)
    words = {kinds.reason_word(int(code), log.meta.exits): int(counts[code]) for code in codes}
    return dict(sorted(words.items(), key=lambda item: (-item[1], item[0])))


def _on_days(log: EventLog, values: Floats | pd.Series[float], name: str) -> Floats:
    """Return values by session of the log's days."""
    if isinstance(values, pd.Series):
        by_date = values.copy()
        by_date.index = pd.DatetimeIndex(by_date.index).as_unit("s")
        wanted = pd.DatetimeIndex(log.meta.dates[log.days["session"]].astype("datetime64[s]"))
        found = by_date.reindex(wanted).to_numpy(dtype=np.float64)
        if np.isnan(found).any():
            raise ValueError(
                f"the {name} has no value for {int(np.isnan(found).sum())} sessions of the account's days"
            )
        return np.asarray(found)
    array = np.asarray(values, dtype=np.float64)
    if array.size == log.days.size:
        return array
    if array.size == log.meta.dates.size:
        return np.asarray(array[log.days["session"]])
    raise ValueError(
        f"the {name} has {array.size} values, but the account has {log.days.size} days to compare with"
    )


def _share_at_work(log: EventLog) -> float:
    held, equity = log.days["stock"] + log.days["options"], log.days["equity"]
    return _mean(np.divide(held, equity, out=np.full(equity.size, math.nan), where=equity > 0))


def _trade_figures(trades: pd.DataFrame) -> dict[str, Any]:
    over = trades[trades["outcome"] != kinds.OPEN]
    win, loss = over[over["pnl"] > 0], over[over["pnl"] < 0]
    average_win, average_loss = _mean(win["return_on_debit"]), -_mean(loss["return_on_debit"])
    sizes = (0.0 if math.isnan(size) else size for size in (average_win, average_loss))
    return {
        "positions": len(trades),
        "positions_open": len(trades) - len(over),
        "win_rate": len(win) / len(over) if len(over) else math.nan,
        "break_even_win_rate": odds.break_even_win_rate(*sizes),
        "average_win": average_win,
        "average_loss": average_loss,
        "average_win_money": _mean(win["pnl"]),
        "average_loss_money": -_mean(loss["pnl"]),
        "expectancy": _mean(over["return_on_debit"]),
        "expectancy_money": _mean(over["pnl"]),
        "profit_factor": odds.profit_factor(float(win["pnl"].sum()), -float(loss["pnl"].sum())),
        "average_sessions": _mean(over["sessions"]),
        "outcomes": _counts(trades["outcome"], kinds.OUTCOMES),
        "reasons": _counts(trades["reason"], ()),
    }


def _money_figures(ledger: Ledger) -> dict[str, Any]:
    trades = ledger.trades
    names = ("stock_pnl", "option_pnl", "dividends", "costs")
    figures: dict[str, Any] = {name: float(trades[name].sum(skipna=False)) for name in names}
    figures["interest"] = float(ledger.postings.by_day()[:, INTEREST].sum()) / CENTS
    return figures


def _odds_figures(ledger: Ledger) -> dict[str, Any]:
    counted, best = ran_to_first_expiry(ledger.postings)
    forecast = ledger.log.terms["odds_of_best"]
    counted = counted & ~np.isnan(forecast)
    over = ledger.trades["outcome"].to_numpy() != kinds.OPEN
    fair = counted.sum() >= LEAST_RUN_OUT * (over & ~np.isnan(forecast)).sum()
    times, trials = int((best & counted).sum()), int(counted.sum())
    low, high = odds.frequency_interval(times, trials) if fair else (math.nan, math.nan)
    return {
        "odds_positions": trials,
        "odds_forecast": _mean(forecast[counted]),
        "odds_observed": times / trials if trials and fair else math.nan,
        "odds_low": low,
        "odds_high": high,
    }


def _counts(words: pd.Series[str], order: tuple[str, ...]) -> dict[str, int]:
    counts = {str(word): int(count) for word, count in words.value_counts().items()}
    known = [word for word in order if word in counts]
    rest = sorted(set(counts) - set(known), key=lambda word: (-counts[word], word))
    return {word: counts[word] for word in known + rest}


def _mean(values: Any) -> float:
    array = np.asarray(values, dtype=np.float64)
    known = array[~np.isnan(array)]
    return float(known.mean()) if known.size else math.nan
