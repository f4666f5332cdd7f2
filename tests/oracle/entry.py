"""Which strikes and expiries a rule leads to at a close, what a lot costs, and how many lots are bought."""

from __future__ import annotations

import math
from dataclasses import dataclass
from typing import Any

from hedgerow.kernels import layout
from oracle import listed
from oracle.moment import Moment, Pricer, Quote, Sight
from oracle.values import CALL, PUT, normal_cdf
from oracle.words import LegRule, Rules, Setting, number

CHOICES = {"nearest": False, "at_least": True}


@dataclass(frozen=True)
class Chosen:
    """A listed option chosen for a leg."""

    rule: LegRule
    strike: float
    expiry: int


@dataclass
class Trader:
    """Prices fills of shares and legs at a moment, by the costs of a setting."""

    pricer: Pricer
    setting: Setting

    def share_fill(self, side: float, price: float) -> float:
        """Price a share after slippage."""
        slip = self.setting.cost("slippage")
        return price * (1.0 + slip) if side > 0.0 else price * (1.0 - slip)

    def share_fee(self, shares: float) -> float:
        """Commission on a stock trade."""
        return self.setting.cost("share_fee") * abs(shares) + self.setting.cost("trade_fee")

    def leg_fee(self, quantity: float) -> float:
        """Commission on so many shares' worth of contracts."""
        return self.setting.cost("contract_fee") * abs(quantity) / 100.0

    def leg_fill(self, side: float, quote: Quote) -> float:
        """Premium a share at which a leg is bought (side > 0) or sold."""
        tick = 0.01 if quote.mid < 3.0 else 0.05
        share = self.setting.cost("half_spread") * (1.0 + self.setting.cost("spread_rise") * quote.deviations)
        half = max(quote.mid * share, self.setting.cost("floor_ticks") * tick)
        price = quote.mid + half if side > 0.0 else max(0.0, quote.mid - half)
        return self._on_tick(price, side) if self.setting.cost("use_ticks") else price

    def finds_bids(self, sight: Sight, moment: Moment, legs: list[Chosen | None]) -> bool:
        """Whether somebody pays for every leg that is to be sold."""
        sold = [leg for leg in legs if leg is not None and leg.rule.sign < 0]
        quotes = [self.pricer.quote(sight, leg.rule.right, leg.strike, leg.expiry, moment) for leg in sold]
        return all(self.leg_fill(-1.0, quote) > 0.0 for quote in quotes)

    @staticmethod
    def _on_tick(price: float, side: float) -> float:
        """The tick at or above what is paid, at or below what is received; counted in cents."""
        cents = price * 100.0
        unit = 1 if price < 3.0 else 5
        whole = round(cents / unit)
        if abs(cents / unit - whole) > 1e-9 * max(1.0, cents / unit):
            whole = math.ceil(cents / unit) if side > 0.0 else math.floor(cents / unit)
        return whole * unit / 100.0


