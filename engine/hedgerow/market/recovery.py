"""Dividends and splits of every symbol recovered from its adjusted close, as actions and findings."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, replace

import numpy as np

from hedgerow.errors import Fault
from hedgerow.kernels.layout import Floats, Ints
from hedgerow.market.actions import KINDS, Actions, placed
from hedgerow.market.dataset import Dataset, Recover
from hedgerow.market.dates import iso
from hedgerow.market.recover import Steps, convention, dividends, steps_of
from hedgerow.market.table import Finding

SPECIAL_MULTIPLE = 5.0
SPECIAL_FRACTION = 0.02
USUAL_COUNT = 4


@dataclass(frozen=True)
class Closes:
    """What a recovery looks at: closes as traded and adjusted (T, N), the sessions' ordinals, the symbols."""

    close: Floats
    adjusted: Floats
    ordinals: Ints
    symbols: Sequence[str]


def recovered(closes: Closes, given: Actions, dataset: Dataset) -> tuple[Actions, list[Finding]]:
    """Return the actions that the adjusted closes hold, and what should be known of them.

    `given` are the actions already known; splits among them are used where splits are not to be recovered.
    """
    wanted = dataset.recover or Recover(False, False)
    split = placed(given, closes.ordinals, closes.symbols, closes.close)[0].split
    steps, bars = [], []
    for index in range(len(closes.symbols)):
        rows = np.flatnonzero(closes.adjusted[:, index] > 0.0)
        step = steps_of(closes.close[rows, index], closes.adjusted[rows, index]) if len(rows) > 1 else None
        if step is not None and not wanted.splits:
            step = replace(step, split=split[rows[step.bar], index])
        steps.append(step)
        bars.append(rows)
    reinvested = dataset.reinvested or convention([step for step in steps if step is not None])
    found, findings = Actions.none(), _unadjusted(closes)
    for index, (step, rows) in enumerate(zip(steps, bars, strict=True)):
        if step is not None:
            mine, notes = _of_symbol(index, step, rows, closes, (wanted, reinvested))
            found = found.joined(mine)
            findings += notes
    return found, findings


def _unadjusted(closes: Closes) -> list[Finding]:
    """Return one finding for each symbol with bars that have no adjusted close."""
    without = ~np.isnan(closes.close) & ~(closes.adjusted > 0.0)
    text = "{} sessions without an adjusted close; nothing is recovered there"
    return [
        Finding(
            "no-adjusted-close", "warning", closes.symbols[i], _first(without[:, i], closes), text.format(n)
        )
        for i, n in enumerate(without.sum(axis=0))
        if n
    ]


def _first(rows: np.ndarray, closes: Closes) -> str:
    return iso(closes.ordinals[int(rows.argmax())])


def _of_symbol(
    index: int, step: Steps, rows: Ints, closes: Closes, how: tuple[Recover, str]
) -> tuple[Actions, list[Finding]]:
    wanted, reinvested = how
    day = closes.ordinals[rows[step.bar]]
    paid = dividends(step, reinvested) if wanted.dividends else np.zeros(len(day))
    special = special_part(paid, step.before)
    split = step.split if wanted.splits else np.ones(len(day))
    columns = (np.round(paid - special, 6), special, np.where(split == 1.0, 0.0, split))
    parts = [
        Actions(np.full(int(has.sum()), index), day[has], np.full(int(has.sum()), kind), column[has])
        for kind, column in enumerate(columns)
        for has in [column > 0.0]
    ]
    found = parts[0].joined(parts[1]).joined(parts[2])
    return found, _told(closes.symbols[index], found, step, closes.ordinals[rows], reinvested)


def special_part(paid: Floats, before: Floats) -> Floats:
    """Return the special part of each dividend of one symbol in order, (k,), 0 for an ordinary one.

    A dividend over five times the usual one (the median of the last four) and over 2 % of the price before is
    taken as the usual one and a special one on the same day.
    """
    special = np.zeros(len(paid))
    usual: list[float] = []
    for row, amount in enumerate(paid):
        ordinary = float(np.median(usual[-USUAL_COUNT:])) if usual else 0.0
        if usual and amount > SPECIAL_MULTIPLE * ordinary and amount > SPECIAL_FRACTION * before[row]:
            special[row] = round(amount - usual[-1], 6)
        elif amount > 0.0:
            usual.append(float(amount))
    return special


def _told(symbol: str, found: Actions, step: Steps, ordinals: Ints, reinvested: str) -> list[Finding]:
    findings = []
    counts = [int((found.kind == kind).sum()) for kind in range(len(KINDS))]
    if any(counts):
        words = [f"{n} {word}{'s' if n > 1 else ''}" for n, word in zip(counts, _WORDS, strict=True) if n]
        text = f"{', '.join(words)} recovered from the adjusted close (reinvested at the {reinvested})"
        findings.append(Finding("recovered", "note", symbol, iso(found.ordinal.min()), text))
    for row in np.flatnonzero(found.kind == KINDS.index("special")):
        text = f"{found.value[row]:g} of the dividend of this day is taken as a special one"
        findings.append(Finding("special-recovered", "note", symbol, iso(found.ordinal[row]), text))
    for bar in step.crooked:
        text = "the adjusted close drifts against the close without a step; what it means is not recovered"
        findings.append(Finding("recovery-drift", "warning", symbol, iso(ordinals[bar]), text))
    return findings


_WORDS = ("dividend", "special dividend", "split")


def missing_column(where: str) -> Fault:
    """Return the fault of a recovery without a column to recover from."""
    told = (
        "the column `adjusted_close` is wanted",
        "name it: `recover: {adjusted_close: NAME OF THE COLUMN}`",
    )
    return Fault(where, 0, 0, "column-missing", "there is no adjusted close to recover from", *told)
