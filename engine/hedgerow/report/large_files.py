"""The folder of a large study: worked in beside its place under its own name, moved there when done."""

from __future__ import annotations

import json
from pathlib import Path
from typing import Any

import pandas as pd
import yaml

from hedgerow.errors import PlaceError
from hedgerow.evidence.described import described
from hedgerow.evidence.figures import Curve, Figure, figures_of
from hedgerow.report.files import fill_folder, harmless, write_frame
from hedgerow.report.place import FINISHED, check_place, move_in, unwritable
from hedgerow.study.large import Findings, LargeResult
from hedgerow.study.shards import MANIFEST
from hedgerow.study.walk_forward import Forward

__all__ = [
    "LARGE_FILES",
    "SHARDS",
    "continues",
    "findings_plain",
    "refuse_foreign",
    "unfinished",
    "write_large",
]

SHARDS = "shards"
LARGE_FILES = ("variants.parquet", "variants.csv", "sessions.parquet", SHARDS)
UNFINISHED = ".unfinished"


def unfinished(place: Path) -> Path:
    """The folder in which a large study is worked on until it is done."""
    return place.with_name(place.name + UNFINISHED)


def write_large(place: Path, result: LargeResult, replace: bool = False) -> Path:
    """Finish the folder of a large study, whose shards lie in `unfinished(place)`, and move it to its place.

    Raises PlaceError when the place is taken or cannot be written; the shards then stay for the next try.
    """
    check_place(place, replace)
    work = unfinished(place)
    try:
        ledger = result.best.ledger
        fill_folder(work, [ledger], [result.best.summary], {})
        variants = _variants(result)
        write_frame(variants, work / "variants.parquet")
        harmless(variants).to_csv(work / "variants.csv", index=False, lineterminator="\n")
        job = result.stage.job
        days = job.market.dates[job.window.start : job.window.stop].astype("datetime64[s]")
        write_frame(pd.DataFrame({"date": days}), work / "sessions.parquet")
        if result.findings.forward is not None:
            write_frame(_record(result, result.findings.forward), work / "walk_forward.parquet")
        summary = {
            "format": 1,
            "variants": {result.best.summary.variant: result.best.summary.as_dict()},
            "grid": findings_plain(result),
        }
        text = json.dumps(summary, indent=2, ensure_ascii=False, allow_nan=False)
        (work / "summary.json").write_text(text + "\n", encoding="utf-8")
        record = yaml.safe_dump(result.record(), sort_keys=False, allow_unicode=True)
        (work / FINISHED).write_text(record, encoding="utf-8")
        move_in(work, place)
    except (OSError, PlaceError) as error:
        raise unwritable(place, error) from error
    return place


def findings_plain(result: LargeResult) -> dict[str, Any]:
    """The findings as plain values, figures with unit and meaning; ready for JSON."""
    found, trials = result.findings, result.stage.trials
    plain: dict[str, Any] = {
        "variants": len(trials),
        "of": trials.grid.size if trials.grid is not None else len(trials),
        "best": {"variant": found.best + 1, "name": trials.name(found.best), **_changes(result, found.best)},
        "worth": found.worth.as_dict(),
    }
    if found.neighbourhood is not None:
        plain["neighbourhood"] = described(found.neighbourhood)
    if found.superiority is not None:
        tested = Figure(found.tested, "variants", "tested against the yardstick, spread evenly over all")
        chance = Figure(
            found.superiority.p_consistent,
            "fraction",
            "chance of so good a best one if none beats the yardstick",
        )
        plain["superiority"] = {"tested": tested.as_dict(), "p": chance.as_dict()}
    if found.forward is not None:
        plain["walk_forward"] = _forward(result, found, found.forward)
    window = result.stage.aside
    if window is not None:
        dates = result.stage.job.market.dates
        plain["held_out"] = {"from": str(dates[window.start]), "to": str(dates[window.stop - 1])}
    return plain


def _changes(result: LargeResult, number: int) -> dict[str, Any]:
    trials = result.stage.trials
    if trials.grid is None or trials.picks is None:
        return {}
    return {"parameters": trials.grid.changes(trials.picks[number])}


def _forward(result: LargeResult, found: Findings, forward: Forward) -> dict[str, Any]:
    dates, trials = result.stage.job.market.dates, result.stage.trials
    return {
        "by": forward.by,
        "gap_sessions": forward.gap_sessions,
        "mean_place": Figure(
            forward.mean_place, "fraction", "mean share of the other variants that did no better where judged"
        ).as_dict(),
        "account": _curve(forward.account),
        "yardstick": None if forward.yardstick is None else _curve(forward.yardstick),
        "judged": [
            {
                "chosen_on": [str(dates[one.fold.choose.start]), str(dates[one.fold.choose.stop - 1])],
                "judged_on": [str(dates[one.fold.judge.start]), str(dates[one.fold.judge.stop - 1])],
                "variant": one.variant + 1 if one.variant >= 0 else None,
                "name": trials.name(one.variant) if one.variant >= 0 else "cash",
                **{
                    name: Figure(getattr(one, name), "", "").as_dict()["value"]
                    for name in ("promised", "brought", "place", "growth")
                },
            }
            for one in forward.judged
        ],
    }


def _curve(curve: Curve) -> dict[str, Any]:
    return {name: figure.as_dict() for name, figure in figures_of(curve).items()}


def _variants(result: LargeResult) -> pd.DataFrame:
    """One row a variant: its number from 1, its name and parameters, and its figures."""
    trials, figures = result.stage.trials, result.findings.figures
    numbers = {"variant": range(1, len(trials) + 1)}
    return pd.DataFrame({**numbers, **trials.columns(), **figures})


def _record(result: LargeResult, forward: Forward) -> pd.DataFrame:
    """The record out of sample: one row a session, with the variant that was chosen and the equity."""
    dates = result.stage.job.market.dates[forward.window.start : forward.window.stop].astype("datetime64[s]")
    lengths = [one.fold.judge.stop - one.fold.judge.start for one in forward.judged]
    variants = [
        one.variant + 1 for one, length in zip(forward.judged, lengths, strict=True) for _ in range(length)
    ]
    return pd.DataFrame({"date": dates, "variant": variants, "equity": forward.equity})


def continues(place: Path, study: str) -> bool:
    """Whether an unfinished run of the study with this fingerprint waits at a place."""
    path = unfinished(place) / SHARDS / MANIFEST
    try:
        plain: Any = json.loads(path.read_text(encoding="utf-8"))
        return bool(plain["study"] == study)
    except (OSError, ValueError, KeyError, TypeError):
        return False


def refuse_foreign(place: Path) -> None:
    """Raise PlaceError when the folder for unfinished work holds something that is none."""
    work = unfinished(place)
    if work.is_dir() and any(work.iterdir()) and not (work / SHARDS / MANIFEST).is_file():
        raise PlaceError.one(
            str(work),
            "place taken",
            "this folder holds other files, and the study is to be worked on in it",
            "expected none, or an unfinished study",
            "name another place with --out",
        )
