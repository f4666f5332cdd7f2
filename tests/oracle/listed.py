"""What is listed at a session: expiries, strike steps, ticks, and how far in the money is exercised.

Days are proleptic ordinals. The calendar ahead is asked one day at a time from the package (it is checked
there against another calendar); everything else is done here by walking days.
"""

from __future__ import annotations

import datetime as dt
import math
from functools import cache

from hedgerow.market.sessions import is_session

DAILY_DAYS, WEEKLY_DAYS, MONTHLY_DAYS = 35, 63, 285
LONG_DAYS = 1096


@cache
def open_day(ordinal: int) -> bool:
    """Whether that day is a session by the rules known ahead."""
    return bool(is_session(ordinal))


def moved_back(ordinal: int) -> int:
    """The day itself, or the last session before it."""
    while not open_day(ordinal):
        ordinal -= 1
    return ordinal


@cache
def third_friday(year: int, month: int) -> int:
    """The standard expiry of a month: its third Friday or the session before it."""
    first = dt.date(year, month, 1)
    return moved_back(first.toordinal() + (4 - first.weekday()) % 7 + 14)


@cache
def series_of(cycle: str, today: int) -> tuple[int, ...]:
    """Every expiry that a class on `cycle` lists at the session `today`, in rising order."""
    found = set()
    if cycle == "daily":
        found |= {day for day in range(today + 1, today + DAILY_DAYS + 1) if open_day(day)}
    if cycle in ("daily", "weekly"):
        for day in range(today + 1, today + WEEKLY_DAYS + 8):
            if dt.date.fromordinal(day).weekday() == 4 and moved_back(day) <= today + WEEKLY_DAYS:
                found.add(moved_back(day))
    year = dt.date.fromordinal(today).year
    for month in range(12 * year, 12 * year + 48):
        standard = third_friday(month // 12, month % 12 + 1)
        near = cycle != "quarterly" and standard <= today + MONTHLY_DAYS
        kept = month % 3 == 2 if cycle == "quarterly" else month % 12 == 0
        far = kept and standard <= today + LONG_DAYS
        if near or far:
            found.add(standard)
    return tuple(sorted(day for day in found if day > today))


@cache
def choose_expiry(cycle: str, days: int, at_least: bool, today: int) -> int:
    """The expiry nearest to `days` ahead (of two the later), or the first no nearer than that; 0 none."""
    wish = today + days
    candidates = [day for day in series_of(cycle, today) if day >= wish or not at_least]
    if not candidates:
        return 0
    best = min(candidates, key=lambda day: (abs(day - wish), -day))
    return best if abs(best - wish) <= max(4.0, days / 2.0) else 0


def exercise_threshold() -> float:
    """Least amount in the money, a share, that is exercised by exception today (OCC rule 805)."""
    return 0.01


def on_grid(wanted: float, step: float, snap: str) -> float:
    """The listed strike at, above or below the wanted one, or the nearest; 0 when there is none."""
    count = wanted / step
    whole = round(count)
    if abs(count - whole) < 1e-9:
        return whole * step
    if snap == "up":
        return math.ceil(count) * step
    if snap == "down":
        return math.floor(count) * step
    return math.floor(count + 0.5) * step


def strike_step(price: float, cycle: str) -> float:
    """Distance between listed strikes near a price, in today's liquid classes (80 FR 1559)."""
    if cycle in ("daily", "weekly"):
        bounds = ((100.0, 0.5), (150.0, 1.0), (500.0, 2.5))
    else:
        bounds = ((5.0, 0.5), (150.0, 1.0))
    for bound, step in bounds:
        if price < bound:
            return step
    return 5.0


def is_listed(strike: float, spot: float) -> bool:
    """Whether a strike lies within 0.4 to 2.5 times the stock's price."""
    return strike > 0.0 and 0.4 * spot <= strike <= 2.5 * spot
