"""A concrete position from what the kernels found: contracts, premiums, limits, what falls inside it."""

from __future__ import annotations

import datetime as dt
import math
from collections.abc import Iterator, Sequence
from typing import Any

import numpy as np

from hedgerow.desk.close import Close, lot_of, probed, with_ratio
from hedgerow.desk.conditions import Test, nearest_end
from hedgerow.desk.sheet import LegLine, Limit, Plan
from hedgerow.kernels.layout import LOT_SHARES, Floats, Records
from hedgerow.kernels.state import World
from hedgerow.market.table import Market
from hedgerow.rules.base import Bounds
from hedgerow.rules.phrases import bounds_phrase
from hedgerow.rules.schema import Accept, Strategy

CENT = 0.01  # the least that options must bring where they must bring money in

__all__ = ["accept_tests", "day_of", "dividends_until", "plans_of", "reports_until"]


def day_of(ordinal: int) -> str:
    """An ordinal as an ISO date; nothing for 0."""
    return dt.date.fromordinal(int(ordinal)).isoformat() if ordinal > 0 else ""


def plans_of(close: Close, world: World, orders: Records, ratios: Sequence[float]) -> list[Plan]:
    """The plan of each of some orders: its figures at the close, and its premiums over the stress."""
    from hedgerow.kernels.probe import PRICE

    if not len(orders):
        return []
    lots = np.concatenate([lot_of(order) for order in orders]).view(np.recarray)
    session = close.rows - 1
    found = probed(world, session, lots, PRICE)
    legs = lots["legs"].copy()
    mids, credits, debits = [], [], []
    for ratio in ratios:
        seen = probed(with_ratio(world, close.bench.tape, ratio), session, lots, PRICE)
        mids.append(lots["legs"]["mid"].copy())
        credits.append(seen["credit"].copy())
        debits.append(seen["debit"].copy())
    stress = (np.array(mids), np.array(credits), np.array(debits))
    return [
        _plan(close, order, legs[n], found[n], tuple(part[:, n] for part in stress))
        for n, order in enumerate(orders)
    ]


def _plan(close: Close, order: Any, legs: Any, found: Any, stress: tuple[Floats, ...]) -> Plan:
    """One order's plan."""
    market, strategy, lots = close.bench.market, close.program.strategy, float(order["lots"])
    mids, credits, debits = stress
    symbol, sign = int(order["symbol"]), float(close.program.plan[0]["shares"])
    lines = tuple(_lines(strategy, legs, found, mids, lots, int(market.ordinals[-1])))
    last = max((leg.expiry for leg in lines), default="")
    return Plan(
        lots=lots,
        shares=sign * LOT_SHARES * lots,
        stock=float(market.close[-1, symbol]),
        legs=lines,
        net_debit=float(found["debit"]) * lots,
        debit_low=float(debits.min()) * lots,
        debit_high=float(debits.max()) * lots,
        option_credit=float(found["credit"]) * lots,
        credit_low=float(credits.min()) * lots,
        credit_high=float(credits.max()) * lots,
        best_gain=float(found["best"]) * lots,
        worst_loss=float(found["worst"]) * lots,
        break_even=float(found["even"]),
        odds_of_best=float(found["odds"]),
        odds_of_gain=float(found["gain"]),
        capital=float(found["stake"]) * lots,
        fees=float(found["fees"]) * lots,
        first_expiry=day_of(int(found["horizon"])),
        limit=limit_of(strategy.accept, found, LOT_SHARES * float(market.close[-1, symbol]), sign < 0.0),
        dividends=dividends_until(close, symbol, last),
        reports=reports_until(market, symbol, last),
    )


def _lines(
    strategy: Strategy, legs: Any, found: Any, mids: Floats, lots: float, today: int
) -> Iterator[LegLine]:
    for k, leg in enumerate(strategy.legs):
        one = legs[k]
        if one["quantity"] == 0.0:
            continue
        yield LegLine(
            name=leg.name,
            side="sell" if leg.sold else "buy",
            right=leg.right,
            contracts=abs(float(one["quantity"])) * lots / LOT_SHARES,
            strike=float(one["strike"]),
            expiry=day_of(int(one["expiry"])),
            days=int(one["expiry"]) - today,
            price=float(found["fills"][k]),
            mid=float(one["mid"]),
            low=float(mids[:, k].min()),
            high=float(mids[:, k].max()),
            volatility=float(one["volatility"]),
            chance=float(found["chances"][k]),
        )


