"""Building blocks of an invented market: keyed random streams, a calendar, factors whose volatility clusters.

Only the raw bits of numpy's PCG64 are used, which numpy promises to keep; uniforms and normals are made from
them here, so that the same key gives the same market with any later numpy.
"""

from __future__ import annotations

import datetime as dt
import hashlib
from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
import numpy.typing as npt

__all__ = [
    "A_YEAR",
    "STEPS",
    "Factor",
    "Floats",
    "Stream",
    "add_jumps",
    "at_or_after",
    "bars",
    "factor",
    "nth_weekday",
    "regime_levels",
    "sessions",
    "short_rate",
]

Floats = npt.NDArray[np.float64]

STEPS = 78  # five-minute steps in a session
A_YEAR = 252.0  # sessions a year
OVERNIGHT = 0.25  # share of an ordinary day's variance that falls between close and open


class Stream:
    """A keyed stream of uniforms and normals made from the raw bits of PCG64."""

    def __init__(self, key: str, seed: int) -> None:
        digest = hashlib.sha256(f"orchard bay/{seed}/{key}".encode()).digest()
        self._bits = np.random.PCG64(np.random.SeedSequence(int.from_bytes(digest, "big")))

    def uniform(self, *shape: int) -> Floats:
        """Uniforms strictly inside (0, 1)."""
        raw = self._bits.random_raw(int(np.prod(shape)))
        fine = (np.asarray(raw) >> np.uint64(11)).astype(np.float64)
        return (fine.reshape(shape) + 0.5) * 2.0**-53

    def normal(self, *shape: int) -> Floats:
        """Standard normals by the method of Box and Muller (1958)."""
        radius = np.sqrt(-2.0 * np.log(self.uniform(*shape)))
        return np.asarray(radius * np.cos(2.0 * np.pi * self.uniform(*shape)))

    def fat_scale(self, count: int, freedom: int = 8) -> Floats:
        """Daily scales that turn normals into unit-variance Student's t, never above four."""
        chi_square = (self.normal(count, freedom) ** 2).sum(axis=1)
        return np.asarray(np.minimum(4.0, np.sqrt((freedom - 2) / chi_square)))


