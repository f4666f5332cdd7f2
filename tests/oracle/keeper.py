"""What happens to open positions: overnight, at their orders, during the session, at its close."""

from __future__ import annotations

import dataclasses
import datetime as dt
import math
from typing import Any

from hedgerow.kernels import layout
from oracle import past
from oracle.book import Book, Leg, Position
from oracle.dealing import Dealer, in_the_money
from oracle.entry import Chooser, Chosen, Trader, range_of_payoff
from oracle.moment import OPEN_HOURS, Moment, Pricer, Puts, Sight
from oracle.values import CALL
from oracle.view import Held
from oracle.words import Rules, Setting

LONGEST_SILENCE = 5
SPECIAL_RULE_FROM = dt.date(2009, 2, 1).toordinal()


def sights_of(history: past.History, surface: dict[str, Any]) -> list[Sight]:
    """What is known of a symbol at each close; where no volatility is known the last known one stands."""
    level, anchor = past.level_and_anchor(history, surface)
    last_level, last_anchor = past.carried(level), past.carried(anchor)
    payers = past.expected_dividends(history)
    return [
        Sight(
            last_level[t],
            last_anchor[t],
            past.known(level[t]),
            payers[t],
            history.next_report(today),
            history.american,
        )
        for t, today in enumerate(history.ordinals)
    ]


