"""A strategy in plain English: what is held, what it can win and lose, how it is entered, left and filled.

The payoff is told from the slopes of the position far above and far below every strike, so it holds for any
structure of shares and legs; what depends on the strikes of the day is told as such.
"""

from __future__ import annotations

from collections.abc import Iterator

from hedgerow.rules.figures import percent_text
from hedgerow.rules.legs import Leg
from hedgerow.rules.phrases import bounds_phrase, condition_phrase, joined, leg_phrase, signal_phrase
from hedgerow.rules.schema import Accept, Strategy

__all__ = ["explain", "paragraphs"]

_ACCEPTED = (
    ("net_debit", "the options together cost {} of the stock's price", True),
    ("worst_loss", "the worst loss is {} of the position's net debit", True),
    ("best_gain", "the best gain is {} of the position's net debit", True),
    ("odds_of_best", "the chance of ending at the best gain is {}", True),
    ("best_over_worst", "the best gain over the worst loss is {}", False),
    ("spread_to_premium", "the bid-ask spread of all legs is {} of their premium", True),
)


def explain(strategy: Strategy) -> str:
    """The strategy as paragraphs of text, a title first, an empty line between."""
    parts = [strategy.name, *([strategy.about] if strategy.about else [])]
    parts += [f"{title}. {text}" for title, text in paragraphs(strategy)]
    return "\n\n".join(parts) + "\n"


def paragraphs(strategy: Strategy) -> list[tuple[str, str]]:
    """The paragraphs, each with its title."""
    found = [
        ("Position", _position(strategy)),
        ("Best case", " ".join(_best(strategy))),
        ("Worst case", " ".join(_worst(strategy))),
        ("Obligations", " ".join(_obligations(strategy))),
        ("Entry", " ".join(_entry(strategy))),
        ("Management", " ".join(_management(strategy))),
        ("Exit", " ".join(_exit(strategy))),
        ("Fills", _fills(strategy)),
    ]
    return [(title, text) for title, text in found if text]


def _position(strategy: Strategy) -> str:
    shares = {"long": "buy 100 shares", "short": "sell 100 shares short", "none": ""}[strategy.shares]
    now = [leg for leg in strategy.legs if leg.add_when is None]
    parts = [*([shares] if shares else []), *(leg_phrase(leg) for leg in now)]
    text = f"For each lot: {'; '.join(parts)}." if parts else "Nothing is held at first."
    if not strategy.legs:
        text += " There are no options."
    return text


def _calls(strategy: Strategy, sold: bool) -> list[Leg]:
    return [leg for leg in strategy.legs if leg.right == "call" and leg.sold == sold and leg.add_when is None]


def _puts(strategy: Strategy, sold: bool) -> list[Leg]:
    return [leg for leg in strategy.legs if leg.right == "put" and leg.sold == sold and leg.add_when is None]


def _count(legs: list[Leg]) -> float:
    return sum(leg.ratio for leg in legs)


def _held(strategy: Strategy) -> float:
    return {"long": 1.0, "short": -1.0, "none": 0.0}[strategy.shares]


def _rise(strategy: Strategy) -> float:
    """Lots of shares the position amounts to far above every strike."""
    return _held(strategy) + _count(_calls(strategy, False)) - _count(_calls(strategy, True))


def _fall(strategy: Strategy) -> float:
    """Lots of shares the position amounts to far below every strike."""
    return _held(strategy) - _count(_puts(strategy, False)) + _count(_puts(strategy, True))


def _names(legs: list[Leg]) -> str:
    return joined([f"`{leg.name}`" for leg in legs])


