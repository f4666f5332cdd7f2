"""The year ahead if days like the past ones come again: results and falls by the share a position takes.

Whole sessions are drawn again in blocks, with everything that was held on them, so that positions that fell
together fall together. It is the past in another order: what never happened in it does not happen here.
"""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass, field
from typing import Any, Self

import numpy as np
from numpy.typing import NDArray

from hedgerow.evidence.described import described, says
from hedgerow.evidence.longrun import block_lengths, resampled_days
from hedgerow.evidence.seeds import Resampling, generator_of
from hedgerow.ledger import Ledger
from hedgerow.ledger.marks import LEG_FIELDS, complete, position_rows
from hedgerow.ledger.positions import capital_tied_up
from hedgerow.units import SESSIONS_A_YEAR

__all__ = ["Forward", "Outlook", "Work", "forward_view", "one_year_fan", "one_year_paths"]

Floats = NDArray[np.float64]
Ints = NDArray[np.int64]


@dataclass(frozen=True, eq=False)
class Work:
    """What positions did day by day, each counted as one whole.

    results (T,): sum over the positions held of the day's result on what each tied up, fractions. held (T,):
    the most positions held at one time from the close before to the session's own. Where one position ends
    and the next begins at the same price, that is one and not two: the same money is tied up in them.
    """

    name: str
    results: Floats
    held: Ints

    @classmethod
    def of(cls, ledger: Ledger) -> Self:
        """Return the work of a ledger's positions. Raises ValueError when its log lacks marks.

        A position's result of a day is its cash plus the change of its value; its days add up to its result
        on what it tied up. Positions whose tied-up money is not positive are left out.
        """
        log, postings = ledger.log, ledger.postings
        if not complete(log):
            raise ValueError(
                "the log does not mark every position at every close, so its days are not known; keep marks"
            )
        tied = capital_tied_up(log)
        share = np.nan_to_num(1.0 / tied)
        sessions = log.days["session"]
        mine = postings.row >= 0
        rows, marked = postings.row[mine], position_rows(log)
        cash_day = np.searchsorted(sessions, log.events["session"][mine])
        mark_day = np.searchsorted(sessions, log.marks["session"])
        value = log.marks["shares"] * log.marks["spot"]
        value = (value + sum(log.marks[leg] for leg in LEG_FIELDS)) * share[marked]
        cash = np.bincount(cash_day, log.events["cash"][mine] * share[rows], sessions.size)
        worth = np.bincount(mark_day, value, sessions.size)
        results = np.asarray(cash + np.diff(worth, prepend=0.0), dtype=np.float64)
        return cls(log.meta.variant, results, _most_at_once(ledger))


def _most_at_once(ledger: Ledger) -> Ints:
    """Return the most positions held at one time from the last close to this, by the log, a session (T,)."""
    events, sessions = ledger.log.events, ledger.log.days["session"]
    opened, closed = ledger.postings.opened, ledger.postings.closed
    change = np.zeros(events.size + 1, np.int64)
    np.add.at(change, opened + 1, 1)
    np.add.at(change, closed[closed >= 0] + 1, -1)
    level = np.cumsum(change)  # before each event, and after the last
    starts = np.searchsorted(events["session"], sessions)
    most = np.maximum.reduceat(level, np.minimum(starts, level.size - 1))
    after = level[np.append(starts[1:], events.size)]  # at the session's own close
    return np.asarray(np.maximum(most, after), dtype=np.int64)


@dataclass(frozen=True, slots=True)
class Outlook:
    """What is asked of the year ahead, all fractions: shares of equity a position, target, limit of a fall.

    `most_invested` is the largest part of the equity in positions at once; where more are held, each takes
    less.
    """

    shares: tuple[float, ...] = (0.05, 0.1, 0.2, 1.0 / 3.0)
    target: float = 0.1
    drawdown_limit: float = 0.2
    most_invested: float = 1.0


