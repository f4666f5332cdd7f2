"""From a level and an anchor of volatility to the volatility of one option.

Four steps, each a small scalar: the level is pulled to the anchor by tenor, a premium is laid on it, a known
report inside the tenor bumps it, and the strike bends it. One volatility serves the call and the put of a
strike, so put-call parity holds by construction. An unknown level (NaN) gives an unknown volatility.
"""

from __future__ import annotations

import math

from hedgerow.kernels.jit import compiled
from hedgerow.kernels.layout import DAYS_A_YEAR, SESSIONS_A_YEAR, SmileModel

__all__ = [
    "LEAST_BEND",
    "at_the_money",
    "at_the_money_pulled",
    "bend_of_strike",
    "bent",
    "pull_weight",
    "skew_scale",
    "volatility_at",
]

LEAST_BEND = 0.3
_TENOR_OF_SKEW_DAYS = 30.0
_SQRT_TWO_PI = math.sqrt(2.0 * math.pi)
_FAR_TAIL = -25.0


@compiled
def pull_weight(kappa: float, years: float) -> float:
    """Weight of today's level over `years`: the mean of exp(-kappa t) for t in [0, years]; 1 without pull.

    Variance and volatility that revert at a yearly rate kappa have this share of today's gap left on average.
    Source: integral of an Ornstein-Uhlenbeck mean, a standard result.
    """
    pull = kappa * years
    if pull <= 0.0:
        return 1.0
    return -math.expm1(-pull) / pull


@compiled
def at_the_money_pulled(
    level: float, anchor: float, weight: float, days: float, report_inside: bool, model: SmileModel
) -> float:
    """At-the-money volatility (annual fraction) over `days`, for a `weight` of today's level already known.

    A report inside the tenor adds the variance of one move of `report_moves` ordinary daily moves in place of
    one ordinary day. Floor and cap bound the ordinary volatility; the report's bump stands on top of it.
    """
    base = level
    if weight != 1.0:
        base = anchor + (level - anchor) * weight
    atm = base * model.ratio + model.points
    if atm < model.floor:
        atm = model.floor
    if atm > model.cap:
        atm = model.cap
    if report_inside and model.report_moves != 1.0:
        sessions = SESSIONS_A_YEAR * max(days, 1.0) / DAYS_A_YEAR
        extra = (model.report_moves * model.report_moves - 1.0) / sessions
        atm = atm * math.sqrt(1.0 + extra)
    return atm


@compiled
def at_the_money(level: float, anchor: float, days: float, report_inside: bool, model: SmileModel) -> float:
    """At-the-money volatility (annual fraction) over calendar `days` to expiry; NaN when the level is."""
    weight = pull_weight(model.kappa, days / DAYS_A_YEAR)
    return at_the_money_pulled(level, anchor, weight, days, report_inside, model)


@compiled
def skew_scale(days: float, model: SmileModel) -> float:
    """Factor on skew and curvature: (30 / days) ** skew_decay, 1 without decay."""
    if model.skew_decay == 0.0:
        return 1.0
    return math.pow(_TENOR_OF_SKEW_DAYS / max(days, 1.0), model.skew_decay)


@compiled
def bend_of_strike(deviations: float, scale: float, model: SmileModel) -> float:
    """Volatility over at-the-money volatility at `deviations` standardized log-moneyness."""
    z = min(max(deviations, -model.wing), model.wing)
    return max(LEAST_BEND, 1.0 + scale * z * (model.skew + model.curvature * z))


@compiled
def bent(atm: float, deviations: float, scale: float, model: SmileModel) -> float:
    """Volatility (annual fraction) at `deviations` standardized log-moneyness; flat where that is NaN."""
    if (model.skew == 0.0 and model.curvature == 0.0) or math.isnan(deviations):
        return atm
    return atm * bend_of_strike(deviations, scale, model)


@compiled
def volatility_at(atm: float, log_moneyness: float, years: float, days: float, model: SmileModel) -> float:
    """Volatility (annual fraction) of the option whose ln(strike / forward) is `log_moneyness`.

    `years` is the time left, `days` the calendar days to expiry; without time left the smile is flat.
    """
    if not (atm > 0.0 and years > 0.0):
        return atm
    return bent(atm, log_moneyness / (atm * math.sqrt(years)), skew_scale(days, model), model)


@compiled
def room_for_slope(d2: float) -> float:
    """N(d2) / n(d2): the greatest slope of the smile at which calls still fall with the strike.

    With total volatility v(z) = s g(z) at strike F exp(z s): dCall/dK = -N(d2) + n(d2) g'(z) and
    dPut/dK = N(-d2) + n(d2) g'(z), discounted alike. Derived from Black 1976; g'(z) is the slope of the total
    volatility in the log of the strike.
    """
    if d2 < _FAR_TAIL:
        return (1.0 - 1.0 / (d2 * d2)) / -d2
    if d2 > -_FAR_TAIL:
        return math.inf
    return 0.5 * math.erfc(-d2 / math.sqrt(2.0)) * math.exp(0.5 * d2 * d2) * _SQRT_TWO_PI


@compiled
def steepest(total: float, scale: float, steps: int, model: SmileModel) -> tuple[float, float]:
    """Least room left for the slope at one total volatility, and the standardized moneyness where it is.

    `total` is at-the-money volatility times sqrt(years). Negative room: there a call rises or a put falls
    with its strike. `steps` points span the wing on either side.
    """
    least, where = math.inf, 0.0
    for i in range(2 * steps + 1):
        z = model.wing * (i - steps) / steps
        bend = bend_of_strike(z, scale, model)
        slope = scale * (model.skew + 2.0 * model.curvature * z) if bend > LEAST_BEND else 0.0
        d2 = -z / bend - 0.5 * total * bend
        room = min(room_for_slope(d2) - slope, room_for_slope(-d2) + slope)
        if room < least:
            least, where = room, z
    return least, where
