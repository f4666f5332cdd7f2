"""One rule on one market from Python: what is given, in which forms, and what is refused."""

from __future__ import annotations

from dataclasses import replace
from pathlib import Path
from typing import Any

import numpy as np
import pytest

import hedgerow as hr
from hedgerow.errors import RulesError, StudyError
from hedgerow.kernels.layout import KIND_LEG, KIND_SHARES
from hedgerow.rules.load import load_strategy
from hedgerow.study.one import Bench
from hedgerow.volatility.model import SurfaceModel
from hedgerow.walk.account import DEFAULT_COSTS, NO_COSTS
from hedgerow.walk.run import Window
from walks import RULES, SURFACE, lively_market

MARKET = lively_market(sessions=130)
COLLAR = {"name": "collar", **RULES["collar"]}
STRATEGY_FILE = Path(__file__).parents[2] / "strategies" / "collar-weekly.yaml"


def test_every_form_of_a_strategy() -> None:
    """Words, a strategy and a file's path as text or path give the same log."""
    words = hr.run(MARKET, COLLAR, pricing=SURFACE)
    assert hr.run(MARKET, load_strategy(COLLAR), pricing=SURFACE).log.same_as(words.log)
    text = hr.run(MARKET, str(STRATEGY_FILE), pricing=SURFACE)
    assert hr.run(MARKET, STRATEGY_FILE, pricing=SURFACE).log.same_as(text.log)
    assert text.log.meta.variant == "Weekly collar"


def test_every_form_of_costs() -> None:
    """None for the usual ones, `none` for none, words, costs."""
    usual = hr.run(MARKET, COLLAR, pricing=SURFACE)
    assert hr.run(MARKET, COLLAR, pricing=SURFACE, costs=DEFAULT_COSTS).log.same_as(usual.log)
    assert hr.run(MARKET, COLLAR, pricing=SURFACE, costs={}).log.same_as(usual.log)
    free = hr.run(MARKET, COLLAR, pricing=SURFACE, costs="none")
    assert hr.run(MARKET, COLLAR, pricing=SURFACE, costs=NO_COSTS).log.same_as(free.log)
    assert free.log.events["fee"].sum() == 0.0
    traded = free.log.events[np.isin(free.log.events["kind"], (KIND_SHARES, KIND_LEG))]
    np.testing.assert_array_equal(traded["price"], traded["mid"])
    dear = hr.run(MARKET, COLLAR, pricing=SURFACE, costs={"half_spread": "10%", "contract_fee": 2})
    assert dear.trades["costs"].sum() > 2 * usual.trades["costs"].sum()


def test_every_form_of_pricing() -> None:
    """A model and its words."""
    words = {"blend": [{"close": 10}]}
    model = hr.run(MARKET, COLLAR, pricing=replace(SurfaceModel(), terms=SURFACE.terms))
    assert hr.run(MARKET, COLLAR, pricing=words).log.same_as(model.log)


@pytest.mark.parametrize(
    ("given", "places"),
    [
        ({"costs": {"half_spread": 3}}, ["costs"]),
        ({"costs": {"half_spred": "3%", "slippage": "200%"}}, ["costs", "costs"]),
        ({"costs": "cheap"}, ["costs"]),
        ({"pricing": {"skew": "steep"}}, None),
        ({"pricing": "no preset of that name"}, None),
        ({"first": "1999-01-01", "last": "tomorrow"}, ["window.from", "window.to"]),
    ],
)
def test_what_is_wrong_is_a_study_error(given: dict[str, Any], places: list[str] | None) -> None:
    """Every fault, where it is, and never another kind of error."""
    with pytest.raises(StudyError) as caught:
        hr.run(MARKET, COLLAR, **given)
    if places is not None:
        assert [fault.where for fault in caught.value.faults] == places


def test_a_wrong_strategy_is_a_rules_error() -> None:
    """Faults of its words, and a symbol that the market does not hold."""
    with pytest.raises(RulesError):
        hr.run(MARKET, {**COLLAR, "fill": "noon"})
    enter = {"when": {"signal": "close_over_mean", "sessions": 10, "of": "SPQ"}}
    with pytest.raises(RulesError, match="`SPQ` is no symbol of the market"):
        hr.run(MARKET, {**COLLAR, "enter": enter}, pricing=SURFACE)


def test_the_frames_are_those_of_the_log() -> None:
    """One row a position, a leg's life, a session and an event; cash adds up."""
    result = hr.run(MARKET, COLLAR, pricing=SURFACE)
    assert len(result.events) == len(result.log.events)
    assert len(result.trades) == len(result.log.terms) == result.summary.positions
    assert len(result.equity) == 130
    assert len(result.legs) >= 2 * len(result.trades) - 8
    assert result.events["cash"].sum() == pytest.approx(result.log.days["cash"][-1])


def test_which_symbols_are_traded() -> None:
    """All stocks, or all where there are none; those named; each unknown name is a fault with its number."""
    mixed = replace(MARKET, kinds=("stock", "index", "stock", "stock"))
    indexes = replace(MARKET, kinds=("index",) * 4)
    assert Bench(mixed, SURFACE).traded.tolist() == [1, 0, 1, 1]
    assert Bench(indexes, SURFACE).traded.tolist() == [1, 1, 1, 1]
    assert Bench(mixed, SURFACE, symbols=("S01", "S03")).traded.tolist() == [0, 1, 0, 1]
    with pytest.raises(StudyError) as caught:
        _ = Bench(MARKET, SURFACE, symbols=("S01", "S1", "T")).traded
    assert [fault.where for fault in caught.value.faults] == ["symbols.2", "symbols.3"]
    assert "did you mean `S" in str(caught.value.faults[0])


def test_only_what_is_traded_is_opened() -> None:
    """Signals and the yardstick too look at no other symbol."""
    bench = Bench(MARKET, SURFACE, symbols=("S00", "S03"))
    result = bench.run(load_strategy(COLLAR), hr.Account(), NO_COSTS, Window.of(MARKET))
    assert set(result.log.terms["symbol"].tolist()) == {0, 3}
    assert result.yardstick is not None
    assert len(result.yardstick) == 130


def test_an_index_is_settled_in_cash() -> None:
    """No shares move at an expiry of a cash-settled index."""
    index = replace(MARKET, kinds=("index",) * 4)
    events = hr.run(index, COLLAR, pricing=SURFACE).events
    ended = events[events["kind"].isin(["exercised", "assigned"])]
    assert len(ended) > 5
    assert (ended["price"] > 0).all()
