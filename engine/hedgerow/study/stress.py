"""The same rules under other premiums and costs: only the smile and the costs change, all else is shared."""

from __future__ import annotations

from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass, replace

import numpy as np

from hedgerow.errors import StudyError
from hedgerow.evidence.stress import Cell
from hedgerow.extend.costs import CostModel
from hedgerow.kernels.layout import Costs, Floats
from hedgerow.rules.schema import Strategy
from hedgerow.study.crew import Tell, together
from hedgerow.study.declare import Study
from hedgerow.study.one import Bench
from hedgerow.volatility.surface import with_smile
from hedgerow.walk.inputs import Tape
from hedgerow.walk.run import Terms, Window, walk_program

__all__ = ["Walked", "base_cell", "cells_of", "costs_of", "walked_cells"]


@dataclass(frozen=True, eq=False)
class Walked:
    """Equity (C, T) of each variant over the cells, and the cells left out because premiums would cross."""

    cells: tuple[Cell, ...]
    equity: Mapping[str, Floats]
    left_out: tuple[Cell, ...] = ()


def base_cell(study: Study) -> Cell:
    """The study's own assumptions."""
    return Cell(study.surface.ratio, study.surface.skew, costs_of(study).half_spread)


def costs_of(study: Study) -> Costs:
    """The costs of a study whose model of costs, if it has one, has said what they are."""
    assert not isinstance(study.costs, CostModel)
    return study.costs


def cells_of(study: Study) -> tuple[Cell, ...]:
    """The sets of assumptions to walk: ratio by skew at the study's costs, then half-spreads at its premium.

    The study's own values are always among them; they come first. Empty where nothing is asked for.
    """
    asked, base = study.evidence, base_cell(study)
    if asked is None or not asked.ratios:
        return ()
    premiums = [
        Cell(ratio, skew, base.half_spread)
        for skew in sorted({*asked.skews, base.skew})
        for ratio in sorted({*asked.ratios, base.ratio})
    ]
    costs = [base._replace(half_spread=spread) for spread in asked.half_spreads]
    return tuple(dict.fromkeys([base, *premiums, *costs]))


def walked_cells(
    bench: Bench,
    study: Study,
    window: Window,
    variants: Sequence[tuple[str, Strategy]],
    workers: int,
    progress: Callable[[int], None] | None = None,
) -> Walked:
    """Walk variants over every set of assumptions of a study, but those under which premiums would cross."""
    tapes: dict[tuple[float, float], Tape | None] = {}
    for cell in cells_of(study):
        if cell[:2] not in tapes:
            tapes[cell[:2]] = _tape(bench, cell)
    cells = [cell for cell in cells_of(study) if tapes[cell[:2]] is not None]
    left_out = tuple(cell for cell in cells_of(study) if tapes[cell[:2]] is None)
    programs = [bench.program(strategy) for _, strategy in variants]

    def walk(piece: int, tell: Tell) -> Floats:
        cell, which = cells[piece % len(cells)], piece // len(cells)
        costs = costs_of(study)._replace(half_spread=cell.half_spread)
        terms = Terms(study.account, costs, window, study.listings, marks=False)
        tape = tapes[cell[:2]]
        assert tape is not None
        log = walk_program(bench.market, tape, programs[which], terms, variants[which][0], tell)
        return np.array(log.days["equity"])

    found = together(walk, range(len(cells) * len(variants)), workers, progress)
    rows = {
        name: np.array(found[at * len(cells) : (at + 1) * len(cells)])
        for at, (name, _) in enumerate(variants)
    }
    return Walked(tuple(cells), rows, left_out)


def _tape(bench: Bench, cell: Cell) -> Tape | None:
    """The bench's tape under another premium; None where calls would rise, or puts fall, by strike."""
    model = replace(bench.surface, ratio=cell.ratio, skew=cell.skew)
    try:
        surface = with_smile(bench.tape.surface, model, bool(bench.market.reports))
    except StudyError:
        return None
    return replace(bench.tape, surface=surface)
