"""The engine unchanged on real prices: five US stocks 2000-2013, their splits and dividends, and the S&P 500.

Prices and bill rates: `hedgerow.market.samples`, sources there. What the account should come to is worked out
again from the events by `plain_account`; option values are held to bounds that need no model.
"""

from __future__ import annotations

import math
from collections.abc import Mapping
from dataclasses import replace
from functools import cache
from pathlib import Path
from typing import Any

import numpy as np
import pandas as pd
import pytest

import hedgerow as hr
from hedgerow.market import samples
from hedgerow.market.sessions import exercise_threshold
from hedgerow.market.table import Market
from hedgerow.volatility import SurfaceModel, build
from plain_account import PlainClose, PlainLeg, plain_closes

STRATEGIES = Path(__file__).parents[2] / "strategies"
FILES = sorted(path.name for path in STRATEGIES.glob("*.yaml"))
ACCOUNT = hr.Account(cash=1_000_000.0)
DEEP_PUTS = {
    "name": "deep puts",
    "shares": "none",
    "legs": {"put": {"sell": "put", "expiry": {"days": 90}, "strike": {"from_spot": "20%"}}},
}
OWN_CALL = {"sell": "call", "expiry": {"days": 60}, "strike": {"from_spot": "0%", "snap": "down"}}


@cache
def stocks() -> Market:
    """The five stocks with the bill rate."""
    market, bills = samples.stocks(), samples.bill_rates()
    begins = bills["date"].to_numpy().astype("datetime64[D]")
    return replace(market, rate=bills["rate"].to_numpy()[np.searchsorted(begins, market.dates, "right") - 1])


@cache
def index() -> Market:
    """The S&P 500 with the bill rate."""
    return samples.index()


@cache
def ran(file: str, costs: str | None = None, on_index: bool = False) -> hr.Result:
    """One shipped strategy over the whole history; costs None are the default ones."""
    return hr.run(index() if on_index else stocks(), STRATEGIES / file, account=ACCOUNT, costs=costs)


def column(market: Market, symbol: str) -> int:
    """Number of a symbol."""
    return market.symbols.index(symbol)


def session_of(market: Market, day: object) -> int:
    """Number of a date's session."""
    return int(np.searchsorted(market.dates, np.datetime64(pd.Timestamp(str(day)), "D")))


def near(one: float, other: float, money: float = 0.01) -> bool:
    """Whether two amounts are the same but for a cent and the rounding of sums."""
    return abs(one - other) <= money + 1e-9 * abs(other)


def check_close(market: Market, close: PlainClose, day: Any, rights: Mapping[str, str]) -> None:
    """Hold one close of the log, and its marks, to the account worked out from events."""
    positions = close.positions
    assert (close.session, len(positions)) == (day["session"], day["positions"])
    assert near(close.cash, day["cash"], 0.005)
    stock, options = close.stock(market), 0.0
    assert near(stock, day["stock"])
    for number, mark in close.marks.items():
        position = positions[number]
        assert abs(position.shares - mark["shares"]) < 1e-9
        symbol = column(market, position.symbol)
        for name, leg in position.legs.items():
            options += mark[name]
            european = market.kinds[symbol] == "index"
            check_value(leg, rights[name], market.close[close.session, symbol], mark[name], european)
    assert set(close.marks) == set(positions)
    assert near(options, day["options"])
    assert near(close.cash + stock + options, day["equity"])


def check_value(leg: PlainLeg, right: str, spot: float, value: float, european: bool) -> None:
    """Without a model: at least intrinsic value when American; a call at most the stock, a put the strike.

    Half a cent a share below intrinsic is allowed: so little is what early exercise may be left out for.
    """
    if leg.quantity == 0.0:
        assert value == 0.0
        return
    each = value / leg.quantity
    least = max(spot - leg.strike, 0.0) if right == "call" else max(leg.strike - spot, 0.0)
    assert (-1e-9 if european else least - 0.0051) <= each <= (spot if right == "call" else leg.strike)


def rights_of(result: hr.Result) -> dict[str, str]:
    """`call` or `put` of each leg's name."""
    return {leg.name: leg.right for leg in result.log.meta.legs}


def early(result: hr.Result, right: str) -> pd.DataFrame:
    """Events of calls, or puts, that were assigned before their expiry."""
    events = result.events
    mine = events["leg"].map(rights_of(result)) == right
    return events[mine & (events["reason"] == "assigned early") & (events["kind"] == "assigned")]


