"""Day counts, sessions a year, cents, and how figures are written for people.

Money is in the account's currency, fractions are fractions (0.021 is 2.1 %), dates are proleptic ordinals
(`date.toordinal()`). Whole amounts of money are held as int64 cents wherever sums must be exact.
"""

from __future__ import annotations

import math
from typing import Any

import numpy as np
from numpy.typing import NDArray

__all__ = [
    "CENTS",
    "DAYS_A_CALENDAR_YEAR",
    "DAYS_A_YEAR",
    "SESSIONS_A_YEAR",
    "days_text",
    "fraction_text",
    "money_text",
    "number_text",
    "percent_text",
    "round_cents",
    "to_cents",
    "years_between",
]

CENTS = 100.0
"""Cents in one unit of money."""

DAYS_A_YEAR = 365.0
"""Calendar days a year for the time to an expiry."""

DAYS_A_CALENDAR_YEAR = 365.25
"""Calendar days a year for growth over many years."""

SESSIONS_A_YEAR = 252.0
"""Sessions a year for volatility and ratios."""

MISSING = "-"
_NUDGE_CENTS = 1e-7


def years_between(first_ordinal: int, last_ordinal: int) -> float:
    """Return the years between two dates on the 365-day count of option times (may be negative)."""
    return (last_ordinal - first_ordinal) / DAYS_A_YEAR


def to_cents(money: Any) -> NDArray[np.int64]:
    """Return money as whole cents (int64, same shape), halves rounded away from zero.

    An amount within 1e-7 of a half cent counts as a half: 1.005 has no exact binary form and becomes 1.01.
    """
    amounts = np.asarray(money, dtype=np.float64) * CENTS
    size = np.floor(np.abs(amounts) + 0.5 + _NUDGE_CENTS)
    return np.asarray(np.copysign(size, amounts)).astype(np.int64)


def round_cents(money: float) -> float:
    """Return an amount of money rounded to the cent, halves away from zero."""
    return int(to_cents(money)) / CENTS


def money_text(money: float, currency: str = "", places: int = 2) -> str:
    """Return money as text with thousands set apart, for example `1,234.50` or `1,234.50 USD`."""
    text = number_text(money, places)
    return f"{text} {currency}" if currency and text != MISSING else text


def percent_text(fraction: float, places: int = 1, signed: bool = False) -> str:
    """Return a fraction as a percentage, for example 0.0213 as `2.1%`, with its sign when asked."""
    text = number_text(fraction * 100.0, places, signed)
    return text if text in (MISSING, "inf", "-inf", "+inf") else f"{text}%"


def fraction_text(part: float, whole: float) -> str:
    """Return `part of whole` with its percentage, for example `12 of 48 (25.0%)`."""
    if whole <= 0:
        return f"{part:,.0f} of {whole:,.0f}"
    return f"{part:,.0f} of {whole:,.0f} ({percent_text(part / whole)})"


def number_text(value: float, places: int = 2, signed: bool = False) -> str:
    """Return a number with so many places and thousands set apart; `-` when it is not known."""
    if math.isnan(value):
        return MISSING
    if math.isinf(value):
        return "inf" if value > 0 else "-inf"
    rounded = round(value, places) + 0.0
    return f"{rounded:+,.{places}f}" if signed and rounded != 0.0 else f"{rounded:,.{places}f}"


def days_text(days: float) -> str:
    """Return a count of days in words, for example `1 day` or `1,204 days`."""
    if math.isnan(days):
        return MISSING
    return f"{days:,.0f} day" if round(days) == 1 else f"{days:,.0f} days"
