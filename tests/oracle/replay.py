"""One account walked over its sessions, in the written order: morning, orders, day, close, entries, record.

`Replay(market, strategy, setting).run()` gives the events, as mappings, and the account at each close.
"""

from __future__ import annotations

import math
from typing import Any

from hedgerow.kernels import layout
from oracle import past
from oracle.book import Leg, Order, Position
from oracle.entry import Chooser, Lot, declined, figure_of, measure, odds_of_best
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
                self.borrow(t)
                for slot in sorted(self.positions):
                    self.morning(slot, t)
                self.fill_orders(t)
            for slot in sorted(self.positions):
                self.evening(slot, t)
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

    def borrow(self, t: int) -> None:
        """What shares sold short cost to borrow since yesterday's close."""
        ordinals = self.histories[0].ordinals
        share = self.setting.cost("borrow") * (ordinals[t] - ordinals[t - 1]) / 365.0
        for _, position in sorted(self.positions.items()):
            if position.shares < 0.0 and share > 0.0:
                self.dealer.borrow(position, t, share * position.last_close)

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
        position = Position(
            self.count, order.symbol, lots, [Leg(rule) for rule in self.rules.legs], slot=order.slot
        )
        position.decided = order.decided
        position.units = 100.0 * lots
        self.count += 1
        self.positions[order.slot] = position
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
        sold = -100.0 * self.rules.shares * position.lots * position.stock_price
        base = whole.debit + whole.reserve
        position.base = max(base, sold) if self.rules.shares < 0 else base
        position.best, position.worst = whole.best, whole.worst
        if self.rules.stop:
            position.stop_price = position.stock_price * (1.0 - self.rules.shares * self.rules.stop)
            position.stop_from = t + 1 if self.rules.at_close else t

    def candidates(self, t: int) -> list[tuple[int, int]]:
        """Symbols that may be entered at this close with a place for each, best rank first, ties in order."""
        queue = []
        for symbol, history in enumerate(self.histories):
            if not history.has_bar(t) or not self.rules.enter(View(history), t):
                continue
            if not self.rules.pace.names(history.ordinals, t):
                continue
            slot = self.free_place(symbol, t)
            score = math.nan if slot is None else self.score(symbol, t)
            if slot is not None and past.known(score):
                queue.append((-score, symbol, slot))
        return [(symbol, slot) for _, symbol, slot in sorted(queue)]

    def free_place(self, symbol: int, t: int) -> int | None:
        """The first rung of a symbol that is free; None while it waits after a loss or an entry."""
        pace = self.rules.pace
        rungs = range(symbol * pace.ladder, (symbol + 1) * pace.ladder)
        if any(t - self.losses.get(rung, -(1 << 30)) < pace.cooling for rung in rungs):
            return None
        held = [self.positions[rung] for rung in rungs if rung in self.positions]
        if any(t - position.decided < pace.spacing for position in held):
            return None
        return next((rung for rung in rungs if rung not in self.positions), None)

    def score(self, symbol: int, t: int) -> float:
        """What a candidate is ranked by, high first; NaN leaves it out."""
        if self.rules.rank:
            return self.rules.rank(View(self.histories[symbol]), t)
        if self.rules.figure is None:
            return 0.0
        sight, moment = self.at_close(symbol, t)
        legs, reason = Chooser(self.rules, self.trader, sight, moment).all_legs() if sight.fresh else ([], 1)
        if reason:
            return math.nan
        lot = measure(self.trader, self.rules, sight, moment, legs)
        name, sign = self.rules.figure
        return sign * figure_of(name, lot, odds_of_best(self.trader, self.rules, sight, moment, legs))

    def sector_is_full(self, symbol: int) -> bool:
        """Whether the sector of a symbol holds as many positions and orders as the account allows."""
        sector = self.sectors[symbol]
        taken = [one.symbol for one in (*self.positions.values(), *self.orders)]
        held = sum(self.sectors[other] == sector for other in taken)
        return bool(sector) and held >= self.setting.most_per_sector

    def enter(self, t: int) -> None:
        """Decide new positions at this close, as far as the limits go."""
        equity, new, queue = self.equity(), 0, self.candidates(t)
        for place, (symbol, slot) in enumerate(queue):
            taken = len(self.positions) + len(self.orders)
            if taken >= self.setting.most_positions or new >= self.setting.most_new_a_day:
                self.decline(t, -1, layout.WHY_FULL, float(len(queue) - place))
                return
            full = self.sector_is_full(symbol)
            reason = layout.WHY_LIMIT if full else self.consider(symbol, slot, t, equity)
            if reason:
                self.decline(t, symbol, reason)
            else:
                new += 1

    def consider(self, symbol: int, slot: int, t: int, equity: float) -> int:
        """Order one candidate at this close; the reason why not, or 0."""
        sight, moment = self.at_close(symbol, t)
        if not sight.fresh and self.rules.legs:
            return layout.WHY_NO_VOLATILITY
        legs, reason = Chooser(self.rules, self.trader, sight, moment).all_legs()
        if reason:
            return reason
        lot = measure(self.trader, self.rules, sight, moment, legs)
        odds = odds_of_best(self.trader, self.rules, sight, moment, legs)
        reason = declined(self.rules, lot, odds)
        if reason:
            return reason
        budget = self.setting.per_position * equity / self.rules.pace.ladder
        free = self.book.cash - sum(position.reserve for position in self.positions.values())
        free -= sum(order.promised for order in self.orders)
        lots = min(math.floor(budget / lot.capital + 1e-9), self.affordable(free, lot))
        if lots < 1.0:
            return layout.WHY_NO_LOT if budget < lot.capital else layout.WHY_NO_CASH
        terms = [(chosen.strike, chosen.expiry) if chosen else (0.0, 0) for chosen in legs]
        order = Order(symbol, lots, terms, lots * lot.capital, slot, t)
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