@pytest.mark.parametrize("on_index", [False, True])
@pytest.mark.parametrize("file", FILES)
def test_every_close_worked_out_from_the_events(file: str, on_index: bool) -> None:
    """Cash, shares, stock, options and equity of every close against a plain account fed with the events.

    The log must reconcile too: that is what asking for its ledger does.
    """
    market, result = index() if on_index else stocks(), ran(file, None, on_index)
    assert result.ledger.trades["pnl"].notna().all()
    assert len(result.trades) > 0 or file == "cash.yaml"
    closes = plain_closes(result.events, market, result.ledger.marks)
    for close, day in zip(closes, result.log.days, strict=True):
        check_close(market, close, day, rights_of(result))


def test_a_cent_astray_is_told() -> None:
    """Negative control: with one event's cash a cent off, or one left out, the closes no longer agree."""
    result = ran("collar.yaml")
    cash = result.equity["cash"].to_numpy()
    for wrong in (
        result.events.assign(cash=result.events["cash"] + 0.01 * (result.events.index == 900)),
        result.events.drop(index=900),
    ):
        found = np.array([close.cash for close in plain_closes(wrong, stocks())])
        event = result.events.loc[900]
        assert event["cash"] != 0.0
        late = stocks().dates >= np.datetime64(event["date"], "D")
        assert (np.abs(found - cash) > 0.005).tolist() == late.tolist()


@cache
def alone(symbol: str) -> hr.Result:
    """One stock bought on its first session's next open and kept, without costs."""
    market = stocks().select([symbol])
    account = hr.Account(cash=1_000_000.0, per_position=0.5, interest=False)
    return hr.run(market, {"name": "kept", "shares": "long", "legs": {}}, account=account, costs="none")


@pytest.mark.parametrize("symbol", ["AAPL", "IBM", "MSFT", "GOOG", "FB"])
def test_dividends_of_shares_that_are_kept(symbol: str) -> None:
    """To the cent, the dividends recovered from the adjusted close on the shares held that night.

    How many there were in that time: recomputed independently; one of Microsoft's, of 2004-11-15, is 3.08.
    """
    events, market = alone(symbol).events, stocks()
    paid = (market.dividend + market.special)[:, column(market, symbol)]
    got = events[events["kind"] == "dividend"].set_index("date")["cash"]
    opened = events[events["kind"] == "opened"].iloc[0]
    expected = {}
    shares = 100.0 * opened["quantity"]
    for session in range(session_of(market, opened["date"]) + 1, len(market.dates)):
        shares *= market.split[session, column(market, symbol)]
        if paid[session]:
            expected[pd.Timestamp(str(market.dates[session]))] = round(paid[session] * shares, 2)
    assert got.to_dict() == pytest.approx(expected, abs=0.0051)
    assert len(got) == {"AAPL": 3, "IBM": 52, "MSFT": 37, "GOOG": 0, "FB": 0}[symbol]


@pytest.mark.parametrize("symbol", ["AAPL", "IBM", "MSFT"])
def test_wealth_of_shares_that_are_kept(symbol: str) -> None:
    """Wealth from prices, splits and dividends against the data's own adjusted close, session by session.

    A day's change of the shares' worth with its dividend, over the worth the night before, is the change of
    the adjusted close; that is in cents and reinvests at the close of the ex-date, which leaves .1 %.
    """
    result, frame = alone(symbol), samples.stocks_frame()
    mine = frame[frame["Ticker"] == symbol].set_index("Date").sort_index()
    days = pd.to_datetime(result.equity["date"]).dt.strftime("%Y-%m-%d")
    adjusted = mine["Adj Close"].astype(float).loc[days].to_numpy()
    stock, cash = result.equity["stock"].to_numpy(), result.equity["cash"].to_numpy()
    kept = np.flatnonzero(stock)[:-1]
    ours = (stock[kept + 1] + cash[kept + 1] - cash[kept]) / stock[kept]
    np.testing.assert_allclose(ours, adjusted[kept + 1] / adjusted[kept], atol=1.5e-3)


def test_splits_multiply_what_is_held() -> None:
    """Apple 2 for 1 on 2000-06-21 and on 2005-02-28, Microsoft on 2003-02-18 (public record)."""
    for symbol, days in (("AAPL", ["2000-06-21", "2005-02-28"]), ("MSFT", ["2003-02-18"])):
        result = alone(symbol)
        splits = result.events[result.events["kind"] == "split"]
        assert splits["date"].dt.strftime("%Y-%m-%d").tolist() == days
        assert splits["quantity"].tolist() == [2.0] * len(days)
        shares = result.ledger.marks.set_index("date")["shares"]
        for day in days:
            before = shares[shares.index < day].iloc[-1]
            assert shares[day] == 2.0 * before
            worth = result.equity.set_index("date")["stock"]
            assert worth[day] / worth[worth.index < day].iloc[-1] == pytest.approx(1.0, abs=0.12)


