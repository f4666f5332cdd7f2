"""What conditions see: a symbol when entries are decided, a position when it is held."""

from __future__ import annotations

import math
from dataclasses import dataclass
from typing import Any

from oracle import past
from oracle.book import Position


@dataclass
class View:
    """A symbol at a close, as the conditions of entry see it."""

    history: past.History


@dataclass
class Held:
    """A position at a close, as the conditions of exits, rolls and additions see it."""

    history: past.History
    position: Position
    gain: float
    mids: dict[int, float]

    def figure(self, word: str, of: Any, t: int) -> float:
        """The number that a word about the position compares with its bound."""
        position = self.position
        move = self.history.close[t] / position.stock_price - 1.0
        if word == "held":
            return t - position.entered
        if word in ("stock_up", "stock_down"):
            return move if word == "stock_up" else -move
        if word == "leg_lost":
            leg = position.legs[of]
            return 1.0 - self.mids[of] / leg.paid if leg.live and leg.paid > 0.0 else -math.inf
        part = self.gain if word == "gain" else -self.gain
        whole = {"debit": position.base, "best": position.best, "worst": position.worst}[of]
        return part / whole if 0.0 < whole < math.inf else -math.inf

    def days_left(self, which: int | None, t: int) -> float:
        """Calendar days to the nearest expiry of a leg held, or of one leg."""
        legs = self.position.held() if which is None else [self.position.legs[which]]
        days = [leg.expiry - self.history.ordinals[t] for leg in legs if leg.live]
        return min(days, default=math.inf)
