"""The records the walk reads, beside the market they come from."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest

from array_market import array_market, cut, random_market, report
from hedgerow.errors import StudyError
from hedgerow.kernels.layout import FRESH, HAS_BAR, PAYS, REPORTS, SPLITS
from hedgerow.market.table import Market
from hedgerow.volatility.surface import SurfaceModel, build
from hedgerow.walk.inputs import Tape, make_tape

MODEL = SurfaceModel(terms=SurfaceModel().terms[:1])


def tape(market: Market) -> Tape:
    """The records of a market with the volatility of ten sessions."""
    return make_tape(market, build(MODEL, market))


def steps(*closes: float) -> np.ndarray:
    """Closes of one symbol, shape (T, 1)."""
    return np.array(closes)[:, np.newaxis]


def test_prices_and_volatility_are_those_of_the_market() -> None:
    """Every bar field by field; levels where they are known, carried where they are not."""
    market = random_market(5, sessions=60)
    made = tape(market)
    surface = build(MODEL, market)
    for name in ("open", "high", "low", "close"):
        np.testing.assert_array_equal(made.bars[name], getattr(market, name))
    known = ~np.isnan(surface.level)
    np.testing.assert_array_equal(made.bars["level"][known], surface.level[known])
    np.testing.assert_array_equal((made.bars["signs"] & FRESH) > 0, known)
    np.testing.assert_array_equal(made.sessions["ordinal"], market.ordinals)


def test_signs_say_what_happens() -> None:
    """A bar, a dividend, a split, a report for Sunday the 11th announced on Wednesday the 7th."""
    market = array_market(np.full((8, 1), 50.0))
    dividend, split = market.dividend.copy(), market.split.copy()
    dividend[2], split[4] = 0.5, 2.0
    close = market.close.copy()
    close[6] = np.nan
    names = ("open", "high", "low", "close")
    market = replace(market, dividend=dividend, split=split, **dict.fromkeys(names, close))
    market = replace(market, reports=(report(market, 5, announced=4),))
    signs = tape(market).bars["signs"][:, 0]
    assert [bool(sign & HAS_BAR) for sign in signs] == [True] * 6 + [False, True]
    assert [at for at, sign in enumerate(signs) if sign & PAYS] == [2]
    assert [at for at, sign in enumerate(signs) if sign & SPLITS] == [4]
    assert [at for at, sign in enumerate(signs) if sign & REPORTS] == [2, 3, 4]


def test_a_report_is_known_from_its_announcement_to_its_reaction() -> None:
    """Announced four days before; the reaction's own session knows the next one, or none."""
    market = array_market(np.full((12, 2), 50.0))
    market = replace(market, reports=(report(market, 9, symbol=1, announced=3), report(market, 10, symbol=1)))
    found = tape(market).bars["report"]
    assert not found[:, 0].any()
    expected = [market.ordinals[9] if market.ordinals[at] >= market.ordinals[9] - 4 else 0 for at in range(9)]
    later = market.ordinals[10]
    assert found[:9, 1].tolist() == [day or later for day in expected]
    assert found[9:, 1].tolist() == [later, 0, 0]


def test_actions_of_a_day_without_a_bar_wait_for_the_next() -> None:
    """Two holes: 1.00 a share, then two for one and 0.30 a new share; then 0.50 + 0.30 and the split.

    By hand: a dollar for each old share is half a dollar for each of two new ones.
    """
    market = array_market(steps(40, np.nan, np.nan, 20, 20))
    dividend, split, special = market.dividend.copy(), market.split.copy(), market.special.copy()
    dividend[1], dividend[2], split[2], special[1] = 0.4, 0.3, 2.0, 0.6
    actions = tape(replace(market, dividend=dividend, split=split, special=special)).actions[:, 0]
    assert actions["dividend"].tolist() == pytest.approx([0, 0, 0, 0.8, 0])
    assert actions["special"].tolist() == pytest.approx([0, 0, 0, 0.3, 0])
    assert actions["split"].tolist() == [1, 1, 1, 2, 1]


def test_actions_after_the_last_bar_are_lost() -> None:
    """There is no later bar to put them on."""
    market = array_market(steps(40, 40, np.nan))
    dividend = market.dividend.copy()
    dividend[2] = 1.0
    assert not tape(replace(market, dividend=dividend)).actions["dividend"].any()


def test_an_unknown_open_is_the_last_close_in_todays_shares() -> None:
    """After a two-for-one split the 40 of yesterday is 20; the range is widened to hold it."""
    close = steps(40, 19, 21)
    opened = steps(40, np.nan, 21)
    split = np.array([[1.0], [2.0], [1.0]])
    bars = tape(array_market(close, open=opened, split=split)).bars[:, 0]
    assert bars["open"].tolist() == [40, 20, 21]
    assert bars["high"][1] == 20
    assert (bars["low"] <= bars["open"]).all()


@pytest.mark.parametrize("sessions", [30, 77, 119])
def test_what_comes_later_changes_nothing(sessions: int) -> None:
    """The records of a market cut at a session are the first ones of the whole market's."""
    market = random_market(8, holes=0.05)
    dividend = market.dividend.copy()
    dividend[10::25] = np.where(np.isnan(market.close[10::25]), 0.0, 0.4)
    market = replace(market, dividend=dividend)
    market = replace(market, reports=tuple(report(market, at) for at in (40, 80, 110)))
    whole, part = tape(market), tape(cut(market, sessions))
    for name in (
        "open",
        "high",
        "low",
        "close",
        "level",
        "anchor",
        "pay_cash",
        "pay_ordinal",
        "pay_gap",
        "signs",
    ):
        np.testing.assert_array_equal(part.bars[name], whole.bars[name][:sessions], err_msg=name)
    known = part.bars["report"]
    np.testing.assert_array_equal(known, whole.bars["report"][:sessions])


def test_an_index_is_exercised_at_its_end_only() -> None:
    """One flag a symbol."""
    market = array_market(np.full((3, 2), 50.0), kinds=("index", "stock"))
    assert tape(market).american.tolist() == [0, 1]


def test_old_listings_have_old_ticks() -> None:
    """Nickels and dimes before 2007 in the historical regime; another regime there is not."""
    market = array_market(np.full((3, 1), 50.0))
    old = np.busday_offset(np.datetime64("2003-03-03"), np.arange(3))
    shift = int((market.dates[0] - old[0]).astype(int))
    early = replace(market, dates=old, ordinals=market.ordinals - shift)
    surface = build(MODEL, early)
    sessions = make_tape(early, surface, "historical").sessions
    assert set(sessions["low_tick"]) == {0.05}
    assert set(sessions["high_tick"]) == {0.10}
    assert set(make_tape(early, surface).sessions["low_tick"]) == {0.01}
    with pytest.raises(StudyError):
        make_tape(early, surface, "ancient")
