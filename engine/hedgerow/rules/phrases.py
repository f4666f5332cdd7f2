"""Parts of a strategy as phrases in plain English: strikes, expiries, conditions, bounds."""

from __future__ import annotations

import math
from collections.abc import Sequence

from hedgerow.rules.base import Bounds
from hedgerow.rules.condition import (
    AllOf,
    AnyOf,
    Condition,
    DaysLeftTest,
    GainTest,
    HeldTest,
    HoldsSharesTest,
    LegLostTest,
    LossTest,
    NotOf,
    StockDownTest,
    StockUpTest,
)
from hedgerow.rules.figures import percent_text
from hedgerow.rules.legs import Expiry, Leg, Strike
from hedgerow.rules.signalwords import SignalTest, SignalValue
from hedgerow.signals import named_signal

__all__ = [
    "bounds_phrase",
    "condition_phrase",
    "counted",
    "expiry_phrase",
    "joined",
    "leg_phrase",
    "signal_phrase",
]

_SNAPS = {
    "nearest": "moved to the nearest listed strike",
    "up": "moved up to a listed strike",
    "down": "moved down to a listed strike",
}


def joined(parts: Sequence[str], word: str = "and") -> str:
    """Phrases as a list in a sentence."""
    if len(parts) < 2:
        return "".join(parts)
    return f"{', '.join(parts[:-1])} {word} {parts[-1]}"


def counted(count: int, thing: str) -> str:
    """A count of things."""
    return f"{count} {thing}" if count == 1 else f"{count} {thing}s"


def leg_phrase(leg: Leg) -> str:
    """A leg: side, count, right, name, expiry and strike."""
    verb = "sell" if leg.sold else "buy"
    count = "one" if leg.ratio == 1 else f"{leg.ratio:g}"
    plural = "" if leg.ratio <= 1 else "s"
    where = f"{expiry_phrase(leg.expiry)}, {strike_phrase(leg)}"
    return f"{verb} {count} {leg.right}{plural} (`{leg.name}`), {where}"


def expiry_phrase(expiry: Expiry) -> str:
    """When a leg expires."""
    if expiry.with_leg is not None:
        return f"expiring with `{expiry.with_leg}`"
    days = counted(expiry.days or 0, "day")
    if expiry.choose == "at_least":
        return f"expiring on the first listed {expiry.listed} date at least {days} away"
    return f"expiring on the listed {expiry.listed} date nearest to {days} away"


def strike_phrase(leg: Leg) -> str:
    """Where a leg's strike lies and how it is moved to the listed grid."""
    strike = leg.strike
    if strike.same_as is not None:
        return f"at the strike of `{strike.same_as}`"
    if strike.steps == 0:
        first = {"up": "first listed strike at or above", "down": "first listed strike at or below"}
        return f"at the {first.get(strike.snap, 'listed strike nearest to')} the stock's price"
    if strike.rule in ("spend", "zero_cost_with", "worst_loss_within"):
        return _searched(leg)
    return f"{_rule(strike, leg.right)}, {_SNAPS[strike.snap]}"


def _searched(leg: Leg) -> str:
    """A strike that is looked for among the listed ones, so that nothing is left to be moved."""
    strike = leg.strike
    if strike.spend is not None:
        share, other = percent_text(strike.spend.share), strike.spend.of
        return f"at the dearest listed strike that costs at most {share} of what `{other}` brings"
    if strike.worst_loss_within is not None:
        share = percent_text(strike.worst_loss_within)
        return f"at the lowest listed strike that keeps the worst loss within {share} of the net debit"
    if leg.sold:
        return f"at the farthest listed strike that still pays for `{strike.zero_cost_with}`"
    return f"at the dearest listed strike that `{strike.zero_cost_with}` pays for"


def _rule(strike: Strike, right: str) -> str:
    beyond = "above" if right == "call" else "below"
    phrases = {
        "from_spot": lambda v: f"struck {_away(v, percent_text(abs(v)))}",
        "steps": lambda v: f"struck {counted(abs(v), 'listed step')} {_side(v)} the stock's price",
        "delta": lambda v: f"at the strike whose delta is {v:g}",
        "odds": lambda v: f"at the strike that the stock ends {beyond} with a chance of {percent_text(v)}",
        "deviations": lambda v: f"struck {_away(v, _deviations(abs(v)))}",
    }
    return phrases[strike.rule](getattr(strike, strike.rule))


