"""Strike grids, ticks and fills, against published rules, decimal arithmetic and identities."""

from __future__ import annotations

import math
from decimal import ROUND_CEILING, ROUND_FLOOR, Decimal

import pytest
from hypothesis import assume, given
from hypothesis import strategies as some

from hedgerow.kernels import listing
from hedgerow.kernels.layout import (
    DAILY,
    MONTHLY,
    QUARTERLY,
    SNAP_DOWN,
    SNAP_NEAREST,
    SNAP_UP,
    WEEKLY,
    Costs,
)

STEPS = some.sampled_from([0.5, 1.0, 2.5, 5.0, 10.0])
DIRECTIONS = some.sampled_from([SNAP_NEAREST, SNAP_UP, SNAP_DOWN])
PRICES = some.floats(0.01, 5000.0)
PREMIUMS = some.floats(0.0, 400.0)
TICKS = some.sampled_from([(0.01, 0.05), (0.05, 0.10), (0.01, 0.01)])
SIDES = some.sampled_from([1.0, -1.0])


def costs(half: float = 0.03, rise: float = 0.5, floor: float = 1.0, ticks: float = 1.0) -> Costs:
    """Costs of an option fill; nothing else is charged."""
    return Costs(half, rise, floor, ticks, 0.0, 0.0, 0.0, 0.0, 0.0, 0.0)


SPREADS = some.builds(costs, some.floats(0.0, 0.5), some.floats(0.0, 2.0), some.floats(0.0, 3.0))


@pytest.mark.parametrize(
    ("price", "cycle", "modern", "step"),
    [
        (24.99, MONTHLY, 0, 2.5),  # old classes: 70 FR 73488
        (25.0, MONTHLY, 0, 5.0),
        (199.0, WEEKLY, 0, 5.0),
        (200.0, QUARTERLY, 0, 10.0),
        (99.0, WEEKLY, 1, 0.5),  # weekly series below 100 from January 2015: 80 FR 1559
        (99.0, DAILY, 1, 0.5),
        (100.0, WEEKLY, 1, 1.0),  # from memory, the rest of the weekly rows
        (149.0, WEEKLY, 1, 1.0),
        (151.0, WEEKLY, 1, 2.5),
        (4.0, MONTHLY, 1, 0.5),  # from memory: half-dollar strikes for low prices
        (49.0, MONTHLY, 1, 1.0),  # the dollar programme, to 50 and later to 150: 70 FR 73488
        (149.0, QUARTERLY, 1, 1.0),
        (1400.0, MONTHLY, 1, 5.0),  # common practice: index strikes are 5 apart near the money
        (1400.0, WEEKLY, 1, 5.0),
    ],
)
def test_strike_spacing(price: float, cycle: int, modern: int, step: float) -> None:
    """Published strike intervals by price and kind of series; the source stands beside each row."""
    assert listing.grid_step(price, cycle, modern) == step


@given(price=PRICES, cycle=some.sampled_from([DAILY, WEEKLY, MONTHLY, QUARTERLY]), modern=some.integers(0, 1))
def test_spacing_widens_with_price_and_tenor(price: float, cycle: int, modern: int) -> None:
    """Identities: a dearer stock, a longer cycle or an older class never has closer strikes."""
    step = listing.grid_step(price, cycle, modern)
    assert listing.grid_step(price * 1.5, cycle, modern) >= step
    assert listing.grid_step(price, min(cycle + 1, QUARTERLY), modern) >= step
    assert listing.grid_step(price, cycle, 0) >= step


@pytest.mark.parametrize(
    ("target", "step", "direction", "strike"),
    [
        (101.2, 1.0, SNAP_UP, 102.0),
        (101.2, 1.0, SNAP_DOWN, 101.0),
        (101.5, 1.0, SNAP_NEAREST, 102.0),
        (101.49, 1.0, SNAP_NEAREST, 101.0),
        (101.0, 0.5, SNAP_UP, 101.0),
        (100.0 * 1.1, 2.5, SNAP_UP, 110.0),  # 110.00000000000001 in floating arithmetic
        (57.5 * (1 - 1e-12), 2.5, SNAP_DOWN, 57.5),
        (0.1, 0.5, SNAP_DOWN, 0.0),
    ],
)
def test_snap_by_hand(target: float, step: float, direction: int, strike: float) -> None:
    """Worked by hand; targets that are on the grid but for floating dust stay where they are."""
    assert listing.snap(target, step, direction) == strike


