"""Raise the first miss of a check with its session, symbol, position and amounts."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from hedgerow.errors import ReconcileError
from hedgerow.events.kinds import KIND_WORDS
from hedgerow.events.log import EventLog
from hedgerow.ledger.marks import position_rows
from hedgerow.units import number_text

__all__ = ["at_day", "at_event", "at_mark", "at_term"]

Mask = NDArray[np.bool_]
Amounts = NDArray[np.generic] | None


def at_event(log: EventLog, wrong: Mask, text: str, said: Amounts = None, due: Amounts = None) -> None:
    """Check events (E,). Raises ReconcileError for the first that is wrong."""
    if wrong.any():
        index = int(np.argmax(wrong))
        event = log.events[index]
        kind = KIND_WORDS[int(event["kind"])]
        where = f"{_place(log, event['session'], event['symbol'], event['position'])}, event {index} ({kind})"
        amounts = _amounts(said, due, index)
        raise ReconcileError(f"the log of this run does not add up at {where}: {text}{amounts}")


def at_term(log: EventLog, wrong: Mask, text: str, said: Amounts = None, due: Amounts = None) -> None:
    """Check terms (P,). Raises ReconcileError for the first that is wrong."""
    if wrong.any():
        index = int(np.argmax(wrong))
        term = log.terms[index]
        where, amounts = (
            _place(log, term["session"], term["symbol"], term["position"]),
            _amounts(said, due, index),
        )
        raise ReconcileError(f"the log of this run does not add up at {where}: {text}{amounts}")


def at_day(log: EventLog, wrong: Mask, text: str, said: Amounts = None, due: Amounts = None) -> None:
    """Check days (T,). Raises ReconcileError for the first that is wrong."""
    if wrong.any():
        index = int(np.argmax(wrong))
        session = int(log.days["session"][index])
        where, amounts = _place(log, session, -1, -1), _amounts(said, due, index)
        raise ReconcileError(f"the log of this run does not add up at {where}: {text}{amounts}")


def at_mark(log: EventLog, wrong: Mask, text: str, said: Amounts = None, due: Amounts = None) -> None:
    """Check marks (M,). Raises ReconcileError for the first that is wrong."""
    if wrong.any():
        index = int(np.argmax(wrong))
        mark, row = log.marks[index], int(position_rows(log)[index])
        symbol = int(log.terms["symbol"][row]) if row >= 0 else -1
        where, amounts = _place(log, mark["session"], symbol, mark["position"]), _amounts(said, due, index)
        raise ReconcileError(f"the log of this run does not add up at {where}: {text}{amounts}")


def _place(log: EventLog, session: int, symbol: int, position: int) -> str:
    parts = [str(log.meta.dates[session])]
    parts += [log.meta.symbols[symbol]] if symbol >= 0 else []
    parts += [f"position {position}"] if position >= 0 else []
    return ", ".join(parts)


def _amounts(said: Amounts, due: Amounts, index: int) -> str:
    if said is None:
        return ""
    found = float(said[index])
    if due is None:
        return f" {_amount(found)}"
    expected = float(due[index])
    return f" {_amount(found)}, expected {_amount(expected)}, off by {_amount(found - expected)}"


def _amount(value: float) -> str:
    return number_text(value, 2) if abs(value) >= 0.01 or value == 0 else f"{value:.3g}"
