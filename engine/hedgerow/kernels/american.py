"""American options on a lognormal price; one option at a time.

Arguments, units and limits are those of `hedgerow.kernels.lognormal`. Puts without a dividend yield are read
off the table of `hedgerow.kernels.exercise`; for the others, and the few outside it, the exercise boundary is
found as `hedgerow.kernels.boundary` says. A call is a put with price and strike, rate and dividend yield
exchanged (McDonald & Schroder 1998, "A parity result for American options", Journal of Computational
Finance 1). Where the rate is negative and the dividend yield lower still, exercise has two boundaries; such
a put gets the larger of its European and intrinsic value.
"""

from __future__ import annotations

import math
from typing import NamedTuple

from hedgerow.kernels.boundary import Problem, exercise_depths, exercise_premium, is_exercised, top_of
from hedgerow.kernels.exercise import is_tabled, tabled_premium
from hedgerow.kernels.jit import compiled
from hedgerow.kernels.layout import CALL, PUT
from hedgerow.kernels.lognormal import discount, european, intrinsic, is_certain
from hedgerow.kernels.normal import ROOT_HALF, cdf

__all__ = [
    "Span",
    "american",
    "american_or_european",
    "call_exercise_is_due_before_dividend",
    "early_exercise_bound",
    "on_forward",
    "put_exercise_is_due",
]

_NOTHING = 1e-9  # an early exercise premium under this share of the strike is left out


class Span(NamedTuple):
    """The time to an expiry, worked out once for all options that expire then."""

    years: float
    root: float  # of the years
    rate: float
    discount: float  # of money due at the expiry


@compiled
def _most_likely(
    spot: float, level: float, years: float, rate: float, dividend_yield: float, volatility: float
) -> float:
    """Find the largest chance, over all times up to `years`, that the price stands at or under `level`.

    With a = ln(spot/level) > 0 and drift m the chance at time s is N(-(a + m s)/(volatility sqrt(s))). Its
    argument has one turning point, at s = a/m, so the chance is largest there or at the end.
    """
    away = math.log(spot / level)
    return _reached(away, years, rate - dividend_yield - 0.5 * volatility * volatility, volatility)


@compiled
def _reached(away: float, years: float, drift: float, volatility: float) -> float:
    """The largest chance, over all times up to `years`, to be `away` or more under today's logarithm."""
    if away <= 0.0:
        return 1.0
    when = years
    if drift > 0.0:
        when = min(years, away / drift)
    return cdf(-(away + drift * when) / (volatility * math.sqrt(when)))


@compiled
def _put_bound(
    spot: float, strike: float, years: float, rate: float, dividend_yield: float, volatility: float
) -> float:
    """Bound what early exercise can add to a put, money per share; see `early_exercise_bound`."""
    if is_certain(spot, strike, years, volatility):
        return max(strike, 0.0) * max(discount(rate, years), 1.0)
    most = rate if dividend_yield >= 0.0 else rate - dividend_yield
    if most <= 0.0:
        return 0.0
    time = years if rate == 0.0 else (1.0 - math.exp(-rate * years)) / rate
    level = strike * min(1.0, rate / dividend_yield) if dividend_yield > 0.0 else strike
    return most * strike * time * _most_likely(spot, level, years, rate, dividend_yield, volatility)


@compiled
def early_exercise_bound(
    right: int,
    spot: float,
    strike: float,
    years: float,
    rate: float,
    dividend_yield: float,
    volatility: float,
) -> float:
    """Bound American less European value from above, money per share, for about one exp and one erfc.

    Proof, for a put. American less European value is the integral over s in (0, T) of
    E[e^(-r s) (r K - q S_s); S_s in the exercise region at s] (Carr, Jarrow & Myneni 1992). Exercise is never
    rational over the strike, nor where r K < q S, so the region lies under L = K min(1, r/q) for q > 0 and
    under K otherwise. In it r K - q S_s is at most c = r K for q >= 0 and at most c = (r - q) K for q < 0.
    So the premium is at most c x (integral of e^(-r s)) x (largest chance over s that S_s <= L), and zero
    when c <= 0. A call is a put with price and strike, rate and yield exchanged: without a yield and with a
    rate of zero or more its bound is 0. Where all is certain (no time, no volatility) the bound is coarse.
    """
    if years <= 0.0:
        return 0.0
    if right == CALL:
        return _put_bound(strike, spot, years, dividend_yield, rate, volatility)
    return _put_bound(spot, strike, years, rate, dividend_yield, volatility)


