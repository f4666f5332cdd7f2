"""American options on a stock with any number of known cash dividends, by a binomial lattice.

Slower than the formulas (a fraction of a millisecond) and made for people and for checking; the walk uses
`hedgerow.kernels.american`. The price less the present value of the dividends still to come is lognormal
(escrowed dividends; Hull, the chapter on basic numerical procedures, known dollar dividends).
"""

from __future__ import annotations

import math

import numpy as np

from hedgerow.kernels.boundary import Problem
from hedgerow.kernels.jit import compiled
from hedgerow.kernels.layout import CALL, Floats
from hedgerow.kernels.lognormal import european, intrinsic

__all__ = ["american_with_dividends", "escrowed"]

STEPS = 400


@compiled
def escrowed(from_years: float, problem: Problem, ex_years: Floats, amounts: Floats) -> float:
    """Sum the present value at `from_years` of dividends after it and up to expiry, money per share.

    `ex_years` and `amounts` are arrays of one length: years from now to each ex-date, money per share.
    """
    total = 0.0
    for k in range(len(ex_years)):
        if from_years < ex_years[k] <= problem.years:
            total += amounts[k] * math.exp(-problem.rate * (ex_years[k] - from_years))
    return total


@compiled
def _exercise_terms(
    right: int, step: int, strike: float, problem: Problem, ex_years: Floats, amounts: Floats
) -> tuple[float, float, float, float]:
    """Escrow and strike of exercising at a step, and of exercising at an ex-date before the next step.

    A call is exercised just before the ex-date, a put just after; both as values at the step.
    """
    here = step * problem.years / STEPS
    after = (step + 1) * problem.years / STEPS
    held = escrowed(here, problem, ex_years, amounts)
    held_then, strike_then = held, strike
    for k in range(len(ex_years)):
        if here < ex_years[k] <= min(after, problem.years):
            shrink = math.exp(-problem.rate * (ex_years[k] - here))
            strike_then = strike * shrink
            held_then = held
            if right != CALL:
                held_then = escrowed(ex_years[k], problem, ex_years, amounts) * shrink
    return held, strike, held_then, strike_then


@compiled
def american_with_dividends(
    right: int, spot: float, strike: float, problem: Problem, ex_years: Floats, amounts: Floats
) -> float:
    """Value an American option, money per share, on a stock with known cash dividends.

    `spot` is the price with its dividends; `ex_years`, `amounts` as in `escrowed`; `problem.top` is not used.
    Binomial lattice of STEPS steps with about even chances, and the European value by formula as control
    variate (Hull, the chapter on basic numerical procedures): lattice American - lattice European + European.
    """
    rest = max(spot - escrowed(0.0, problem, ex_years, amounts), 0.0)
    years, rate, carry, volatility = problem.years, problem.rate, problem.dividend_yield, problem.volatility
    plain = european(right, rest, strike, years, rate, carry, volatility)
    gain = intrinsic(right, spot, strike)
    if years <= 0.0 or volatility <= 0.0 or rest <= 0.0:
        return max(plain, gain)
    span = years / STEPS
    drift = (rate - carry - 0.5 * volatility * volatility) * span
    jump = volatility * math.sqrt(span)
    up, down = math.exp(drift + jump), math.exp(drift - jump)
    chance = (math.exp((rate - carry) * span) - down) / (up - down)
    shrink = math.exp(-rate * span)
    free = np.empty(STEPS + 1)
    bound = np.empty(STEPS + 1)
    for i in range(STEPS + 1):
        price = rest * math.exp(STEPS * drift + (2 * i - STEPS) * jump)
        bound[i] = intrinsic(right, price, strike)
        free[i] = bound[i]
    for step in range(STEPS - 1, -1, -1):
        held, owed, held_then, owed_then = _exercise_terms(right, step, strike, problem, ex_years, amounts)
        price = rest * math.exp(step * drift - step * jump)
        for i in range(step + 1):
            bound[i] = shrink * (chance * bound[i + 1] + (1.0 - chance) * bound[i])
            kept = shrink * (chance * free[i + 1] + (1.0 - chance) * free[i])
            now = intrinsic(right, price + held, owed)
            then = intrinsic(right, price + held_then, owed_then)
            free[i] = max(kept, now, then)
            price *= up / down
    return max(plain + float(free[0] - bound[0]), plain, gain)
