"""The surface: its premium, its anchor, what it refuses, and prices that keep their order."""

from __future__ import annotations

import math
from dataclasses import replace

import numpy as np
import pytest

from array_market import array_market, random_market, report
from hedgerow.errors import StudyError
from hedgerow.kernels.layout import CALL, PUT
from hedgerow.kernels.lognormal import european
from hedgerow.market.table import Market
from hedgerow.volatility import Surface, SurfaceModel, build
from hedgerow.volatility.model import PRESETS

DAYS = (1, 7, 30, 91, 400, 1100)


def prices(surface: Surface, right: int, atm: float, days: int) -> list[float]:
    """Values of 61 strikes around a spot of 100, rate 2 %, no dividend, from the surface's volatilities."""
    years = days / 365.0
    forward = 100.0 * math.exp(0.02 * years)
    strikes = forward * np.exp(np.linspace(-2.8, 2.8, 61) * atm * math.sqrt(years))
    return [
        european(
            right, 100.0, float(k), years, 0.02, 0.0, surface.volatility(atm, float(k), forward, float(days))
        )
        for k in strikes
    ]


@pytest.mark.parametrize("days", DAYS)
@pytest.mark.parametrize("atm", [0.05, 0.2, 0.6, 1.5])
def test_calls_fall_and_puts_rise_with_the_strike(days: int, atm: float) -> None:
    """Static order of prices, with the default model over the tenors and levels a study may use."""
    surface = build(SurfaceModel(), random_market(1))
    assert (np.diff(prices(surface, CALL, atm, days)) < 0.0).all()
    assert (np.diff(prices(surface, PUT, atm, days)) > 0.0).all()


@pytest.mark.parametrize("days", DAYS)
def test_parity_holds_at_every_strike(days: int) -> None:
    """Put-call parity: one volatility serves both rights, so call - put is spot - discounted strike."""
    surface = build(SurfaceModel(), random_market(1))
    years, atm = days / 365.0, 0.35
    for strike in (60.0, 95.0, 100.0, 105.0, 160.0):
        volatility = surface.volatility(atm, strike, 100.0 * math.exp(0.02 * years), float(days))
        call = european(CALL, 100.0, strike, years, 0.02, 0.0, volatility)
        put = european(PUT, 100.0, strike, years, 0.02, 0.0, volatility)
        assert call - put == pytest.approx(100.0 - strike * math.exp(-0.02 * years), abs=1e-9)


@pytest.mark.parametrize(
    ("model", "right"),
    [
        (SurfaceModel(skew=-0.9, curvature=0.0), PUT),
        (SurfaceModel(skew=0.9, curvature=0.0), CALL),
        (SurfaceModel(skew=0.0, curvature=0.5), CALL),
    ],
)
def test_a_smile_that_crosses_prices_is_refused(model: SurfaceModel, right: int) -> None:
    """Negative control: prices of the refused smile cross; the message names tenor, level and strike."""
    market = random_market(1)
    with pytest.raises(StudyError) as caught:
        build(model, market)
    assert caught.value.faults[0].code == "arbitrage"
    told = str(caught.value)
    for part in ("too steep", "days from expiry", "at the money", "strike near", "deviations"):
        assert part in told
    level = build(PRESETS["plain-21"], market).level
    unchecked = Surface(level, level, model.smile, model)
    steps = np.diff(prices(unchecked, right, 0.3, 30))
    assert (steps > 0.0).any() if right == CALL else (steps < 0.0).any()


def test_only_the_tenors_in_use_are_held_against_a_smile() -> None:
    """A smile that is too steep at one week and decays may serve a study that uses a year and more."""
    model = SurfaceModel(skew=-0.62, curvature=0.0, skew_decay=0.5)
    market = random_market(1)
    with pytest.raises(StudyError, match="too steep"):
        build(model, market, (7, 400))
    assert build(model, market, (365, 400)).model is model


def test_nothing_known_is_nothing_to_refuse() -> None:
    """A history too short for any level gives an empty surface, not an error."""
    assert np.isnan(build(SurfaceModel(), random_market(1, 20)).level).all()


def test_arrays_are_frozen() -> None:
    """Level and anchor are C-contiguous and read-only, of the market's shape."""
    surface = build(SurfaceModel(pull=1.0), random_market(1))
    for array in (surface.level, surface.anchor):
        assert array.shape == (120, 2)
        assert array.flags.c_contiguous
        assert not array.flags.writeable


def calm_after_storm() -> Market:
    """900 wild sessions, then 60 calm ones."""
    rng = np.random.default_rng(9)
    daily = np.where(np.arange(960) < 900, 0.03, 0.005)
    return array_market(100.0 * np.exp(np.cumsum(rng.normal(0.0, 1.0, 960) * daily)).reshape(-1, 1))


def test_long_tenors_are_pulled_to_the_long_run() -> None:
    """With pull a month costs less than two years after calm; without pull both cost the level."""
    market = calm_after_storm()
    pulled = build(SurfaceModel(pull=3.0), market)
    month, years = pulled.at_the_money(959, 0, 30), pulled.at_the_money(959, 0, 730)
    assert pulled.level[959, 0] < month < years < pulled.anchor[959, 0]
    returns = np.diff(np.log(market.close[959 - 756 :, 0]))
    assert pulled.anchor[959, 0] == pytest.approx(np.sqrt(np.mean(returns**2) * 252.0), rel=1e-10)
    flat = build(SurfaceModel(), market)
    assert flat.at_the_money(959, 0, 30) == flat.at_the_money(959, 0, 730) == flat.level[959, 0]


def test_without_a_long_history_the_anchor_is_the_level() -> None:
    """Before a year of returns there is no long run to be pulled to."""
    surface = build(SurfaceModel(pull=3.0), random_market(2))
    np.testing.assert_array_equal(surface.anchor, surface.level)


def test_ratio_and_points() -> None:
    """Hand-worked: a tenth more and a point on top, of the default's level."""
    market = random_market(3)
    plain = build(SurfaceModel(), market).at_the_money(119, 0, 30)
    dear = build(SurfaceModel(ratio=1.1, points=0.01), market).at_the_money(119, 0, 30)
    assert dear == pytest.approx(plain * 1.1 + 0.01, rel=1e-12)


def test_a_report_inside_the_tenor_costs_more() -> None:
    """Closed form of 5 moves over 30 days: the root of 1 + 24 x 365 / 252 / 30."""
    market = random_market(4)
    surface = build(SurfaceModel(), replace(market, reports=(report(market, 100),)))
    ratio = surface.at_the_money(90, 0, 30, True) / surface.at_the_money(90, 0, 30)
    assert ratio == pytest.approx(math.sqrt(1.0 + 24.0 * 365.0 / 252.0 / 30.0), rel=1e-12)


def test_plain_21_is_what_its_name_says() -> None:
    """Exactly the root mean square of 21 returns, the same for every strike, with or without a report."""
    market = random_market(5)
    surface = build(PRESETS["plain-21"], market)
    returns = np.diff(np.log(market.close[98:120, 0]))
    assert surface.level[119, 0] == pytest.approx(np.sqrt(np.mean(returns**2) * 252.0), rel=1e-10)
    assert surface.at_the_money(119, 0, 30, True) == surface.level[119, 0]
    assert surface.volatility(0.3, 60.0, 100.0, 30.0) == 0.3
