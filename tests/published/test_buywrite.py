"""The buy-write rule, an ordinary strategy file, against the published S&P 500 BuyWrite index.

Sources stand in `buywrite_table`, which prints the table. Premiums come from realized volatility alone.
"""

from __future__ import annotations

import datetime as dt
import itertools
import math
from collections.abc import Iterator, Mapping
from dataclasses import replace
from functools import cache
from typing import Any

import numpy as np
import pytest

import buywrite_table as bw
import hedgerow as hr
from hedgerow.kernels.layout import Floats
from hedgerow.market import samples
from hedgerow.market.table import Market
from hedgerow.yamltext import load

BOUNDS = {"default": (1.0, 4.0, 0.955), "plain-21": (1.0, 3.3, 0.96)}


@cache
def market() -> Market:
    """The index with its dividends, made once."""
    return bw.index_with_dividends()


@cache
def preset(name: str) -> bw.Comparison:
    """The rule as shipped with one volatility model."""
    return bw.compared(name, market=market())


def holds(one: bw.Comparison, name: str) -> bool:
    """Whether a comparison is within the bounds of a model."""
    mean, rms, correlation = BOUNDS[name]
    return abs(one.mean_error) <= mean and one.rms_error <= rms and one.correlation >= correlation


def words_of_rule() -> dict[str, Any]:
    """The shipped strategy as plain words."""
    plain = load(bw.RULE.read_text(encoding="utf-8"), str(bw.RULE)).plain()
    assert isinstance(plain, dict)
    return plain


@pytest.mark.parametrize("name", BOUNDS)
def test_calendar_years_of_the_published_index(name: str) -> None:
    """2000-2018: mean error within 1 point; rms 4.0 and correlation .955, plain 21 sessions 3.3 and .96.

    Measured: default +.33, 3.99, .9592; plain-21 +.17, 3.12, .9630. A throw-away script of the same rule
    with a dividend yield a year, recomputed independently, had +.3, 3.9, .960 and +.1, 3.1, .963.
    """
    one = preset(name)
    assert abs(one.mean_error) <= BOUNDS[name][0]
    assert one.rms_error <= BOUNDS[name][1]
    assert one.correlation >= BOUNDS[name][2]


def test_what_is_known_to_be_off() -> None:
    """The largest misses, measured: 2009 by the default, 2008 by plain 21 sessions, both upward.

    A year of memory still prices the crisis in the year after it; a month's does not.
    """
    default, plain = preset("default"), preset("plain-21")
    assert bw.YEARS[int(np.abs(default.misses).argmax())] == 2009
    assert bw.YEARS[int(np.abs(plain.misses).argmax())] == 2008
    assert default.misses[bw.YEARS.index(2009)] > plain.misses[bw.YEARS.index(2009)] + 5.0


def wrong_rules() -> Iterator[tuple[str, Mapping[str, Any]]]:
    """The shipped rule with one thing about it changed."""
    call = words_of_rule()["legs"]["call"]
    for name, strike in (
        ("calls 3 % in the money", {"from_spot": "-3%", "snap": "up"}),
        ("calls 3 % out of the money", {"from_spot": "3%", "snap": "up"}),
    ):
        yield name, {**words_of_rule(), "legs": {"call": {**call, "strike": strike}}}
    yield "no calls", {**words_of_rule(), "legs": {}}


def shifted(sessions: int) -> Market:
    """The index with its prices and dividends so many sessions later."""
    names = ("open", "high", "low", "close", "dividend")
    return replace(market(), **{name: np.roll(getattr(market(), name), sessions, axis=0) for name in names})


@pytest.mark.parametrize("name", BOUNDS)
def test_another_rule_is_told(name: str) -> None:
    """Negative control: strikes 3 % in or out of the money, and no calls at all, miss the bounds."""
    for told, rule in wrong_rules():
        assert not holds(bw.compared(name, rule, market()), name), told


@pytest.mark.parametrize("name", BOUNDS)
@pytest.mark.parametrize("ratio", [0.7, 1.3])
def test_another_premium_is_told(name: str, ratio: float) -> None:
    """Negative control: implied volatility 30 % over or under what is assumed misses the bounds."""
    assert not holds(bw.compared({"preset": name, "ratio": ratio}, market=market()), name)


@pytest.mark.parametrize("name", BOUNDS)
@pytest.mark.parametrize("sessions", [21, -21])
def test_other_dates_are_told(name: str, sessions: int) -> None:
    """Negative control: prices a month late, or early, miss the bounds."""
    assert not holds(bw.compared(name, market=shifted(sessions)), name)


def test_the_dividends_are_those_of_the_total_returns() -> None:
    """Prices and month-end dividends compound to the published total returns; the yield was about 1 to 3 %.

    Public record, exactly; the range of S&P 500 dividend yields 2000-2018 is from memory.
    """
    years, close, dividend = bw.calendar_years(market()), market().close[:, 0], market().dividend[:, 0]
    growth = np.append(1.0, (close[1:] + dividend[1:]) / close[:-1])
    for year, published in zip(bw.YEARS, bw.TOTAL_RETURN, strict=True):
        mine = years == year
        assert growth[mine].prod() == pytest.approx(1.0 + published / 100.0, rel=1e-12)
        assert 0.01 < dividend[mine].sum() / close[mine].mean() < 0.03
        assert (dividend[mine] > 0.0).sum() == 12


