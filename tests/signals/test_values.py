"""Signals by hand-worked examples."""

from __future__ import annotations

import datetime
from dataclasses import replace

import numpy as np
import pytest

from array_market import array_market, report, with_split
from hedgerow.kernels.layout import Floats
from hedgerow.market.table import Market, Report
from hedgerow.signals import Panel


def asked(closes: list[float], name: str, **params: float) -> list[float]:
    """What a signal says of one symbol with these closes."""
    return Panel(array_market(np.array(closes).reshape(-1, 1))).evaluate(name, params)[:, 0].tolist()


def test_close_against_its_mean() -> None:
    """Hand-worked: means of three are 2, 3, 3; an equal close is neither over nor under."""
    closes = [1.0, 2.0, 3.0, 4.0, 2.0, 3.0]
    assert asked(closes, "close_over_mean", sessions=3) == [False, False, True, True, False, False]
    assert asked(closes, "close_under_mean", sessions=3) == [False, False, False, False, True, False]


def test_slope_of_a_mean() -> None:
    """Hand-worked: means of two are 1.5, 2.5, 2.5, 1.5; against one session before."""
    closes = [1.0, 2.0, 3.0, 2.0, 1.0]
    assert asked(closes, "mean_rising", sessions=2, over=1) == [False, False, True, False, False]
    assert asked(closes, "mean_falling", sessions=2, over=1) == [False, False, False, False, True]


def test_change_of_price_and_distance_from_the_high() -> None:
    """Hand-worked: 110 over 100 is a tenth; 99 below a high of 110 x 1.01 = 111.1 is .1089."""
    assert asked([100.0, 105.0, 110.0, 99.0], "momentum", sessions=2)[2] == pytest.approx(0.1, rel=1e-12)
    assert asked([100.0, 105.0, 110.0, 99.0], "distance_from_high", sessions=2)[3] == pytest.approx(
        1.0 - 99.0 / 111.1, rel=1e-12
    )


def test_strength_at_its_ends() -> None:
    """Identities: only gains 100, only losses 0, nothing at all 50."""
    assert asked([1.0, 2.0, 3.0, 4.0], "rsi", sessions=3)[3] == 100.0
    assert asked([4.0, 3.0, 2.0, 1.0], "rsi", sessions=3)[3] == 0.0
    assert asked([2.0, 2.0, 2.0, 2.0], "rsi", sessions=3)[3] == 50.0


def test_rank_of_volatility() -> None:
    """Hand-worked: moves grow every session, so today's volatility is above all others; then it is below."""
    growing = 100.0 * np.exp(np.cumsum([0.001 * k * (-1) ** k for k in range(12)]))
    calm = growing[-1] * np.exp(np.cumsum([1e-6, -1e-6, 1e-6]))
    ranks = asked([*growing, *calm], "volatility_rank", sessions=2, over=5)
    assert ranks[11] == 1.0
    assert ranks[13] == 0.0


def test_a_break_of_the_band() -> None:
    """Hand-worked: mean 11 and deviation 2 of (10, 10, 10, 10, 15): 15 is two deviations out."""
    closes = [10.0, 10.0, 10.0, 10.0, 15.0]
    assert asked(closes, "band_break_up", sessions=5, width=1.9) == [False] * 4 + [True]
    assert asked(closes, "band_break_up", sessions=5, width=2.1) == [False] * 5
    assert asked([10.0, 10.0, 10.0, 10.0, 5.0], "band_break_down", sessions=5, width=1.9)[4]


def test_crossings_stand_where_the_sides_change() -> None:
    """Identity: a crossing is where the line is on the other side of its signal than the bar before."""
    rng = np.random.default_rng(1)
    market = array_market(50.0 * np.exp(np.cumsum(rng.normal(0, 0.02, (300, 3)), axis=0)))
    panel, params = Panel(market), {"fast": 5, "slow": 10, "smooth": 4}
    over = panel.evaluate("macd_over_signal", params)[14:]
    up = panel.evaluate("macd_crossed_up", params)[14:]
    down = panel.evaluate("macd_crossed_down", params)[14:]
    np.testing.assert_array_equal(up[1:], over[1:] & ~over[:-1])
    np.testing.assert_array_equal(down[1:], ~over[1:] & over[:-1])
    assert up.sum() > 20


def test_weekdays_are_those_of_the_calendar() -> None:
    """Against the standard library's weekday of the same dates."""
    market = array_market(np.full((40, 1), 5.0))
    found = Panel(market).evaluate("weekday")[:, 0]
    assert found.tolist() == [datetime.date.fromordinal(int(day)).weekday() for day in market.ordinals]


