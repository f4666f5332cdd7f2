"""The folder of a run: written whole beside its place, then moved there; nothing is left half-written."""

from __future__ import annotations

import errno
import json
import os
import shutil
from collections.abc import Mapping, Sequence
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

__all__ = [
    "FINISHED",
    "RUN_FILES",
    "STRESS_FILES",
    "check_place",
    "fill_folder",
    "harmless",
    "move_in",
    "unwritable",
    "write_frame",
    "write_run",
]

FINISHED = "run.yaml"
"""The file that a finished run folder has; it is written last."""

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

FORMULA_STARTS = ("=", "+", "-", "@", "\t", "\r")


def check_place(folder: str | Path, replace: bool = False) -> Path:
    """Return the folder as a path when a run may be written there: it is new, empty, or a run to be replaced.

    Raises PlaceError when it is a file, holds other files or a finished run without `replace` being given, or
    lies where nothing can be written.
    """
    place = Path(folder)
    try:
        if place.exists() and not place.is_dir():
            raise _refused(place, "a file of this name stands there, and a folder is to be made")
        if place.is_dir() and any(place.iterdir()):
            if not (place / FINISHED).is_file():
                raise _refused(place, "this folder holds other files, which are not those of a run")
            if not replace:
                raise _refused(place, "a finished run stands there and was not to be replaced")
        _check_parent(place)
    except OSError as error:
        raise unwritable(place, error) from error
    return place


def write_run(
    folder: str | Path,
    ledgers: Sequence[Ledger],
    summaries: Sequence[Summary],
    run: Mapping[str, Any],
    *,
    replace: bool = False,
    extra: Mapping[str, str | bytes] | None = None,
    evidence: Evidence | None = None,
) -> Path:
    """Write a run folder (RUN_FILES, with a stress STRESS_FILES) in one step and return it.

    ledgers and summaries: one a variant, in the same order; every frame carries a `variant` column. run:
    what is needed to repeat the run, plain values. extra: further files by name. evidence: goes into
    summary.json and the files of the stress. Raises PlaceError when the
    place is taken or cannot be written; then nothing is left behind, and a run that stood there still does.
    """
    place = check_place(folder, replace)
    part = place.with_name(f".{place.name}.{os.getpid()}.part")
    made = _missing_parents(place)
    done = False
    try:
        part.mkdir(parents=True)
        fill_folder(part, ledgers, summaries, extra or {})
        _weigh(part, summaries, evidence)
        (part / FINISHED).write_text(
            yaml.safe_dump(dict(run), sort_keys=False, allow_unicode=True), encoding="utf-8"
        )
        move_in(part, place)
        done = True
    except OSError as error:
        raise unwritable(place, error) from error
    finally:
        shutil.rmtree(part, ignore_errors=True)
        for parent in () if done else made:
            _remove_empty(parent)
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
    harmless(trades).to_csv(part / "trades.csv", index=False, date_format="%Y-%m-%d", lineterminator="\n")
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
        harmless(evidence.stress).to_csv(page, index=False, lineterminator="\n")


def write_frame(frame: pd.DataFrame, path: Path) -> None:
    """Write a frame as Parquet."""
    pq.write_table(pa.Table.from_pandas(frame, preserve_index=False), path, compression="zstd")


def move_in(part: Path, place: Path) -> None:
    """Put the finished folder in its place; an old run is set aside first and comes back when that fails."""
    if not place.exists():
        os.replace(part, place)
        return
    aside = place.with_name(f".{place.name}.{os.getpid()}.old")
    os.replace(place, aside)
    try:
        os.replace(part, place)
    finally:
        if not place.exists():
            os.replace(aside, place)
    shutil.rmtree(aside, ignore_errors=True)


def _check_parent(place: Path) -> None:
    """Raise OSError when the nearest folder above a place is a file, or nothing can be written in it."""
    above = next(parent for parent in place.absolute().parents if os.path.lexists(parent))
    if not above.is_dir():
        raise NotADirectoryError(errno.ENOTDIR, os.strerror(errno.ENOTDIR), str(above))
    if not os.access(above, os.W_OK | os.X_OK):
        raise PermissionError(errno.EACCES, os.strerror(errno.EACCES), str(above))


def _missing_parents(place: Path) -> list[Path]:
    return [parent for parent in place.parents if not parent.exists()]


def _remove_empty(folder: Path) -> None:
    if folder.is_dir() and not any(folder.iterdir()):
        folder.rmdir()


def _refused(place: Path, why: str) -> PlaceError:
    return PlaceError.one(
        str(place),
        "place taken",
        f"the run is not written here: {why}",
        "expected a new or an empty folder",
        "name another with --out, or replace a finished run with --replace",
    )


def unwritable(place: Path, error: OSError) -> PlaceError:
    """The error of a folder that cannot be written."""
    return PlaceError.one(
        str(place),
        "cannot write",
        f"the run could not be written: {error.strerror or error}",
        remedy="nothing was left behind",
    )
