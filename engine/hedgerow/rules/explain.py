"""A strategy in plain English: what is held, what it can win and lose, how it is entered, left and filled."""

from __future__ import annotations

from collections.abc import Iterator

from hedgerow.rules.entering import Enter, FigureValue, On, Rank
from hedgerow.rules.legs import Roll
from hedgerow.rules.outlook import best_case, obligations, worst_case
from hedgerow.rules.phrases import (
    bounds_phrase,
    condition_phrase,
    counted,
    joined,
    leg_phrase,
    signal_phrase,
)
from hedgerow.rules.schema import Accept, Strategy
from hedgerow.rules.shape import at_entry

__all__ = ["explain", "paragraphs"]

_ACCEPTED = (
    ("net_debit", "the options together cost {} of the stock's price", True),
    ("worst_loss", "the worst loss is {} of the position's net debit", True),
    ("best_gain", "the best gain is {} of the position's net debit", True),
    ("odds_of_best", "the chance of ending at the best gain is {}", True),
    ("best_over_worst", "the best gain over the worst loss is {}", False),
    ("spread_to_premium", "the bid-ask spread of all legs is {} of their premium", True),
)
_RANKED = {
    "odds_of_best": "the chance of ending at the best gain",
    "best_over_worst": "the best gain over the worst loss",
    "net_credit": "what the options bring in, of the stock's price",
    "best_gain": "the best gain, of the net debit",
    "worst_loss": "the worst loss, of the net debit",
}
_WAYS = {
    "up": "to a higher strike",
    "down": "to a lower strike",
    "out": "to a later expiry",
    "up and out": "to a higher strike and a later expiry",
    "down and out": "to a lower strike and a later expiry",
}


def explain(strategy: Strategy) -> str:
    """The strategy as paragraphs of text, a title first, an empty line between."""
    parts = [strategy.name, *([strategy.about] if strategy.about else [])]
    parts += [f"{title}. {text}" for title, text in paragraphs(strategy)]
    return "\n\n".join(parts) + "\n"


def paragraphs(strategy: Strategy) -> list[tuple[str, str]]:
    """The paragraphs, each with its title."""
    found = [
        ("Position", _position(strategy)),
        ("Best case", " ".join(best_case(strategy))),
        ("Worst case", " ".join(worst_case(strategy))),
        ("Obligations", " ".join(obligations(strategy))),
        ("Entry", " ".join(_entry(strategy))),
        ("Management", " ".join(_management(strategy))),
        ("Exit", " ".join(_exit(strategy))),
        ("Fills", _fills(strategy)),
    ]
    return [(title, text) for title, text in found if text]


def _position(strategy: Strategy) -> str:
    if strategy.holds_nothing:
        return "Nothing: neither shares nor options."
    shares = {"long": "buy 100 shares", "short": "sell 100 shares short", "none": ""}[strategy.shares]
    parts = [*([shares] if shares else []), *(leg_phrase(leg) for leg in at_entry(strategy))]
    text = f"For each lot: {'; '.join(parts)}." if parts else "Nothing is held at first."
    if not strategy.legs:
        text += " There are no options."
    return text


def _entry(strategy: Strategy) -> Iterator[str]:
    if strategy.holds_nothing:
        yield "Never: the account stays in cash."
        return
    enter = strategy.enter or Enter()
    yield _moment(enter)
    if enter.ladder is not None:
        yield f"Each takes 1/{enter.ladder.positions} of the money that one position alone would take."
    if enter.cool_down is not None:
        pause = counted(enter.cool_down.sessions, "session")
        yield f"After a position in a stock has lost money, none is opened in it for {pause}."
    if enter.rank is not None:
        order = "highest" if enter.rank.order == "high" else "lowest"
        yield f"When capital is short, the {order} come first by {_ranked_by(enter.rank)}."
    if strategy.accept is not None:
        yield f"The entry is declined unless {joined(_accepted(strategy.accept))}."


def _moment(enter: Enter) -> str:
    """The close at which a position may be opened."""
    room = "no open position"
    if enter.ladder is not None:
        ago = counted(enter.ladder.spacing, "session")
        room = f"fewer than {enter.ladder.positions} open positions, each opened {ago} ago or more"
    if enter.on is not None:
        asked = "" if enter.when is None else f" and {condition_phrase(enter.when, True)}"
        return f"At the close of {_days(enter.on)}, if the stock has {room}{asked}."
    if enter.when is None:
        return f"At every close at which the stock has {room}."
    if enter.ladder is not None:
        return f"At a close at which the stock has {room}, when {condition_phrase(enter.when)}."
    return f"At a close without an open position in the stock, when {condition_phrase(enter.when)}."


def _days(on: On) -> str:
    """The sessions of an entry."""
    if on.weekday is not None:
        return f"every {joined([day.capitalize() for day in on.weekday])}"
    if on.first_session_of is not None:
        return f"the first session of every {on.first_session_of}"
    return f"every session on which a {on.expiry_of} expiry falls"


def _ranked_by(rank: Rank) -> str:
    """What candidates are ranked by."""
    return _RANKED[rank.by.figure] if isinstance(rank.by, FigureValue) else signal_phrase(rank.by)


def _accepted(accept: Accept) -> list[str]:
    parts = ["the options together bring money in"] if accept.net_credit else []
    for name, phrase, percent in _ACCEPTED:
        bounds = getattr(accept, name)
        if bounds is not None:
            parts.append(phrase.format(bounds_phrase(bounds, percent)))
    return parts


def _management(strategy: Strategy) -> Iterator[str]:
    if strategy.after_assignment == "keep":
        yield "Shares that an assigned put brings are kept."
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
        yield f"`{leg.name}` is {verb} again by the same rules {joined(times, 'or')}{_only(leg.roll)}."


def _only(roll: Roll) -> str:
    """What a roll of a leg that lives is held to."""
    parts = [_WAYS[roll.direction]] if roll.direction != "any" else []
    parts += ["if that brings money in"] if roll.only_for else []
    return f", but only {joined(parts, 'and only')}" if parts else ""


def _exit(strategy: Strategy) -> Iterator[str]:
    if strategy.holds_nothing:
        return
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
    if strategy.after_assignment == "keep":
        return text + (
            " A put that ends worthless ends the position. One that is assigned brings shares: the position "
            "then goes on while they are held, and ends when they are called away."
        )
    if strategy.shares == "none":
        text += " Shares that this leaves are sold at that close."
        if len(strategy.legs) > 1 and any(leg.sold for leg in strategy.legs):
            text += " Those of an early assignment are sold at the next open, and the other legs with them."
        return text
    if again:
        return text + " The position goes on while shares are held and a leg lives or is made again."
    return text + " Shares that no leg keeps any longer are sold at that close."


def _fills(strategy: Strategy) -> str:
    if strategy.holds_nothing:
        return ""
    if strategy.fill == "close":
        return "What is decided at a close is filled at that close, after costs, as if it were known in time."
    return "What is decided at a close is filled at the next open, after costs."
