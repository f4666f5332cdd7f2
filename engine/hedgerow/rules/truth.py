"""Conditions about the market worked out for all sessions: where they hold, and where they do not.

What is not known holds neither way: a signal in its warm-up is neither yes nor no, and so is `not` of it
(Kleene's three-valued logic). So the two arrays of a condition need not cover every session.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from hedgerow.kernels.layout import Floats
from hedgerow.rules.base import Bounds
from hedgerow.rules.schema import AllOf, AnyOf, Condition, NotOf, SignalTest, SignalValue

__all__ = ["Asked", "Truth", "Values", "signal_truth", "truths_of", "within"]

Values = Callable[[SignalValue], NDArray[np.bool_] | Floats]
Truth = NDArray[np.bool_]

WEEKDAYS = ("monday", "tuesday", "wednesday", "thursday", "friday", "saturday", "sunday")


@dataclass(frozen=True)
class Asked:
    """Who answers for signals: `values` (T, N), and where a yes-or-no signal is known; None: everywhere."""

    values: Values
    known: Callable[[SignalValue], Truth] | None = None


def within(values: Floats, bounds: Bounds) -> Truth:
    """Where values lie within bounds, both ends included; never where they are unknown."""
    return np.asarray((values >= bounds.low) & (values <= bounds.high))


def signal_truth(test: SignalTest, asked: Asked) -> tuple[Truth, Truth]:
    """Where a signal's condition holds and where it does not, each (T, N)."""
    found = asked.values(test)
    if found.dtype == np.bool_:
        yes = np.asarray(found, np.bool_)
        known = np.ones_like(yes) if asked.known is None else asked.known(test)
        return yes, known & ~yes
    known = ~np.isnan(found)
    if test.days:
        yes = np.asarray(np.isin(found, [WEEKDAYS.index(day) for day in test.days]))
    else:
        yes = within(np.asarray(found, np.float64), test.bounds or Bounds())
    return yes & known, known & ~yes


def truths_of(condition: Condition, asked: Asked) -> tuple[Truth, Truth]:
    """Where a condition about the market alone holds and where it does not, each (T, N)."""
    if isinstance(condition, NotOf):
        yes, no = truths_of(condition.condition, asked)
        return no, yes
    if isinstance(condition, AllOf | AnyOf):
        parts = [truths_of(part, asked) for part in condition.conditions]
        every = np.logical_and.reduce([part[0 if isinstance(condition, AllOf) else 1] for part in parts])
        some = np.logical_or.reduce([part[1 if isinstance(condition, AllOf) else 0] for part in parts])
        pair = np.asarray(every), np.asarray(some)
        return pair if isinstance(condition, AllOf) else pair[::-1]
    assert isinstance(condition, SignalTest)
    return signal_truth(condition, asked)
