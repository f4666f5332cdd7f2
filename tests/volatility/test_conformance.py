"""What every estimator of volatility must do, whichever it is: the house's rules for this extension point."""

from __future__ import annotations

from collections.abc import Iterator

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from array_market import array_market, cut, random_market
from hedgerow import volatility
from hedgerow.extend import check_estimator
from hedgerow.kernels.layout import Floats
from hedgerow.market.table import Market
from hedgerow.volatility.registry import ESTIMATORS, Bars, Estimate, estimator, named_estimator

NAMES = sorted(ESTIMATORS)


def estimate(name: str, market: Market) -> Floats:
    """Estimate with a parameter that suits the estimator."""
    return check_estimator.estimate(named_estimator(name), market)


def test_the_named_estimators_are_there() -> None:
    """The six that the study language promises."""
    promised = {"close", "ewma", "parkinson", "garman_klass", "rogers_satchell", "yang_zhang"}
    assert promised <= set(NAMES)
    assert volatility.surface_words({"blend": [{"yang_zhang": 21}]}).terms[0].estimator == "yang_zhang"


@pytest.mark.parametrize("rule", check_estimator.ESTIMATOR_CHECKS)
@pytest.mark.parametrize("name", NAMES)
def test_every_rule_of_the_house_is_kept(name: str, rule: str) -> None:
    """What is asked of a user's estimator is asked of each of the package's own."""
    assert check_estimator.ESTIMATOR_CHECKS[rule](ESTIMATORS[name]) == ""


@pytest.mark.parametrize("name", NAMES)
@settings(max_examples=15, deadline=None)
@given(seed=st.integers(0, 10**6), sessions=st.integers(1, 119))
def test_time_runs_one_way(name: str, seed: int, sessions: int) -> None:
    """Bit for bit the same up to a session when all after it is changed, or is not there."""
    market = random_market(seed, holes=0.05)
    assert not check_estimator.later_sessions_change(ESTIMATORS[name], market, sessions, seed + 1)


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
    told = check_estimator.looks_only_backward(ESTIMATORS[peeking])
    assert told.startswith("it looks ahead")


def test_a_name_is_taken_once() -> None:
    """A second estimator of the same name is refused."""
    with pytest.raises(ValueError, match="already registered under the name `close`"):
        estimator("close")(lambda bars, horizon: Estimate(bars.returns, bars.returns))