@given(target=PRICES, step=STEPS, direction=DIRECTIONS)
def test_snap_lands_on_the_grid_beside_its_target(target: float, step: float, direction: int) -> None:
    """Identities: a whole multiple; idempotent in every direction; within one step, on the asked side."""
    strike = listing.snap(target, step, direction)
    dust = 1e-8 * max(target, step)
    assert strike % step == 0.0
    assert all(listing.snap(strike, step, again) == strike for again in (SNAP_NEAREST, SNAP_UP, SNAP_DOWN))
    assert direction != SNAP_UP or target - dust <= strike < target + step
    assert direction != SNAP_DOWN or target - step < strike <= target + dust
    assert abs(strike - target) <= (step if direction else step / 2) + dust


@given(count=some.integers(1, 2000), step=STEPS, dust=some.floats(-1e-10, 1e-10), direction=DIRECTIONS)
def test_a_listed_target_stays_within_dust(count: int, step: float, dust: float, direction: int) -> None:
    """A multiple of the step, moved by less than 1e-9 of itself, is that multiple in each direction."""
    assert listing.snap(count * step * (1.0 + dust), step, direction) == count * step


def test_snap_does_move_what_is_more_than_dust_away() -> None:
    """Negative control: a cent above the grid goes up, a cent below goes down."""
    assert listing.snap(110.01, 5.0, SNAP_UP) == 115.0
    assert listing.snap(109.99, 5.0, SNAP_DOWN) == 105.0


@pytest.mark.parametrize(
    ("strike", "spot", "listed"),
    [
        (40.0, 100.0, True),
        (39.5, 100.0, False),
        (250.0, 100.0, True),
        (255.0, 100.0, False),
        (0.0, 0.0, False),
        (-5.0, 10.0, False),
    ],
)
def test_range_of_listed_strikes(strike: float, spot: float, listed: bool) -> None:
    """From 0.4 to 2.5 times the stock's price, both ends included, and above zero: common practice."""
    assert bool(listing.is_listed(strike, spot)) is listed


@given(spot=PRICES, steps=some.integers(-10, 10), step=STEPS, direction=DIRECTIONS)
def test_steps_from_counts_from_the_money(spot: float, steps: int, step: float, direction: int) -> None:
    """Identity: zero steps is the snapped spot, and each step is one spacing of the grid."""
    strike = listing.steps_from(spot, float(steps), step, direction)
    assert strike - listing.snap(spot, step, direction) == steps * step
    assert strike % step == 0.0


def decimal_tick(premium: float, ticks: tuple[float, float], rounding: str) -> float:
    """A premium moved to its tick in decimal arithmetic."""
    tick = Decimal(str(ticks[0] if premium < 3.0 else ticks[1]))
    return float((Decimal(premium) / tick).to_integral_value(rounding) * tick)


@given(premium=PREMIUMS, ticks=TICKS)
def test_ticks_against_decimal_arithmetic(premium: float, ticks: tuple[float, float]) -> None:
    """Rounding to 0.01/0.05 and 0.05/0.10 in exact decimals (tick sizes: exchange notices 2007-2020)."""
    units = premium / ticks[premium >= 3.0]
    assume(abs(units - round(units)) > 1e-6)
    assert listing.tick_floor(premium, *ticks) == decimal_tick(premium, ticks, ROUND_FLOOR)
    assert listing.tick_ceil(premium, *ticks) == decimal_tick(premium, ticks, ROUND_CEILING)


@given(cents=some.integers(0, 600), dust=some.floats(-1e-12, 1e-12))
def test_a_premium_on_its_tick_stays(cents: int, dust: float) -> None:
    """Whole cents below 3.00 and nickels above, with floating dust, are the decimal itself both ways."""
    cents = cents if cents < 300 else cents // 5 * 5
    premium = cents / 100.0 * (1.0 + dust)
    assert listing.tick_floor(premium, 0.01, 0.05) == cents / 100.0
    assert listing.tick_ceil(premium, 0.01, 0.05) == cents / 100.0


