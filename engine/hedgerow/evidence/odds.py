"""Arithmetic of many trades: break-even win rates, expectancy, compounding, and intervals of a frequency.

A win and a loss are positive fractions of what a position ties up (0.021 is 2.1 %).
"""

from __future__ import annotations

import math
from statistics import NormalDist

__all__ = ["after_trades", "break_even_win_rate", "expectancy", "frequency_interval", "profit_factor"]


def break_even_win_rate(average_win: float, average_loss: float) -> float:
    """Return the share of winners at which nothing is won or lost, fraction; NaN when both are nothing.

    average loss / (average win + average loss): the rate p that solves p x win = (1 - p) x loss.
    """
    total = average_win + average_loss
    return average_loss / total if total > 0 else math.nan


def expectancy(win_rate: float, average_win: float, average_loss: float) -> float:
    """Return what one trade earns on average: win rate x win - (1 - win rate) x loss."""
    return win_rate * average_win - (1.0 - win_rate) * average_loss


def profit_factor(money_won: float, money_lost: float) -> float:
    """Return money won over money lost (both positive); inf when nothing was lost, NaN when nothing moved."""
    if money_lost > 0:
        return money_won / money_lost
    return math.inf if money_won > 0 else math.nan


def after_trades(trades: int, win_rate: float, win: float, loss: float, share: float) -> float:
    """Return the account's growth, a fraction, after so many trades one after the other.

    Each trade uses `share` of the account: winners multiply it by 1 + share x win, losers by
    1 - share x loss, and the order does not matter. Raises ValueError when one loss takes the whole account.
    """
    if share * loss >= 1.0:
        raise ValueError(
            f"one loss of {loss:g} on a share of {share:g} takes the whole account; use less of it"
        )
    winners = trades * win_rate
    growth = winners * math.log1p(share * win) + (trades - winners) * math.log1p(-share * loss)
    return math.expm1(growth)


def frequency_interval(times: int, trials: int, confidence: float = 0.95) -> tuple[float, float]:
    """Return the interval (low, high) of a frequency seen so many times in so many trials, fractions.

    Wilson's score interval (Wilson 1927, "Probable inference", JASA 22, 209-212), which stays inside 0 and 1.
    (NaN, NaN) without trials.
    """
    if trials == 0:
        return math.nan, math.nan
    z = NormalDist().inv_cdf(0.5 + confidence / 2.0)
    seen = times / trials
    scale = 1.0 + z * z / trials
    middle = (seen + z * z / (2.0 * trials)) / scale
    half = z / scale * math.sqrt(seen * (1.0 - seen) / trials + z * z / (4.0 * trials * trials))
    return max(middle - half, 0.0), min(middle + half, 1.0)