def test_a_covered_call_through_a_split_by_hand() -> None:
    """Apple from 2005-02-22, worked out from the raw bars: bought at 86.30, split 2 for 1, stopped on 03-08.

    Open of 02-22 86.30, with 2 in 10,000 slippage 86.3173; 7 % under it, halved by the split, 40.1375; the
    low of 03-08 is the first under it. The call's strike 92, the first 5 % over the close of 02-18, is then
    46, and twice as many are bought back.
    """
    raw = samples.stocks_frame()
    bars = raw[raw["Ticker"] == "AAPL"].set_index("Date")[["Open", "Low"]].astype(float)
    assert bars.loc["2005-02-22", "Open"] == 86.30
    stop = 86.30 * 1.0002 * 0.93 / 2.0
    after = bars.loc["2005-02-28":"2005-03-08"]
    assert (after["Low"] <= stop).tolist() == [False] * (len(after) - 1) + [True]
    assert after["Open"].iloc[-1] > stop
    call = {"sell": "call", "expiry": {"days": 30}, "strike": {"from_spot": "5%", "snap": "up"}}
    rule = {"name": "call", "shares": "long", "legs": {"call": call}, "stop": {"below_entry": "7%"}}
    market = stocks().select(["AAPL"])
    result = hr.run(market, rule, account=ACCOUNT, first="2005-02-18", last="2005-03-08")
    trade = result.trades.iloc[0]
    size = 100.0 * trade["lots"]
    rows = result.events[result.events["position"] == trade["position"]]
    assert rows["kind"].tolist() == ["opened", "shares", "leg", "split", "leg", "shares", "closed"]
    assert rows["strike"].tolist()[2:5:2] == [92.0, 46.0]
    assert rows["quantity"].tolist()[1:6] == [size, -size, 2.0, 2.0 * size, -2.0 * size]
    assert rows["price"].iloc[1] == pytest.approx(86.30 * 1.0002, rel=1e-12)
    assert rows["price"].iloc[5] == pytest.approx(stop * 0.9998, rel=1e-12)
    assert trade["closed"] == pd.Timestamp("2005-03-08")


@pytest.mark.parametrize("file", ["collar.yaml", "collar-weekly.yaml"])
@pytest.mark.parametrize("costs", ["none", None])
def test_collars_end_within_their_bounds(file: str, costs: str | None) -> None:
    """A collar held to expiry earns between its worst loss and best gain, before fees and dividends.

    Also where a split fell inside its life. What is in the money by less than the exercise threshold of the
    time (OCC rule 805) is not exercised, which may take a result so far over a bound, and a special dividend
    that came off the strikes has left the price. The fills at entry count, as in the bounds.
    """
    result, market = ran(file, costs), stocks()
    trades = result.trades.assign(spread=result.ledger.postings.entry_spread() / 100.0)
    trades = trades[trades["reason"] == "expiry"]
    with_split = set(result.events.loc[result.events["kind"] == "split", "position"])
    assert len(with_split & set(trades["position"])) >= 2
    for row in trades.itertuples():
        start, stop = session_of(market, row.opened) + 1, session_of(market, row.closed)
        where = (slice(start, stop + 1), column(market, row.symbol))
        shares = row.shares * market.split[where].prod()
        special = (market.special[where] * row.shares).sum()
        threshold = float(exercise_threshold([market.ordinals[stop]])[0]) * shares
        earned = row.stock_pnl + row.option_pnl - row.spread + special
        assert -row.worst_loss - threshold - 0.03 <= earned <= row.best_gain + threshold + 0.03


def test_calls_are_assigned_early_only_for_a_dividend() -> None:
    """On an ex-date's session, in the money, for a dividend worth more than interest on the strike to expiry.

    Hull, Options, Futures and Other Derivatives: never rational for a dividend of at most K (1 - e^(-r tau)).
    """
    market, seen = stocks(), 0
    for file in FILES:
        result = ran(file)
        for row in early(result, "call").itertuples():
            session, symbol = session_of(market, row.date), column(market, row.symbol)
            paid = market.dividend[session, symbol]
            days = (row.expiry - pd.Timestamp(str(market.dates[session - 1]))).days
            assert paid > row.strike * -math.expm1(-market.rate[session - 1] * days / 365.0)
            assert market.close[session - 1, symbol] > row.strike
            assert not is_paid_to(result.events, row)
            seen += 1
    assert seen > 20


def is_paid_to(events: pd.DataFrame, row: Any) -> bool:
    """Whether the position of an assignment was paid a dividend on that day; shares then owed owe theirs."""
    same = (events["position"] == row.position) & (events["date"] == row.date)
    return bool(((events[same]["kind"] == "dividend") & (events[same]["quantity"] > 0.0)).any())