@dataclass
class Chooser:
    """Chooses strikes and expiries of a rule's legs at one close."""

    rules: Rules
    trader: Trader
    sight: Sight
    moment: Moment

    def expiry(self, rule: LegRule, chosen: dict[str, int]) -> int:
        """The expiry of a leg, its own or another leg's; 0 none."""
        words = rule.expiry
        if "with" in words:
            other = next(leg for leg in self.rules.legs if leg.name == words["with"])
            return chosen[other.name] if other.name in chosen else self.expiry(other, chosen)
        cycle = words.get("listed", "monthly")
        choice = CHOICES[words.get("choose", "nearest")]
        return listed.choose_expiry(cycle, int(words["days"]), choice, self.moment.ordinal)

    def cycle(self, rule: LegRule) -> str:
        """The cycle on whose grid a leg's strike lies."""
        if "with" in rule.expiry:
            other = next(leg for leg in self.rules.legs if leg.name == rule.expiry["with"])
            return self.cycle(other)
        return str(rule.expiry.get("listed", "monthly"))

    def strike(self, rule: LegRule, expiry: int, chosen: dict[str, Chosen]) -> float:
        """The listed strike of a leg; 0 when there is none."""
        words, spot = rule.strike, self.moment.spot
        snap = words.get("snap", "nearest")
        step = listed.strike_step(spot, self.cycle(rule))
        if "same_as" in words:
            return chosen[words["same_as"]].strike
        if "worst_loss_within" in words:
            return self.within_worst(rule, expiry, step, list(chosen.values()))
        if "spend" in words or "zero_cost_with" in words:
            return self.within_budget(rule, expiry, step, chosen)
        if "steps" in words:
            strike = listed.on_grid(spot, step, snap) + int(words["steps"]) * step
        elif "from_spot" in words:
            strike = listed.on_grid(spot * (1.0 + number(words["from_spot"])), step, snap)
        else:
            strike = listed.on_grid(self.wanted(rule, expiry), step, snap)
        return strike if listed.is_listed(strike, spot) else 0.0

    def price(self, rule: LegRule, strike: float, expiry: int) -> float:
        """What a leg is bought or sold for, a share."""
        quote = self.trader.pricer.quote(self.sight, rule.right, strike, expiry, self.moment)
        return self.trader.leg_fill(float(rule.sign), quote)

    def grid(self, step: float) -> list[float]:
        """Every listed strike, rising."""
        spot = self.moment.spot
        numbers = range(math.floor(0.4 * spot / step), math.ceil(2.5 * spot / step) + 1)
        return [n * step for n in numbers if listed.is_listed(n * step, spot)]

    def within_budget(self, rule: LegRule, expiry: int, step: float, chosen: dict[str, Chosen]) -> float:
        """The dearest strike that another leg's premium pays for, or the farthest one that pays for it."""
        spend = rule.strike.get("spend")
        other = chosen[spend["of"] if spend else rule.strike["zero_cost_with"]]
        money = self.price(other.rule, other.strike, other.expiry) * other.rule.ratio / rule.ratio
        money *= number(spend["share"]) if spend else 1.0
        if rule.sign > 0:
            fit = [k for k in self.grid(step) if 0.0 < self.price(rule, k, expiry) <= money + 1e-9]
            return 0.0 if not fit else max(fit) if rule.right == PUT else min(fit)
        fit = [k for k in self.grid(step) if self.price(rule, k, expiry) >= money - 1e-9]
        return 0.0 if not fit else min(fit) if rule.right == PUT else max(fit)

    def within_worst(self, rule: LegRule, expiry: int, step: float, others: list[Chosen]) -> float:
        """The lowest strike of a put that keeps the worst loss within a share of the net debit."""
        share = number(rule.strike["worst_loss_within"])
        for strike in self.grid(step):
            legs: list[Chosen | None] = [*others, Chosen(rule, strike, expiry)]
            lot = measure(self.trader, self.rules, self.sight, self.moment, legs)
            if lot.worst <= share * lot.debit:
                return strike
        return 0.0

    def wanted(self, rule: LegRule, expiry: int) -> float:
        """The strike of a wanted delta, chance or number of deviations, found by halving."""
        base, forward = self.trader.pricer.spot_and_forward(self.sight, expiry, self.moment)
        years = (expiry - self.moment.ordinal) / 365.0
        sign = 1.0 if rule.right == CALL else -1.0
        words = rule.strike
        if "deviations" in words:
            atm = self.trader.pricer.at_the_money(self.sight, expiry, self.moment)
            return forward * math.exp(float(words["deviations"]) * atm * math.sqrt(years))

        def short_of(strike: float) -> bool:
            """Whether the wanted strike lies above this one."""
            quote = self.trader.pricer.quote(self.sight, rule.right, strike, expiry, self.moment)
            spread = quote.volatility * math.sqrt(years)
            d2 = (math.log(forward / strike)) / spread - 0.5 * spread
            chance = normal_cdf(sign * (d2 + spread if "delta" in words else d2))
            want = number(words.get("delta", words.get("odds")))
            return chance > want if rule.right == CALL else chance < want

        low, high = 0.05 * base, 20.0 * base
        for _ in range(80):
            middle = math.sqrt(low * high)
            low, high = (middle, high) if short_of(middle) else (low, middle)
        return math.sqrt(low * high)

    def all_legs(self) -> tuple[list[Chosen | None], int]:
        """Every leg that opens with the position, and why not (0 when all are listed)."""
        expiries: dict[str, int] = {}
        found: dict[str, Chosen] = {}
        for rule in self.rules.legs:
            if rule.add_when is None:
                expiries[rule.name] = self.expiry(rule, expiries)
                if expiries[rule.name] == 0:
                    return [], layout.WHY_NO_EXPIRY
        waiting = [rule for rule in self.rules.legs if rule.add_when is None]
        waiting.sort(key=lambda rule: "worst_loss_within" in rule.strike)  # which looks at all the others
        while waiting:
            rule = next(r for r in waiting if partner(r) not in {w.name for w in waiting})
            waiting.remove(rule)
            strike = self.strike(rule, expiries[rule.name], found)
            if strike == 0.0:
                return [], layout.WHY_NO_STRIKE
            found[rule.name] = Chosen(rule, strike, expiries[rule.name])
        legs = [found.get(rule.name) for rule in self.rules.legs]
        bid = self.trader.finds_bids(self.sight, self.moment, legs)
        return legs, 0 if bid else layout.WHY_NO_BID


