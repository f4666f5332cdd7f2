"""The surface of volatility: what an option of any strike and expiry would cost at each close.

Why the default is what it is. Neither weights nor ratio nor skew were fitted to a result of this program.
One choice was made after seeing one: `close` was first taken about the mean, under which 21 sessions alone
would have missed a bound of the BuyWrite check (correlation .9597, at least .96) that they meet about zero
(.963). The reason below for about zero stands by itself, but a reader should know the order of things.

- Level: the mean of the logarithms of close-to-close volatility over 10, 63 and 252 sessions (two weeks, a
  quarter, a year). Against the 30-day at-the-money implied volatility of five large US stocks in 2023 such a
  blend was off by 12 % (median absolute error), a 21-session estimate by 23 %, a 63-session one by 13 %
  (recomputed from chains). Traders price the recent past and its habit of going away together: the short
  term answers a shock within days, the long ones remember what is normal. About zero, not about the mean:
  the mean of ten moves is mostly noise, and taking it out would cost a tenth of what they know.
- Ratio 1, points 0: implied over that blend was 1.00 for those stocks; single stocks held no significant
  premium in 1996-2003 (Driessen, Maenhout & Vilkov 2009). Index options do hold one: at-the-money implied
  stood near 1.10 of realized (recomputed from public index levels since 1990). Who writes index options can
  write `ratio: 1.1`; it is not the default, since it would pay every seller a premium that stocks do not.
- Pull 0: the year in the blend already pulls to the long run, at every tenor alike. A pull by tenor is there
  for positions of very different tenors; its anchor is the trailing three years.
- Skew -.11 and curvature +.05 per standard deviation: through the 25-delta put at 1.10 and the 25-delta call
  at .95 of at the money, at 30 and at 91 days (recomputed from the same chains). The same slope in standard
  deviations at both tenors means a slope in log-moneyness that falls with 1/sqrt(T), hence no further decay.
  The 10-delta put comes out at 1.27-1.30 against 1.35 observed. Beyond 2.5 deviations the smile stays flat:
  nothing was observed there.
- Report 5 moves: 30-day implied falls by about a third across an earnings report (same chains). A report that
  counts as one move of m ordinary days adds m^2 - 1 daily variances to about 20.7; m = 5 gives a fall of .32.
  The sessions that reacted to a report are then left out of the estimates, or they would be paid for twice.
- Floor 5 %, cap 300 %: against stale prices and broken ones; neither binds in ordinary markets.
"""

from __future__ import annotations

import math
from dataclasses import dataclass

import numpy as np

from hedgerow.errors import StudyError
from hedgerow.kernels.layout import DAYS_A_YEAR, Floats, SmileModel
from hedgerow.kernels.smile import at_the_money, skew_scale, steepest, volatility_at
from hedgerow.market.table import Market
from hedgerow.volatility.blend import Term, blended, reaction_sessions
from hedgerow.volatility.model import SurfaceModel
from hedgerow.volatility.observed import NONE, observed_level
from hedgerow.volatility.registry import Bars

__all__ = ["Surface", "SurfaceModel", "build", "with_smile"]

LONGEST_DAYS = 1100
_ANCHOR_HISTORY_SESSIONS = 252
_TENORS, _TOTALS, _STEPS = 24, 24, 50


@dataclass(frozen=True, eq=False)
class Surface:
    """Level and anchor of volatility (T, N), annual fractions known at each close, and the smile on them."""

    level: Floats
    anchor: Floats
    smile: SmileModel
    model: SurfaceModel

    def at_the_money(self, session: int, symbol: int, days: float, report_inside: bool = False) -> float:
        """At-the-money volatility (annual fraction) for `days` calendar days from that close; NaN unknown."""
        level, anchor = float(self.level[session, symbol]), float(self.anchor[session, symbol])
        return at_the_money(level, anchor, float(days), report_inside, self.smile)

    def volatility(self, atm: float, strike: float, forward: float, days: float) -> float:
        """Volatility (annual fraction) of a strike, given at-the-money volatility; one for call and put."""
        moneyness = math.log(strike / forward)
        return volatility_at(atm, moneyness, days / DAYS_A_YEAR, float(days), self.smile)