@compiled
def _certain_put(spot: float, strike: float, years: float, rate: float, dividend_yield: float) -> float:
    """Value an American put whose price follows its forward: the best moment is an end or a turn."""
    now = strike - spot
    end = strike * discount(rate, years) - spot * discount(dividend_yield, years)
    best = max(now, end, 0.0)
    gains, costs = dividend_yield * spot, rate * strike
    if gains * costs > 0.0 and rate != dividend_yield:
        turn = math.log(gains / costs) / (dividend_yield - rate)
        if 0.0 < turn < years:
            best = max(best, strike * discount(rate, turn) - spot * discount(dividend_yield, turn))
    return best


@compiled
def _solved_premium(log_moneyness: float, problem: Problem) -> float:
    """Value what early exercise adds to a put that is not exercised now, in strikes; 0 where it is."""
    depths = exercise_depths(problem)
    if is_exercised(log_moneyness, depths, problem):
        return 0.0
    return exercise_premium(log_moneyness, 0.0, depths, problem)


@compiled
def _put_premium(
    spot: float,
    strike: float,
    years: float,
    rate: float,
    dividend_yield: float,
    volatility: float,
    most: float,
) -> float:
    """Value what early exercise adds to a put that is not exercised now, money per share; 0 where it is.

    Never over the bound `most`; nothing where that is negligible or exercise has two boundaries.
    """
    if rate < 0.0 or not most > _NOTHING * strike:
        return 0.0
    log_moneyness = math.log(spot / strike)
    if dividend_yield == 0.0:
        return min(strike * _plain_premium(log_moneyness, years, math.sqrt(years), rate, volatility), most)
    problem = Problem(years, rate, dividend_yield, volatility, top_of(rate, dividend_yield))
    return min(strike * _solved_premium(log_moneyness, problem), most)


@compiled
def _plain_premium(log_moneyness: float, years: float, root: float, rate: float, volatility: float) -> float:
    """Value what early exercise adds to a put without dividends that is not exercised now, in strikes."""
    leaning, deviation = rate * root / volatility, volatility * root
    if is_tabled(leaning, deviation):
        return max(tabled_premium(log_moneyness, leaning, deviation), 0.0)
    return _solved_premium(log_moneyness, Problem(years, rate, 0.0, volatility, top_of(rate, 0.0)))


@compiled
def _early_exercise(
    right: int,
    spot: float,
    strike: float,
    years: float,
    rate: float,
    dividend_yield: float,
    volatility: float,
    most: float,
) -> float:
    """Value what early exercise adds, at most `most`, to an option not exercised now; 0 where it is."""
    if right == CALL:
        return _put_premium(strike, spot, years, dividend_yield, rate, volatility, most)
    return _put_premium(spot, strike, years, rate, dividend_yield, volatility, most)


@compiled
def american(
    right: int,
    spot: float,
    strike: float,
    years: float,
    rate: float,
    dividend_yield: float,
    volatility: float,
) -> float:
    """Value an American option, money per share; never under its European nor its intrinsic value."""
    gain = intrinsic(right, spot, strike)
    if years <= 0.0:
        return gain
    if is_certain(spot, strike, years, volatility):
        if right == CALL:
            return _certain_put(strike, spot, years, dividend_yield, rate)
        return _certain_put(spot, strike, years, rate, dividend_yield)
    most = early_exercise_bound(right, spot, strike, years, rate, dividend_yield, volatility)
    extra = _early_exercise(right, spot, strike, years, rate, dividend_yield, volatility, most)
    value = european(right, spot, strike, years, rate, dividend_yield, volatility) + extra
    return gain if value < gain else value


