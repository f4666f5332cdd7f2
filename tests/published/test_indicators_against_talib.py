"""Means, MACD, RSI and Bollinger bands against TA-Lib, start-up included.

Conventions shared with TA-Lib: an exponential mean begins at the plain mean of its first values; both means
of MACD begin on the same bar; RSI begins at plain means of gains and losses; bands use the divisor n.
"""

from __future__ import annotations

from typing import Any

import numpy as np
import pytest

from array_market import array_market
from hedgerow.kernels.layout import Floats
from hedgerow.signals import Panel
from hedgerow.signals.bands import band
from hedgerow.signals.trend import exponential_mean, macd, mean

talib: Any = pytest.importorskip("talib")


@pytest.fixture(scope="module")
def closes() -> Floats:
    """Random walks of two symbols, 600 sessions."""
    rng = np.random.default_rng(20240101)
    return np.ascontiguousarray(80.0 * np.exp(np.cumsum(rng.normal(0.0003, 0.02, (600, 2)), axis=0)))


def same(ours: Floats, theirs: Floats) -> None:
    """Equal to 1e-9, unknown on the same sessions: both add in another order, neither loses more."""
    np.testing.assert_allclose(ours, theirs, rtol=1e-9, atol=1e-9)
    assert (~np.isnan(ours)).sum() > 400


@pytest.mark.parametrize("sessions", [2, 20, 100])
def test_plain_mean(closes: Floats, sessions: int) -> None:
    """Against SMA."""
    for s in (0, 1):
        same(mean(closes, sessions)[:, s], talib.SMA(closes[:, s].copy(), sessions))


@pytest.mark.parametrize("sessions", [2, 20, 100])
def test_exponential_mean(closes: Floats, sessions: int) -> None:
    """Against EMA."""
    for s in (0, 1):
        same(exponential_mean(closes, sessions)[:, s], talib.EMA(closes[:, s].copy(), sessions))


@pytest.mark.parametrize(("fast", "slow", "smooth"), [(12, 26, 9), (5, 35, 5)])
def test_macd_and_its_signal(closes: Floats, fast: int, slow: int, smooth: int) -> None:
    """Against MACD; it gives nothing before its signal line, so those bars of ours are left out."""
    line = macd(closes, fast, slow)
    for s in (0, 1):
        theirs, their_signal, _ = talib.MACD(closes[:, s].copy(), fast, slow, smooth)
        same(np.where(np.isnan(theirs), np.nan, line[:, s]), theirs)
        same(exponential_mean(line, smooth)[:, s], their_signal)


@pytest.mark.parametrize("sessions", [2, 14, 50])
def test_strength(closes: Floats, sessions: int) -> None:
    """Against RSI, through the signal itself."""
    found = Panel(array_market(closes)).evaluate("rsi", {"sessions": sessions})
    for s in (0, 1):
        same(found[:, s], talib.RSI(closes[:, s].copy(), sessions))


@pytest.mark.parametrize(("sessions", "width"), [(20, 2.0), (10, 1.5)])
def test_bands(closes: Floats, sessions: int, width: float) -> None:
    """Against BBANDS. Its running sum of squares loses about eight digits, hence 1e-6 here."""
    for s in (0, 1):
        upper, _, lower = talib.BBANDS(closes[:, s].copy(), sessions, width, width)
        np.testing.assert_allclose(band(closes, sessions, width)[:, s], upper, rtol=1e-6)
        np.testing.assert_allclose(band(closes, sessions, -width)[:, s], lower, rtol=1e-6)


def test_a_band_with_the_other_divisor_would_be_caught(closes: Floats) -> None:
    """Negative control: with the divisor n - 1 the band is off by far more than is allowed above."""
    upper, _, _ = talib.BBANDS(closes[:, 0].copy(), 20, 2.0, 2.0)
    wrong = band(closes, 20, 2.0 * np.sqrt(20 / 19))[:, 0]
    assert np.nanmax(np.abs(wrong / upper - 1.0)) > 1e-4


def test_breaks_are_where_the_close_leaves_their_bands(closes: Floats) -> None:
    """Against BBANDS: the signals are true exactly on the sessions that close beyond."""
    panel = Panel(array_market(closes))
    up, down = panel.evaluate("band_break_up"), panel.evaluate("band_break_down")
    for s in (0, 1):
        upper, _, lower = talib.BBANDS(closes[:, s].copy(), 20, 2.0, 2.0)
        np.testing.assert_array_equal(up[:, s], closes[:, s] > upper)
        np.testing.assert_array_equal(down[:, s], closes[:, s] < lower)