def _best(strategy: Strategy) -> Iterator[str]:
    rise, fall = _rise(strategy), _fall(strategy)
    if _upside_down(strategy) and rise == 0 and fall == 0:
        yield "The put is struck above the call: the position wins when the stock falls, most below both."
        return
    if rise > 0:
        where = "above every strike " if strategy.legs else ""
        pace = "" if rise == 1 else f", at the pace of {rise * 100:g} shares a lot"
        yield f"Not capped: {where}the position gains with the stock, without limit{pace}."
        if any(leg.sold and leg.right == "call" for leg in strategy.legs if leg.add_when is not None):
            yield "A call sold later caps it from then on."
    elif _simple(strategy) and _calls(strategy, True):
        sold = _names(_calls(strategy, True))
        yield (
            f"Capped by {sold}: above its strike a further rise adds nothing, since the shares go at that "
            "strike. The most that can be won is the strike less the net debit."
        )
    elif rise == 0 and strategy.legs and strategy.shares == "none" and all(leg.sold for leg in strategy.legs):
        yield "Capped: the premium received is the most that can be won."
    elif rise == 0:
        yield "Capped: above every strike a further rise adds nothing."
    if any(leg.roll is not None for leg in _calls(strategy, True)):
        yield "A call sold later brings its own premium and its own cap."
    if fall < 0:
        where = "Below every strike the" if strategy.legs else "The"
        yield f"{where} position gains as the stock falls, at most until it is worth nothing."
    if _one_strike(strategy) and rise == 0 and fall == 0 and strategy.shares != "none":
        yield "Call and put share strike and expiry: the result is locked in at entry, whatever comes."


def _worst(strategy: Strategy) -> Iterator[str]:
    rise, fall = _rise(strategy), _fall(strategy)
    bought = _puts(strategy, False)
    if rise < 0:
        yield "No limit above: the position loses as the stock rises, however far it rises."
    if fall > 0 and strategy.shares == "long" and bought:
        puts = _names(bought)
        yield f"Protected by {puts} in part: below every strike the loss goes on, at worst down to nothing."
    elif fall > 0 and strategy.shares == "long":
        cushion = ", cushioned by the premium alone" if _calls(strategy, True) else ""
        yield f"Not floored: the shares fall unprotected, at worst to nothing{cushion}."
    elif fall > 0:
        yield "Below every strike the position loses as the stock falls, at worst until it is worth nothing."
    elif bought and _simple(strategy):
        yield (
            f"Floored by {_names(bought)}: below its strike a further fall costs nothing more while the put "
            "lives, since the shares can be sold at that strike. The most that can be lost is the net debit "
            "less the strike."
        )
    elif rise >= 0 and strategy.legs:
        yield "Bounded: below every strike and above every strike there is nothing more to lose."
    if strategy.stop is not None:
        yield _stop(strategy)


def _stop(strategy: Strategy) -> str:
    where = "below" if strategy.shares == "long" else "above"
    assert strategy.stop is not None
    distance = percent_text(strategy.stop.distance)
    return (
        f"A resting order in the stock {distance} {where} its price at entry ends the whole position; "
        "a gap jumps it, and the fill is then the open."
    )


def _simple(strategy: Strategy) -> bool:
    """Whether shares stand with at most one call sold and one put bought, the put not above the call."""
    now = [leg for leg in strategy.legs if leg.add_when is None]
    kinds = [(leg.sold, leg.right) for leg in now]
    usual = len(set(kinds)) == len(kinds) and {*kinds} <= {(True, "call"), (False, "put")}
    whole = all(leg.ratio == 1 for leg in now)
    return strategy.shares == "long" and usual and whole and not _upside_down(strategy)


def _upside_down(strategy: Strategy) -> bool:
    """Whether a bought put is known to be struck above a sold call: a reverse collar."""
    puts = [leg.strike.from_spot for leg in _puts(strategy, False)]
    calls = [leg.strike.from_spot for leg in _calls(strategy, True)]
    return any(put is not None and call is not None and put > call for put in puts for call in calls)


def _one_strike(strategy: Strategy) -> bool:
    """Whether two legs, a call and a put, are struck and expire together."""
    if len(strategy.legs) != 2:
        return False
    names = {leg.name for leg in strategy.legs}
    same = [leg.strike.same_as in names for leg in strategy.legs]
    together = [leg.expiry.with_leg in names for leg in strategy.legs]
    return any(same) and any(together) and {leg.right for leg in strategy.legs} == {"call", "put"}


