"""Resampled records drawn once more for the page: how a difference is spread, and the fan of the year ahead.

The keys of the draws are those of the evidence, so that the pictures show the very draws its figures tell of.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from typing import Any

import numpy as np

from hedgerow.evidence.forward import Work, one_year_fan
from hedgerow.evidence.longrun import resampled_days
from hedgerow.evidence.seeds import Resampling, generator_of
from hedgerow.kernels.layout import Floats
from hedgerow.ledger.marks import complete
from hedgerow.report.folder import RunFolder
from hedgerow.report.pack import column

__all__ = ["FAN_LEVELS", "differences_of", "fans_of", "resampling_of"]

FAN_LEVELS = (0.05, 0.25, 0.5, 0.75, 0.95)
MOST_FANS = 12
MOST_DIFFERENCES = 3


def resampling_of(evidence: Mapping[str, Any]) -> Resampling:
    """Return how the evidence drew its days."""
    basis = {name: figure["value"] for name, figure in evidence["basis"].items()}
    return Resampling(basis["seed"], basis["draws"], basis["level"])


def differences_of(folder: RunFolder) -> list[dict[str, Any]]:
    """Return how growth a year is spread, first less second: the headline pair, and both its variants.

    Those against the yardstick; without a pair every variant against it. Each is `first`, `second` and the
    column `draws`, fractions a year. Empty without evidence.
    """
    evidence = folder.evidence
    if evidence is None:
        return []
    head = evidence["headline_pair"]
    pairs = [evidence["pairs"][head]] if head is not None else []
    told = {pair[side] for pair in pairs for side in ("first", "second")}
    beside = [one for one in evidence["against_yardstick"] if not told or one["first"] in told]
    chosen = [one for one in (*pairs, *beside) if one["block_sessions"] > 0]
    return [_difference(folder, one) for one in chosen[:MOST_DIFFERENCES]]


def _difference(folder: RunFolder, pair: Mapping[str, Any]) -> dict[str, Any]:
    assert folder.evidence is not None
    known = resampling_of(folder.evidence)
    curves = dict(zip(folder.names, folder.equity, strict=True))
    names = (pair["first"], pair["second"])
    logs = np.column_stack([np.diff(np.log(_curve(folder, curves, name))) for name in names])
    random = generator_of(known.seed, "compare", *sorted(names))
    drawn = resampled_days(len(logs), pair["block_sessions"], known.replications, random)
    totals = np.array([logs[days].sum(axis=0) for days in drawn])
    growth = np.expm1(totals / folder.evidence["basis"]["years"]["value"])
    return {"first": names[0], "second": names[1], "draws": column(growth[:, 0] - growth[:, 1], 1e-6)}


def _curve(folder: RunFolder, curves: Mapping[str, Floats], name: str) -> Floats:
    """The curve of a variant, or of the yardstick."""
    if name in curves:
        return curves[name]
    assert folder.yardstick is not None
    return folder.yardstick


def fans_of(folder: RunFolder) -> list[dict[str, Any]]:
    """Return each variant's quantiles FAN_LEVELS of the account over the year ahead, at its own share."""
    evidence = folder.evidence
    if evidence is None:
        return []
    shares = {one["variant"]: one["forward"]["own_share"] for one in evidence["variants"]}
    known = resampling_of(evidence)
    fans: list[dict[str, Any]] = []
    for ledger in folder.ledgers:
        name = ledger.log.meta.variant
        own = shares.get(name)
        if own is None or not complete(ledger.log) or len(fans) == MOST_FANS:
            continue
        levels = one_year_fan(Work.of(ledger), own["share"]["value"], known, FAN_LEVELS)
        fans.append({"variant": name, "levels": _rows(levels)})
    return fans


def _rows(levels: Floats) -> Sequence[dict[str, Any]]:
    return [column(row, 1e-5) for row in levels]
