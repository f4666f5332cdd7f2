"""Options valued outside the package: by QuantLib, and by a plain lattice in numpy."""

from __future__ import annotations

from collections.abc import Sequence
from typing import NamedTuple

import numpy as np
import QuantLib as ql  # noqa: N813 - the name its own documentation uses

RIGHTS = (ql.Option.Call, ql.Option.Put)
TODAY = ql.Date(2, 1, 2020)


class Terms(NamedTuple):
    """One option; `days` are calendar days, a year has 365."""

    right: int
    spot: float
    strike: float
    days: int
    rate: float
    dividend_yield: float
    volatility: float

    @property
    def scalars(self) -> tuple[int, float, float, float, float, float, float]:
        """The arguments of the compiled scalars."""
        return (self.right, self.spot, self.strike, self.days / 365.0, *self[4:])


def draw(rng: np.random.Generator, days: tuple[int, int], with_yield: bool) -> Terms:
    """Draw a random option around the money: within about two and a half standard deviations."""
    left = int(rng.integers(*days))
    volatility = float(rng.uniform(0.08, 1.0))
    away = float(np.clip(rng.normal(), -2.5, 2.5)) * volatility * np.sqrt(left / 365.0)
    spot = 100.0 * float(np.exp(away))
    carry = float(rng.uniform(0.0, 0.1)) if with_yield else 0.0
    return Terms(int(rng.integers(2)), spot, 100.0, left, float(rng.uniform(0.001, 0.1)), carry, volatility)


def _process(terms: Terms) -> ql.BlackScholesMertonProcess:
    """Build the lognormal process of the option's stock."""
    ql.Settings.instance().evaluationDate = TODAY
    count = ql.Actual365Fixed()
    flat = [
        ql.YieldTermStructureHandle(ql.FlatForward(TODAY, rate, count))
        for rate in (terms.dividend_yield, terms.rate)
    ]
    smile = ql.BlackConstantVol(TODAY, ql.NullCalendar(), terms.volatility, count)
    spot = ql.QuoteHandle(ql.SimpleQuote(terms.spot))
    return ql.BlackScholesMertonProcess(spot, *flat, ql.BlackVolTermStructureHandle(smile))


def _dividends(cash: Sequence[tuple[int, float]]) -> ql.DividendSchedule:
    """Turn (days, money) into QuantLib's dividends."""
    days = [TODAY + day for day, _ in cash]
    return ql.DividendVector(days, [amount for _, amount in cash])


def european_option(terms: Terms, cash: Sequence[tuple[int, float]] = ()) -> ql.VanillaOption:
    """The European option under QuantLib's analytic engine, with cash dividends (days, money) escrowed."""
    exercise = ql.EuropeanExercise(TODAY + terms.days)
    option = ql.VanillaOption(ql.PlainVanillaPayoff(RIGHTS[terms.right], terms.strike), exercise)
    process = _process(terms)
    if cash:
        option.setPricingEngine(ql.AnalyticDividendEuropeanEngine(process, _dividends(cash)))
    else:
        option.setPricingEngine(ql.AnalyticEuropeanEngine(process))
    return option


def american_value(terms: Terms) -> float:
    """American value by QuantLib's QdFp engine at its accurate setting."""
    exercise = ql.AmericanExercise(TODAY, TODAY + terms.days)
    option = ql.VanillaOption(ql.PlainVanillaPayoff(RIGHTS[terms.right], terms.strike), exercise)
    scheme = ql.QdFpAmericanEngine.accurateScheme()
    option.setPricingEngine(ql.QdFpAmericanEngine(_process(terms), scheme))
    return float(option.NPV())


def american_with_cash(terms: Terms, cash: Sequence[tuple[int, float]], points: int = 400) -> float:
    """American value with escrowed cash dividends (days, money) by QuantLib's finite differences."""
    exercise = ql.AmericanExercise(TODAY, TODAY + terms.days)
    option = ql.VanillaOption(ql.PlainVanillaPayoff(RIGHTS[terms.right], terms.strike), exercise)
    engine = ql.FdBlackScholesVanillaEngine(
        _process(terms),
        _dividends(cash),
        points,
        points,
        0,
        ql.FdmSchemeDesc.Douglas(),
        False,
        -1.0,
        ql.FdBlackScholesVanillaEngine.Escrowed,
    )
    option.setPricingEngine(engine)
    return float(option.NPV())


def lattice_american(terms: Terms, steps: int) -> float:
    """American value by the binomial lattice of Cox, Ross & Rubinstein 1979, vectorised over a step.

    The mean of lattices of `steps` and `steps` + 1 steps, which cancels their zigzag.
    """
    return 0.5 * (_crr(terms, steps) + _crr(terms, steps + 1))


def _crr(terms: Terms, steps: int) -> float:
    """One lattice of Cox, Ross & Rubinstein."""
    right, spot, strike, years, rate, carry, volatility = terms.scalars
    sign = 1.0 if right == 0 else -1.0
    span = years / steps
    up = np.exp(volatility * np.sqrt(span))
    chance = (np.exp((rate - carry) * span) - 1.0 / up) / (up - 1.0 / up)
    shrink = np.exp(-rate * span)
    prices = spot * up ** (2.0 * np.arange(steps + 1) - steps)
    values = np.maximum(sign * (prices - strike), 0.0)
    for _ in range(steps):
        prices = prices[:-1] * up
        values = shrink * (chance * values[1:] + (1.0 - chance) * values[:-1])
        values = np.maximum(values, sign * (prices - strike))
    return float(values[0])
