"""Words for the integer codes of the event log, and the words for how a position ended."""

from __future__ import annotations

from collections.abc import Sequence

from hedgerow.kernels import layout as at

__all__ = [
    "ASSIGNED",
    "BEST_GAIN",
    "BETWEEN",
    "CUT",
    "DECLINED_REASONS",
    "FLOOR",
    "GONE",
    "KIND_WORDS",
    "OPEN",
    "OUTCOMES",
    "STOP",
    "WHY_WORDS",
    "leg_word",
    "reason_word",
    "reason_words",
]

KIND_WORDS: tuple[str, ...] = (
    "deposit",
    "opened",
    "shares",
    "leg",
    "expired",
    "exercised",
    "assigned",
    "dividend",
    "split",
    "interest",
    "borrow cost",
    "declined",
    "signalled",
    "closed",
    "gone",
    "margin call",
)
"""Word of each KIND_ code, by the code."""

WHY_WORDS: tuple[str, ...] = (
    "",
    "entry",
    "expiry",
    "assigned early",
    "stop",
    "stop through a gap",
    "no price for 5 sessions",
    "no volatility known",
    "no listed expiry near",
    "strike not listed",
    "capital too small for one lot",
    "no cash left",
    "most positions reached",
    "not a net credit",
    "net debit too high",
    "worst loss too large",
    "best gain too small",
    "odds outside the band",
    "best over worst too low",
    "spread too wide",
    "roll",
    "leg added",
    "left over",
    "open at end",
    "cooling down",
    "margin too small",
    "limit reached",
    "market gone before the fill",
    "no bid for a leg to be sold",
)
"""Word of each WHY_ code below WHY_EXIT_RULE, by the code."""

DECLINED_REASONS: tuple[int, ...] = (
    *range(at.WHY_NO_VOLATILITY, at.WHY_SPREAD + 1),
    at.WHY_COOLING,
    at.WHY_MARGIN,
    at.WHY_LIMIT,
    at.WHY_GONE_ORDER,
    at.WHY_NO_BID,
)
"""Codes that say why an entry was not made."""

BEST_GAIN, BETWEEN, FLOOR, CUT = "best gain", "between", "floor", "cut"
STOP, ASSIGNED, GONE, OPEN = "stop", "assigned", "gone", "open"

OUTCOMES: tuple[str, ...] = (BEST_GAIN, BETWEEN, FLOOR, CUT, STOP, ASSIGNED, GONE, OPEN)
"""How a position ended.

best gain   ran to its end with the best result its terms allowed, before fees and dividends
between     ran to its end with a result between the two bounds
floor       ran to its end with the worst result its terms allowed
cut         left early by an exit rule; the reason names the rule
stop        the resting stock stop was filled
assigned    written options were assigned before expiry and that ended it
gone        no price for five sessions in a row; closed at the last one, though the symbol may trade again
open        still open at the last session
"""


def reason_word(code: int, exits: Sequence[str]) -> str:
    """Return the word of a reason; codes from WHY_EXIT_RULE on are names of exit rules."""
    if code >= at.WHY_EXIT_RULE:
        number = code - at.WHY_EXIT_RULE
        return exits[number] if number < len(exits) else f"exit rule {number + 1}"
    return WHY_WORDS[code]


def reason_words(exits: Sequence[str]) -> tuple[str, ...]:
    """Return a table of words by reason code, from 0 to the last exit rule."""
    last = at.WHY_EXIT_RULE + max(len(exits), 1)
    padded = WHY_WORDS + tuple(f"reason {code}" for code in range(len(WHY_WORDS), at.WHY_EXIT_RULE))
    return padded + tuple(reason_word(code, exits) for code in range(at.WHY_EXIT_RULE, last))


def leg_word(leg: int, names: Sequence[str]) -> str:
    """Return the name of a leg, `shares` for the shares, nothing for an event about neither."""
    if leg == at.SHARES_ROW:
        return "shares"
    return names[leg] if 0 <= leg < len(names) else ""