def partner(rule: LegRule) -> str:
    """The leg that a leg's strike rule refers to."""
    words = rule.strike
    return str(words.get("spend", {}).get("of", words.get("same_as", words.get("zero_cost_with", ""))))


@dataclass(frozen=True)
class Lot:
    """What one lot of a structure costs and can come to, money."""

    debit: float
    credit: float
    fees: float
    reserve: float
    best: float
    worst: float
    base_price: float  # of a lot's stock
    short: bool
    spread: float  # of all legs between bid and ask, of their premium

    @property
    def base(self) -> float:
        """What is paid and what could be owed, of shares sold short at least their price: for gains."""
        return max(self.debit + self.reserve, self.base_price) if self.short else self.debit + self.reserve

    def of_base(self, money: float) -> float:
        """Money as a share of the base; of a base that is nothing it is all or nothing."""
        return money / self.base if self.base > 0.0 else math.copysign(math.inf, money)

    @property
    def capital(self) -> float:
        """Cash that a lot ties up; shares sold short tie up their price, whatever their sale brings."""
        least = self.base_price if self.short else 0.01 * self.base_price
        return max(self.debit + self.reserve + self.fees, least)


def measure(
    trader: Trader, rules: Rules, sight: Sight, moment: Moment, legs: list[Chosen | None], lots: float = 1.0
) -> Lot:
    """Cost, reserve, best and worst of `lots` lots at this moment's fills."""
    shares = 100.0 * rules.shares * lots
    price = trader.share_fill(shares, moment.spot)
    debit, credit = shares * price, 0.0
    fees = trader.setting.cost("share_fee") * abs(shares)  # the fee of a whole trade is none of a lot's
    held, wide, premiums = [], 0.0, 0.0
    for chosen in legs:
        if chosen is None:
            continue
        quantity = 100.0 * chosen.rule.sign * chosen.rule.ratio * lots
        quote = trader.pricer.quote(sight, chosen.rule.right, chosen.strike, chosen.expiry, moment)
        premium = trader.leg_fill(quantity, quote)
        debit += quantity * premium
        credit -= quantity * premium
        fees += trader.leg_fee(quantity)
        wide += abs(quantity) * (trader.leg_fill(1.0, quote) - trader.leg_fill(-1.0, quote))
        premiums += abs(quantity) * quote.mid
        held.append((quantity, chosen.rule.right, chosen.strike, chosen.expiry))
    least, most = range_of_payoff(shares, held)
    return Lot(
        debit=debit,
        credit=credit,
        fees=fees,
        reserve=max(0.0, -least),
        best=most - debit,
        worst=debit - least,
        base_price=100.0 * moment.spot,
        short=rules.shares < 0,
        spread=wide / premiums if premiums > 0.0 else 0.0,
    )


def range_of_payoff(shares: float, legs: list[tuple[float, int, float, int]]) -> tuple[float, float]:
    """Least and most that shares and legs are worth at the first expiry, over every price of the stock.

    A leg of a later expiry that is held counts as its intrinsic value, the least it can be worth.
    """
    corners = [0.0, *(strike for _, _, strike, _ in legs)]
    values = []
    for price in corners:
        value = shares * price
        for quantity, right, strike, _ in legs:
            value += quantity * max(0.0, price - strike if right == CALL else strike - price)
        values.append(value)
    slope = shares + sum(quantity for quantity, right, _, _ in legs if right == CALL)
    least = -math.inf if slope < 0.0 else min(values)
    most = math.inf if slope > 0.0 else max(values)
    return least, most


