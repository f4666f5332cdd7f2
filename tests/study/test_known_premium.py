"""The flip premium where the fair one is known: options on a market of known volatility.

Prices are a geometric random walk without drift (a martingale), so that at the true volatility no option is
worth more or less than it costs (Black & Scholes 1973, and plainly: the mean of its payoff). The implied
volatility that is observed is the true one over the fair ratio, so that selling earns nothing at that ratio.
"""

from __future__ import annotations

import math
from functools import cache
from typing import Any

import numpy as np
import pytest

from array_market import array_market
from hedgerow.evidence.findings import Pairing
from hedgerow.market.table import Market
from hedgerow.study.compare import run_study
from hedgerow.study.declare import load_study

TRUE_VOLATILITY = 0.2
SESSIONS, STOCKS = 1300, 8
WEEKDAYS_A_YEAR = 365.0 * 5.0 / 7.0
FAIR = (0.9, 1.0, 1.1, 1.2)
MARKETS = 3

NEVER = {"signal": "momentum", "sessions": 5, "at_least": "900%"}
PUTS = {
    "shares": "none",
    "fill": "close",
    "legs": {"put": {"sell": "put", "expiry": {"days": 30}, "strike": {"from_spot": "0%"}}},
}
CALL = {"sell": "call", "expiry": {"days": 30}, "strike": {"from_spot": "0%"}, "roll": {"at": "expiry"}}


def market(seed: int, fair: float) -> Market:
    """Stocks without drift at 20 % a year, and an implied volatility of that over the fair ratio."""
    rng = np.random.default_rng(seed)
    step = TRUE_VOLATILITY / math.sqrt(WEEKDAYS_A_YEAR)
    moves = rng.normal(-0.5 * step * step, step, (SESSIONS, STOCKS))
    close = 60.0 * np.exp(np.cumsum(moves, axis=0))
    return array_market(close, high=close, low=close, implied=np.full(close.shape, TRUE_VOLATILITY / fair))


def pairing(seed: int, fair: float, rules: dict[str, Any]) -> Pairing:
    """Two rules compared at a ratio of 1, stressed from .7 to 1.4."""
    plain = {
        "name": "known premium",
        "market": ".",
        "account": {"cash": 1_000_000, "per_position": "1/8", "interest": False},
        "pricing": {"volatility": {"observed": "column", "skew": 0, "curvature": 0, "report_moves": 1}},
        "costs": "none",
        "yardstick": "none",
        "variants": {name: {"strategy": {"name": name, **rule}} for name, rule in rules.items()},
        "evidence": {
            "draws": 200,
            "timing": False,
            "stress": {"ratio": [0.7, 0.8, 0.9, 1.0, 1.1, 1.2, 1.3, 1.4], "skew": [0], "half_spread": ["0%"]},
        },
    }
    evidence = run_study(load_study(plain, "."), market=market(seed, fair)).evidence
    assert evidence is not None
    assert evidence.headline is not None
    return evidence.headline


@cache
def sold_puts() -> tuple[tuple[float, float, float, float], ...]:
    """Fair ratio, flip, and its interval, for selling puts against cash on several markets."""
    rows = []
    for fair in FAIR:
        for number in range(MARKETS):
            rules = {"puts": PUTS, "cash": {**PUTS, "enter": {"when": NEVER}}}
            pair = pairing(1000 * number + round(100 * fair), fair, rules)
            assert pair.stress is not None
            flip = pair.stress.premium
            assert flip is not None
            assert flip.ahead_above == "puts"
            rows.append((fair, flip.value, flip.low, flip.high))
    return tuple(rows)


def test_the_flip_of_sold_puts_is_the_fair_ratio() -> None:
    """Twelve markets, four fair ratios: the mean miss is within three standard errors of nothing.

    What the variance of the account takes off its growth moves the flip by under .005.
    """
    rows = np.array(sold_puts())
    misses = rows[:, 1] - rows[:, 0]
    assert not np.isnan(misses).any()
    assert abs(misses.mean()) < 3.0 * misses.std(ddof=1) / math.sqrt(len(misses)) + 0.005
    assert misses.std(ddof=1) < 0.12


def test_its_interval_holds_the_fair_ratio_as_often_as_it_says() -> None:
    """Of twelve 90 % intervals at least eight: fewer have a chance of .4 % (exact binomial)."""
    held = sum(low <= fair <= high for fair, _, low, high in sold_puts())
    assert held >= 8


def test_the_check_finds_a_ratio_that_is_not_the_fair_one() -> None:
    """Negative control: with the fair ratio taken for .35 more than it is, hardly any interval holds it."""
    held = sum(low <= fair + 0.35 <= high for fair, _, low, high in sold_puts())
    assert held <= 3


def test_the_flip_of_covered_calls_against_their_shares() -> None:
    """The shares cancel and the call is left: the interval holds the fair ratio 1.1, writers ahead above."""
    rules = {"covered": {"legs": {"call": CALL}, "fill": "close"}, "shares": {"legs": {}, "fill": "close"}}
    pair = pairing(77, 1.1, rules)
    assert pair.stress is not None
    flip = pair.stress.premium
    assert flip is not None
    assert flip.low <= 1.1 <= flip.high
    assert flip.ahead_above == "covered"
    assert pair.trades is not None


@pytest.mark.parametrize("fair", [0.75])
def test_far_from_the_fair_ratio_the_verdict_is_clear(fair: float) -> None:
    """Premiums assumed a third above the fair ones: selling beats cash, and the flip lies below 1."""
    pair = pairing(5, fair, {"cash": {**PUTS, "enter": {"when": NEVER}}, "puts": PUTS})
    assert (pair.first, pair.verdict) == ("puts", "better")
    assert pair.stress is not None
    assert pair.stress.premium is not None
    assert pair.stress.premium.high < 1.0
