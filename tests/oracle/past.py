"""What was known of one symbol at a close: volatility, dividends to come, reports to come, signals.

Everything is a plain list over sessions, None where unknown. Prices are as traded; a price of an earlier
session is put into today's shares by the splits that lie between, never by a later one.
"""

from __future__ import annotations

import itertools
import math
import statistics
from dataclasses import dataclass, field
from typing import Any

GAPS = (30, 91, 182, 365)


def known(value: float) -> bool:
    """Whether a number is there."""
    return value == value


@dataclass
class History:
    """One symbol's columns of a market, as plain lists over sessions."""

    symbol: str
    american: bool
    ordinals: list[int]
    open: list[float]
    high: list[float]
    low: list[float]
    close: list[float]
    dividend: list[float]
    special: list[float]
    split: list[float]
    implied: list[float]
    reports: list[tuple[int, int]] = field(default_factory=list)  # (announced, reaction) ordinals
    acts: list[tuple[float, float, float]] = field(default_factory=list)  # dividend, special, split at a bar

    @classmethod
    def of(cls, market: Any, number: int) -> History:
        """The columns of symbol `number` of a market."""
        lists = {
            name: getattr(market, name)[:, number].tolist()
            for name in ("open", "high", "low", "close", "dividend", "special", "split", "implied")
        }
        reports = [
            (int(report.announced_ordinal), int(report.reaction_ordinal))
            for report in market.reports
            if report.symbol_index == number
        ]
        ordinals = [int(day) for day in market.ordinals]
        american = market.kinds[number] == "stock"
        history = cls(market.symbols[number], american, ordinals, reports=reports, **lists)
        history.acts = history.acts_at_bars()
        return history

    def acts_at_bars(self) -> list[tuple[float, float, float]]:
        """Dividend, special dividend and split at each session with a bar.

        Those of a day without a bar wait for the next bar, the dividends restated in its shares.
        """
        out, waiting = [], (0.0, 0.0, 1.0)
        for t in range(len(self.close)):
            ratio = self.split[t]
            waiting = (
                waiting[0] / ratio + self.dividend[t],
                waiting[1] / ratio + self.special[t],
                waiting[2] * ratio,
            )
            out.append(waiting if self.has_bar(t) else (0.0, 0.0, 1.0))
            if self.has_bar(t):
                waiting = (0.0, 0.0, 1.0)
        return out

    def open_price(self, t: int) -> float:
        """The open; where it is not known the close before in today's shares, else the close."""
        if known(self.open[t]):
            return self.open[t]
        before = self.close[t - 1] / self.split[t] if t else math.nan
        return before if known(before) else self.close[t]

    def low_price(self, t: int) -> float:
        """The low, the open where that is lower or the low is not known."""
        return min(self.open_price(t), self.low[t]) if known(self.low[t]) else self.open_price(t)

    def high_price(self, t: int) -> float:
        """The high, the open where that is higher or the high is not known."""
        return max(self.open_price(t), self.high[t]) if known(self.high[t]) else self.open_price(t)

    def reactions(self) -> set[int]:
        """Sessions that reacted to a report: the first on or after the day of its reaction."""
        days = [next((t for t, day in enumerate(self.ordinals) if day >= r), -1) for _, r in self.reports]
        return {t for t in days if t >= 0}

    def has_bar(self, t: int) -> bool:
        """Whether the symbol traded at session `t`."""
        return known(self.close[t])

    def paid(self, t: int) -> float:
        """Every cash dividend that goes ex at session `t`, a share."""
        return self.dividend[t] + self.special[t]

    def growth(self, t: int) -> float | None:
        """Log of what a share held from the close before is worth at this close, its dividend added back."""
        if t == 0 or not self.has_bar(t) or not self.has_bar(t - 1):
            return None
        return math.log((self.close[t] + self.paid(t)) * self.split[t] / self.close[t - 1])

    def in_first_shares(self) -> list[float]:
        """Closes of the share that was held at the first session and never sold, splits followed."""
        factor, out = 1.0, []
        for t, close in enumerate(self.close):
            factor *= self.split[t]
            out.append(close * factor)
        return out

    def next_report(self, today: int) -> int:
        """Ordinal of the next session-day that will react to a report already announced; 0 none."""
        ahead = [reaction for announced, reaction in self.reports if announced <= today < reaction]
        return min(ahead, default=0)


def trailing_volatility(history: History, sessions: int, left_out: set[int]) -> list[float | None]:
    """Annual close-to-close volatility over the last `sessions`: root of the mean square about zero.

    Known from two thirds of the sessions on; none when prices stood still.
    """
    growths = [None if t in left_out else history.growth(t) for t in range(len(history.close))]
    out: list[float | None] = []
    for t in range(len(growths)):
        window = [g for g in growths[max(0, t - sessions + 1) : t + 1] if g is not None]
        value = None
        if len(window) >= max(2.0, sessions * 2.0 / 3.0):
            variance = math.fsum(g * g for g in window) / len(window)
            value = math.sqrt(variance * 252.0) if variance > 0.0 else None
        out.append(value)
    return out


