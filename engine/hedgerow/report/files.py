"""The folder of a run: written whole beside its place, then moved there; nothing is left half-written."""

from __future__ import annotations

import json
import shutil
from collections.abc import Iterable, Mapping, Sequence
from pathlib import Path
from typing import Any

import pandas as pd
import pyarrow as pa
import pyarrow.parquet as pq
import yaml

from hedgerow.errors import PlaceError
from hedgerow.events.store import write_logs
from hedgerow.evidence.figures import Summary
from hedgerow.evidence.findings import Evidence
from hedgerow.ledger import Ledger
from hedgerow.report.place import (
    FINISHED,
    OWN_FILES,
    check_place,
    missing_parents,
    move_in,
    part_of,
    remove_empty,
    sweep,
    take_first,
    unwritable,
)

__all__ = ["FINISHED", "RUN_FILES", "STRESS_FILES", "fill_folder", "harmless", "write_frame", "write_run"]

RUN_FILES = (
    "events.parquet",
    "trades.parquet",
    "trades.csv",
    "legs.parquet",
    "equity.parquet",
    "summary.json",
    FINISHED,
)

STRESS_FILES = ("stress.parquet", "stress.csv")
"""Further files of a run whose comparisons were repeated under other premiums and costs."""

CSV_NUMBER = "%.12g"  # no digits that are only rounding: 403.476, not 403.4760000000051

FORMULA_STARTS = ("=", "+", "-", "@", "\t", "\r")


def write_run(
    folder: str | Path,
    ledgers: Sequence[Ledger],
    summaries: Sequence[Summary],
    run: Mapping[str, Any],
    *,
    replace: bool = False,
    extra: Mapping[str, str | bytes] | None = None,
    evidence: Evidence | None = None,
    others: Iterable[Path] | None = None,
) -> Path:
    """Write a run folder (RUN_FILES, with a stress STRESS_FILES) in one step and return it.

    ledgers and summaries: one a variant, in the same order; every frame carries a `variant` column. run:
    what is needed to repeat the run, plain values. extra: further files by name. evidence: goes into
    summary.json and the files of the stress. others: further places, taken in order when the first has
    been taken meanwhile. Raises PlaceError when the place is taken or cannot be written; then nothing is left
    behind, and a run that stood there still does.
    """
    place = check_place(folder, replace, others is not None)
    part, made, done = part_of(place), missing_parents(place), False
    try:
        sweep(place.parent, OWN_FILES)
        part.mkdir(parents=True)
        fill_folder(part, ledgers, summaries, extra or {})
        _weigh(part, summaries, evidence)
        (part / FINISHED).write_text(
            yaml.safe_dump(dict(run), sort_keys=False, allow_unicode=True), encoding="utf-8"
        )
        place = move_in(part, place) if others is None else take_first(part, place, others)
        done = True
    except (OSError, PlaceError) as error:
        raise unwritable(place, error) from error
    finally:
        shutil.rmtree(part, ignore_errors=True)
        for parent in () if done else made:
            remove_empty(parent)
    return place


def harmless(frame: pd.DataFrame) -> pd.DataFrame:
    """Return a frame whose text cells no spreadsheet takes for a formula: those get a leading apostrophe."""
    safe = frame.copy()
    for name in safe.columns:
        if pd.api.types.is_string_dtype(safe[name]) or safe[name].dtype == object:
            text = safe[name].astype("str")
            safe[name] = text.where(~text.str.startswith(FORMULA_STARTS), "'" + text)
    return safe


def fill_folder(
    part: Path, ledgers: Sequence[Ledger], summaries: Sequence[Summary], extra: Mapping[str, str | bytes]
) -> None:
    """Write the ledgers of some variants and `extra` files into a folder."""
    write_logs(part / "events.parquet", [ledger.log for ledger in ledgers])
    trades = pd.concat([ledger.trades for ledger in ledgers], ignore_index=True)
    write_frame(trades, part / "trades.parquet")
    plain = harmless(trades)
    page, day = part / "trades.csv", "%Y-%m-%d"
    plain.to_csv(page, index=False, date_format=day, float_format=CSV_NUMBER, lineterminator="\n")
    write_frame(pd.concat([ledger.legs for ledger in ledgers], ignore_index=True), part / "legs.parquet")
    write_frame(pd.concat([ledger.equity for ledger in ledgers], ignore_index=True), part / "equity.parquet")
    for name, content in extra.items():
        data = content.encode("utf-8") if isinstance(content, str) else content
        (part / name).write_bytes(data)


def _weigh(part: Path, summaries: Sequence[Summary], evidence: Evidence | None) -> None:
    """Write summary.json and, where comparisons were stressed, the files of the stress."""
    described: dict[str, Any] = {"format": 1, "variants": {one.variant: one.as_dict() for one in summaries}}
    if evidence is not None:
        described["evidence"] = evidence.as_dict()
    text = json.dumps(described, indent=2, ensure_ascii=False, allow_nan=False)
    (part / "summary.json").write_text(text + "\n", encoding="utf-8")
    if evidence is not None and len(evidence.stress):
        table, page = (part / name for name in STRESS_FILES)
        write_frame(evidence.stress, table)
        harmless(evidence.stress).to_csv(page, index=False, float_format=CSV_NUMBER, lineterminator="\n")


def write_frame(frame: pd.DataFrame, path: Path) -> None:
    """Write a frame as Parquet."""
    pq.write_table(pa.Table.from_pandas(frame, preserve_index=False), path, compression="zstd")
