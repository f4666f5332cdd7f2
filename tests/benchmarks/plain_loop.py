"""The same collar as a straightforward loop in plain Python: lists and floats, nothing compiled, no numpy."""

from __future__ import annotations

import math
from collections.abc import Callable
from dataclasses import dataclass, field

from bench_market import PUT_DISTANCE, Inputs
from plain_american import american_or_european

from hedgerow.kernels.layout import Costs, SmileModel
from hedgerow.walk.account import Account

__all__ = ["prepare_plain", "run_plain"]

LOT = 100.0
OPEN_TO_CLOSE_DAYS = 6.5 / 24.0
Rows = list[list[float]]
Quote = tuple[float, float]


def cents(money: float) -> float:
    """Money in whole cents, halves away from zero."""
    return math.copysign(math.floor(abs(money) * 100.0 + 0.5) / 100.0, money)


def whole_units(amount: float, unit: float, up: bool) -> float:
    """Whole units of an amount, up or down, unless it is one already but for dust."""
    units = amount / unit
    nearest = math.floor(units + 0.5)
    if abs(units - nearest) <= 1e-9 * max(1.0, abs(nearest)):
        return float(nearest)
    return float(math.ceil(units) if up else math.floor(units))


def grid_step(price: float) -> float:
    """Distance between the strikes of a weekly series."""
    if price < 150.0:
        return 0.5 if price < 100.0 else 1.0
    return 2.5 if price < 500.0 else 5.0


def fill(side: float, quote: Quote, low: float, high: float, costs: Costs) -> float:
    """What an option is bought (side > 0) or sold for, on its tick."""
    mid, away = quote
    share = costs.half_spread * (1.0 + costs.spread_rise * away)
    half = max(share * mid, costs.floor_ticks * (low if mid < 3.0 else high))
    price = mid + half if side > 0.0 else max(0.0, mid - half)
    tick = low if price < 3.0 * (1.0 - 1e-9) else high
    if costs.use_ticks == 0.0 or tick <= 0.0:
        return price
    return math.floor(whole_units(price, tick, side > 0.0) * tick * 1e4 + 0.5) / 1e4


def quote(
    right: int, strike: float, days: float, spot: float, point: Quote, rate: float, smile: SmileModel
) -> Quote:
    """Mid of an option and its distance from the money in standard deviations; `point` is (level, anchor)."""
    level, anchor = point
    years = days / 365.0
    pull = smile.kappa * years
    weight = -math.expm1(-pull) / pull if pull > 0.0 else 1.0
    base = level if weight == 1.0 else anchor + (level - anchor) * weight
    atm = min(max(base * smile.ratio + smile.points, smile.floor), smile.cap)
    deviations = (math.log(strike / spot) - rate * years) / (atm * math.sqrt(years))
    z = min(max(deviations, -smile.wing), smile.wing)
    scale = (30.0 / max(days, 1.0)) ** smile.skew_decay
    volatility = atm * max(0.3, 1.0 + scale * z * (smile.skew + smile.curvature * z))
    return american_or_european(right, spot, strike, years, rate, volatility), abs(deviations)


@dataclass
class Held:
    """One position, ordered or open."""

    call_strike: float
    put_strike: float
    expiry: int
    lots: float
    open: bool = False