def blended(parts: list[list[float | None]]) -> list[float | None]:
    """Mean of the logarithms of what is known at each session."""
    out: list[float | None] = []
    for values in zip(*parts, strict=True):
        logs = [math.log(value) for value in values if value is not None]
        out.append(math.exp(math.fsum(logs) / len(logs)) if logs else None)
    return out


def carried(values: list[float]) -> list[float]:
    """Each value, or the last known one where it is not known."""
    out, last = [], math.nan
    for value in values:
        last = value if known(value) else last
        out.append(last)
    return out


def observed(history: History) -> list[float]:
    """Volatility as it was quoted at each close; a quote stands for five more sessions at most."""
    out, last, age = [], math.nan, 0
    for value in history.implied:
        last, age = (value, 0) if known(value) else (last, age + 1)
        out.append(last if age <= 5 else math.nan)
    return out


HORIZONS = (10, 63, 252)


def level_and_anchor(history: History, surface: dict[str, Any]) -> tuple[list[float], list[float]]:
    """Volatility now and in the long run at each close; NaN until a quarter of returns is known.

    Now: the mean of logarithms over two weeks, a quarter and a year. In the long run: over `anchor` sessions
    once a year is known, before that the same. Reactions to reports are left out where a report has a move of
    its own.
    """
    if surface.get("observed") == "column":
        seen_levels = observed(history)
        return seen_levels, seen_levels
    left_out = history.reactions() if surface.get("report_moves", 5.0) > 1.0 else set()
    horizons = surface.get("horizons", HORIZONS)
    now = blended([trailing_volatility(history, sessions, left_out) for sessions in horizons])
    far = trailing_volatility(history, int(surface.get("anchor", 756)), left_out)
    least = int(surface.get("history", min(63, max(horizons))))
    levels, anchors, seen = [], [], 0
    for t, (near, long) in enumerate(zip(now, far, strict=True)):
        seen += t not in left_out and history.growth(t) is not None
        level = near if near is not None and seen >= least else math.nan
        levels.append(level)
        anchors.append(long if surface.get("kappa") and long is not None and seen >= 252 else level)
    return levels, anchors


@dataclass
class Payer:
    """The ordinary dividends a trader expected at one close: the next, and the gap of those after it."""

    amount: float = 0.0
    first: int = 0
    gap: int = 0

    def between(self, after: int, until: int) -> list[tuple[int, float]]:
        """Expected ex-days in (after, until], with the amount a share."""
        if self.first == 0 or self.amount <= 0.0:
            return []
        days, day = [], self.first
        while day <= until:
            if day > after:
                days.append((day, self.amount))
            if self.gap == 0:
                break
            day += self.gap
        return days


def expected_dividends(history: History) -> list[Payer]:
    """What was expected at each close: the last dividend again, at the usual gap of the last ones.

    The usual gap is the median of the last four, taken to the nearest (in proportion) of 30, 91, 182 and 365
    days. One that is overdue is expected the next day, for up to half a gap.
    """
    out, ex_days, amount = [], [], 0.0
    for t, today in enumerate(history.ordinals):
        amount /= history.split[t]
        if history.dividend[t] > 0.0:
            ex_days.append(today)
            amount = history.dividend[t]
        out.append(Payer())
        if len(ex_days) < 2:
            continue
        recent = ex_days[-5:]
        usual = statistics.median(b - a for a, b in itertools.pairwise(recent))
        gap = min(GAPS, key=lambda days: abs(math.log(usual / days)))
        due = ex_days[-1] + gap
        if due > today:
            out[-1] = Payer(amount, due, gap)
        elif today - due <= gap / 2.0:
            out[-1] = Payer(amount, today + 1, gap)
    return out


def close_over_mean(history: History, sessions: int) -> list[bool | None]:
    """Whether the close stands above the mean of the last `sessions` closes, its own among them."""
    return [None if rel is None else rel > 0.0 for rel in over_mean(history, sessions)]


def close_under_mean(history: History, sessions: int) -> list[bool | None]:
    """Whether the close stands below the mean of the last `sessions` closes, its own among them."""
    return [None if rel is None else rel < 0.0 for rel in over_mean(history, sessions)]


def bars_so_far(history: History) -> list[list[float]]:
    """Closes in first shares of every bar up to each session; none at a session without a bar."""
    seen: list[float] = []
    out = []
    for close in history.in_first_shares():
        if known(close):
            seen.append(close)
        out.append(list(seen) if known(close) else [])
    return out


def over_mean(history: History, sessions: int) -> list[float | None]:
    """Close less the mean of the last `sessions` closes in first shares; None while there are fewer bars."""
    out: list[float | None] = []
    for closes in bars_so_far(history):
        window = closes[-sessions:]
        out.append(window[-1] - math.fsum(window) / sessions if len(window) == sessions else None)
    return out


def momentum(history: History, sessions: int) -> list[float]:
    """Close over the close `sessions` bars before, less one, in first shares; NaN where unknown."""
    return [
        closes[-1] / closes[-1 - sessions] - 1.0 if len(closes) > sessions else math.nan
        for closes in bars_so_far(history)
    ]
