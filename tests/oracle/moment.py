"""What an option is worth to a trader at one moment: the smile, the dividends expected, the value.

The volatility rules are those of the written surface: the level drawn to its anchor by tenor, a premium, a
report's move, then the strike's place on the smile.
"""

from __future__ import annotations

import math
from dataclasses import dataclass, field
from typing import Any, NamedTuple

from oracle.past import Payer
from oracle.values import CALL, PUT, american, call_across_dividend, european

OPEN_HOURS = 6.5 / 24.0  # a session's length in days: what is left of the day at its open
SURFACE = {
    "kappa": 0.0,
    "ratio": 1.0,
    "points": 0.0,
    "skew": -0.11,
    "curvature": 0.05,
    "skew_decay": 0.0,
    "wing": 2.5,
    "report_moves": 5.0,
    "floor": 0.05,
    "cap": 3.0,
}


class Ahead(NamedTuple):
    """The dividends expected in an option's life, as one: years to the first, and their worth on that day."""

    years: float
    amount: float


class Puts:
    """American puts on a price that is `base` without the dividends ahead (Bjerksund & Stensland 2002)."""

    def value(
        self, base: float, strike: float, years: float, rate: float, volatility: float, ahead: Ahead | None
    ) -> float:
        """Money a share."""
        worth = american(PUT, base, strike, years, rate, 0.0, volatility)
        if ahead is None:
            return worth
        plain = european(PUT, base, strike, years, rate, 0.0, volatility)
        return max(plain, strike - base - ahead.amount * math.exp(-rate * ahead.years))

    def is_due(self, spot: float, strike: float, years: float, rate: float, volatility: float) -> bool:
        """Whether waiting is worth no more than what exercising now brings."""
        return self.value(spot, strike, years, rate, volatility, None) <= strike - spot


class Quote(NamedTuple):
    """Mid a share, its volatility, and how far the strike lies from the forward in deviations (>= 0)."""

    mid: float
    volatility: float
    deviations: float


@dataclass(frozen=True)
class Sight:
    """What is known of a symbol at a close."""

    level: float  # the last known one
    anchor: float
    fresh: bool  # whether the level is known at this very close
    payer: Payer
    report: int
    american: bool


@dataclass(frozen=True)
class Moment:
    """When, at which price and at which interest an option is valued."""

    ordinal: int
    spot: float
    rate: float
    extra_days: float = 0.0


@dataclass
class Pricer:
    """Values options on a surface of given numbers."""

    surface: dict[str, Any] = field(default_factory=dict)
    puts: Puts = field(default_factory=Puts)

    def number(self, name: str) -> float:
        """One number of the surface."""
        return float(self.surface.get(name, SURFACE[name]))

    def at_the_money(self, sight: Sight, expiry: int, moment: Moment) -> float:
        """Volatility at the forward, a report's move included."""
        days = expiry - moment.ordinal + moment.extra_days
        years, kappa = days / 365.0, self.number("kappa")
        pull = (1.0 - math.exp(-kappa * years)) / (kappa * years) if kappa * years > 0.0 else 1.0
        base = sight.anchor + (sight.level - sight.anchor) * pull if pull != 1.0 else sight.level
        base = base * self.number("ratio") + self.number("points")
        base = min(self.number("cap"), max(self.number("floor"), base))
        if moment.ordinal < sight.report <= expiry:
            extra = (self.number("report_moves") ** 2 - 1.0) * base * base / 252.0
            return math.sqrt(base * base + extra / (max(days, 1.0) / 365.0))
        return base

    def spot_and_forward(self, sight: Sight, expiry: int, moment: Moment) -> tuple[float, float]:
        """Spot less the dividends expected up to `expiry`, and the forward it grows to."""
        base = moment.spot
        for day, amount in sight.payer.between(moment.ordinal, expiry):
            base -= amount * math.exp(-moment.rate * (day - moment.ordinal) / 365.0)
        years = (expiry - moment.ordinal + moment.extra_days) / 365.0
        return base, base * math.exp(moment.rate * years)

    def smile(self, atm: float, deviations: float, days: float) -> float:
        """Volatility of a strike so many signed deviations from the forward."""
        wing = self.number("wing")
        z = max(-wing, min(wing, deviations))
        fade = (30.0 / max(days, 1.0)) ** self.number("skew_decay")
        return atm * max(0.3, 1.0 + fade * (self.number("skew") * z + self.number("curvature") * z * z))

    def quote(self, sight: Sight, right: int, strike: float, expiry: int, moment: Moment) -> Quote:
        """Mid, volatility and deviations of one option."""
        days = expiry - moment.ordinal + moment.extra_days
        base, forward = self.spot_and_forward(sight, expiry, moment)
        sign = 1.0 if right == CALL else -1.0
        if days <= 0.0:
            return Quote(max(0.0, sign * (moment.spot - strike)), 0.0, 0.0)
        years = days / 365.0
        atm = self.at_the_money(sight, expiry, moment)
        deviations = math.log(strike / forward) / (atm * math.sqrt(years))
        volatility = self.smile(atm, deviations, days)
        ahead = self.ahead(sight, base, expiry, moment)
        if not sight.american or (right == CALL and ahead is None):
            mid = european(right, base, strike, years, moment.rate, 0.0, volatility)
        elif right == PUT:
            mid = self.put(base, strike, years, moment.rate, volatility, ahead)
        else:
            mid = call_across_dividend(
                base, strike, years, moment.rate, volatility, ahead.years, ahead.amount
            )
        return Quote(mid, volatility, abs(deviations))

    def ahead(self, sight: Sight, base: float, expiry: int, moment: Moment) -> Ahead | None:
        """The dividends expected up to `expiry`, as one on the day of the first."""
        days = sight.payer.between(moment.ordinal, expiry)
        if not days:
            return None
        years = (days[0][0] - moment.ordinal + moment.extra_days) / 365.0
        return Ahead(years, (moment.spot - base) * math.exp(moment.rate * years))

    def put(
        self, base: float, strike: float, years: float, rate: float, volatility: float, ahead: Ahead | None
    ) -> float:
        """An American put; without interest to gain it is never exercised early."""
        if rate <= 0.0:
            return european(PUT, base, strike, years, rate, 0.0, volatility)
        return self.puts.value(base, strike, years, rate, volatility, ahead)

    def call_is_due(
        self, strike: float, years: float, moment: Moment, volatility: float, drop: float
    ) -> bool:
        """Whether a call's holder exercises before a dividend of `drop`: it brings more than is left."""
        after = moment.spot - drop
        left = european(CALL, after, strike, years, moment.rate, 0.0, volatility) if after > 0.0 else 0.0
        return moment.spot - strike > left

    def put_is_due(self, strike: float, years: float, moment: Moment, volatility: float) -> bool:
        """Whether a put's holder exercises at once: waiting is worth no more than what that brings."""
        if strike <= moment.spot or moment.rate <= 0.0:
            return False
        return self.puts.is_due(moment.spot, strike, years, moment.rate, volatility)