@pytest.mark.parametrize(
    ("premium", "ticks", "bid", "ask"),
    [
        (2.999, (0.01, 0.05), 2.99, 3.0),
        (3.01, (0.01, 0.05), 3.0, 3.05),
        (2.97, (0.05, 0.10), 2.95, 3.0),
        (3.11, (0.05, 0.10), 3.1, 3.2),
        (0.004, (0.01, 0.05), 0.0, 0.01),
        (1.234, (0.0, 0.0), 1.234, 1.234),
    ],
)
def test_ticks_around_three(premium: float, ticks: tuple[float, float], bid: float, ask: float) -> None:
    """Worked by hand: the finer tick below 3.00, the wider from there; a tick of 0 is none."""
    assert listing.tick_floor(premium, *ticks) == bid
    assert listing.tick_ceil(premium, *ticks) == ask


def test_half_spread_by_hand() -> None:
    """3 % of a 4.00 premium, half as much again one deviation away; at least one tick of 0.05."""
    assert listing.half_spread(4.0, 0.0, 0.05, costs()) == pytest.approx(0.12, rel=1e-15)
    assert listing.half_spread(4.0, 1.0, 0.05, costs()) == pytest.approx(0.18, rel=1e-15)
    assert listing.half_spread(0.5, 0.0, 0.05, costs()) == 0.05


def test_fills_by_hand() -> None:
    """Mid 2.40, half-spread 0.072: ask 2.472 goes up to 2.48, bid 2.328 down to 2.32; exact without ticks."""
    assert listing.fill_price(1.0, 2.4, 0.0, 0.01, 0.05, costs()) == 2.48
    assert listing.fill_price(-1.0, 2.4, 0.0, 0.01, 0.05, costs()) == 2.32
    exact = costs(ticks=0.0)
    assert listing.fill_price(1.0, 2.4, 0.0, 0.01, 0.05, exact) == pytest.approx(2.472, rel=1e-15)
    assert listing.fill_price(-1.0, 0.004, 0.0, 0.01, 0.05, exact) == 0.0


@given(side=SIDES, mid=PREMIUMS, away=some.floats(0.0, 2.5), ticks=TICKS, spread=SPREADS)
def test_a_fill_is_against_the_trader_and_on_the_tick(
    side: float, mid: float, away: float, ticks: tuple[float, float], spread: Costs
) -> None:
    """Identities: no better than the exact quote, at most a tick worse, on the tick, never negative."""
    price = listing.fill_price(side, mid, away, *ticks, spread)
    exact = listing.fill_price(side, mid, away, *ticks, spread._replace(use_ticks=0.0))
    assert price >= 0.0
    assert -1e-6 <= side * (price - exact) < max(ticks) + 1e-6
    assert side * (price - mid) >= -1e-6
    assert listing.tick_floor(price, *ticks) == price == listing.tick_ceil(price, *ticks)


@given(mid=some.floats(0.05, 400.0), away=some.floats(0.0, 2.4), spread=SPREADS)
def test_a_round_trip_costs_more_further_from_the_money(mid: float, away: float, spread: Costs) -> None:
    """Identity: buying and selling at once loses the spread, which never shrinks away from the money."""
    exact = spread._replace(use_ticks=0.0)

    def loss(distance: float) -> float:
        """Money a share lost by buying and selling at once."""
        ask = listing.fill_price(1.0, mid, distance, 0.01, 0.05, exact)
        return float(ask - listing.fill_price(-1.0, mid, distance, 0.01, 0.05, exact))

    assert 0.0 <= loss(away) <= loss(away + 0.1) + 1e-9


def test_free_trading_fills_at_mid() -> None:
    """Identity: without spread, floor and ticks both sides trade at the mid."""
    free = costs(half=0.0, floor=0.0, ticks=0.0)
    assert {listing.fill_price(side, math.pi, 1.0, 0.01, 0.05, free) for side in (1.0, -1.0)} == {math.pi}