def odds_of_best(
    trader: Trader, rules: Rules, sight: Sight, moment: Moment, legs: list[Chosen | None]
) -> float:
    """Chance of ending where the payoff at expiry is greatest; NaN where it has no bound.

    For legs of one expiry. The chance of ending above a price is that of the log-normal law with the
    volatility of that strike; where the best is a single price, the chance of ending beyond it.
    """
    shares, held = 100.0 * rules.shares, []
    for leg in legs:
        if leg is not None:
            held.append((100.0 * leg.rule.sign * leg.rule.ratio, leg.rule.right, leg.strike, leg.expiry))
    _, most = range_of_payoff(shares, held)
    if not held or math.isinf(most):
        return math.nan
    expiry = held[0][3]

    def worth(price: float) -> float:
        return shares * price + sum(
            q * max(0.0, price - k if r == CALL else k - price) for q, r, k, _ in held
        )

    def above(price: float) -> float:
        if price <= 0.0:
            return 1.0
        _, forward = trader.pricer.spot_and_forward(sight, expiry, moment)
        spread = trader.pricer.quote(sight, CALL, price, expiry, moment).volatility
        spread *= math.sqrt((expiry - moment.ordinal + moment.extra_days) / 365.0)
        return normal_cdf(math.log(forward / price) / spread - 0.5 * spread)

    corners = sorted({0.0, *(strike for _, _, strike, _ in held)})
    best = [price for price in corners if worth(price) >= most - 1e-9 * max(1.0, abs(most))]
    flat = abs(worth(2.0 * corners[-1] + 1.0) - most) <= 1e-9 * max(1.0, abs(most))
    odds = 0.0
    for low, high in zip(corners, [*corners[1:], math.inf], strict=True):
        if low in best and (high in best or (high == math.inf and flat)):
            odds += above(low) - (above(high) if high < math.inf else 0.0)
    return odds if odds > 0.0 else above(best[0])


def figure_of(name: str, lot: Lot, odds: float) -> float:
    """A figure of a candidate's own structure."""
    if name == "best_over_worst":
        return lot.best / lot.worst if lot.worst > 0.0 else math.inf
    if name == "net_credit":
        return lot.credit / lot.base_price
    if name == "odds_of_best":
        return odds
    return (lot.best if name == "best_gain" else lot.worst) / lot.base


def outside(words: dict[str, Any], value: float) -> bool:
    """Whether a value lies outside its bounds; what is unknown does."""
    ((word, bound),) = words.items()
    if word == "between":
        return not number(bound[0]) <= value <= number(bound[1])
    return not (value >= number(bound) if word == "at_least" else value <= number(bound))


def declined(rules: Rules, lot: Lot, odds: float) -> int:
    """The reason for which the structure's own conditions decline it; 0 none."""
    words = rules.accept
    if words.get("net_credit") and not lot.credit > 0.0:
        return layout.WHY_NET_CREDIT
    if "net_debit" in words and not -lot.credit / lot.base_price <= number(words["net_debit"]["at_most"]):
        return layout.WHY_NET_DEBIT
    worst, best = lot.of_base(lot.worst), lot.of_base(lot.best)
    if "worst_loss" in words and outside(words["worst_loss"], worst):
        return layout.WHY_WORST_LOSS
    if "best_gain" in words and outside(words["best_gain"], best):
        return layout.WHY_BEST_GAIN
    if "odds_of_best" in words and outside(words["odds_of_best"], odds):
        return layout.WHY_ODDS
    ratio = words.get("best_over_worst", {}).get("at_least")
    if ratio is not None and not lot.best >= number(ratio) * lot.worst:
        return layout.WHY_BEST_OVER_WORST
    most = words.get("spread_to_premium", {}).get("at_most", math.inf)
    return layout.WHY_SPREAD if lot.spread > number(most) else 0
