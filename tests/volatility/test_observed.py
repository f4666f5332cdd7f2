"""Observed implied volatility in place of an estimate."""

from __future__ import annotations

import numpy as np
import pytest

from array_market import array_market, random_market
from hedgerow.errors import StudyError
from hedgerow.market.table import Market
from hedgerow.volatility import SurfaceModel, build


def quoted(sessions: int = 40) -> Market:
    """Three symbols, the last an index of volatility in points; an implied column with holes."""
    rng = np.random.default_rng(1)
    close = 50.0 * np.exp(np.cumsum(rng.normal(0.0, 0.02, (sessions, 3)), axis=0))
    close[:, 2] = np.linspace(15.0, 25.0, sessions)
    implied = np.full((sessions, 3), np.nan)
    implied[5:, 0] = np.linspace(0.2, 0.4, sessions - 5)
    implied[10:20, 0] = np.nan
    return array_market(close, symbols=["AAA", "BBB", "VOL"], implied=implied)


def test_a_column_is_the_level() -> None:
    """Exactly the column where it stands; carried five sessions through a hole, then unknown; not mixed."""
    market = quoted()
    level = build(SurfaceModel(observed="column"), market).level
    np.testing.assert_array_equal(level[5:10, 0], market.implied[5:10, 0])
    assert (level[10:15, 0] == market.implied[9, 0]).all()
    assert np.isnan(level[15:20, 0]).all()
    np.testing.assert_array_equal(level[20:, 0], market.implied[20:, 0])
    assert np.isnan(level[:5, 0]).all()
    assert np.isnan(level[:, 1]).all()


def test_a_symbol_serves_all() -> None:
    """Exactly a hundredth of the index's close, in every column."""
    market = quoted()
    level = build(SurfaceModel(observed="VOL", observed_scale=0.01), market).level
    for symbol in range(3):
        np.testing.assert_allclose(level[:, symbol], market.close[:, 2] / 100.0, rtol=1e-15)


@pytest.mark.parametrize(
    ("observed", "told"),
    [("VOLA", "did you mean `VOL`"), ("column", "holds no implied volatility above zero")],
)
def test_what_is_not_there_is_told(observed: str, told: str) -> None:
    """An unknown symbol names the nearest; an empty column says so."""
    market = quoted() if observed == "VOLA" else random_market(2)
    with pytest.raises(StudyError, match=told):
        build(SurfaceModel(observed=observed), market)
