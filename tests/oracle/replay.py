"""One account walked over its sessions, in the written order: morning, orders, day, close, entries, record.

`Replay(market, strategy, setting).run()` gives the events, as mappings, and the account at each close.
"""

from __future__ import annotations

import math
from typing import Any

from hedgerow.kernels import layout
from oracle import past
from oracle.book import Leg, Order, Position
from oracle.entry import Chooser, Lot, declined, measure
from oracle.keeper import Keeper, adjusts_contracts
from oracle.moment import Moment, Puts, Sight
from oracle.view import View
from oracle.words import Setting

LOAN_SPREAD = 0.015  # a year, over what cash earns: the price of cash that is not there


class Replay(Keeper):
    """The walk of one strategy over one market; `window` is the first and last session walked."""

    def __init__(
        self,
        market: Any,
        strategy: dict[str, Any],
        setting: Setting,
        puts: Puts | None = None,
        known: list[list[Sight]] | None = None,
        window: tuple[int, int] | None = None,
    ) -> None:
        super().__init__(market, strategy, setting, puts, known)
        self.first, self.last = window or (0, len(self.rates) - 1)
        self.orders: list[Order] = []
        self.count = 0
        self.days: list[dict[str, float]] = []

    def run(self) -> tuple[list[dict[str, Any]], list[dict[str, float]]]:
        """Walk every session; return the events and the account at each close."""
        event = self.book.write(self.first, -1, -1, layout.KIND_DEPOSIT, 0)
        self.book.pay(None, event, self.setting.cash)
        for t in range(self.first, self.last + 1):
            if t > self.first:
                self.interest(t)
                for symbol in sorted(self.positions):
                    self.morning(symbol, t)
                self.fill_orders(t)
            for symbol in sorted(self.positions):
                self.evening(symbol, t)
            self.enter(t)
            self.record(t)
        return self.book.events, self.days

    def interest(self, t: int) -> None:
        """Interest on yesterday's cash, the part set aside for a position under its number."""
        ordinals = self.histories[0].ordinals
        years = (ordinals[t] - ordinals[t - 1]) / 365.0
        factor = math.expm1(self.rates[t - 1] * years)
        if not self.setting.interest:
            return
        held = [position for _, position in sorted(self.positions.items())]
        free = self.book.cash - sum(position.reserve for position in held)
        owed = math.expm1((self.rates[t - 1] + LOAN_SPREAD) * years)
        self.dealer.interest(t, None, free * (factor if free >= 0.0 else owed))
        for position in held:
            if position.reserve > 0.0 and factor != 0.0:
                self.dealer.interest(t, position, position.reserve * factor)

    def fill_orders(self, t: int) -> None:
        """New positions decided at yesterday's close, in their order; an order lasts one session."""
        waiting, self.orders = self.orders, []
        for order in waiting:
            history = self.histories[order.symbol]
            if not history.has_bar(t):
                self.decline(t, order.symbol, layout.WHY_GONE_ORDER)
                continue
            _, special, ratio = history.acts[t]
            before = history.close[t - 1] / ratio
            off = special if adjusts_contracts(special, before, history.ordinals[t]) else 0.0
            order.terms = [(strike / ratio - off, expiry) for strike, expiry in order.terms]
            self.fill(order, t, *self.at_open(order.symbol, t, history.open_price(t)))

    def decline(self, t: int, symbol: int, reason: int, count: float = 1.0) -> None:
        """Write that an entry was not made."""
        self.book.write(t, symbol, -1, layout.KIND_DECLINED, reason, quantity=count)

    def affordable(self, money: float, lot: Lot) -> float:
        """Whole lots that some cash buys."""
        return float(math.floor((money - self.setting.cost("trade_fee")) / lot.capital + 1e-9))

    def fill(self, order: Order, t: int, sight: Sight, moment: Moment) -> None:
        """Buy as many of the ordered lots as the free cash allows."""
        legs = self.dealer.chosen(self.rules, order)
        lot = measure(self.trader, self.rules, sight, moment, legs)
        free = self.book.cash - sum(position.reserve for position in self.positions.values())
        lots = min(order.lots, self.affordable(free, lot))
        bid = self.trader.finds_bids(sight, moment, legs)
        if lots < 1.0 or not bid:
            self.decline(t, order.symbol, layout.WHY_NO_CASH if bid else layout.WHY_NO_BID)
            return
        position = Position(self.count, order.symbol, lots, [Leg(rule) for rule in self.rules.legs])
        position.units = 100.0 * lots
        self.count += 1
        self.positions[order.symbol] = position
        position.entered, position.stock_price, position.last_close = t, moment.spot, moment.spot
        self.book.write(t, order.symbol, position.number, layout.KIND_OPENED, layout.WHY_ENTRY, quantity=lots)
        whole = measure(self.trader, self.rules, sight, moment, legs, lots)
        if self.rules.shares:
            shares = 100.0 * self.rules.shares * lots
            self.dealer.shares(position, t, layout.WHY_ENTRY, shares, moment.spot)
            position.stock_price = self.trader.share_fill(shares, moment.spot)
        for row, chosen in enumerate(legs):
            if chosen is not None:
                leg = position.legs[row]
                leg.strike, leg.expiry = chosen.strike, chosen.expiry
                quantity = 100.0 * leg.rule.sign * leg.rule.ratio * lots
                self.dealer.leg(position, row, t, layout.WHY_ENTRY, quantity, sight, moment)
        self.set_terms(position, whole, t)

    def set_terms(self, position: Position, whole: Lot, t: int) -> None:
        """Keep what the position's gains, stop and reserve are measured by."""
        position.reserve = whole.reserve
        position.base, position.best, position.worst = whole.debit + whole.reserve, whole.best, whole.worst
        if self.rules.stop:
            position.stop_price = position.stock_price * (1.0 - self.rules.shares * self.rules.stop)
            position.stop_from = t + 1 if self.rules.at_close else t

    def candidates(self, t: int) -> list[int]:
        """Symbols that may be entered at this close, best rank first, ties in their order."""
        busy = set(self.positions)
        queue = []
        for symbol, history in enumerate(self.histories):
            if symbol in busy or not history.has_bar(t) or not self.rules.enter(View(history), t):
                continue
            score = self.rules.rank(View(history), t) if self.rules.rank else 0.0
            if past.known(score):
                queue.append((-score, symbol))
        return [symbol for _, symbol in sorted(queue)]

    def enter(self, t: int) -> None:
        """Decide new positions at this close, as far as the limits go."""
        equity, new, queue = self.equity(), 0, self.candidates(t)
        for place, symbol in enumerate(queue):
            taken = len(self.positions) + len(self.orders)
            if taken >= self.setting.most_positions or new >= self.setting.most_new_a_day:
                self.decline(t, -1, layout.WHY_FULL, float(len(queue) - place))
                return
            reason = self.consider(symbol, t, equity)
            if reason:
                self.decline(t, symbol, reason)
            else:
                new += 1

    def consider(self, symbol: int, t: int, equity: float) -> int:
        """Order one candidate at this close; the reason why not, or 0."""
        sight, moment = self.at_close(symbol, t)
        if not sight.fresh and self.rules.legs:
            return layout.WHY_NO_VOLATILITY
        legs, reason = Chooser(self.rules, self.trader, sight, moment).all_legs()
        if reason:
            return reason
        lot = measure(self.trader, self.rules, sight, moment, legs)
        reason = declined(self.rules, lot)
        if reason:
            return reason
        budget = self.setting.per_position * equity
        free = self.book.cash - sum(position.reserve for position in self.positions.values())
        free -= sum(order.promised for order in self.orders)
        lots = min(math.floor(budget / lot.capital + 1e-9), self.affordable(free, lot))
        if lots < 1.0:
            return layout.WHY_NO_LOT if budget < lot.capital else layout.WHY_NO_CASH
        terms = [(chosen.strike, chosen.expiry) if chosen else (0.0, 0) for chosen in legs]
        order = Order(symbol, lots, terms, lots * lot.capital)
        if self.rules.at_close:
            self.fill(order, t, sight, moment)
        else:
            self.orders.append(order)
            self.book.write(t, symbol, -1, layout.KIND_SIGNALLED, layout.WHY_ENTRY)
        return 0

    def values(self) -> tuple[float, float]:
        """Value of all shares and of all legs as last seen."""
        held = [position for _, position in sorted(self.positions.items())]
        stock = sum(position.shares * position.last_close for position in held)
        return stock, sum(leg.quantity * leg.mid for position in held for leg in position.held())

    def equity(self) -> float:
        """Worth of the account as last seen."""
        return self.book.cash + sum(self.values())

    def record(self, t: int) -> None:
        """The account at this close."""
        stock, options = self.values()
        reserved = sum(position.reserve for position in self.positions.values())
        self.days.append(
            {
                "session": t,
                "positions": len(self.positions),
                "cash": self.book.cash,
                "stock": stock,
                "options": options,
                "reserved": reserved,
                "equity": self.book.cash + stock + options,
            }
        )
