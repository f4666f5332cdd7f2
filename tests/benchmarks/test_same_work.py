"""What is timed against one another does the same work: walk, C and plain Python end with the same money."""

from __future__ import annotations

from dataclasses import replace
from functools import cache

import bench_market
import numpy as np
import pytest
from c_collar import COMPILER, run_c
from plain_american import american_or_european as plain_value
from plain_loop import run_plain

from hedgerow.kernels.american import american_or_european
from hedgerow.kernels.layout import Floats
from hedgerow.walk.account import Account

needs_gcc = pytest.mark.skipif(COMPILER is None, reason="there is no gcc on the search path")

# Relative difference of equity allowed. The loops add in another order here and there, so a value may differ
# in its last bit; a premium may then round to the next tick, a hundred-millionth of the account.
CLOSE = 1e-6


@cache
def stage(rate: float) -> bench_market.Stage:
    """Ten stocks over 600 sessions; with interest, puts are worth more than European ones."""
    return bench_market.make_stage(600, 10, seed=3, rate=rate)


def by_walk(rate: float) -> tuple[Floats, int]:
    """Equity and positions opened by the walk."""
    return bench_market.run_walk(stage(rate))


@needs_gcc
@pytest.mark.parametrize("rate", [0.0, 0.04])
def test_c_loop_does_what_the_walk_does(rate: float) -> None:
    """The C loop, written separately: the same number of positions, and equity at every close."""
    found, opened = by_walk(rate)
    expected, wanted = run_c(stage(rate).inputs)
    assert opened == wanted > 1000
    np.testing.assert_allclose(found, expected, rtol=CLOSE)


@pytest.mark.parametrize("rate", [0.0, 0.04])
def test_plain_loop_does_what_the_walk_does(rate: float) -> None:
    """The plain Python loop, written separately: the same number of positions, and equity at every close."""
    found, opened = by_walk(rate)
    expected, wanted = run_plain(stage(rate).inputs)
    assert opened == wanted
    np.testing.assert_allclose(found, expected, rtol=CLOSE)


@needs_gcc
def test_short_capital_is_shared_out_alike() -> None:
    """An account that can hold only a few positions: walk, C and plain Python decline the same entries."""
    poor = Account(cash=60_000.0, per_position=0.3, most_positions=4, most_new_a_day=2)
    inputs = replace(stage(0.0).inputs, account=poor)
    found, opened = bench_market.run_walk(replace(stage(0.0), inputs=inputs))
    assert opened < by_walk(0.0)[1]
    for equity, count in (run_c(inputs), run_plain(inputs)):
        assert count == opened
        np.testing.assert_allclose(equity, found, rtol=CLOSE)


@needs_gcc
def test_comparison_notices_other_work() -> None:
    """Negative control: with a commission ten cents higher, the C loop's equity is far outside."""
    inputs = stage(0.0).inputs
    dearer = replace(inputs, costs=inputs.costs._replace(contract_fee=inputs.costs.contract_fee + 0.1))
    equity, _ = run_c(dearer)
    assert np.abs(equity[-1] / by_walk(0.0)[0][-1] - 1.0) > 100 * CLOSE


def test_plain_option_values_are_those_of_the_kernel() -> None:
    """One formula written twice, over random options of up to a month: equal but for rounding."""
    draw = np.random.default_rng(1)
    for _ in range(300):
        right, spot = int(draw.integers(2)), draw.uniform(10.0, 300.0)
        strike, years = spot * np.exp(draw.normal(0.0, 0.08)), draw.uniform(0.2, 30.0) / 365.0
        rate, volatility = draw.uniform(0.0, 0.08), draw.uniform(0.05, 1.0)
        found = plain_value(right, spot, strike, years, rate, volatility)
        expected = american_or_european(right, spot, strike, years, rate, 0.0, volatility, 0.01)
        assert found == pytest.approx(expected, abs=1e-11 * strike)