@dataclass(frozen=True, slots=True)
class Forward:
    """One-year results at one share of equity a position, from resampled sessions."""

    share: float = field(metadata=says("fraction", "share of equity a position takes"))
    mean: float = field(metadata=says("fraction a year", "mean result"))
    low: float = field(metadata=says("fraction a year", "result that one year in twenty stays below"))
    lower_quarter: float = field(metadata=says("fraction a year", "result that a quarter stays below"))
    median: float = field(metadata=says("fraction a year", "result that half of the years stay below"))
    upper_quarter: float = field(metadata=says("fraction a year", "result that a quarter exceeds"))
    high: float = field(metadata=says("fraction a year", "result that one year in twenty exceeds"))
    chance_of_loss: float = field(metadata=says("fraction", "years that end below their start"))
    chance_of_drawdown: float = field(
        metadata=says("fraction", "years in which a fall from a highest value so far reaches the limit")
    )
    chance_of_target: float = field(metadata=says("fraction", "years that end at the target or above"))
    drawdown_limit: float = field(metadata=says("fraction", "the limit of a fall"))
    target: float = field(metadata=says("fraction a year", "the target"))
    years_drawn: int = field(metadata=says("years", "resampled years"))
    block_sessions: int = field(metadata=says("sessions", "mean block that sessions were drawn in"))

    def as_dict(self) -> dict[str, Any]:
        """Return every figure as {value, unit, meaning}, ready for JSON."""
        return described(self)


def forward_view(
    work: Work, outlook: Outlook | None = None, resampling: Resampling | None = None
) -> tuple[Forward, ...]:
    """Return the year ahead at every share of the outlook, from the same resampled sessions.

    A position's share is of the equity of the day, costs are those of the record, idle cash earns nothing,
    and an account that reaches nothing stays there. Raises ValueError without sessions.
    """
    asked, known = outlook or Outlook(), resampling or Resampling()
    if not work.results.size:
        raise ValueError(f"the record of `{work.name}` has no sessions to draw a year ahead from")
    block = math.ceil(float(block_lengths(np.column_stack([work.results, np.abs(work.results)])).max()))
    days = _years(work.results.size, block, known, work.name)
    return tuple(_view(work, days, share, asked, block) for share in asked.shares)


def one_year_paths(work: Work, days: Ints, share: float, most_invested: float = 1.0) -> Floats:
    """Return the account (N, T) over drawn sessions (N, T) as a multiple of its start."""
    held = np.maximum(work.held, 1)
    returns = np.minimum(share, most_invested / held) * work.results
    return np.asarray(np.cumprod(np.maximum(1.0 + returns, 0.0)[days], axis=1))


def _years(sessions: int, block: int, known: Resampling, name: str) -> Ints:
    """Return the sessions (N, 252) of as many years as there are replications."""
    length, wanted = int(SESSIONS_A_YEAR), known.replications
    rounds = math.ceil(wanted * length / sessions)
    drawn = resampled_days(sessions, block, rounds, generator_of(known.seed, "forward", name))
    return np.concatenate(list(drawn))[: wanted * length].reshape(wanted, length)


def _view(work: Work, days: Ints, share: float, asked: Outlook, block: int) -> Forward:
    paths = one_year_paths(work, days, share, asked.most_invested)
    peak = np.maximum(np.maximum.accumulate(paths, axis=1), 1.0)
    fall = np.max(1.0 - paths / peak, axis=1)
    result = paths[:, -1] - 1.0
    low, lower, median, upper, high = np.quantile(result, (0.05, 0.25, 0.5, 0.75, 0.95)).tolist()
    return Forward(
        share=share,
        mean=float(np.mean(result)),
        low=low,
        lower_quarter=lower,
        median=median,
        upper_quarter=upper,
        high=high,
        chance_of_loss=_share(result < 0.0),
        chance_of_drawdown=_share(fall >= asked.drawdown_limit),
        chance_of_target=_share(result >= asked.target),
        drawdown_limit=asked.drawdown_limit,
        target=asked.target,
        years_drawn=len(days),
        block_sessions=block,
    )


def _share(hits: NDArray[np.bool_] | Sequence[bool]) -> float:
    return float(np.mean(hits))


def one_year_fan(work: Work, share: float, known: Resampling, levels: Sequence[float]) -> Floats:
    """Return the account (levels, 252) as a multiple of its start: its quantiles at each session ahead.

    The same resampled years as those of `forward_view`, so that its ends are the figures told there. Raises
    ValueError without sessions.
    """
    if not work.results.size:
        raise ValueError(f"the record of `{work.name}` has no sessions to draw a year ahead from")
    block = math.ceil(float(block_lengths(np.column_stack([work.results, np.abs(work.results)])).max()))
    paths = one_year_paths(work, _years(work.results.size, block, known, work.name), share)
    return np.asarray(np.quantile(paths, levels, axis=0))