def lattice_put(spot: float, strike: float, years: float, rate: float, volatility: float) -> float:
    """An American put kept for at least one step of 800, by a binomial tree of Cox, Ross and Rubinstein."""
    steps = 800
    up = math.exp(volatility * math.sqrt(years / steps))
    growth = math.exp(rate * years / steps)
    chance = (growth - 1.0 / up) / (up - 1.0 / up)
    value = np.maximum(strike - spot * up ** np.arange(steps, -steps - 1, -2.0), 0.0)
    for step in range(steps - 1, -1, -1):
        value = (chance * value[:-1] + (1.0 - chance) * value[1:]) / growth
        if step:
            value = np.maximum(value, strike - spot * up ** np.arange(step, -step - 1, -2.0))
    return float(value[0])


def assert_no_dividend_is_missed(puts: pd.DataFrame) -> None:
    """Nobody exercises IBM puts in the fortnight before a dividend worth more than interest on the strike.

    Exercised on the ex-date a put brings K - (S - D), now K - S; waiting costs K (e^(r t) - 1). IBM paid each
    quarter throughout, so that its dividend was expected; a fortnight allows for days that move.
    """
    market, seen = stocks(), 0
    paid = market.dividend[:, column(market, "IBM")]
    for row in puts[puts["symbol"] == "IBM"].itertuples():
        session = session_of(market, row.date)
        ahead = session + np.flatnonzero(paid[session:])[:1]
        if ahead.size and market.ordinals[ahead[0]] <= row.expiry.toordinal():
            days = int(market.ordinals[ahead[0]] - market.ordinals[session - 1])
            waiting = row.strike * math.expm1(market.rate[session - 1] * days / 365.0)
            assert days > 14 or paid[ahead[0]] <= waiting + 0.005
            seen += 1
    assert seen > 50


def test_puts_are_assigned_early_only_deep_in_the_money() -> None:
    """Every thirtieth early assignment of puts written 20 % in the money, against a lattice of its own.

    Keeping the put one more step must not be worth more than its exercise, to a hundredth of a cent.
    """
    market, surface = stocks(), build(SurfaceModel(), stocks())
    result = hr.run(market, DEEP_PUTS, account=hr.Account(cash=1e6, per_position=0.2))
    rows = early(result, "put")
    assert len(rows) > 300
    assert_no_dividend_is_missed(rows)
    for row in rows.iloc[::30].itertuples():
        before, symbol = session_of(market, row.date) - 1, column(market, row.symbol)
        spot, rate = market.close[before, symbol], market.rate[before]
        days = (row.expiry - pd.Timestamp(str(market.dates[before]))).days
        years = days / 365.0
        atm = surface.at_the_money(before, symbol, days)
        volatility = surface.volatility(atm, row.strike, spot * math.exp(rate * years), days)
        assert row.spot == spot
        assert lattice_put(spot, row.strike, years, rate, volatility) <= row.strike - spot + 1e-4


def test_a_special_dividend_comes_off_the_strike() -> None:
    """Microsoft's 3.00 of 2004-11-15, a tenth of its price: contracts were adjusted by it (public record).

    Nobody exercises for what comes off the strike: the call at 29, .97 in the money with two months left,
    is not assigned for 3.08, and ends at 26. An order of the evening before is filled at strikes so lowered.
    """
    rule = {"name": "call", "shares": "long", "legs": {"call": OWN_CALL}}
    market, strikes = stocks().select(["MSFT"]), {}
    for first in ("2004-11-10", "2004-11-12"):
        events = hr.run(market, rule, account=ACCOUNT, costs="none", first=first, last="2005-01-21").events
        legs = events[events["leg"] == "call"]
        strikes[first] = legs["strike"].tolist()
        assert legs["kind"].tolist() == ["leg", "expired"]
    assert strikes == {"2004-11-10": [29.0, 26.0], "2004-11-12": [26.0, 26.0]}


@pytest.mark.parametrize("file", ["collar.yaml", "covered-call.yaml"])
def test_the_index_is_settled_in_cash(file: str) -> None:
    """European and cash-settled: paid the intrinsic value at expiry, nothing delivered, nothing early."""
    events = ran(file, None, True).events
    ends = events[events["kind"].isin(["exercised", "assigned"])]
    assert len(ends) > 20
    assert (ends["reason"] == "expiry").all()
    assert (ends["date"] == ends["expiry"]).all()
    gap = (ends["spot"] - ends["strike"]) * np.where(ends["leg"] == "put", -1.0, 1.0)
    np.testing.assert_allclose(ends["price"], gap, rtol=1e-12)
    np.testing.assert_allclose(ends["cash"], -ends["quantity"] * gap, atol=0.0051)
    shares = events[events["kind"] == "shares"]
    assert (np.abs(shares["price"] / shares["mid"] - 1.0) > 1e-5).all()
