"""What every estimator of volatility must do, whichever it is: the house's rules for this extension point."""

from __future__ import annotations

from collections.abc import Iterator

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from array_market import array_market, cut, random_market, with_split
from hedgerow import volatility
from hedgerow.kernels.layout import Floats
from hedgerow.market.table import Market
from hedgerow.volatility.registry import ESTIMATORS, Bars, Estimate, estimator, named_estimator

NAMES = sorted(ESTIMATORS)


def estimate(name: str, market: Market) -> Floats:
    """Estimate with a parameter that suits the estimator."""
    chosen = named_estimator(name)
    return chosen.volatility(Bars.of(market), 0.9 if chosen.parameter == "decay" else 10.0)


def test_the_named_estimators_are_there() -> None:
    """The six that the study language promises."""
    promised = {"close", "ewma", "parkinson", "garman_klass", "rogers_satchell", "yang_zhang"}
    assert promised <= set(NAMES)
    assert volatility.surface_words({"blend": [{"yang_zhang": 21}]}).terms[0].estimator == "yang_zhang"


@pytest.mark.parametrize("name", NAMES)
@settings(max_examples=15, deadline=None)
@given(seed=st.integers(0, 10**6), sessions=st.integers(1, 119))
def test_time_runs_one_way(name: str, seed: int, sessions: int) -> None:
    """Bit for bit the same up to a session when all after it is changed, or is not there."""
    market = random_market(seed, holes=0.05)
    other = random_market(seed + 1, holes=0.05)
    mixed = {
        field: np.vstack([getattr(market, field)[:sessions], getattr(other, field)[sessions:] * 7.0])
        for field in ("open", "high", "low", "close")
    }
    changed = array_market(mixed.pop("close"), **mixed)
    whole = estimate(name, market)[:sessions].tobytes()
    assert whole == estimate(name, changed)[:sessions].tobytes()
    assert whole == estimate(name, cut(market, sessions)).tobytes()


@pytest.mark.parametrize("name", NAMES)
def test_scale_does_not_matter(name: str) -> None:
    """Prices in cents give the volatility of prices in dollars; 1e-9 allows for rounded ratios."""
    market = random_market(1)
    fields = {field: getattr(market, field) * 100.0 for field in ("open", "high", "low", "close")}
    np.testing.assert_allclose(
        estimate(name, market), estimate(name, array_market(fields.pop("close"), **fields)), rtol=1e-9
    )


@pytest.mark.parametrize("name", NAMES)
@pytest.mark.parametrize("ratio", [2.0, 1.5, 0.1])
def test_splits_do_not_matter(name: str, ratio: float) -> None:
    """A split of the same worth leaves every value as it was; 1e-9 allows for rounded ratios."""
    market = random_market(2)
    np.testing.assert_allclose(
        estimate(name, market), estimate(name, with_split(market, 60, ratio)), rtol=1e-9
    )


@pytest.mark.parametrize("kind", ["dividend", "special"])
@pytest.mark.parametrize("name", ["close", "ewma", "yang_zhang"])
def test_cash_that_left_the_price_is_no_move(name: str, kind: str) -> None:
    """Whoever looks across sessions must see a tenth paid out as (nearly) no move, and unpaid as a fall."""
    market = random_market(3)
    fields = {field: getattr(market, field).copy() for field in ("open", "high", "low", "close")}
    for array in fields.values():
        array[60:] *= 0.9
    close = fields.pop("close")
    cash = np.zeros_like(close)
    cash[60] = market.close[60] * 0.1
    paid = estimate(name, array_market(close, **fields, **{kind: cash}))
    unpaid = estimate(name, array_market(close, **fields))
    np.testing.assert_allclose(paid[64], estimate(name, market)[64], rtol=0.02)
    assert (unpaid[64] > 1.2 * paid[64]).all()


@pytest.mark.parametrize("name", NAMES)
def test_each_symbol_stands_alone(name: str) -> None:
    """Bit for bit the same for a symbol alone and beside another."""
    market = random_market(4, holes=0.1)
    fields = {field: getattr(market, field)[:, :1].copy() for field in ("open", "high", "low", "close")}
    alone = array_market(fields.pop("close"), **fields)
    assert estimate(name, market)[:, 0].tobytes() == estimate(name, alone)[:, 0].tobytes()


@pytest.mark.parametrize("name", NAMES)
def test_holes_are_lived_through(name: str) -> None:
    """With a tenth of the bars missing an estimate is still there, and near that of the whole history."""
    full, holed = random_market(5, sessions=400), random_market(5, sessions=400, holes=0.1)
    values = estimate(name, holed)
    known = ~np.isnan(values)
    assert known[40:].mean() > 0.8
    ratio = np.nanmean(values[40:]) / np.nanmean(estimate(name, full)[40:])
    assert ratio == pytest.approx(1.0, abs=0.05)


@pytest.mark.parametrize("name", NAMES)
def test_positive_or_unknown(name: str) -> None:
    """Never zero or negative: prices that stand still give nothing to go by."""
    still = array_market(np.full((60, 1), 20.0), high=np.full((60, 1), 20.0), low=np.full((60, 1), 20.0))
    assert np.isnan(estimate(name, still)).all()
    moving = estimate(name, random_market(6, holes=0.1))
    assert (moving[~np.isnan(moving)] > 0.0).all()


@pytest.mark.parametrize("name", NAMES)
def test_unknown_until_two_thirds_of_the_horizon(name: str) -> None:
    """The first value appears with the least count of known values, and no earlier."""
    chosen = named_estimator(name)
    values = estimate(name, random_market(7))
    least = chosen.least_known(0.9 if chosen.parameter == "decay" else 10.0)
    first = int(np.argmax(~np.isnan(values[:, 0])))
    assert first in (least - 1, least)


@pytest.fixture
def peeking() -> Iterator[str]:
    """Register an estimator that looks at tomorrow, for as long as a test runs."""

    @estimator("peeking")
    def tomorrow(bars: Bars, horizon: float) -> Estimate:
        squares = np.vstack([bars.returns[1:], bars.returns[-1:]]) ** 2
        return Estimate(np.full_like(squares, horizon), squares)

    yield "peeking"
    del ESTIMATORS["peeking"]


def test_an_estimator_that_peeks_is_caught(peeking: str) -> None:
    """Negative control: the comparison above tells an estimator that looks at tomorrow."""
    market = random_market(8)
    assert estimate(peeking, market)[:50].tobytes() != estimate(peeking, cut(market, 50)).tobytes()


def test_a_name_is_taken_once() -> None:
    """A second estimator of the same name is refused."""
    with pytest.raises(ValueError, match="already registered under the name `close`"):
        estimator("close")(lambda bars, horizon: Estimate(bars.returns, bars.returns))
