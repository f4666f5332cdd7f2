"""What is held: running quantities of shares and legs, and each leg's lives from opening to nothing."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from hedgerow.kernels import layout as at
from hedgerow.ledger.postings import QUANTITY_TOLERANCE, Postings, is_trade

__all__ = ["Holdings", "hold"]

Ints = NDArray[np.int64]
Floats = NDArray[np.float64]
SLOTS = at.MAX_LEGS + 1


@dataclass(frozen=True, eq=False)
class Holdings:
    """Every change of a quantity, sorted by position, then shares and legs, then time. H changes.

    event (H,): index of the event. slot (H,): position row x 5 + (0 shares, 1 to 4 legs).
    after (H,): quantity held after it, in shares of the day the position was opened.
    life (H,): number of the life of that slot, counted from 0 over the whole log; a life ends at nothing.
    """

    event: Ints
    slot: Ints
    after: Floats
    life: Ints

    @property
    def last_of_slot(self) -> NDArray[np.bool_]:
        """Whether each change (H,) is the last of its slot."""
        return _last(self.slot)

    def before(self, postings: Postings, index: Ints) -> Floats:
        """Return the shares held just before events (any of the log), in units of the opening day."""
        events = postings.log.events.size
        shares = self.slot % SLOTS == 0
        keys = (self.slot[shares] // SLOTS) * (events + 1) + self.event[shares]
        wanted = postings.row[index] * (events + 1) + index
        place = np.searchsorted(keys, wanted) - 1
        held = np.where(place >= 0, self.after[shares][np.maximum(place, 0)] if keys.size else 0.0, 0.0)
        same = keys[np.maximum(place, 0)] // (events + 1) == postings.row[index] if keys.size else False
        return np.asarray(np.where(same, held, 0.0))


def hold(postings: Postings) -> Holdings:
    """Return the holdings of a log's postings."""
    events = postings.log.events
    leg = events["leg"].astype(np.int64)
    part = np.where(events["kind"] == at.KIND_SHARES, 0, leg + 1)
    chosen = np.flatnonzero(is_trade(postings.log) & (postings.row >= 0) & (part >= 0))
    slot = postings.row[chosen] * SLOTS + part[chosen]
    order = np.lexsort((chosen, slot))
    chosen, slot = chosen[order], slot[order]
    quantity = postings.first_units()[chosen]
    running = np.cumsum(quantity)
    first = np.flatnonzero(~np.concatenate(([False], slot[1:] == slot[:-1]))) if slot.size else slot
    lengths = np.diff(np.concatenate((first, [slot.size])))
    after = running - np.repeat((running - quantity)[first], lengths)
    over = (np.abs(after) < QUANTITY_TOLERANCE) | _last(slot)
    life = np.cumsum(np.concatenate(([0], over[:-1]))).astype(np.int64) if slot.size else slot
    return Holdings(chosen, slot, after, life)


def _last(slot: Ints) -> NDArray[np.bool_]:
    return np.concatenate((slot[1:] != slot[:-1], [True])) if slot.size else np.zeros(0, dtype=bool)