@compiled
def american_or_european(
    right: int,
    spot: float,
    strike: float,
    years: float,
    rate: float,
    dividend_yield: float,
    volatility: float,
    tick: float,
) -> float:
    """Value an American option, as a European one where exercise is proven to add under half a tick.

    `tick` is the least step of a premium, money per share. See `early_exercise_bound` for the proof.
    """
    plain = european(right, spot, strike, years, rate, dividend_yield, volatility)
    most = early_exercise_bound(right, spot, strike, years, rate, dividend_yield, volatility)
    if most < 0.5 * tick:
        return plain
    if is_certain(spot, strike, years, volatility):
        return american(right, spot, strike, years, rate, dividend_yield, volatility)
    extra = _early_exercise(right, spot, strike, years, rate, dividend_yield, volatility, most)
    value, gain = plain + extra, intrinsic(right, spot, strike)
    return gain if value < gain else value


@compiled
def on_forward(
    right: int, spot: float, strike: float, away: float, volatility: float, span: Span, tick: float
) -> float:
    """Value what `american_or_european` values, without dividends, where more is known beforehand.

    `away` is ln(strike / forward). An infinite `tick` makes it European. One formula less a few logarithms:
    with the strike's own K = K e^(-r T) + interest, the bound on early exercise is that interest times the
    largest chance to be under the strike.
    """
    if not (spot > 0.0 and volatility > 0.0 and span.rate >= 0.0):
        return american_or_european(right, spot, strike, span.years, span.rate, 0.0, volatility, tick)
    owed = strike * span.discount
    deviation = volatility * span.root
    d1 = 0.5 * deviation - away / deviation
    a, b = d1 * ROOT_HALF, (d1 - deviation) * ROOT_HALF
    if right == CALL:
        return max(0.5 * (spot * math.erfc(-a) - owed * math.erfc(-b)), 0.0)
    plain = max(0.5 * (owed * math.erfc(b) - spot * math.erfc(a)), 0.0)
    interest = strike - owed
    if interest < 0.5 * tick:
        return plain
    over = -(away + span.rate * span.years)
    drift = span.rate - 0.5 * volatility * volatility
    most = interest * _reached(over, span.years, drift, volatility)
    if most < 0.5 * tick:
        return plain
    extra = strike * _plain_premium(over, span.years, span.root, span.rate, volatility)
    return max(plain + min(extra, most), strike - spot)


@compiled
def put_exercise_is_due(
    spot: float, strike: float, years: float, rate: float, dividend_yield: float, volatility: float
) -> bool:
    """Tell whether exercising an American put now is worth at least as much as keeping it.

    True where the price is at or under the exercise boundary for the time left. At or after expiry: whether
    it is in the money. Never without interest to gain.
    """
    gain = intrinsic(PUT, spot, strike)
    if gain <= 0.0 or years <= 0.0:
        return gain > 0.0
    if is_certain(spot, strike, years, volatility):
        return gain >= _certain_put(spot, strike, years, rate, dividend_yield)
    if rate <= 0.0 or european(PUT, spot, strike, years, rate, dividend_yield, volatility) > gain:
        return False
    problem = Problem(years, rate, dividend_yield, volatility, top_of(rate, dividend_yield))
    return is_exercised(math.log(spot / strike), exercise_depths(problem), problem)


@compiled
def call_exercise_is_due_before_dividend(
    spot: float, strike: float, years: float, rate: float, dividend: float, volatility: float
) -> bool:
    """Tell whether a call is rationally exercised at the last close before its stock pays `dividend`.

    True where exercise now pays more than the call is worth once the dividend (money per share) has left the
    price, with `years` to expiry. The same as dividend > K (1 - e^(-r years)) + put of the same strike (Hull,
    early exercise of calls on dividend-paying stocks), so never when it is at most K (1 - e^(-r years)).
    """
    if dividend <= 0.0 or spot <= strike:
        return False
    return spot - strike > european(CALL, spot - dividend, strike, years, rate, 0.0, volatility)
