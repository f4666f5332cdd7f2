"""Strikes and lots that the tables take for granted, worked out from the words of the files."""

from __future__ import annotations

import math
from statistics import NormalDist

import pytest

from structures.ledger_lines import VOLATILITY, premium
from structures.test_by_hand import CASES

NORMAL = NormalDist()


def strike_of_delta(right: str, delta: float, spot: float, days: int) -> float:
    """The strike of an option of this delta without interest: N(d1) of a call, N(d1) - 1 of a put (Hull)."""
    spread = VOLATILITY * math.sqrt(days / 365.0)
    d1 = NORMAL.inv_cdf(delta if right == "call" else 1.0 - delta)
    return spot * math.exp(spread * spread / 2.0 - d1 * spread)


# file, right, delta, stock price and days at the close that decides, way to the grid of 1.00, strike
DELTAS = (
    ("covered call out of the money, still", "call", 0.25, 50.0, 28, "up", "call -200 54 02-16"),
    ("covered call out of the money, rising", "call", 0.25, 53.5, 30, "up", "call ordered 57 03-15"),
    ("cash-secured put, still", "put", 0.30, 50.0, 28, "down", "put -200 48 02-16"),
    ("put credit spread, still", "put", 0.30, 50.0, 56, "nearest", "put -200 47 03-15"),
    ("put credit spread, still", "put", 0.15, 50.0, 56, "down", "low-put +200 44 03-15"),
    ("cash-secured put, then calls, gapping", "call", 0.30, 43.5, 35, "up", "call ordered 46 04-19"),
    ("cash-secured put, then calls, rising", "put", 0.30, 52.5, 35, "down", "put -200 50 04-19"),
    ("married put with income, rising", "call", 0.30, 52.5, 30, "up", "call ordered 56 05-17"),
    ("married put with income, leaping", "call", 0.30, 56.0, 37, "up", "call ordered 60 04-19"),
)


@pytest.mark.parametrize("row", DELTAS, ids=lambda row: f"{row[0]}, {row[-1]}")
def test_strikes_by_delta(row: tuple[str, str, float, float, int, str, str]) -> None:
    """The strike in the table beside the one the formula leads to."""
    name, right, delta, spot, days, way, words = row
    case = next(case for case in CASES if case.name == name)
    assert any(words in line for line in case.lines)
    exact = strike_of_delta(right, delta, spot, days)
    listed = {"up": math.ceil(exact), "down": math.floor(exact), "nearest": math.floor(exact + 0.5)}[way]
    strike = next(float(word) for word in words.split()[2:] if "-" not in word)
    assert strike == listed


def test_the_call_that_pays_for_the_put() -> None:
    """91 days: of the listed calls the furthest that brings at least what the 47 put costs is the 53 call."""
    cost = premium("put", 50.0, 47.0, 91.0)
    assert premium("call", 50.0, 53.0, 91.0) >= cost > premium("call", 50.0, 54.0, 91.0)
    case = next(case for case in CASES if case.name == "zero-cost collar, still")
    assert any("call -200 53 04-19" in line for line in case.lines)


def payoff(legs: list[tuple[str, float, float]], shares: float, price: float) -> float:
    """Money at expiry."""
    return shares * price + sum(size * premium(right, price, strike, 0.0) for right, size, strike in legs)


# name of the case, legs and shares of one lot, whole days to go at the fill, lots
LOTS = (
    ("collar, still", [("call", -100, 51), ("put", 100, 47)], 100, 25, 2),
    ("cash-secured put, still", [("put", -100, 48)], 0, 25, 2),
    ("call debit spread, still", [("call", 100, 47), ("call", -100, 51)], 0, 25, 2),
    ("put credit spread, still", [("put", -100, 47), ("put", 100, 44)], 0, 53, 2),
    ("put-spread collar, still", [("put", 100, 47), ("put", -100, 40), ("call", -100, 53)], 100, 98, 2),
    ("conversion, still", [("call", -100, 50), ("put", 100, 50)], 100, 25, 2),
)


@pytest.mark.parametrize("row", LOTS, ids=lambda row: row[0])
def test_lots_that_the_cash_allows(
    row: tuple[str, list[tuple[str, float, float]], float, int, float],
) -> None:
    """What is paid for a lot and the most that could be owed on it, once, twice, but not three times."""
    name, legs, shares, days, lots = row
    case = next(case for case in CASES if case.name == name)
    paid = shares * 50.0 + sum(size * premium(right, 50.0, strike, days) for right, size, strike in legs)
    owed = max(0.0, *(-payoff(legs, shares, float(price)) for price in range(201)))
    opened = next(line for line in case.lines if "opened" in line)
    assert float(opened.split()[-1]) == lots == math.floor(case.cash / (paid + owed))
