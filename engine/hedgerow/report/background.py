"""What a report says besides the ledgers: question, rules in words, cautions, yardstick, volatility.

Written into the folder of a run, so that the page can be made again from the folder alone.
"""

from __future__ import annotations

import io
import json
from typing import Any

import numpy as np
import pandas as pd

from hedgerow.kernels.layout import Floats
from hedgerow.report.cautions import Basis, cautions
from hedgerow.rules.explain import paragraphs
from hedgerow.study.compare import StudyResult
from hedgerow.units import SESSIONS_A_YEAR
from hedgerow.volatility.registry import Bars

__all__ = ["ABOUT", "BACKGROUND_FILES", "DAILY", "background_of", "cautions_of"]

ABOUT, DAILY = "about.json", "background.parquet"
BACKGROUND_FILES = (ABOUT, DAILY)
"""Further files of a run, which its report is made from."""

TENOR_DAYS = 30.0
AFTERWARDS = 21
"""Sessions after a close over which volatility came true: about the 30 days that it was assumed for."""
EVERY = 5
"""Sessions between two points of the picture of volatility."""
MOST_SYMBOLS = 200
"""Symbols that the picture of volatility is drawn from; of more, as many evenly spread."""


def cautions_of(result: StudyResult) -> tuple[str, ...]:
    """Return the cautions of a study's result."""
    evidence = result.evidence
    tried = len(result.results) if evidence is None else evidence.tries.count.in_all
    return cautions(Basis(tried, result.assumptions, result.ended))


def background_of(result: StudyResult) -> dict[str, bytes]:
    """Return the files BACKGROUND_FILES of a run by name.

    about.json: words. background.parquet: one row a session with `date`, `yardstick` (money, NaN without
    one) and, on every fifth session, the median over the traded symbols of volatility `assumed` at the money
    for 30 days, its quartiles `assumed_low` and `assumed_high`, and `realized` over the 21 sessions after
    (annual fractions, NaN between and where unknown).
    """
    text = json.dumps(_about(result), indent=2, ensure_ascii=False)
    table = io.BytesIO()
    _daily(result).to_parquet(table, index=False, compression="zstd")
    return {ABOUT: f"{text}\n".encode(), DAILY: table.getvalue()}


def _about(result: StudyResult) -> dict[str, Any]:
    study = result.study
    rules = {
        name: {"name": strategy.name, "about": strategy.about or "", "paragraphs": paragraphs(strategy)}
        for name, strategy in study.variants
    }
    return {
        "format": 1,
        "name": study.name,
        "question": study.question,
        "cautions": list(cautions_of(result)),
        "assumptions": list(result.assumptions),
        "histories_ended": result.ended,
        "rules": rules,
    }


def _daily(result: StudyResult) -> pd.DataFrame:
    days = result.results[0].log.days["session"]
    start, stop = int(days[0]), int(days[-1]) + 1
    yardstick = result.results[0].yardstick
    value = np.full(stop - start, np.nan) if yardstick is None else np.asarray(yardstick, np.float64)
    columns = {"date": result.market.dates[start:stop].astype("datetime64[s]"), "yardstick": value}
    return pd.DataFrame(columns | _volatility(result, start, stop))


def _volatility(result: StudyResult, start: int, stop: int) -> dict[str, Floats]:
    """Return the columns of assumed and realized volatility (sessions,)."""
    chosen = np.flatnonzero(result.bench.traded)
    chosen = chosen[:: -(-len(chosen) // MOST_SYMBOLS)]
    surface = result.bench.tape.surface
    realized = _realized_after(np.array(Bars.of(result.market).returns[:, chosen]))
    names = ("assumed", "assumed_low", "assumed_high", "realized")
    columns = {name: np.full(stop - start, np.nan) for name in names}
    for session in range(start, stop, EVERY):
        assumed = np.array([surface.at_the_money(session, int(one), TENOR_DAYS) for one in chosen])
        both = np.isfinite(assumed)
        if not both.any():
            continue
        middle, low, high = np.quantile(assumed[both], (0.5, 0.25, 0.75))
        came = realized[session][np.isfinite(realized[session])]
        row = (middle, low, high, np.median(came) if came.size else np.nan)
        for name, number in zip(names, row, strict=True):
            columns[name][session - start] = number
    return columns


def _realized_after(returns: Floats) -> Floats:
    """Return volatility about zero over the AFTERWARDS sessions after each (T, N), NaN where unknown."""
    squares = np.vstack([np.zeros((1, returns.shape[1])), np.cumsum(np.nan_to_num(returns) ** 2, axis=0)])
    known = np.vstack([np.zeros((1, returns.shape[1])), np.cumsum(np.isfinite(returns), axis=0)])
    out = np.full(returns.shape, np.nan)
    last = len(returns) - AFTERWARDS
    if last > 0:
        total = squares[1 + AFTERWARDS :] - squares[1:-AFTERWARDS]
        count = known[1 + AFTERWARDS :] - known[1:-AFTERWARDS]
        mean = np.where(count == AFTERWARDS, total / AFTERWARDS, np.nan)
        out[:last] = np.sqrt(mean * SESSIONS_A_YEAR)
    return out