def _deviations(count: float) -> str:
    return "1 standard deviation" if count == 1.0 else f"{count:g} standard deviations"


def _side(value: float) -> str:
    return "above" if value > 0 else "below"


def _away(value: float, size: str) -> str:
    return "at the stock's price" if value == 0 else f"{size} {_side(value)} the stock's price"


def bounds_phrase(bounds: Bounds, percent: bool) -> str:
    """A range in words."""
    low, high = (percent_text(end) if percent and math.isfinite(end) else f"{end:g}" for end in _ends(bounds))
    if bounds.low == -math.inf:
        return f"at most {high}"
    if bounds.high == math.inf:
        return f"at least {low}"
    return f"between {low} and {high}"


def _ends(bounds: Bounds) -> tuple[float, float]:
    return bounds.low, bounds.high


def signal_phrase(value: SignalValue) -> str:
    """A signal with its parameters, of another symbol where one is named."""
    phrase = named_signal(value.signal).words(value.arguments)
    return phrase if value.of is None else f"on {value.of}, {phrase}"


def condition_phrase(condition: Condition, inner: bool = False) -> str:
    """A condition as a clause; joined ones inside others stand in parentheses."""
    if isinstance(condition, AllOf | AnyOf):
        word = "and" if isinstance(condition, AllOf) else "or"
        parts = [condition_phrase(part, True) for part in condition.conditions]
        text = f" {word} ".join(parts) if len(parts) < 3 else ", ".join(parts[:-1]) + f", {word} {parts[-1]}"
        return f"({text})" if inner and len(parts) > 1 else text
    if isinstance(condition, NotOf):
        return f"it is not so that {condition_phrase(condition.condition, True)}"
    if isinstance(condition, SignalTest):
        return _signal_clause(condition)
    return _position_clause(condition)


def _signal_clause(test: SignalTest) -> str:
    phrase = signal_phrase(test)
    if test.days:
        return f"{phrase} is {joined([day.capitalize() for day in test.days], 'or')}"
    if test.bounds is None:
        return phrase
    number = named_signal(test.signal).number
    return f"{phrase} is {bounds_phrase(test.bounds, number is not None and number.unit == 'fraction')}"


def _position_clause(test: Condition) -> str:
    if isinstance(test, GainTest):
        of = "its net debit" if test.gain.of == "debit" else "the best gain it could make"
        return f"the position has gained at least {percent_text(test.gain.at_least)} of {of}"
    if isinstance(test, LossTest):
        of = "its net debit" if test.loss.of == "debit" else "the worst loss it could make"
        return f"the position has lost at least {percent_text(test.loss.at_least)} of {of}"
    if isinstance(test, DaysLeftTest):
        leg = test.days_left.leg
        which = "the nearest expiry" if leg is None else f"the expiry of `{leg}`"
        if test.days_left.at_most == 1:
            return f"one day or none is left to {which}"
        if test.days_left.at_most == 0:
            return f"no day is left to {which}"
        return f"{test.days_left.at_most} days or fewer are left to {which}"
    if isinstance(test, HeldTest):
        return f"it has been held for {counted(test.held.at_least, 'session')} or more"
    return _move_clause(test)


def _move_clause(test: Condition) -> str:
    if isinstance(test, HoldsSharesTest):
        return "the position holds shares"
    if isinstance(test, StockUpTest):
        return f"the stock is {percent_text(test.stock_up.at_least)} or more above its price at entry"
    if isinstance(test, StockDownTest):
        return f"the stock is {percent_text(test.stock_down.at_least)} or more below its price at entry"
    if isinstance(test, LegLostTest):
        share = percent_text(test.leg_lost.at_least)
        return f"`{test.leg_lost.leg}` has lost at least {share} of the price at which it was opened"
    raise TypeError(f"a condition of an unknown kind cannot be put into words: {type(test).__name__}")
