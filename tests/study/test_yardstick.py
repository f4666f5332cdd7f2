"""Buy and hold, beside a plain loop over each symbol's days."""

from __future__ import annotations

import math
from dataclasses import replace

import numpy as np
import pytest

from array_market import array_market
from hedgerow.market.table import Market
from hedgerow.study.yardstick import buy_and_hold
from hedgerow.walk.run import Window
from walks import lively_market

MARKET = lively_market()


def plainly(market: Market, traded: list[int], window: Window, cash: float) -> list[float]:
    """The same money in each symbol at its first close; dividends buy more at that day's close."""
    worth = [[0.0] * len(traded) for _ in range(window.start, window.stop)]
    for place, symbol in enumerate(traded):
        shares, last = math.nan, math.nan
        for at in range(window.stop):
            close = float(market.close[at, symbol])
            paid = float(market.dividend[at, symbol] + market.special[at, symbol])
            shares *= float(market.split[at, symbol])
            if not math.isnan(close):
                shares += shares * paid / close
                last = close
            if at < window.start:
                continue
            if math.isnan(shares) and not math.isnan(last):
                shares = cash / len(traded) / last
            share = cash / len(traded) if math.isnan(shares) else shares * last
            worth[at - window.start][place] = share
    return [sum(row) for row in worth]


@pytest.mark.parametrize("window", [Window(0, 260), Window(50, 180), Window(151, 152), Window(210, 260)])
@pytest.mark.parametrize("traded", [[0], [0, 1, 2, 3], [2, 3]])
def test_against_a_plain_loop(window: Window, traded: list[int]) -> None:
    """With splits, dividends, holes and a history that ends."""
    flags = np.array([n in traded for n in range(4)], np.uint8)
    found = buy_and_hold(MARKET, flags, window, 90_000.0)
    assert found.tolist() == pytest.approx(plainly(MARKET, traded, window, 90_000.0), rel=1e-9)


def test_by_hand() -> None:
    """100 at 50 is two shares; 1 a share paid at 49 buys 2/49 more; then two for one.

    Each symbol gets 100: the first ends as (2 + 2/49) x 2 x 25, the second waits as cash.
    """
    close = np.array([[50.0, np.nan], [49.0, np.nan], [24.0, 10.0], [25.0, 11.0]])
    dividend, split = np.zeros(close.shape), np.ones(close.shape)
    dividend[1, 0], split[2, 0] = 1.0, 2.0
    market = array_market(close, dividend=dividend, split=split)
    found = buy_and_hold(market, np.array([1, 1], np.uint8), Window(0, 4), 200.0)
    shares = 2 + 2 / 49
    expected = [200, shares * 49 + 100, shares * 2 * 24 + 100, shares * 2 * 25 + 110]
    assert found.tolist() == pytest.approx(expected)


def test_what_comes_later_changes_nothing() -> None:
    """Cut at a session, the values before stand."""
    whole = buy_and_hold(MARKET, np.ones(4, np.uint8), Window(0, 260), 1000.0)
    spoiled = replace(MARKET, close=np.where(np.arange(260)[:, np.newaxis] >= 140, 1.0, MARKET.close))
    part = buy_and_hold(spoiled, np.ones(4, np.uint8), Window(0, 140), 1000.0)
    np.testing.assert_array_equal(whole[:140], part)
