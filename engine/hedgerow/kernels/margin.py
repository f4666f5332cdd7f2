"""What an account on margin must have behind a position, by the regulation's table of strategies.

Requirements are set against equity that counts shares and options at their value, options owed as a debt: so
an option held asks for its whole value (it lends nothing), an option written for what stands beyond its
premium. Source: FINRA rule 4210 and Regulation T, from memory; an account on portfolio margin differs.
"""

from __future__ import annotations

from typing import Any

from hedgerow.kernels.jit import step
from hedgerow.kernels.layout import CALL, PUT

__all__ = ["requirement"]

LONG_INITIAL, LONG_MAINTENANCE = 0.50, 0.25
SHORT_INITIAL, SHORT_MAINTENANCE = 0.50, 0.30  # of the price, beyond the proceeds, which are owed
PROTECTED_SHARE = 0.10  # of the strike of the option that protects
WRITTEN_SHARE, WRITTEN_LEAST = 0.20, 0.10
_DUST = 1e-6


@step
def _find(position: Any, count: int, right: int, sign: float) -> int:
    """The first leg held (sign > 0) or owed of a right, -1 when there is none."""
    for k in range(count):
        leg = position.legs[k]
        if leg.right == right and leg.quantity * sign > 0.0:
            return k
    return -1


@step
def _out_of_the_money(leg: Any, spot: float) -> float:
    """How far a leg is out of the money, per share."""
    gap = leg.strike - spot if leg.right == CALL else spot - leg.strike
    return gap if gap > 0.0 else 0.0


@step
def _same_terms(one: Any, other: Any) -> bool:
    """Whether two legs have one strike and one expiry."""
    return abs(one.strike - other.strike) < _DUST and one.expiry == other.expiry


@step
def _share_of(position: Any, leg: int, size: float) -> float:
    """The part of `size` shares that a leg's contracts stand for; none without a leg."""
    return 0.0 if leg < 0 else min(1.0, abs(position.legs[leg].quantity) / size)


@step
def _held(position: Any, count: int, size: float, spot: float) -> float:
    """Maintenance of `size` shares held, money: each part by the put and the call that stand for it."""
    put, call = _find(position, count, PUT, 1.0), _find(position, count, CALL, -1.0)
    if put >= 0 and _find(position, count, PUT, -1.0) >= 0:
        put = -1  # that put stands behind the one written
    protected, covered = _share_of(position, put, size), _share_of(position, call, size)
    both = min(protected, covered)
    money = both * _held_shares(position, put, call, spot)
    money += (protected - both) * _held_shares(position, put, -1, spot)
    money += (covered - both) * _held_shares(position, -1, call, spot)
    return size * (money + (1.0 - max(protected, covered)) * _held_shares(position, -1, -1, spot))


@step
def _held_shares(position: Any, put: int, call: int, spot: float) -> float:
    """Maintenance of a share held: less where leg `put` protects it, none on leg `call` that it covers."""
    plain = LONG_MAINTENANCE * spot
    if call >= 0 and put < 0:
        plain = LONG_MAINTENANCE * min(spot, position.legs[call].strike)
    if put < 0:
        return plain
    held = position.legs[put]
    protected = PROTECTED_SHARE * held.strike + _out_of_the_money(held, spot)
    if call < 0:
        return min(protected, plain)
    written = position.legs[call]
    if _same_terms(written, held):
        return PROTECTED_SHARE * held.strike
    return min(protected, LONG_MAINTENANCE * written.strike)


@step
def _short_shares(position: Any, call: int, put: int, spot: float) -> float:
    """Maintenance of a share sold short, beyond the proceeds: less where leg `call` protects it."""
    if call < 0:
        return SHORT_MAINTENANCE * spot
    held = position.legs[call]
    if put >= 0 and _same_terms(position.legs[put], held):
        return PROTECTED_SHARE * held.strike
    return min(PROTECTED_SHARE * held.strike + _out_of_the_money(held, spot), SHORT_MAINTENANCE * spot)


@step
def _short(position: Any, count: int, size: float, spot: float) -> float:
    """Maintenance of `size` shares sold short, money: each part by the call that stands for it."""
    call, put = _find(position, count, CALL, 1.0), _find(position, count, PUT, -1.0)
    protected = _share_of(position, call, size)
    locked = min(protected, _share_of(position, put, size))
    money = locked * _short_shares(position, call, put, spot)
    money += (protected - locked) * _short_shares(position, call, -1, spot)
    return size * (money + (1.0 - protected) * _short_shares(position, -1, -1, spot))


@step
def _written(position: Any, count: int, leg: Any, spot: float) -> float:
    """Requirement beyond its premium of a leg that was written and no shares cover, per share.

    With a bought leg behind it, of the same right and at least its life, the whole requirement is no more
    than the distance of the strikes, and the premium counts towards that.
    """
    least = WRITTEN_LEAST * (spot if leg.right == CALL else leg.strike)
    alone = max(WRITTEN_SHARE * spot - _out_of_the_money(leg, spot), least)
    behind = _find(position, count, leg.right, 1.0)
    if behind < 0 or position.legs[behind].expiry < leg.expiry:
        return alone
    held = position.legs[behind]
    wide = held.strike - leg.strike if leg.right == CALL else leg.strike - held.strike
    share = min(1.0, held.quantity / abs(leg.quantity))
    return share * min(alone, max(wide, 0.0) - leg.mid) + (1.0 - share) * alone


@step
def requirement(position: Any, count: int, shares: float, spot: float) -> tuple[float, float]:
    """Initial and maintenance requirement, money, of `shares` and the legs of a position at this price."""
    size, initial, maintenance = abs(shares), 0.0, 0.0
    if shares > 0.0:
        maintenance = _held(position, count, size, spot)
        initial = max(size * LONG_INITIAL * spot, maintenance)
    elif shares < 0.0:
        maintenance = _short(position, count, size, spot)
        initial = max(size * SHORT_INITIAL * spot, maintenance)
    more = 0.0
    for k in range(count):
        leg = position.legs[k]
        if leg.quantity > 0.0:
            more += leg.quantity * leg.mid
        elif leg.quantity < 0.0:
            covered = (shares > 0.0 and leg.right == CALL) or (shares < 0.0 and leg.right == PUT)
            bare = -leg.quantity - (size if covered else 0.0)
            if bare > 0.0:
                more += bare * _written(position, count, leg, spot)
    return initial + more, maintenance + more
