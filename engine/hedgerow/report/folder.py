"""A run folder read back: everything that its report is made from."""

from __future__ import annotations

import dataclasses
import json
import math
from collections.abc import Mapping
from dataclasses import dataclass
from functools import cached_property
from pathlib import Path
from typing import Any

import numpy as np
import pandas as pd
import yaml
from numpy.typing import NDArray

from hedgerow.errors import PlaceError
from hedgerow.events.store import read_logs
from hedgerow.evidence.figures import Curve, Summary
from hedgerow.kernels.layout import Floats
from hedgerow.ledger import Ledger
from hedgerow.report.background import ABOUT, BACKGROUND_FILES, DAILY
from hedgerow.report.files import FINISHED, STRESS_FILES

__all__ = ["RunFolder", "read_folder"]

LARGE = "variants.parquet"
NEEDED = ("events.parquet", "summary.json", FINISHED, *BACKGROUND_FILES)


@dataclass(frozen=True, eq=False)
class RunFolder:
    """A finished run: ledgers and summaries in the order of the study, its evidence, words and daily table.

    `evidence` is the part of summary.json, None without one; `stress` is empty without a stress; `daily` has
    the columns of background.parquet. `kept` are, for each ledger, its days that curves are drawn of; None
    for all.
    """

    place: Path
    ledgers: tuple[Ledger, ...]
    summaries: tuple[Summary, ...]
    evidence: Mapping[str, Any] | None
    stress: pd.DataFrame
    run: Mapping[str, Any]
    about: Mapping[str, Any]
    daily: pd.DataFrame
    kept: tuple[NDArray[np.int64], ...] | None = None

    @property
    def names(self) -> tuple[str, ...]:
        """The variants' names."""
        return tuple(one.log.meta.variant for one in self.ledgers)

    @property
    def currency(self) -> str:
        """The currency of all money; empty where it has no name."""
        return self.summaries[0].currency

    @cached_property
    def dates(self) -> np.ndarray:
        """The sessions of the run, datetime64[D]."""
        return np.asarray(self.daily["date"].to_numpy().astype("datetime64[D]"))

    @cached_property
    def yardstick(self) -> Floats | None:
        """The yardstick's value at every close, money; None without one."""
        value = self.daily["yardstick"].to_numpy(np.float64)
        return None if np.isnan(value).all() else value

    @cached_property
    def equity(self) -> tuple[Floats, ...]:
        """Each variant's equity at every close, the first being what was paid in."""
        curves = []
        for ledger in self.ledgers:
            value = np.array(ledger.log.days["equity"])
            value[0] = ledger.log.meta.opening_cash or value[0]
            curves.append(value)
        return tuple(curves) if self.kept is None else tuple(map(np.take, curves, self.kept))

    @cached_property
    def empty(self) -> tuple[NDArray[np.bool_], ...]:
        """For each variant, whether no position was open at each close."""
        days = [ledger.log.days["positions"] == 0 for ledger in self.ledgers]
        return tuple(days) if self.kept is None else tuple(map(np.take, days, self.kept))


def read_folder(place: str | Path) -> RunFolder:
    """Return the run of a folder. Raises PlaceError when it is none, or lacks what a report needs."""
    folder = Path(place)
    if (folder / LARGE).is_file():
        raise PlaceError.one(
            str(folder),
            "large study",
            "this is the folder of a large study, and pages are made of studies that name their variants",
            "its findings stand in summary.json and variants.csv",
            "run its best variants as a study of their own",
        )
    missing = [name for name in NEEDED if not (folder / name).is_file()]
    if missing:
        known = (folder / FINISHED).is_file()
        why = f"it lacks {', '.join(missing)}" if known else "no finished run lies there"
        raise PlaceError.one(
            str(folder),
            "no run",
            f"no report can be made of this folder: {why}",
            "expected a folder that `hedgerow run` has written",
            "run the study again" if known else "name the folder that a run printed at its end",
        )
    try:
        return _read(folder)
    except (OSError, ValueError, KeyError, TypeError, yaml.YAMLError) as error:
        raise PlaceError.one(
            str(folder),
            "damaged run",
            f"the files of this run cannot be read: {error}",
            "expected the files as a run wrote them",
            "run the study again",
        ) from error


def _read(folder: Path) -> RunFolder:
    described = json.loads((folder / "summary.json").read_text(encoding="utf-8"))
    stress = folder / STRESS_FILES[0]
    return RunFolder(
        place=folder,
        ledgers=tuple(Ledger(log) for log in read_logs(folder / "events.parquet")),
        summaries=tuple(_summary(one) for one in described["variants"].values()),
        evidence=described.get("evidence"),
        stress=pd.read_parquet(stress) if stress.is_file() else pd.DataFrame(),
        run=yaml.safe_load((folder / FINISHED).read_text(encoding="utf-8")),
        about=json.loads((folder / ABOUT).read_text(encoding="utf-8")),
        daily=pd.read_parquet(folder / DAILY),
    )


def _summary(told: Mapping[str, Any]) -> Summary:
    """The summary of its figures in summary.json; null is unknown."""
    values = {one.name: _value(told[one.name], one.type) for one in dataclasses.fields(Summary)}
    return Summary(**values)


def _value(told: Any, kind: Any) -> Any:
    if told is None:
        return None
    if "value" not in told:
        return Curve(**{one.name: _value(told[one.name], one.type) for one in dataclasses.fields(Curve)})
    return math.nan if told["value"] is None and kind == "float" else told["value"]
