"""The level: a mean of logarithms over the terms that are known."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest

from array_market import array_market, cut, random_market, report
from hedgerow.kernels.layout import Floats
from hedgerow.market.table import Market
from hedgerow.volatility import SurfaceModel, build
from hedgerow.volatility.blend import Term, blended, reaction_sessions
from hedgerow.volatility.registry import Bars, total_return_logs


def plain_volatility(market: Market, session: int, horizon: int, symbol: int = 0) -> float:
    """Annualised root of the mean square of the last returns, with numpy alone."""
    returns = np.diff(np.log(market.close[session - horizon : session + 1, symbol]))
    return float(np.sqrt(np.mean(returns**2) * 252.0))


def test_the_default_level_is_a_mean_of_logarithms() -> None:
    """Against numpy: the cube root of the product of 10-, 63- and 252-session volatility."""
    market = random_market(1, 400)
    level = build(SurfaceModel(), market).level
    terms = [plain_volatility(market, 399, horizon) for horizon in (10, 63, 252)]
    assert level[399, 0] == pytest.approx(np.prod(terms) ** (1.0 / 3.0), rel=1e-10)


def test_terms_that_are_not_known_yet_are_left_out() -> None:
    """Against numpy: after 100 sessions two of the default's three terms are known."""
    market = random_market(2, 400)
    level = build(SurfaceModel(), market).level
    terms = [plain_volatility(market, 100, horizon) for horizon in (10, 63)]
    assert level[100, 0] == pytest.approx(np.sqrt(np.prod(terms)), rel=1e-10)


def test_weights() -> None:
    """Hand-worked: weights 2 and 1 make (a a b) to the power of a third."""
    market = random_market(3, 100)
    level = blended(Bars.of(market), [Term("close", 10, 2.0), Term("close", 63)], 63)
    a, b = plain_volatility(market, 99, 10), plain_volatility(market, 99, 63)
    assert level[99, 0] == pytest.approx((a * a * b) ** (1.0 / 3.0), rel=1e-10)


@pytest.mark.parametrize(("history", "first"), [(0, 63), (30, 30), (90, 90)])
def test_a_level_needs_its_history(history: int, first: int) -> None:
    """The first level stands on the session with that many returns: a quarter unless said otherwise."""
    level = build(SurfaceModel(history=history), random_market(4, 120)).level
    assert np.isnan(level[:first]).all()
    assert not np.isnan(level[first:]).any()


def shocked_market() -> Market:
    """A market with one move of 20 % on session 150, a reaction to a report."""
    market = random_market(5, 200, 1)
    factor = np.ones((200, 1))
    factor[150:] = 1.2
    close = market.close * factor
    shocked = array_market(close, open=market.open * factor, high=close * 1.02, low=close * 0.98)
    return replace(shocked, reports=(report(shocked, 150),))


def test_reactions_to_reports_are_left_out_of_the_level() -> None:
    """Against the market without the move: nearly the same level; with no bump the move stays in."""
    calm, shocked = random_market(5, 200, 1), shocked_market()
    assert reaction_sessions(shocked).nonzero()[0].tolist() == [150]
    plain = build(SurfaceModel(), calm).level[155, 0]
    assert build(SurfaceModel(), shocked).level[155, 0] == pytest.approx(plain, rel=0.10)
    assert build(SurfaceModel(report_moves=1.0), shocked).level[155, 0] > 1.6 * plain


def test_a_report_after_the_data_leaves_nothing_out() -> None:
    """A known report whose session has not come marks no session."""
    market = random_market(6, 50)
    far = report(market, 49)._replace(reaction_ordinal=int(market.ordinals[-1]) + 9)
    assert not reaction_sessions(replace(market, reports=(far,))).any()


def test_total_returns_by_hand() -> None:
    """Hand-worked: 2-for-1 from 100 to 49 with .5 a new share is (49 + .5) x 2 = 99 over 100."""
    close: Floats = np.array([[100.0], [49.0], [np.nan], [50.0]])
    split, cash = np.ones((4, 1)), np.zeros((4, 1))
    split[1], cash[1] = 2.0, 0.5
    found = total_return_logs(array_market(close, split=split, dividend=cash), close)[:, 0]
    np.testing.assert_allclose(found, [np.nan, np.log(0.99), np.nan, np.nan], rtol=1e-12)


@pytest.mark.parametrize("session", [63, 100, 317])
def test_the_level_looks_only_backward(session: int) -> None:
    """Bit for bit the same level and anchor when nothing after a close is there, reports included."""
    market = random_market(7, 400, 2, 0.05)
    market = replace(market, reports=tuple(report(market, s) for s in range(30, 400, 63)))
    model = SurfaceModel(pull=2.0)
    whole, short = build(model, market), build(model, cut(market, session + 1))
    assert whole.level[: session + 1].tobytes() == short.level.tobytes()
    assert whole.anchor[: session + 1].tobytes() == short.anchor.tobytes()