def limit_of(accept: Accept | None, found: Any, notional: float, short: bool = False) -> Limit:
    """The highest net debit at which a structure still meets what the rule accepts, solved for the debit.

    With F what the structure is worth at worst, B at best, and O what could be owed, a bound on the worst
    loss D - F <= m (D + O) holds up to D = (F + m O) / (1 - m), one on the best gain B - D >= b (D + O) up to
    D = (B - b O) / (1 + b), and one on their ratio B - D >= r (D - F) up to D = (B + r F) / (1 + r). Of
    shares sold `short` losses and gains are measured on their price where that is more than D + O.
    """
    debit, owed, credit = float(found["debit"]), float(found["owed"]), float(found["credit"])
    floor, top = debit - float(found["worst"]), debit + float(found["best"])
    shares, least = debit + credit, notional if short else -math.inf  # what the shares alone cost
    on_options = [] if accept is None else list(_option_ends(accept, shares, notional))
    on_whole = [] if accept is None else list(_whole_ends(accept, floor, top, owed, least))
    if not on_options and not on_whole:
        return Limit(math.nan, math.nan, "", False)
    most, rule = min([*on_options, *on_whole])
    return Limit(most / LOT_SHARES, (shares - most) / LOT_SHARES, rule, (most, rule) in on_whole)


def _option_ends(accept: Accept, shares: float, notional: float) -> Iterator[tuple[float, str]]:
    """The net debit of one lot up to which each bound on the options holds, and the bound in words."""
    if accept.net_credit:
        yield shares - CENT * LOT_SHARES, "the options together bring money in"
    if accept.net_debit is not None:
        most = accept.net_debit.high * notional
        yield shares + most, f"the options cost {_said(accept.net_debit)} of the stock's price"


def _whole_ends(
    accept: Accept, floor: float, top: float, owed: float, least: float
) -> Iterator[tuple[float, str]]:
    """The same for each bound on what the whole can win or lose, measured on `least` or more."""
    if accept.worst_loss is not None and accept.worst_loss.high < 1.0:
        share = accept.worst_loss.high
        most = max((floor + share * owed) / (1.0 - share), floor + share * least)
        yield most, f"the worst loss is {_said(accept.worst_loss)} of what is tied up"
    if accept.best_gain is not None and accept.best_gain.low > 0.0 and math.isfinite(top):
        share = accept.best_gain.low
        most = min((top - share * owed) / (1.0 + share), top - share * least)
        yield most, f"the best gain is {_said(accept.best_gain)} of what is tied up"
    if accept.best_over_worst is not None and math.isfinite(top):
        ratio = accept.best_over_worst.low
        bound = _said(accept.best_over_worst, False)
        yield (top + ratio * floor) / (1.0 + ratio), f"the best gain over the worst loss is {bound}"


def _said(bounds: Bounds, percent: bool = True) -> str:
    return bounds_phrase(bounds, percent)


def accept_tests(accept: Accept | None, found: Any, notional: float) -> list[Test]:
    """What the rule accepts, each part with the figure of the structure that was found."""
    if accept is None:
        return []
    base, credit = float(found["stake"]), float(found["credit"])
    best, worst = float(found["best"]), float(found["worst"])
    tests = []
    if accept.net_credit:
        share = credit / notional
        tests.append(
            Test("the options bring money in, of the stock's price", credit > 0.0, share, 0.0, "fraction")
        )
    figures = (
        ("net_debit", "the options cost {} of the stock's price", -credit / notional, "fraction"),
        ("worst_loss", "the worst loss is {} of what the position ties up", worst / base, "fraction"),
        ("best_gain", "the best gain is {} of what the position ties up", best / base, "fraction"),
        ("odds_of_best", "the chance of the best gain is {}", float(found["odds"]), "fraction"),
        (
            "best_over_worst",
            "the best gain over the worst loss is {}",
            best / worst if worst > 0.0 else math.inf,
            "ratio",
        ),
        ("spread_to_premium", "the spread is {} of the premium", float(found["wide"]), "fraction"),
    )
    for name, phrase, value, unit in figures:
        bounds = getattr(accept, name)
        if bounds is not None:
            text = phrase.format(_said(bounds, unit == "fraction"))
            tests.append(Test(text, bounds.holds(value), value, nearest_end(value, bounds), unit))
    return tests


def dividends_until(close: Close, symbol: int, last: str) -> tuple[tuple[str, float], ...]:
    """Dividends expected after the close and up to an ISO date, as (date, cash a share)."""
    bar, today = close.bench.tape.bars[-1, symbol], int(close.bench.market.ordinals[-1])
    if not last or bar["pay_ordinal"] == 0:
        return ()
    end, due, gap = dt.date.fromisoformat(last).toordinal(), int(bar["pay_ordinal"]), int(bar["pay_gap"])
    days = [due] if gap <= 0 else range(due, end + 1, gap)
    return tuple((day_of(day), float(bar["pay_cash"])) for day in days if today < day <= end)


def reports_until(market: Market, symbol: int, last: str) -> tuple[str, ...]:
    """Dates of earnings reports known at the close whose reaction falls up to an ISO date."""
    if not last:
        return ()
    today, end = int(market.ordinals[-1]), dt.date.fromisoformat(last).toordinal()
    return tuple(
        day_of(report.ordinal)
        for report in market.reports
        if report.symbol_index == symbol and today < report.reaction_ordinal <= end
    )