def build(model: SurfaceModel, market: Market, days: tuple[int, int] = (1, LONGEST_DAYS)) -> Surface:
    """Build the surface of a market; `days` is the range of calendar days to expiry that will be used.

    Raises StudyError when the observed series is not there, and when somewhere over those tenors, the wing of
    the smile and the volatilities present a call would rise, or a put fall, with its strike.
    """
    level, anchor = _level(model, market), None
    if model.pull > 0.0:
        bars = Bars.of(market, reaction_sessions(market) if model.report_moves > 1.0 else None)
        far = blended(bars, [Term("close", float(model.anchor))], _ANCHOR_HISTORY_SESSIONS)
        anchor = np.where(np.isnan(far), level, far)
    surface = Surface(_frozen(level), _frozen(level if anchor is None else anchor), model.smile, model)
    _refuse_arbitrage(surface, days, bool(market.reports))
    return surface


def with_smile(
    surface: Surface, model: SurfaceModel, with_reports: bool, days: tuple[int, int] = (1, LONGEST_DAYS)
) -> Surface:
    """Return a surface with its level and anchor as they are and the smile of another model.

    `model` may differ from the surface's own in what the smile holds (ratio, points, pull, skew and so on),
    not in what the level is estimated from. Raises StudyError as `build` does.
    """
    changed = Surface(surface.level, surface.anchor, model.smile, model)
    _refuse_arbitrage(changed, days, with_reports)
    return changed


def _frozen(values: Floats) -> Floats:
    out = np.ascontiguousarray(values)
    out.flags.writeable = False
    return out


def _level(model: SurfaceModel, market: Market) -> Floats:
    if model.observed != NONE:
        return observed_level(market, model.observed, model.observed_scale)
    leave_out = reaction_sessions(market) if model.report_moves > 1.0 else None
    return blended(Bars.of(market, leave_out), model.terms, model.history_sessions)


def _refuse_arbitrage(surface: Surface, days: tuple[int, int], with_reports: bool) -> None:
    """Raise StudyError where prices of a strike order would cross; see `kernels.smile.steepest`."""
    known = ~np.isnan(surface.level)
    if not known.any():
        return
    levels, anchors = surface.level[known], surface.anchor[known]
    low, high = (float(levels.min()), float(anchors.min())), (float(levels.max()), float(anchors.max()))
    for tenor in np.geomspace(days[0], max(days), _TENORS):
        root_years = math.sqrt(tenor / DAYS_A_YEAR)
        least = at_the_money(*low, tenor, False, surface.smile) * root_years
        most = at_the_money(*high, tenor, with_reports, surface.smile) * root_years
        scale = skew_scale(tenor, surface.smile)
        for total in np.geomspace(least, most, _TOTALS):
            room, deviations = steepest(total, scale, _STEPS, surface.smile)
            if room < 0.0:
                raise _arbitrage(float(tenor), float(total), deviations)


def _arbitrage(days: float, total: float, deviations: float) -> StudyError:
    strike = 100.0 * math.exp(deviations * total)
    volatility = total / math.sqrt(days / DAYS_A_YEAR)
    found = (
        f"the smile is too steep: {days:.0f} days from expiry, at {volatility:.1%} at the money, a call would"
        f" rise or a put fall with its strike near {strike:.4g} (forward 100, {deviations:+.2f} deviations)"
    )
    allowed = "calls must fall and puts rise with the strike"
    remedy = "bring skew and curvature nearer to 0, or make the wing narrower"
    return StudyError.one("pricing.volatility", "arbitrage", found, allowed, remedy)
