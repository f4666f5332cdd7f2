"""The rows of a comparison: which figures are shown, under which heading, and how each is written."""

from __future__ import annotations

import math
from collections.abc import Callable
from dataclasses import dataclass

from hedgerow.evidence.figures import Curve, Summary
from hedgerow.units import money_text, number_text, percent_text

__all__ = ["ACCOUNT_ROWS", "SECTIONS", "Row"]


@dataclass(frozen=True, slots=True)
class Row:
    """One row: its label, its unit (written beside the label), and what it says of a summary."""

    label: str
    unit: str
    say: Callable[[Summary], str]


@dataclass(frozen=True, slots=True)
class CurveRow:
    """One row that the yardstick has too."""

    label: str
    unit: str
    say: Callable[[Curve], str]


def _percent(name: str, places: int = 1, signed: bool = False) -> Callable[[Summary], str]:
    return lambda summary: percent_text(getattr(summary, name), places, signed)


def _number(name: str, places: int, signed: bool = False) -> Callable[[Summary], str]:
    return lambda summary: number_text(float(getattr(summary, name)), places, signed)


def _money(name: str) -> Callable[[Summary], str]:
    return lambda summary: money_text(getattr(summary, name), places=0)


def _seen(summary: Summary) -> str:
    if math.isnan(summary.odds_observed) and summary.odds_positions:
        return "many left early"
    return percent_text(summary.odds_observed)


def _interval(summary: Summary) -> str:
    if math.isnan(summary.odds_low):
        return "-"
    return f"{percent_text(summary.odds_low, 0)} to {percent_text(summary.odds_high, 0)}"


ACCOUNT_ROWS: tuple[CurveRow, ...] = (
    CurveRow("Value at the end", "money", lambda curve: money_text(curve.last_value, places=0)),
    CurveRow("Growth", "a year", lambda curve: percent_text(curve.growth_a_year, 1, signed=True)),
    CurveRow("Volatility", "a year", lambda curve: percent_text(curve.volatility_a_year)),
    CurveRow("Sharpe ratio", "a year", lambda curve: number_text(curve.sharpe)),
    CurveRow("Sortino ratio", "a year", lambda curve: number_text(curve.sortino)),
    CurveRow("Deepest drawdown", "of peak", lambda curve: percent_text(curve.deepest_drawdown)),
    CurveRow("Longest drawdown", "days", lambda curve: number_text(float(curve.longest_drawdown_days), 0)),
)

SECTIONS: tuple[tuple[str, tuple[Row, ...]], ...] = (
    (
        "Trades",
        (
            Row("Positions", "count", _number("positions", 0)),
            Row("Win rate", "of ended", _percent("win_rate")),
            Row("Break-even win rate", "of ended", _percent("break_even_win_rate")),
            Row("Average win", "of debit", _percent("average_win", 2)),
            Row("Average loss", "of debit", _percent("average_loss", 2)),
            Row("Expectancy a trade", "of debit", _percent("expectancy", 2, signed=True)),
            Row("Expectancy a trade", "money", _number("expectancy_money", 0, signed=True)),
            Row("Profit factor", "ratio", _number("profit_factor", 2)),
            Row("Time held", "sessions", _number("average_sessions", 1)),
            Row("Time invested", "of sessions", _percent("time_invested", 0)),
            Row("Capital at work", "of equity", _percent("capital_at_work", 0)),
        ),
    ),
    (
        "Where the money came from",
        (
            Row("Stock", "money", _money("stock_pnl")),
            Row("Options", "money", _money("option_pnl")),
            Row("Dividends", "money", _money("dividends")),
            Row("Interest", "money", _money("interest")),
            Row("Costs", "money", lambda summary: money_text(-summary.costs, places=0)),
        ),
    ),
    (
        "Best gain: odds and fact",
        (
            Row("Ran to their end", "positions", _number("odds_positions", 0)),
            Row("Forecast at entry", "mean odds", _percent("odds_forecast")),
            Row("Seen", "of those", _seen),
            Row("Seen, 95% interval", "of those", _interval),
        ),
    ),
)
