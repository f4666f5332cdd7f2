"""Every figure of a summary with its unit and its meaning."""

from __future__ import annotations

import dataclasses
import math
from collections.abc import Mapping
from dataclasses import dataclass, field
from typing import Any

__all__ = ["Curve", "Figure", "Summary", "figures_of"]


def _says(unit: str, meaning: str) -> dict[str, str]:
    return {"unit": unit, "meaning": meaning}


@dataclass(frozen=True, slots=True)
class Figure:
    """One figure: its value, its unit, and what it means."""

    value: Any
    unit: str
    meaning: str

    def as_dict(self) -> dict[str, Any]:
        """Return the figure as plain values; what is not known or not finite becomes null."""
        return {"value": _plain(self.value), "unit": self.unit, "meaning": self.meaning}


@dataclass(frozen=True, slots=True)
class Curve:
    """What a curve of account values says; the same figures for the account and for its yardstick."""

    first_value: float = field(metadata=_says("money", "value at the start"))
    last_value: float = field(metadata=_says("money", "value at the last close"))
    whole_growth: float = field(metadata=_says("fraction", "last value over first value, less one"))
    growth_a_year: float = field(
        metadata=_says("fraction a year", "constant yearly growth from first to last value, by calendar days")
    )
    volatility_a_year: float = field(
        metadata=_says(
            "fraction a year", "standard deviation of session returns times the square root of 252"
        )
    )
    sharpe: float = field(
        metadata=_says(
            "ratio a year", "mean session return above interest over its standard deviation, times root 252"
        )
    )
    sortino: float = field(
        metadata=_says(
            "ratio a year", "mean session return above interest over its downside deviation, times root 252"
        )
    )
    deepest_drawdown: float = field(metadata=_says("fraction", "largest fall from a highest value so far"))
    deepest_from: str = field(metadata=_says("date", "close of the peak before the deepest fall"))
    deepest_to: str = field(metadata=_says("date", "close of the lowest value of the deepest fall"))
    longest_drawdown_days: int = field(
        metadata=_says(
            "calendar days", "longest time from a peak until it is reached again, or until the end"
        )
    )
    longest_from: str = field(metadata=_says("date", "close of the peak before the longest fall"))


@dataclass(frozen=True, slots=True)
class Summary:
    """One variant in figures. Wins and losses are of positions that are over; both are positive numbers."""

    variant: str = field(metadata=_says("name", "the variant"))
    strategy: str = field(metadata=_says("name", "the strategy"))
    currency: str = field(metadata=_says("name", "currency of all money"))
    first_date: str = field(metadata=_says("date", "first session"))
    last_date: str = field(metadata=_says("date", "last session"))
    sessions: int = field(metadata=_says("sessions", "sessions walked"))
    positions: int = field(metadata=_says("positions", "positions opened"))
    positions_open: int = field(metadata=_says("positions", "positions still open at the last session"))
    win_rate: float = field(
        metadata=_says("fraction", "positions over with a result above nothing, of positions over")
    )
    break_even_win_rate: float = field(
        metadata=_says(
            "fraction",
            "average loss over average win plus average loss; the win rate must be above it to earn",
        )
    )
    average_win: float = field(
        metadata=_says("fraction of net debit", "mean result of winners on what they tied up")
    )
    average_loss: float = field(
        metadata=_says("fraction of net debit", "mean loss of losers on what they tied up")
    )
    average_win_money: float = field(metadata=_says("money", "mean result of winners"))
    average_loss_money: float = field(metadata=_says("money", "mean loss of losers"))
    expectancy: float = field(
        metadata=_says("fraction of net debit", "mean result of positions over on what they tied up")
    )
    expectancy_money: float = field(metadata=_says("money", "mean result of positions over"))
    profit_factor: float = field(metadata=_says("ratio", "money won by winners over money lost by losers"))
    average_sessions: float = field(
        metadata=_says("sessions", "mean sessions from opening to end of positions over")
    )
    time_invested: float = field(
        metadata=_says("fraction", "sessions that closed with a position open, of all sessions")
    )
    capital_at_work: float = field(
        metadata=_says("fraction", "mean share of equity in stock and options at the close")
    )
    stock_pnl: float = field(metadata=_says("money", "result of stock at mid, all positions"))
    option_pnl: float = field(metadata=_says("money", "result of all legs at mid, all positions"))
    dividends: float = field(metadata=_says("money", "dividends received less dividends owed"))
    interest: float = field(metadata=_says("money", "interest on cash less the cost of borrowed shares"))
    costs: float = field(
        metadata=_says("money", "spread, slippage, commissions and assignment fees; positive is paid")
    )
    outcomes: Mapping[str, int] = field(metadata=_says("positions by outcome", "how positions ended"))
    reasons: Mapping[str, int] = field(
        metadata=_says("positions by reason", "what ended them, exit rules by name")
    )
    declined: Mapping[str, int] = field(
        metadata=_says("entries by reason", "entries that were not made, and why")
    )
    odds_positions: int = field(
        metadata=_says(
            "positions",
            "positions that kept their first legs to the end and had odds of the best gain at entry",
        )
    )
    odds_forecast: float = field(
        metadata=_says("fraction", "mean odds of the best gain at entry, of those positions")
    )
    odds_observed: float = field(
        metadata=_says(
            "fraction",
            "share of those positions that ended at the best gain; unknown where over a tenth left early",
        )
    )
    odds_low: float = field(
        metadata=_says("fraction", "lower end of the 95 % interval of the observed share (Wilson)")
    )
    odds_high: float = field(
        metadata=_says("fraction", "upper end of the 95 % interval of the observed share (Wilson)")
    )
    account: Curve = field(metadata=_says("figures", "the account's equity at each close"))
    yardstick: Curve | None = field(metadata=_says("figures", "the yardstick on the same sessions"))
    yardstick_name: str = field(metadata=_says("name", "what the yardstick is"))

    @property
    def odds_held(self) -> bool | None:
        """Whether the forecast lies inside the interval of what was observed; None without positions."""
        if self.odds_positions == 0:
            return None
        return self.odds_low <= self.odds_forecast <= self.odds_high

    def as_dict(self) -> dict[str, Any]:
        """Return every figure as {value, unit, meaning}, ready for JSON; curves as mappings of figures."""
        return _described(self)


def figures_of(record: Summary | Curve) -> dict[str, Figure]:
    """Return the figures of a record by name, in order; nested curves are left out."""
    return {
        one.name: Figure(getattr(record, one.name), one.metadata["unit"], one.metadata["meaning"])
        for one in dataclasses.fields(record)
        if not isinstance(getattr(record, one.name), Curve)
    }


def _described(record: Summary | Curve) -> dict[str, Any]:
    described: dict[str, Any] = {}
    for one in dataclasses.fields(record):
        value = getattr(record, one.name)
        figure = Figure(value, one.metadata["unit"], one.metadata["meaning"])
        described[one.name] = _described(value) if isinstance(value, Curve) else figure.as_dict()
    return described


def _plain(value: Any) -> Any:
    if isinstance(value, Mapping):
        return {str(key): int(count) for key, count in value.items()}
    if isinstance(value, float) and not math.isfinite(value):
        return None
    return value