class Keeper:
    """The open positions of one strategy over one market, and what is known at every close."""

    def __init__(
        self,
        market: Any,
        strategy: dict[str, Any],
        setting: Setting,
        puts: Puts | None = None,
        known: list[list[Sight]] | None = None,
    ) -> None:
        self.rules, self.setting = Rules.read(strategy), setting
        self.histories = [past.History.of(market, n) for n in range(len(market.symbols))]
        self.rates = [float(rate) for rate in market.rate]
        self.book = Book()
        self.trader = Trader(Pricer(setting.surface, puts or Puts()), setting)
        self.dealer = Dealer(self.book, self.trader)
        self.sights = known or [sights_of(history, setting.surface) for history in self.histories]
        self.sectors = list(market.sectors)
        self.positions: dict[int, Position] = {}  # by rung: a symbol has as many as the ladder
        self.losses: dict[int, int] = {}  # session at which a rung last ended with a loss

    def at_open(self, symbol: int, t: int, price: float) -> tuple[Sight, Moment]:
        """What the open of a session knows: yesterday's close, and a price."""
        history = self.histories[symbol]
        moment = Moment(history.ordinals[t], price, self.rates[t - 1], OPEN_HOURS)
        sight = self.sights[symbol][t - 1]
        payer = dataclasses.replace(sight.payer, amount=sight.payer.amount / history.split[t])
        return dataclasses.replace(sight, payer=payer), moment

    def at_close(self, symbol: int, t: int) -> tuple[Sight, Moment]:
        """What the close of a session knows."""
        history = self.histories[symbol]
        return self.sights[symbol][t], Moment(history.ordinals[t], history.close[t], self.rates[t])

    def morning(self, slot: int, t: int) -> None:
        """What happens to a position before the open, and its orders at the open."""
        position = self.positions[slot]
        symbol, history = position.symbol, self.histories[position.symbol]
        if not history.has_bar(t):
            return
        self.overnight(position, history, t)
        if slot not in self.positions:
            return
        sight, moment = self.at_open(symbol, t, history.open_price(t))
        if position.closing:
            self.leave(position, t, position.closing, sight, moment)
        elif self.dealer.fill_legs(position, t, sight, moment, self.units(position)):
            self.restate(position)

    def overnight(self, position: Position, history: past.History, t: int) -> None:
        """Expiries passed without a session, early exercise, split, dividend: in that order."""
        yesterday = history.ordinals[t] - 1
        if any(leg.expiry <= yesterday for leg in position.held()):
            self.settle(position, t, position.last_close, yesterday)
        if position.slot in self.positions:
            self.early_exercise(position, history, t)
        if position.slot not in self.positions:
            return
        before = position.last_close
        dividend, special, ratio = history.acts[t]
        if ratio != 1.0:
            before /= ratio
            self.dealer.split(position, t, ratio)
        if dividend + special > 0.0 and position.shares != 0.0:
            self.dealer.dividend(position, t, dividend + special)
        if adjusts_contracts(special, before, history.ordinals[t]):
            self.dealer.lower_strikes(position, special)

    def early_exercise(self, position: Position, history: past.History, t: int) -> None:
        """Legs written that their holder exercises after yesterday's close."""
        if not history.american or not history.has_bar(t - 1):
            return
        held = position.shares
        for row, leg in enumerate(position.legs):
            if leg.quantity < 0.0 and self.due_early(leg, history, t):
                self.dealer.deliver(position, row, t, layout.WHY_ASSIGNED_EARLY)
        if held != 0.0 and position.shares == 0.0:
            self.shares_gone(position, t, layout.WHY_ASSIGNED_EARLY)
        elif position.shares != held and not self.rules.shares and not self.rules.keep and position.held():
            for leg in position.legs:
                leg.due, leg.ordered = False, None
            position.closing = position.closing or layout.WHY_LEFT_OVER  # shares and legs are sold together

    def due_early(self, leg: Leg, history: past.History, t: int) -> bool:
        """Whether a leg written is exercised against us after yesterday's close."""
        symbol = self.histories.index(history)
        sight, moment = self.at_close(symbol, t - 1)
        if leg.expiry <= moment.ordinal or in_the_money(leg, moment.spot) <= 0.0:
            return False
        pricer = self.trader.pricer
        dividend, special, ratio = history.acts[t]
        drop = (dividend + special) * ratio  # what a holder of the option does without
        if adjusts_contracts(special, moment.spot / ratio, history.ordinals[t]):
            drop = dividend * ratio
        if leg.rule.right == CALL and drop <= 0.0:
            return False
        volatility = pricer.quote(sight, leg.rule.right, leg.strike, leg.expiry, moment).volatility
        years = (leg.expiry - moment.ordinal) / 365.0
        if leg.rule.right == CALL:
            return pricer.call_is_due(leg.strike, years, moment, volatility, drop)
        if drop > 0.0:
            ahead = [(history.ordinals[t], drop)]
        else:
            ahead = sight.payer.between(moment.ordinal, leg.expiry)
        if ahead and ahead[0][1] > interest(leg.strike, moment, ahead[0][0]):
            return False  # the dividend that waiting brings is worth more than interest on the strike
        return pricer.put_is_due(leg.strike, years, moment, volatility)

    def shares_gone(self, position: Position, t: int, reason: int) -> None:
        """The shares were called or put away: the position is over, or the rest of it is to be closed."""
        for leg in position.legs:
            leg.due, leg.ordered = False, None if not leg.live else leg.ordered
        if not position.held():
            self.over(position, t, reason)
        elif not position.closing:
            position.closing = layout.WHY_LEFT_OVER

    def units(self, position: Position) -> float:
        """Shares' worth of a contract per 100 shares."""
        return abs(position.shares) if self.rules.shares or position.shares > 0.0 else position.units

    def restate(self, position: Position) -> None:
        """Work out best, worst and reserve again after legs have changed."""
        held = [(leg.quantity, leg.rule.right, leg.strike, leg.expiry) for leg in position.held()]
        least, most = range_of_payoff(position.shares, held)
        position.best, position.worst = most - position.outlay, position.outlay - least
        position.reserve = max(0.0, -least)

    def evening(self, slot: int, t: int) -> None:
        """A position's resting stop, then its close."""
        position = self.positions[slot]
        symbol, history = position.symbol, self.histories[position.symbol]
        if not history.has_bar(t):
            self.silence(position, t)
            return
        position.silent = 0
        if self.stopped(position, history, t):
            return
        position.last_close = history.close[t]
        today = history.ordinals[t]
        if position.ended or any(leg.expiry <= today for leg in position.held()):
            self.settle(position, t, history.close[t], today)
        if slot not in self.positions:
            return
        sight, moment = self.at_close(symbol, t)
        held = self.held(position, history, sight, moment)
        if not position.closing:
            self.ask(position, held, t)
        if position.closing and self.rules.at_close:
            self.leave(position, t, position.closing, sight, moment)
        elif not position.closing:
            self.order_legs(position, held, t, sight, moment)

    def silence(self, position: Position, t: int) -> None:
        """A session without a bar: the position waits, until its history is taken as ended."""
        position.silent += 1
        if position.silent < LONGEST_SILENCE:
            return
        self.book.write(t, position.symbol, position.number, layout.KIND_GONE, layout.WHY_GONE)
        self.dealer.end_at_last_price(position, t)
        self.over(position, t, layout.WHY_GONE)

    def stopped(self, position: Position, history: past.History, t: int) -> bool:
        """Trade the resting stop if the session reached it."""
        stop, side = position.stop_price, self.rules.shares
        if not stop or t < position.stop_from or position.shares == 0.0:
            return False
        first = history.open_price(t)
        worst = history.low_price(t) if side > 0 else history.high_price(t)
        if side * (first - stop) <= 0.0:
            price, reason = first, layout.WHY_STOP_GAP
        elif side * (worst - stop) <= 0.0:
            price, reason = stop, layout.WHY_STOP
        else:
            return False
        self.leave(position, t, reason, *self.at_open(position.symbol, t, price))
        return True

    def settle(self, position: Position, t: int, close: float, last: int) -> None:
        """Settle the legs that expire up to the day `last`, and end what ends with them."""
        history, before = self.histories[position.symbol], position.shares
        for row, leg in enumerate(position.legs):
            if leg.live and leg.expiry <= last:
                delivered = self.dealer.expire(position, row, t, close, history)
                leg.ordered = None
                leg.due = leg.rule.again_at_expiry and not delivered
        position.ended = False
        if before != 0.0 and position.shares == 0.0:
            self.shares_gone(position, t, layout.WHY_EXPIRY)
        elif position.held() or any(leg.due or leg.ordered for leg in position.legs):
            self.restate(position)
        elif self.rules.keep and position.shares > 0.0:
            self.restate(position)  # the shares that an assignment brought are kept
        else:
            if position.shares:
                self.dealer.shares(position, t, layout.WHY_EXPIRY, -position.shares, close)
            self.over(position, t, layout.WHY_EXPIRY)

    def ask(self, position: Position, held: Held, t: int) -> None:
        """Exit rules in their order; the first that holds ends the position."""
        for place, rule in enumerate(self.rules.exits):
            if rule(held, t):
                position.closing = layout.WHY_EXIT_RULE + place
                self.signal(position, t, position.closing)
                return

    def held(self, position: Position, history: past.History, sight: Sight, moment: Moment) -> Held:
        """The position as its rules see it at this close."""
        mids, value = {}, position.shares * moment.spot
        for row, leg in enumerate(position.legs):
            if leg.live:
                quote = self.trader.pricer.quote(sight, leg.rule.right, leg.strike, leg.expiry, moment)
                leg.mid = mids[row] = quote.mid
                value += leg.quantity * quote.mid
        return Held(history, position, position.flows / 100.0 + value, mids)

    def order_legs(self, position: Position, held: Held, t: int, sight: Sight, moment: Moment) -> None:
        """Choose what is written again after expiry, rolled or added; fill it now or at the next open."""
        chooser = Chooser(self.rules, self.trader, sight, moment)
        for row, leg in enumerate(position.legs):
            reason = self.wish(leg, held, t)
            if not reason:
                continue
            others = [other for other in position.held() if other is not leg]
            expiry = chooser.expiry(leg.rule, {other.rule.name: other.expiry for other in others})
            strikes = {o.rule.name: Chosen(o.rule, o.strike, o.expiry) for o in others}
            strike = chooser.strike(leg.rule, expiry, strikes) if expiry else 0.0
            same = leg.live and (strike, expiry) == (leg.strike, leg.expiry)
            if leg.live and wrong_way(leg, strike, expiry):
                continue
            if strike <= 0.0 or same or not self.pays(leg, strike, expiry, sight, moment):
                continue
            if self.dealer.finds_bid(position, row, (strike, expiry), t, sight, moment):
                leg.ordered, leg.reason = (strike, expiry), reason
                self.signal(position, t, reason, leg=row, strike=strike, expiry=expiry)
        if self.rules.at_close and self.dealer.fill_legs(position, t, sight, moment, self.units(position)):
            self.restate(position)

    def pays(self, leg: Leg, strike: float, expiry: int, sight: Sight, moment: Moment) -> bool:
        """Whether rolling a leg brings money in, where the rule wants that."""
        if not leg.live or not leg.rule.roll_for_credit:
            return True
        pricer, right = self.trader.pricer, leg.rule.right
        old = pricer.quote(sight, right, leg.strike, leg.expiry, moment)
        new = pricer.quote(sight, right, strike, expiry, moment)
        side = -leg.quantity
        return leg.quantity * (self.trader.leg_fill(side, old) - self.trader.leg_fill(-side, new)) > 0.0

    def wish(self, leg: Leg, held: Held, t: int) -> int:
        """The reason for which a leg is to be opened anew; 0 when it is left as it is."""
        rule = leg.rule
        if leg.due or (leg.live and rule.roll_if is not None and rule.roll_if(held, t)):
            return layout.WHY_ROLL
        if not leg.live and rule.add_when is not None and rule.add_when(held, t):
            return layout.WHY_ADDED
        return 0

    def signal(self, position: Position, t: int, reason: int, **more: Any) -> None:
        """Write that something was decided at this close."""
        self.book.write(t, position.symbol, position.number, layout.KIND_SIGNALLED, reason, **more)

    def leave(self, position: Position, t: int, reason: int, sight: Sight, moment: Moment) -> None:
        """Close every leg, sell the shares, and end the position."""
        for row, leg in enumerate(position.legs):
            if leg.live:
                self.dealer.leg(position, row, t, reason, -leg.quantity, sight, moment)
        if position.shares:
            self.dealer.shares(position, t, reason, -position.shares, moment.spot)
        self.over(position, t, reason)

    def over(self, position: Position, t: int, reason: int) -> None:
        """Write that a position has ended, with its whole result."""
        event = self.book.write(t, position.symbol, position.number, layout.KIND_CLOSED, reason)
        event["price"] = position.flows / 100.0
        if position.flows < 0:
            self.losses[position.slot] = t
        else:
            self.losses.pop(position.slot, None)
        del self.positions[position.slot]


def wrong_way(leg: Leg, strike: float, expiry: int) -> bool:
    """Whether new terms lie another way than a leg's rule lets it be rolled."""
    words = leg.rule.direction.split(" and ")
    up, down, out = strike > leg.strike, strike < leg.strike, expiry > leg.expiry
    return any(not holds for word, holds in (("up", up), ("down", down), ("out", out)) if word in words)


def interest(money: float, moment: Moment, until: int) -> float:
    """What money earns from a moment to a day."""
    return money * (math.exp(moment.rate * (until - moment.ordinal) / 365.0) - 1.0)


def adjusts_contracts(special: float, before: float, today: int) -> bool:
    """Whether a special dividend is large enough to lower the strikes (73 FR 55582)."""
    if special <= 0.0:
        return False
    return special >= 0.125 if today >= SPECIAL_RULE_FROM else special > 0.1 * before
