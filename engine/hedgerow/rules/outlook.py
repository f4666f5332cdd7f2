"""What a position can win, lose and owe, in plain English.

Told from the slopes of the position far above and far below every strike, so it holds for any structure of
shares and legs; where the rules themselves say which strike lies above which, the sentence says more.
"""

from __future__ import annotations

from collections.abc import Iterator

from hedgerow.rules.figures import percent_text
from hedgerow.rules.legs import Leg
from hedgerow.rules.phrases import joined
from hedgerow.rules.schema import Strategy
from hedgerow.rules.shape import (
    at_entry,
    fall,
    is_locked,
    is_plain,
    is_reversed,
    later_calls,
    of_kind,
    rise,
    together,
    vertical,
)

__all__ = ["best_case", "obligations", "worst_case"]


def _names(legs: list[Leg]) -> str:
    return joined([f"`{leg.name}`" for leg in legs])


def best_case(strategy: Strategy) -> Iterator[str]:
    """The sentences about what can be won."""
    if strategy.holds_nothing:
        yield "Nothing to win but the interest on cash."
    elif is_locked(strategy):
        yield from _locked(strategy)
    elif is_reversed(strategy) and rise(strategy) == 0 and fall(strategy) == 0:
        yield from _reversed_best(strategy)
    elif rise(strategy) > 0:
        yield from _open_above(strategy)
    elif rise(strategy) == 0:
        yield _capped(strategy)
    if not is_locked(strategy):
        yield from _more_to_win(strategy)


def _locked(strategy: Strategy) -> Iterator[str]:
    amount = "the strike less the net debit" if strategy.shares == "long" else "what came in less the strike"
    yield (
        "Call and put share strike and expiry: the result is locked in at entry, whatever comes. "
        f"It is {amount}."
    )


def _reversed_best(strategy: Strategy) -> Iterator[str]:
    yield "The put is struck above the call: the position wins when the stock falls, most below both."
    if together(strategy):
        yield "The most that can be won is the put's strike less the net debit."


def _open_above(strategy: Strategy) -> Iterator[str]:
    where = "above every strike " if strategy.legs else ""
    slope = rise(strategy)
    pace = "" if slope == 1 else f", at the pace of {slope * 100:g} shares a lot"
    yield f"Not capped: {where}the position gains with the stock, without limit{pace}."
    if later_calls(strategy):
        yield "A call sold later caps it from then on."


def _capped(strategy: Strategy) -> str:
    calls, spread = of_kind(strategy, "call", True), vertical(strategy)
    if strategy.shares == "long" and len(calls) == 1 and not of_kind(strategy, "call", False):
        still = "" if together(strategy) else ", and what the put is still worth then"
        return (
            f"Capped by {_names(calls)}: above its strike a further rise adds nothing, since the shares go "
            f"at that strike. The most that can be won is the strike less the net debit{still}."
        )
    if spread is not None:
        sold, _, credit = spread
        side = "above" if (sold.right == "put") == credit else "below"
        amount = "what the options bring in" if credit else "the distance of the strikes less what was paid"
        return f"Capped: the most that can be won is {amount}, when the stock ends {side} both strikes."
    if strategy.shares == "none" and strategy.legs and all(leg.sold for leg in at_entry(strategy)):
        return "Capped: the premium received is the most that can be won."
    return "Capped: above every strike a further rise adds nothing."


def _more_to_win(strategy: Strategy) -> Iterator[str]:
    """What later calls and a fall may bring."""
    if any(leg.roll is not None for leg in of_kind(strategy, "call", True)):
        yield "A call sold later brings its own premium and its own cap."
    if strategy.after_assignment == "keep":
        capped = ", up to the strike of the call sold against them" if later_calls(strategy) else ""
        yield f"Shares that were assigned and kept gain with the stock{capped}."
    if fall(strategy) < 0:
        where = "Below every strike the" if strategy.legs else "The"
        yield f"{where} position gains as the stock falls, at most until it is worth nothing."


def worst_case(strategy: Strategy) -> Iterator[str]:
    """The sentences about what can be lost."""
    if rise(strategy) < 0:
        yield "No limit above: the position loses as the stock rises, however far it rises."
    if strategy.holds_nothing:
        yield "Nothing to lose."
    elif is_locked(strategy):
        yield from _locked_worst(strategy)
    elif fall(strategy) > 0:
        yield _falling(strategy)
    elif is_plain(strategy) and of_kind(strategy, "put", False):
        yield from _floored(strategy)
    elif rise(strategy) >= 0 and strategy.legs:
        yield _bounded(strategy)
    if strategy.stop is not None:
        yield _stop(strategy)