def nth_weekday(year: int, month: int, weekday: int, nth: int) -> dt.date:
    """The nth (-1: last) given weekday of a month."""
    if nth < 0:
        last = dt.date(year + month // 12, month % 12 + 1, 1) - dt.timedelta(days=1)
        return last - dt.timedelta(days=(last.weekday() - weekday) % 7)
    first = dt.date(year, month, 1)
    return first + dt.timedelta(days=(weekday - first.weekday()) % 7 + 7 * (nth - 1))


def good_friday(year: int) -> dt.date:
    """Two days before Easter by the anonymous Gregorian rule (Meeus, Astronomical Algorithms, ch. 8)."""
    a, (b, c) = year % 19, divmod(year, 100)
    d, e = divmod(b, 4)
    h = (19 * a + b - d - (b - (b + 8) // 25 + 1) // 3 + 15) % 30
    i, k = divmod(c, 4)
    m = (32 + 2 * e + 2 * i - h - k) % 7
    n = h + m - 7 * ((a + 11 * h + 22 * m) // 451) + 114
    return dt.date(year, n // 31, n % 31 + 1) - dt.timedelta(days=2)


def holidays(year: int) -> set[dt.date]:
    """Closed weekdays of a US exchange year; a holiday on a Saturday is taken on the Friday, New Year not."""
    fixed = [dt.date(year, 7, 4), dt.date(year, 12, 25)] + ([dt.date(year, 6, 19)] if year >= 2022 else [])
    days = {day + dt.timedelta(days={5: -1, 6: 1}.get(day.weekday(), 0)) for day in fixed}
    new_year = dt.date(year, 1, 1)
    days.add(new_year + dt.timedelta(days=1 if new_year.weekday() == 6 else 0))
    floating = ((1, 0, 3), (2, 0, 3), (5, 0, -1), (9, 0, 1), (11, 3, 4))
    return days | {nth_weekday(year, *rule) for rule in floating} | {good_friday(year)}


def sessions(first: dt.date, last: dt.date) -> list[dt.date]:
    """All sessions of a span, without the three unplanned closures of those years in the US."""
    closed = {dt.date(2012, 10, 29), dt.date(2012, 10, 30), dt.date(2018, 12, 5)}
    closed |= {day for year in range(first.year, last.year + 1) for day in holidays(year)}
    span = (first + dt.timedelta(days=i) for i in range((last - first).days + 1))
    return [day for day in span if day.weekday() < 5 and day not in closed]


def at_or_after(days: list[dt.date], day: dt.date) -> int:
    """Index of the first session on or after a day."""
    return int(np.searchsorted(np.array(days), np.datetime64(day)))


@dataclass(frozen=True)
class Factor:
    """Moves of one factor: `night` (T,), `steps` (T, STEPS), `volatility` a session (T,), all in logs."""

    night: Floats
    steps: Floats
    volatility: Floats


def regime_levels(stream: Stream, count: int) -> Floats:
    """Log of annual volatility on two regimes, smoothed over about ten sessions."""
    calm, nervous = np.log(0.088), np.log(0.185)
    leave, stressed, level = (1 / 350, 1 / 75), False, calm
    draws, levels = stream.uniform(count), np.empty(count)
    for t in range(count):
        stressed ^= bool(draws[t] < leave[stressed])
        level += 0.1 * ((nervous if stressed else calm) - level)
        levels[t] = level
    return levels


def factor(key: str, base: Floats, lever: float, news: float, seed: int) -> Factor:
    """Simulate a factor whose log annual volatility wanders around `base`.

    Each session news of that standard deviation is added to it, and `lever` times the session's fall in
    deviations; it returns to `base` with a half-life of about four weeks.
    """
    stream, count = Stream(key, seed), len(base)
    scale, turns, shocks = stream.fat_scale(count), stream.normal(count), stream.normal(count, STEPS)
    shape = 1.0 + 1.5 * np.linspace(-1.0, 1.0, STEPS) ** 2
    unit_steps = shocks * np.sqrt((1.0 - OVERNIGHT) * shape / shape.sum()) * scale[:, None]
    unit_night = stream.normal(count) * np.sqrt(OVERNIGHT) * scale
    unit_day = unit_night + unit_steps.sum(axis=1)
    wander, volatility = 0.0, np.empty(count)
    for t in range(count):
        volatility[t] = np.exp(min(base[t] + wander, np.log(1.2))) / np.sqrt(A_YEAR)
        wander = 0.965 * wander - lever * unit_day[t] + news * turns[t]
    fair = -0.5 * volatility**2
    steps = unit_steps * volatility[:, None] + ((1.0 - OVERNIGHT) * fair / STEPS)[:, None]
    return Factor(unit_night * volatility + OVERNIGHT * fair, steps, volatility)


def add_jumps(moved: Factor, key: str, a_year: float, mean: float, spread: float, seed: int) -> None:
    """Add rare jumps, half overnight and half within the session, compensated to leave the mean unchanged."""
    stream, count = Stream(key, seed), len(moved.night)
    hit, where = stream.uniform(count) < a_year / A_YEAR, stream.uniform(count, 2)
    size = (mean + spread * stream.normal(count)) * hit
    inside = where[:, 0] < 0.5
    moved.night[:] += np.where(inside, 0.0, size)
    np.add.at(moved.steps, (np.arange(count), (where[:, 1] * STEPS).astype(int)), np.where(inside, size, 0.0))
    moved.night[:] -= a_year / A_YEAR * (np.exp(mean + 0.5 * spread**2) - 1.0)


def bars(path: Floats) -> Floats:
    """Open, high, low, close (T, 4) in cents from paths (T, STEPS + 1).

    A path looked at in steps misses the extremes between them: the high and low are moved out by .5826 of a
    step's deviation (Broadie, Glasserman and Kou, Mathematical Finance 1997).
    """
    steps = np.diff(np.log(path), axis=1)
    reach = np.exp(0.5826 * steps.std(axis=1))
    high = np.maximum(np.round(path.max(axis=1) * reach, 2), path.max(axis=1))
    low = np.maximum(0.01, np.minimum(np.round(path.min(axis=1) / reach, 2), path.min(axis=1)))
    return np.column_stack([path[:, 0], high, low, path[:, -1]])


def short_rate(
    days: list[dt.date], steps: Sequence[tuple[int, int, float]], stream: Stream
) -> tuple[list[tuple[int, float]], Floats]:
    """Monthly rows (session, annual rate) around steps (year, month, level), and the rate a session (T,)."""
    rows: list[tuple[int, float]] = []
    noise = 0.0
    rate = np.empty(len(days))
    for t, day in enumerate(days):
        if t == 0 or day.month != days[t - 1].month:
            level = [step[2] for step in steps if step[:2] <= (day.year, day.month)][-1]
            noise = 0.7 * noise + 0.0003 * float(stream.normal(1)[0])
            rows.append((t, round(max(0.0005, level + noise), 4)))
        rate[t] = rows[-1][1]
    return rows, rate
