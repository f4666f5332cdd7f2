"""Checks of what legs say about each other: names, circles, sides."""

from __future__ import annotations

from collections.abc import Iterator, Mapping

from hedgerow.rules.condition import DaysLeftTest, LegLostTest
from hedgerow.rules.legs import Strike
from hedgerow.rules.parts import Parts
from hedgerow.rules.words import Loose, Path, unknown_name

__all__ = ["reference_faults"]


def reference_faults(parts: Parts) -> Iterator[Loose]:
    """Every fault of legs and conditions that name a leg."""
    yield from _names(parts)
    with_legs = {name: expiry.with_leg for name, expiry in parts.expiries.items() if expiry.with_leg}
    yield from _circles(with_legs, "expiry", "with")
    partners = {name: strike.partner for name, strike in parts.strikes.items() if strike.partner}
    yield from _circles(partners, "strike", "")
    yield from _worst_case_last(parts, partners)
    yield from _sides(parts)
    yield from _rolls(parts, with_legs)
    yield from _ways(parts, with_legs)


def partner_path(name: str, strike: Strike) -> Path:
    """Where a strike names the leg it is reckoned from."""
    tail = ("spend", "of") if strike.spend is not None else (strike.rule,)
    return ("legs", name, "strike", *tail)


def _names(parts: Parts) -> Iterator[Loose]:
    for name, expiry in parts.expiries.items():
        if expiry.with_leg is not None:
            yield from _named(parts, ("legs", name, "expiry", "with"), expiry.with_leg, name)
    for name, strike in parts.strikes.items():
        if strike.partner is not None:
            yield from _named(parts, partner_path(name, strike), strike.partner, name)
    for asked in parts.asked:
        if isinstance(asked.test, LegLostTest):
            yield from _named(parts, (*asked.path, "leg_lost", "leg"), asked.test.leg_lost.leg, None)
        elif isinstance(asked.test, DaysLeftTest) and asked.test.days_left.leg is not None:
            yield from _named(parts, (*asked.path, "days_left", "leg"), asked.test.days_left.leg, None)


def _named(parts: Parts, path: Path, target: str, own: str | None) -> Iterator[Loose]:
    others = [name for name in parts.names if name != own]
    if target == own:
        allowed = (
            f"allowed: another leg, of {', '.join(f'`{name}`' for name in others) or 'which there is none'}"
        )
        yield Loose(path, "reference", "names the leg itself", allowed)
    elif target not in parts.names:
        yield unknown_name(path, target, others, "leg of this strategy")


def _circles(partners: Mapping[str, str | None], section: str, word: str) -> Iterator[Loose]:
    """Each circle once, told at the first of its legs."""
    told: set[str] = set()
    for first in partners:
        chain = [first]
        while (after := partners.get(chain[-1])) is not None and after not in chain:
            chain.append(after)
        if after == first and len(chain) > 1 and first not in told:
            told.update(chain)
            circle = " -> ".join(f"`{name}`" for name in (*chain, first))
            path: Path = ("legs", first, section, word) if word else ("legs", first, section)
            what = "expiry" if section == "expiry" else "strike"
            allowed = f"allowed: one of these legs with an {what} of its own"
            yield Loose(
                path, "circle", f"runs in a circle: {circle}", allowed.replace("an strike", "a strike")
            )


def _worst_case_last(parts: Parts, partners: Mapping[str, str | None]) -> Iterator[Loose]:
    """A strike that keeps the worst case needs all others first."""
    solved = [name for name, strike in parts.strikes.items() if strike.worst_loss_within is not None]
    for name in solved[1:]:
        path = ("legs", name, "strike", "worst_loss_within")
        yield Loose(
            path, "circle", f"stands in `{solved[0]}` too", "allowed: one leg solved for the worst case"
        )
    for name, target in partners.items():
        if target in solved:
            found = f"names `{target}`, whose strike is solved from all others"
            yield Loose(
                partner_path(name, parts.strikes[name]),
                "circle",
                found,
                "allowed: a leg whose strike does not depend on this one",
            )


def _sides(parts: Parts) -> Iterator[Loose]:
    """Strikes solved from premiums need one leg that pays and one that is paid."""
    for name, leg in parts.legs.items():
        strike = leg.strike
        where: Path = ("legs", name, "strike", strike.rule)
        partner = parts.legs.get(strike.partner or "")
        if strike.spend is not None and (leg.sold or (partner is not None and not partner.sold)):
            allowed = "allowed: a leg that is bought, spending from a leg that is sold"
            yield Loose(where, "side", "is no way to pay for this leg", allowed)
        if strike.zero_cost_with is not None and partner is not None and partner.sold == leg.sold:
            side = "sold" if leg.sold else "bought"
            found = f"names `{partner.name}`, and both legs are {side}"
            yield Loose(where, "side", found, "allowed: one leg sold and one bought")
        if strike.worst_loss_within is not None and leg.sold:
            yield Loose(where, "side", "stands in a leg that is sold", "allowed: in a leg that is bought")


def _rolls(parts: Parts, with_legs: Mapping[str, str | None]) -> Iterator[Loose]:
    """A leg that ends with another cannot be written again at expiry unless the other is."""
    for name, leg in parts.legs.items():
        root = expiry_root(name, with_legs)
        other = parts.legs.get(root)
        if root == name or other is None or leg.roll is None or not leg.roll.at_expiry:
            continue
        if other.roll is None or not other.roll.at_expiry:
            found = f"rolls at expiry, but `{name}` ends with `{root}`, which does not roll"
            allowed = f"allowed: an expiry of its own, or `roll: {{at: expiry}}` in `{root}` too"
            yield Loose(("legs", name, "roll"), "roll", found, allowed)


def _ways(parts: Parts, with_legs: Mapping[str, str | None]) -> Iterator[Loose]:
    """A leg cannot go where the leg it follows stays."""
    for name, leg in parts.legs.items():
        way = "any" if leg.roll is None else leg.roll.direction
        for words, other, what in (
            (("out",), expiry_root(name, with_legs), "expiry"),
            (("up", "down"), leg.strike.same_as or name, "strike"),
        ):
            followed = parts.legs.get(other)
            if other != name and set(words) & set(way.split()) and followed and followed.roll is None:
                found = f"is `{way}`, but the {what} is that of `{other}`, which does not roll"
                allowed = f"allowed: a direction that leaves the {what} where it is, or one of its own"
                yield Loose(("legs", name, "roll", "direction"), "never", found, allowed)


def expiry_root(name: str, with_legs: Mapping[str, str | None]) -> str:
    """The leg whose own expiry rule this leg follows; a circle ends where it closes."""
    seen = {name}
    while (after := with_legs.get(name)) is not None and after not in seen:
        seen.add(after)
        name = after
    return name