def test_the_index_alone_comes_to_its_total_return() -> None:
    """Shares alone, from one year's end to the next, against the published total return.

    Dividends lie as cash: exactly the price's return and the dividends over the first price, but for interest
    (at most .06 points) and a lot; and within .6 points of the total return (public record), which reinvests.
    """
    rule = {"name": "index alone", "shares": "long", "legs": {}, "fill": "close"}
    account = hr.Account(cash=1e9, per_position=1.0)
    ends, years = bw.month_ends(market()), bw.calendar_years(market())
    close, paid = market().close[:, 0], market().dividend[:, 0]
    for year, published in zip(bw.YEARS, bw.TOTAL_RETURN, strict=True):
        start, stop = int(ends[years[ends] < year][-1]), int(ends[years[ends] == year][-1])
        first, last = str(market().dates[start]), str(market().dates[stop])
        equity = hr.run(market(), rule, account=account, costs="none", first=first, last=last).equity
        found = 100.0 * (equity["equity"].iloc[-1] / 1e9 - 1.0)
        plain = 100.0 * ((close[stop] + paid[start + 1 : stop + 1].sum()) / close[start] - 1.0)
        assert found == pytest.approx(plain, abs=0.08)
        assert found == pytest.approx(published, abs=0.6)


def third_fridays() -> list[int]:
    """Sessions of the third Fridays from December 1999, or before them where the market was closed."""
    days, found = market().dates, []
    for month in np.arange(np.datetime64("1999-12"), np.datetime64("2019-01")):
        first = dt.date.fromisoformat(f"{month}-01")
        friday = first + dt.timedelta(days=(4 - first.weekday()) % 7 + 14)
        found.append(int(np.searchsorted(days, np.datetime64(friday), side="right")) - 1)
    return found


def plain_call(session: int, strike: float, expiry: int) -> float:
    """A European call by the formula of Black and Scholes, from 21 sessions' moves about zero.

    At least 5 % a year. The dividend paid last is expected again thirty days later, once two have been paid.
    """
    close, paid = market().close[:, 0], market().dividend[:, 0]
    if expiry == session:
        return max(float(close[session]) - strike, 0.0)
    window = slice(session - 20, session + 1)
    moves = np.log((close[window] + paid[window]) / close[session - 21 : session])
    rate = float(market().rate[session])
    day, last = int(market().ordinals[session]), int(market().ordinals[expiry])
    spot, so_far = float(close[session]), np.flatnonzero(paid[: session + 1])
    if len(so_far) > 1 and (due := int(market().ordinals[so_far[-1]]) + 30) <= last:
        spot -= float(paid[so_far[-1]]) * math.exp(-rate * (due - day) / 365.0)
    years = (last - day) / 365.0
    deviation = max(0.05, math.sqrt(float(np.mean(moves**2)) * 252.0)) * math.sqrt(years)
    high = (math.log(spot / strike) + rate * years) / deviation + deviation / 2.0
    normal = [0.5 * math.erfc(-x / math.sqrt(2.0)) for x in (high, high - deviation)]
    return spot * normal[0] - strike * math.exp(-rate * years) * normal[1]


def plain_replay() -> Floats:
    """Wealth at every close of the rule, written out plainly: put everything in, write, hold, settle."""
    rolls, close, paid = third_fridays(), market().close[:, 0], market().dividend[:, 0]
    wealth = np.full(len(close), np.nan)
    wealth[rolls[0]] = 1.0
    for start, expiry in itertools.pairwise(rolls):
        strike = 5.0 * math.ceil(close[start] / 5.0)
        units = wealth[start] / (close[start] - plain_call(start, strike, expiry))
        for session in range(start + 1, expiry + 1):
            cash = paid[start + 1 : session + 1].sum()
            wealth[session] = units * (close[session] + cash - plain_call(session, strike, expiry))
    return wealth


def test_a_plain_replay_of_the_rule_agrees_with_the_engine() -> None:
    """Every close from December 1999 to December 2018 against a loop that shares no code with the engine.

    It trades fractions of a share and lets dividends lie without interest until the next roll; the engine's
    account trades whole lots and earns the bill rate on what is left. Together that is .005 % a year.
    """
    account = hr.Account(cash=1e9, per_position=1.0)
    result = hr.run(market(), bw.RULE, account=account, pricing="plain-21", costs="none", first=bw.FIRST_ROLL)
    wealth = plain_replay()
    rolls = third_fridays()
    found = np.full(len(wealth), np.nan)
    found[rolls[0] :] = result.equity["equity"].to_numpy() / 1e9
    opened = [str(market().dates[roll]) for roll in rolls]
    assert result.trades["opened"].dt.strftime("%Y-%m-%d").tolist() == opened
    known = slice(rolls[0], rolls[-1] + 1)
    np.testing.assert_allclose(found[known], wealth[known], rtol=1e-3)
    steps = [np.diff(np.log(one[known])) for one in (found, wealth)]
    np.testing.assert_allclose(steps[0], steps[1], atol=2e-5)


def test_the_table_says_what_was_compared(capsys: pytest.CaptureFixture[str]) -> None:
    """Every year, both published columns and the figures of both models stand in the printed table."""
    assert bw.main() == 0
    lines = capsys.readouterr().out.splitlines()
    assert [line.split()[0] for line in lines[1:20]] == [str(year) for year in bw.YEARS]
    assert lines[9].split()[1:3] == ["-37.00", "-28.65"]
    figures = {line.split()[0]: line.split()[-2:] for line in lines[20:]}
    assert float(figures["rms"][0]) == pytest.approx(preset("default").rms_error, abs=0.005)
    assert float(figures["correlation"][1]) == pytest.approx(preset("plain-21").correlation, abs=5e-5)


def test_samples_are_not_touched() -> None:
    """The sample index itself pays no dividends; they are laid over it here alone."""
    assert not samples.index().dividend.any()