def _obligations(strategy: Strategy) -> Iterator[str]:
    calls = [leg for leg in strategy.legs if leg.sold and leg.right == "call"]
    puts = [leg for leg in strategy.legs if leg.sold and leg.right == "put"]
    if calls:
        held = strategy.shares == "long"
        how = "the shares held are delivered" if held else "the calls bought stand behind it"
        yield (
            f"The buyer of {_names(calls)} may take shares at its strike whenever that pays, most likely the "
            f"session before an ex-dividend date: {how}."
        )
    if puts:
        how = (
            "they close the shares sold short" if strategy.shares == "short" else "cash for that is set aside"
        )
        yield (
            f"The buyer of {_names(puts)} may sell you shares at its strike, early too when it is deep in "
            f"the money: {how}."
        )
    if strategy.shares == "short":
        yield "Shares sold short cost their borrowing and every dividend."


def _entry(strategy: Strategy) -> Iterator[str]:
    enter = strategy.enter
    if enter is None or enter.when is None:
        yield "At every close at which the stock has no open position."
    else:
        yield f"At a close without an open position in the stock, when {condition_phrase(enter.when)}."
    if enter is not None and enter.rank is not None:
        order = "highest" if enter.rank.order == "high" else "lowest"
        yield f"When capital is short, the {order} come first by {signal_phrase(enter.rank.by)}."
    if strategy.accept is not None:
        yield f"The entry is declined unless {joined(_accepted(strategy.accept))}."


def _accepted(accept: Accept) -> list[str]:
    parts = ["the options together bring money in"] if accept.net_credit else []
    for name, phrase, percent in _ACCEPTED:
        bounds = getattr(accept, name)
        if bounds is not None:
            parts.append(phrase.format(bounds_phrase(bounds, percent)))
    return parts


def _management(strategy: Strategy) -> Iterator[str]:
    for leg in strategy.legs:
        if leg.add_when is not None:
            yield f"Later, when {condition_phrase(leg.add_when)}: {leg_phrase(leg)}."
        if leg.roll is None:
            continue
        times = []
        if leg.roll.at_expiry:
            times.append("when it ends at expiry and the position goes on")
        if leg.roll.condition is not None:
            times.append(f"when {condition_phrase(leg.roll.condition)}")
        verb = "sold" if leg.sold else "bought"
        credit = ", but only if that brings money in" if leg.roll.only_for else ""
        yield f"`{leg.name}` is {verb} again by the same rules {joined(times, 'or')}{credit}."


def _exit(strategy: Strategy) -> Iterator[str]:
    if strategy.exit:
        yield "Asked at each close, in this order; the first that holds ends the whole position:"
        rules = (
            f"({at}) {rule.name}: {condition_phrase(rule.condition)}"
            for at, rule in enumerate(strategy.exit, 1)
        )
        yield "; ".join(rules) + "."
    else:
        yield "No exit rule." if strategy.legs else "No exit rule: the position is kept."
    if strategy.legs:
        yield _at_expiry(strategy)


def _at_expiry(strategy: Strategy) -> str:
    again = [leg for leg in strategy.legs if leg.roll is not None and leg.roll.at_expiry]
    text = (
        "At expiry an option in the money is exercised or assigned, any other ends worthless; those of an "
        "index are settled in cash, and never early."
    )
    if strategy.shares == "none":
        return text + " Shares that this leaves are sold at that close."
    if again:
        return text + " The position goes on while shares are held and a leg lives or is made again."
    return text + " Shares that no leg keeps any longer are sold at that close."


def _fills(strategy: Strategy) -> str:
    if strategy.fill == "close":
        return "What is decided at a close is filled at that close, after costs, as if it were known in time."
    return "What is decided at a close is filled at the next open, after costs."