@dataclass
class Loop:
    """The account and the market it trades on, as lists."""

    account: Account
    costs: Costs
    smile: SmileModel
    opens: Rows
    closes: Rows
    levels: Rows
    anchors: Rows
    allowed: list[list[int]]
    ordinals: list[int]
    expiries: list[int]
    rates: list[float]
    ticks: list[tuple[float, float]]
    thresholds: list[float]
    cash: float = 0.0
    opened: int = 0
    held: dict[int, Held] = field(default_factory=dict)

    def quotes(self, held: Held, spot: float, known: tuple[int, int, float]) -> tuple[Quote, Quote]:
        """Call and put of a position; `known` is (session whose volatility is known, symbol, days left)."""
        session, s, days = known
        point = self.levels[session][s], self.anchors[session][s]
        rate, smile = self.rates[session], self.smile
        return (
            quote(0, held.call_strike, days, spot, point, rate, smile),
            quote(1, held.put_strike, days, spot, point, rate, smile),
        )

    def prices(self, t: int, call: Quote, put: Quote) -> tuple[float, float]:
        """What the call is sold and the put bought for."""
        low, high = self.ticks[t]
        return fill(-1.0, call, low, high, self.costs), fill(1.0, put, low, high, self.costs)

    def lot(self, spot: float, sold: float, bought: float) -> float:
        """Cash one lot ties up."""
        costs = self.costs
        credit = LOT * sold - LOT * bought
        fees = costs.share_fee * LOT + 2.0 * costs.contract_fee
        return max(LOT * (spot * (1.0 + costs.slippage)) - credit + fees, spot)

    def post(self, money: float) -> None:
        """Change cash by whole cents."""
        self.cash = cents(self.cash + cents(money))

    def enter(self, t: int) -> None:
        """Fill yesterday's orders at the open."""
        costs = self.costs
        for s in sorted(s for s, held in self.held.items() if not held.open):
            held, spot = self.held[s], self.opens[t][s]
            days = held.expiry - self.ordinals[t] + OPEN_TO_CLOSE_DAYS
            sold, bought = self.prices(t, *self.quotes(held, spot, (t - 1, s, days)))
            afford = math.floor((self.cash - costs.trade_fee) / self.lot(spot, sold, bought) + 1e-9)
            held.lots = min(held.lots, float(afford))
            if held.lots < 1.0 or sold <= 0.0:
                del self.held[s]
                continue
            shares, fee = LOT * held.lots, costs.contract_fee * held.lots
            self.post(
                -shares * (spot * (1.0 + costs.slippage)) - (costs.share_fee * shares + costs.trade_fee)
            )
            self.post(shares * sold - fee)
            self.post(-shares * bought - fee)
            held.open = True
            self.opened += 1

    def settle(self, t: int, held: Held, spot: float) -> None:
        """End a position at its expiry."""
        costs, shares = self.costs, LOT * held.lots
        least = max(self.thresholds[t] - 1e-9, 5e-324)
        for sign, strike in ((1.0, held.call_strike), (-1.0, held.put_strike)):
            if sign * (spot - strike) >= least:
                self.post(-costs.assignment_fee)
                self.post(shares * strike)
                return
        self.post(shares * (spot * (1.0 - costs.slippage)) - (costs.share_fee * shares + costs.trade_fee))

    def close(self, t: int) -> float:
        """Settle and value what is open; return equity."""
        stock, options = 0.0, 0.0
        for s in sorted(s for s, held in self.held.items() if held.open):
            held, spot = self.held[s], self.closes[t][s]
            days = held.expiry - self.ordinals[t]
            if days <= 0:
                self.settle(t, held, spot)
                del self.held[s]
                continue
            call, put = self.quotes(held, spot, (t, s, float(days)))
            shares = LOT * held.lots
            stock += shares * spot
            options += -shares * call[0] + shares * put[0]
        return self.cash + stock + options

    def decide(self, t: int, equity: float) -> None:
        """Order entries for the next open."""
        account, costs = self.account, self.costs
        expiry, promised, made = self.expiries[t], 0.0, 0
        if expiry == 0:
            return
        for s, spot in enumerate(self.closes[t]):
            if s in self.held or not self.allowed[t][s] or math.isnan(self.levels[t][s]):
                continue
            if len(self.held) >= account.most_positions or made >= account.most_new_a_day:
                break
            step = grid_step(spot)
            call_strike = whole_units(spot, step, True) * step
            put_strike = whole_units(spot * (1.0 + PUT_DISTANCE), step, False) * step
            held = Held(call_strike, put_strike, expiry, 0.0)
            days = float(expiry - self.ordinals[t])
            sold, bought = self.prices(t, *self.quotes(held, spot, (t, s, days)))
            lot = self.lot(spot, sold, bought)
            left = self.cash - promised - costs.trade_fee
            held.lots = float(math.floor(min(account.per_position * equity, left) / lot + 1e-9))
            if held.lots >= 1.0 and sold > 0.0:  # nobody buys a call that has no bid
                self.held[s] = held
                promised += held.lots * lot
                made += 1

    def run(self) -> tuple[list[float], int]:
        """Equity at every close, and how many positions were opened."""
        self.cash, self.opened = self.account.cash, 0
        equities = []
        for t, today in enumerate(self.ordinals):
            if t > 0 and self.account.interest:
                years = (today - self.ordinals[t - 1]) / 365.0
                self.post(self.cash * math.expm1(self.rates[t - 1] * years))
            self.enter(t)
            equities.append(self.close(t))
            self.decide(t, equities[-1])
        return equities, self.opened


def prepare_plain(inputs: Inputs) -> Callable[[], tuple[list[float], int]]:
    """The plain loop with its inputs as lists."""
    return Loop(
        inputs.account,
        inputs.costs,
        inputs.smile,
        inputs.open.tolist(),
        inputs.close.tolist(),
        inputs.level.tolist(),
        inputs.anchor.tolist(),
        inputs.allowed.tolist(),
        inputs.ordinal.tolist(),
        inputs.expiry.tolist(),
        inputs.rate.tolist(),
        list(zip(inputs.low_tick.tolist(), inputs.high_tick.tolist(), strict=True)),
        inputs.threshold.tolist(),
    ).run


def run_plain(inputs: Inputs) -> tuple[list[float], int]:
    """Equity at every close and how many positions were opened, by plain Python."""
    return prepare_plain(inputs)()
