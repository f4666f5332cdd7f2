"""Everything that moves cash, shares or legs, each with its event."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any

from hedgerow.kernels import layout
from oracle import listed, past
from oracle.book import SHARES_ROW, Book, Leg, Order, Position, to_cents
from oracle.entry import Chosen, Trader
from oracle.moment import Moment, Sight
from oracle.values import CALL
from oracle.words import Rules


@dataclass
class Dealer:
    """Trades for positions by the costs of a trader and writes them in a book."""

    book: Book
    trader: Trader

    def interest(self, t: int, position: Position | None, money: float) -> None:
        """Interest, on a position's reserve or on the rest."""
        number, symbol = (position.number, position.symbol) if position else (-1, -1)
        if position is None and to_cents(money) == 0:
            return
        event = self.book.write(t, symbol, number, layout.KIND_INTEREST, 0)
        self.book.pay(position, event, money)

    def shares(self, position: Position, t: int, reason: int, quantity: float, mid: float) -> None:
        """Buy (quantity > 0) or sell shares around a price."""
        price, fee = self.trader.share_fill(quantity, mid), self.trader.share_fee(quantity)
        self._move(position, t, reason, quantity, price, mid, fee)

    def _move(
        self, position: Position, t: int, reason: int, quantity: float, price: float, mid: float, fee: float
    ) -> None:
        """Shares change hands at a price."""
        event = self.book.write(t, position.symbol, position.number, layout.KIND_SHARES, reason)
        event.update(leg=SHARES_ROW, quantity=quantity, price=price, mid=mid, fee=fee)
        self.book.pay(position, event, -quantity * price - fee)
        position.outlay += quantity * price
        position.shares += quantity

    def leg(
        self, position: Position, row: int, t: int, reason: int, quantity: float, sight: Sight, moment: Moment
    ) -> None:
        """Buy or sell an option leg at its fill."""
        leg = position.legs[row]
        quote = self.trader.pricer.quote(sight, leg.rule.right, leg.strike, leg.expiry, moment)
        price = self.trader.leg_fill(quantity, quote)
        fee = self.trader.leg_fee(quantity) if price > 0.0 else 0.0  # without a bid it is left to lapse
        event = self.book.write(t, position.symbol, position.number, layout.KIND_LEG, reason, leg=row)
        event.update(quantity=quantity, price=price, mid=quote.mid, fee=fee)
        event.update(strike=leg.strike, expiry=leg.expiry)
        self.book.pay(position, event, -quantity * price - fee)
        position.outlay += quantity * price
        leg.mid = quote.mid
        if not leg.live:
            leg.paid = quote.mid
        leg.quantity += quantity

    def fill_legs(self, position: Position, t: int, sight: Sight, moment: Moment, units: float) -> bool:
        """Fill leg orders: what is rolled is bought back, what is ordered opened; whether any were."""
        moved = False
        for row, leg in enumerate(position.legs):
            if leg.ordered is None:
                continue
            if not self.finds_bid(position, row, leg.ordered, t, sight, moment):
                leg.ordered = None
                continue
            if leg.live:
                self.leg(position, row, t, leg.reason, -leg.quantity, sight, moment)
            (leg.strike, leg.expiry), leg.ordered, leg.due, moved = leg.ordered, None, False, True
            self.leg(position, row, t, leg.reason, leg.rule.sign * leg.rule.ratio * units, sight, moment)
        return moved

    def finds_bid(
        self, position: Position, row: int, terms: tuple[float, int], t: int, sight: Sight, moment: Moment
    ) -> bool:
        """Whether a leg that is to be sold finds a bid; without one it is left, and the log says so."""
        rule, (strike, expiry) = position.legs[row].rule, terms
        quote = self.trader.pricer.quote(sight, rule.right, strike, expiry, moment)
        if rule.sign > 0 or self.trader.leg_fill(-1.0, quote) > 0.0:
            return True
        event = self.book.write(
            t, position.symbol, position.number, layout.KIND_DECLINED, layout.WHY_NO_BID, leg=row
        )
        event.update(quantity=1.0, strike=strike, expiry=expiry)
        return False

    def chosen(self, rules: Rules, order: Order) -> list[Chosen | None]:
        """The legs of an order as they stand after a split."""
        return [
            Chosen(rule, strike, expiry) if expiry else None
            for rule, (strike, expiry) in zip(rules.legs, order.terms, strict=True)
        ]

    def end_leg(self, position: Position, row: int, t: int, kind: int, reason: int) -> dict[str, Any]:
        """Write that a leg has come to its end."""
        leg = position.legs[row]
        event = self.book.write(t, position.symbol, position.number, kind, reason, leg=row)
        event.update(quantity=-leg.quantity, strike=leg.strike, expiry=leg.expiry)
        position.ended = True
        return event

    def deliver(self, position: Position, row: int, t: int, reason: int) -> None:
        """A leg is exercised against its shares at the strike."""
        leg = position.legs[row]
        event = self.end_leg(position, row, t, taken(leg), reason)
        event["fee"] = self.trader.setting.cost("assignment_fee")
        self.book.pay(position, event, -event["fee"])
        moved = leg.quantity if leg.rule.right == CALL else -leg.quantity
        leg.quantity = 0.0
        self._move(position, t, reason, moved, leg.strike, leg.strike, 0.0)

    def pay_out(self, position: Position, row: int, t: int, reason: int, worth: float) -> None:
        """A leg is settled for its intrinsic value in cash, or ends worthless."""
        leg = position.legs[row]
        event = self.end_leg(position, row, t, taken(leg) if worth > 0.0 else layout.KIND_EXPIRED, reason)
        if worth > 0.0:
            event.update(price=worth, mid=worth, fee=self.trader.setting.cost("assignment_fee"))
            position.outlay -= leg.quantity * worth
            self.book.pay(position, event, leg.quantity * worth - event["fee"])
        leg.quantity = 0.0

    def expire(self, position: Position, row: int, t: int, close: float, history: past.History) -> bool:
        """Settle a leg at its expiry; return whether shares changed hands."""
        worth = in_the_money(position.legs[row], close)
        if worth <= 0.0 or worth < listed.exercise_threshold() - 1e-9:
            self.pay_out(position, row, t, layout.WHY_EXPIRY, 0.0)
            return False
        if history.american:
            self.deliver(position, row, t, layout.WHY_EXPIRY)
            return True
        self.pay_out(position, row, t, layout.WHY_EXPIRY, worth)
        return False

    def split(self, position: Position, t: int, ratio: float) -> None:
        """Restate shares, strikes and prices in new shares."""
        self.book.write(t, position.symbol, position.number, layout.KIND_SPLIT, 0, quantity=ratio)
        position.shares *= ratio
        position.stock_price /= ratio
        position.stop_price /= ratio
        position.last_close /= ratio
        position.units *= ratio
        for leg in position.legs:
            leg.quantity *= ratio
            leg.strike /= ratio
            leg.paid /= ratio
            leg.mid /= ratio
            if leg.ordered is not None:
                leg.ordered = (leg.ordered[0] / ratio, leg.ordered[1])

    def lower_strikes(self, position: Position, amount: float) -> None:
        """A special dividend large enough comes off the strikes."""
        for leg in position.legs:
            if leg.live:
                leg.strike -= amount
            if leg.ordered is not None:
                leg.ordered = (leg.ordered[0] - amount, leg.ordered[1])

    def dividend(self, position: Position, t: int, amount: float) -> None:
        """Shares held overnight earn the dividend; shares sold short pay it."""
        event = self.book.write(t, position.symbol, position.number, layout.KIND_DIVIDEND, 0)
        event.update(quantity=position.shares, price=amount, mid=amount)
        self.book.pay(position, event, position.shares * amount)

    def borrow(self, position: Position, t: int, price: float) -> None:
        """Shares sold short pay so much a share for being borrowed."""
        event = self.book.write(t, position.symbol, position.number, layout.KIND_BORROW, 0)
        event.update(quantity=position.shares, price=price, mid=price)
        self.book.pay(position, event, position.shares * price)

    def end_at_last_price(self, position: Position, t: int) -> None:
        """A position whose market is gone: legs for their intrinsic value, shares at the last price."""
        for row, leg in enumerate(position.legs):
            if leg.live:
                self.pay_out(position, row, t, layout.WHY_GONE, in_the_money(leg, position.last_close))
        if position.shares:
            price = position.last_close
            self._move(position, t, layout.WHY_GONE, -position.shares, price, price, 0.0)


def in_the_money(leg: Leg, price: float) -> float:
    """What exercising a leg at this price brings a share; negative when out of the money."""
    return price - leg.strike if leg.rule.right == CALL else leg.strike - price


def taken(leg: Leg) -> int:
    """The kind of event when a leg is exercised: by us if held, against us if written."""
    return int(layout.KIND_ASSIGNED if leg.quantity < 0.0 else layout.KIND_EXERCISED)