def _locked_worst(strategy: Strategy) -> Iterator[str]:
    yield "Bounded by the same result: what is locked in at entry may be a loss, and so may its costs."
    if strategy.shares == "short":
        yield "Borrowing that grows dear and dividends that rise come off it; an early assignment ends it."
    else:
        yield "A dividend that is cut comes off it; an early assignment before one ends it."


def _falling(strategy: Strategy) -> str:
    """The position still loses below every strike."""
    bought, sold = of_kind(strategy, "put", False), of_kind(strategy, "put", True)
    if strategy.shares == "long" and bought:
        between = f" between its strike and that of {_names(sold)} nothing more is lost;" if sold else ""
        return (
            f"Protected by {_names(bought)} in part:{between} below every strike the loss goes on, at worst "
            "down to nothing."
        )
    if strategy.shares == "long":
        cushion = ", cushioned by the premium alone" if of_kind(strategy, "call", True) else ""
        return f"Not floored: the shares fall unprotected, at worst to nothing{cushion}."
    text = "Below every strike the position loses as the stock falls, at worst until it is worth nothing"
    return text + (": the strike less the premium." if len(sold) == 1 and not bought else ".")


def _floored(strategy: Strategy) -> Iterator[str]:
    puts = of_kind(strategy, "put", False)
    yield (
        f"Floored by {_names(puts)}: below its strike a further fall costs nothing more while the put lives, "
        "since the shares can be sold at that strike. The most that can be lost is the net debit less the "
        "strike."
    )
    if any(leg.roll is not None for leg in puts):
        yield "A put bought again has its own price and its own floor."
    sold = [leg for leg in strategy.legs if leg.sold and leg.right == "call"]
    again = [leg for leg in sold if leg.roll is not None or leg.add_when is not None]
    if again:
        yield (
            f"That is so for the legs of the entry. Where {_names(again)} is sold below that strike later, "
            "after a fall, the shares may be taken there, and more is lost."
        )


def _bounded(strategy: Strategy) -> str:
    spread = vertical(strategy)
    if spread is not None:
        amount = (
            "the distance of the strikes less what the options bring in" if spread[2] else "what was paid"
        )
        return f"Bounded: the most that can be lost is {amount}."
    if is_reversed(strategy):
        calls = _names(of_kind(strategy, "call", True))
        amount = "the net debit less that strike"
        return (
            f"Bounded: above every strike the shares go at the strike of {calls}, and nothing more is lost. "
            f"The most that can be lost is {amount}."
        )
    return "Bounded: below every strike and above every strike there is nothing more to lose."


def _stop(strategy: Strategy) -> str:
    where = "below" if strategy.shares == "long" else "above"
    assert strategy.stop is not None
    distance = percent_text(strategy.stop.distance)
    return (
        f"A resting order in the stock {distance} {where} its price at entry ends the whole position; "
        "a gap jumps it, and the fill is then the open."
    )


def obligations(strategy: Strategy) -> Iterator[str]:
    """The sentences about what others may ask of the position."""
    calls = [leg for leg in strategy.legs if leg.sold and leg.right == "call"]
    puts = [leg for leg in strategy.legs if leg.sold and leg.right == "put"]
    if calls:
        held = strategy.shares == "long" or calls == later_calls(strategy)
        how = "the shares held are delivered" if held else "the calls bought stand behind it"
        yield (
            f"The buyer of {_names(calls)} may take shares at its strike whenever that pays, most likely the "
            f"session before an ex-dividend date: {how}."
        )
    if puts:
        yield (
            f"The buyer of {_names(puts)} may sell you shares at its strike, early too when it is deep in "
            f"the money: {_for_puts(strategy)}."
        )
    if strategy.shares == "short":
        yield "Shares sold short cost their borrowing and every dividend."


def _for_puts(strategy: Strategy) -> str:
    """What stands behind a put that is sold."""
    if strategy.shares == "short":
        return "they close the shares sold short"
    if of_kind(strategy, "put", False) and strategy.shares == "long":
        return "the put bought stands behind it, and shares taken early are paid for on credit until they go"
    if of_kind(strategy, "put", False):
        return "the put bought limits what that can cost, and cash for that is set aside"
    kept = ", and the shares are kept" if strategy.after_assignment == "keep" else ""
    return f"cash for that is set aside{kept}"