def yearly_market(sessions: int = 330) -> Market:
    """A market of one still symbol, with nothing reported yet."""
    return array_market(np.full((sessions, 1), 20.0))


def growth(market: Market) -> Floats:
    """What the market's earnings growth is at each close of its only symbol."""
    return Panel(market).evaluate("eps_growth")[:, 0]


def test_growth_of_earnings_is_known_at_the_reaction() -> None:
    """Hand-worked: 1.20 over 1.00 a year before is 20 %, from the session that reacts on, for 200 days."""
    market = yearly_market(500)
    reports = (report(market, 10, 1.0), report(market, 271, 1.2))
    found = growth(replace(market, reports=reports))
    assert np.isnan(found[:271]).all()
    assert found[271] == pytest.approx(0.2, rel=1e-12)
    stale = int(np.searchsorted(market.ordinals, reports[1].reaction_ordinal + 200, side="right"))
    assert found[stale - 1] == found[271]
    assert np.isnan(found[stale:]).all()


def test_growth_is_blind_to_a_split_between_the_reports() -> None:
    """Hand-worked: .66 a share after a 2-for-1 split is 1.32 of the old share: 10 % over 1.20."""
    market = with_split(yearly_market(), 100, 2.0)
    found = growth(replace(market, reports=(report(market, 10, 1.2), report(market, 271, 0.66))))
    assert found[300] == pytest.approx(0.1, rel=1e-12)


@pytest.mark.parametrize(("eps", "session"), [(-0.5, 10), (0.0, 10), (np.nan, 10), (1.0, 80)])
def test_growth_over_a_loss_or_no_year_before_is_unknown(eps: float, session: int) -> None:
    """A year before with a loss, with nothing, unknown, or not within six weeks of a year: no growth."""
    market = yearly_market()
    found = growth(replace(market, reports=(report(market, session, eps), report(market, 271, 1.2))))
    assert np.isnan(found).all()


def test_the_next_report_is_seen_once_announced() -> None:
    """Hand-worked: announced 14 days (10 sessions) before; 1 on the eve; 999 when none is known."""
    market = yearly_market(60)
    reports = (report(market, 30, announced=13),)
    to_report = Panel(replace(market, reports=reports)).evaluate("sessions_to_report")[:, 0]
    assert to_report[20:30].tolist() == [10.0, 9.0, 8.0, 7.0, 6.0, 5.0, 4.0, 3.0, 2.0, 1.0]
    assert (to_report[:20] == 999.0).all()
    assert (to_report[30:] == 999.0).all()


def test_a_report_beyond_the_data_is_counted_by_the_calendar() -> None:
    """From Monday 2015-01-05 the Friday week after next is 14 sessions off less Martin Luther King Day."""
    market = yearly_market(1)
    friday = datetime.date(2015, 1, 23).toordinal()
    reports = (Report(0, friday - 1, friday - 40, friday, 1.0),)
    found = Panel(replace(market, reports=reports)).evaluate("sessions_to_report")
    assert found[0, 0] == 13.0


def test_sessions_since_the_last_report() -> None:
    """Hand-worked: 999 before the first, 0 on the session that reacts, then one more a session."""
    market = yearly_market(30)
    found = Panel(replace(market, reports=(report(market, 5), report(market, 20)))).evaluate(
        "sessions_since_report"
    )[:, 0]
    assert found[4] == 999.0
    assert found[5:9].tolist() == [0.0, 1.0, 2.0, 3.0]
    assert found[19:22].tolist() == [14.0, 0.0, 1.0]


def test_the_next_dividend_is_expected_after_two() -> None:
    """Hand-worked: paid on Monday 5 January and 6 April 2015, so expected 91 days later, on Monday 6 July.

    On Thursday 2 July, the eve (the 3rd is a holiday), 1 session is left; a late one is expected every next
    day for 45 days, up to 20 August, then no more.
    """
    market = yearly_market(200)
    dividend = np.zeros_like(market.close)
    dividend[[0, 65]] = 0.5
    assert str(market.dates[65]) == "2015-04-06"
    found = Panel(replace(market, dividend=dividend)).evaluate("sessions_to_ex_dividend")[:, 0]
    at = {str(date): value for date, value in zip(market.dates, found, strict=True)}
    assert (found[:65] == 999.0).all()
    assert at["2015-04-06"] == 63.0  # 13 weeks less Memorial Day and 3 July
    assert [at[f"2015-06-{day}"] for day in (29, 30)] == [4.0, 3.0]
    assert at["2015-07-02"] == 1.0
    assert at["2015-07-06"] == at["2015-07-07"] == at["2015-08-20"] == 1.0
    assert at["2015-08-21"] == 999.0
