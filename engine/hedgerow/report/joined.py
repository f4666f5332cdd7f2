"""Several runs as one: their variants side by side over the sessions that all of them share."""

from __future__ import annotations

import dataclasses
from collections.abc import Mapping, Sequence
from dataclasses import replace
from functools import reduce
from typing import Any

import numpy as np
import pandas as pd
from numpy.typing import NDArray

from hedgerow.errors import PlaceError
from hedgerow.events.log import EventLog
from hedgerow.evidence.resample import Comparison, Track, compare
from hedgerow.evidence.seeds import Resampling
from hedgerow.ledger import Ledger
from hedgerow.report.answer import said
from hedgerow.report.cautions import tries_told
from hedgerow.report.folder import RunFolder
from hedgerow.units import DAYS_A_CALENDAR_YEAR

__all__ = ["join_runs"]

LEAST_SHARED = 2
KNOWN = Resampling(replications=1000)
SAME_VALUE = 1e-9


def join_runs(runs: Sequence[RunFolder]) -> RunFolder:
    """Return several runs as one, whose curves hold the sessions that all share and whose trades are all.

    The fastest grower over those sessions is compared with every other variant. A variant's name is led by
    its study's where two studies have one of the same. Raises PlaceError when the runs share too few
    sessions.
    """
    shared = reduce(np.intersect1d, [run.dates for run in runs])
    if shared.size < LEAST_SHARED:
        spans = "; ".join(f"{run.place}: {run.dates[0]} to {run.dates[-1]}" for run in runs)
        found = "these runs have no two sessions in common, so they cannot be compared"
        raise PlaceError.one(str(runs[0].place), "nothing shared", found, spans, "name runs of the same days")
    names = _names(runs)
    ledgers = [_renamed(one, name) for one, name in zip(_every(runs, "ledgers"), names, strict=True)]
    summaries = [
        replace(one, variant=name) for one, name in zip(_every(runs, "summaries"), names, strict=True)
    ]
    whole = RunFolder(
        place=runs[0].place,
        ledgers=tuple(ledgers),
        summaries=tuple(summaries),
        evidence=None,
        stress=pd.DataFrame(),
        run=_run(runs),
        about=_about(runs, names),
        daily=_daily(runs, shared),
        kept=tuple(np.flatnonzero(np.isin(run.dates, shared)) for run in runs for _ in run.ledgers),
    )
    return replace(whole, evidence=_evidence(whole, runs, names))


def _every(runs: Sequence[RunFolder], part: str) -> list[Any]:
    return [one for run in runs for one in getattr(run, part)]


def _names(runs: Sequence[RunFolder]) -> list[str]:
    """Names that differ: as they are where they do, else with the study's, and at last with a number."""
    plain = [name for run in runs for name in run.names]
    led = [f"{run.about['name']}: {name}" for run in runs for name in run.names]
    chosen = [one if plain.count(one) == 1 else other for one, other in zip(plain, led, strict=True)]
    seen: dict[str, int] = {}
    for at, name in enumerate(chosen):
        seen[name] = seen.get(name, 0) + 1
        chosen[at] = name if seen[name] == 1 else f"{name} ({seen[name]})"
    return chosen


def _renamed(ledger: Ledger, name: str) -> Ledger:
    log = ledger.log
    meta = dataclasses.replace(log.meta, variant=name)
    return Ledger(EventLog(meta, log.events, log.terms, log.days, log.marks, known=True))


def _daily(runs: Sequence[RunFolder], shared: NDArray[np.datetime64]) -> pd.DataFrame:
    """The first run's daily table over the shared sessions; the yardstick only where all have the same."""
    tables = [run.daily[np.isin(run.dates, shared)].reset_index(drop=True) for run in runs]
    values = [table["yardstick"].to_numpy(np.float64) for table in tables]
    alike = all(np.allclose(one / one[0], values[0] / values[0][0], SAME_VALUE) for one in values)
    return tables[0] if alike else tables[0].assign(yardstick=np.nan)


def _run(runs: Sequence[RunFolder]) -> dict[str, Any]:
    """The record of the first run, with those of all under `runs`."""
    return {**runs[0].run, "study": {str(run.about["name"]): run.run["study"] for run in runs}}


def _about(runs: Sequence[RunFolder], names: Sequence[str]) -> dict[str, Any]:
    titles = [str(run.about["name"]) for run in runs]
    rules = [rule for run in runs for rule in run.about["rules"].values()]
    cautions = [one for run in sorted(runs, key=_tried) for one in run.about["cautions"]]
    fewer = {tries_told(_tried(run)) for run in runs} - {tries_told(max(map(_tried, runs)))}
    assumed = [one for run in runs for one in run.about["assumptions"]]
    return {
        "name": " and ".join(dict.fromkeys(titles)),
        "question": "",
        "cautions": [*_unlike(runs), *(one for one in dict.fromkeys(cautions) if one not in fewer)],
        "assumptions": list(dict.fromkeys(assumed)),
        "histories_ended": max(int(run.about["histories_ended"]) for run in runs),
        "rules": dict(zip(names, rules, strict=True)),
    }


def _tried(run: RunFolder) -> int:
    """How many variants were tried when a run was made."""
    return len(run.names) if run.evidence is None else int(said(run.evidence["tries"]["count"]["in_all"]))


def _unlike(runs: Sequence[RunFolder]) -> list[str]:
    """What makes the runs hard to compare."""
    told = []
    if len({str(run.run["data"]["fingerprint"]) for run in runs}) > 1:
        told.append("The runs rest on different prices: what separates them may be the market, not the rule.")
    if len({tuple(run.about["assumptions"]) for run in runs}) > 1:
        told.append("The runs assume different premiums or costs: what separates them may be the assumption.")
    if len({(str(run.dates[0]), str(run.dates[-1])) for run in runs}) > 1:
        told.append(
            "The runs cover different days: tables and trades tell of each run's own days, curves and "
            "differences of the days that all share."
        )
    accounts = {str(run.run["study"].get("account")) for run in runs}
    if len(accounts) > 1:
        told.append("The runs have different accounts: cash, shares of equity or limits differ.")
    return told


def _evidence(whole: RunFolder, runs: Sequence[RunFolder], names: Sequence[str]) -> dict[str, Any] | None:
    """The comparisons over the shared sessions, and what each run says of its own variants."""
    curves = dict(zip(names, whole.equity, strict=True))
    alive = {name: value for name, value in curves.items() if (value > 0.0).all()}
    ranked = sorted(alive, key=lambda name: -alive[name][-1] / alive[name][0])
    if len(ranked) < LEAST_SHARED:
        return None
    tracks = [Track(name, alive[name]) for name in ranked]
    pairs = [compare(tracks[0], other, whole.dates, None, KNOWN) for other in tracks[1:]]
    told = [_pair(one, tracks[0].name, other.name) for one, other in zip(pairs, tracks[1:], strict=True)]
    count = max(len(names), *map(_tried, runs))
    last = (
        f"Each of the {len(names)} variants of these {len(runs)} runs was a try, and the fastest of several "
        "looks better than it is."
    )
    return {
        "verdict": {
            "headline": _capital(pairs[0].sentence),
            "sentences": [*(_capital(one.sentence) for one in pairs), last],
        },
        "basis": _basis(whole),
        "headline_pair": 0,
        "pairs": told,
        "against_yardstick": _beside(whole, runs, names),
        "tries": {"count": {"in_study": len(names), "in_all": count}},
        "timing": [],
        "variants": [],
        "notes": [],
    }


def _beside(whole: RunFolder, runs: Sequence[RunFolder], names: Sequence[str]) -> list[dict[str, Any]]:
    """What each run says of its variants against the yardstick, where all have its days and its yardstick."""
    if whole.yardstick is None or any(len(run.dates) != len(whole.dates) for run in runs):
        return []
    plain = [(at, name) for at, run in enumerate(runs) for name in run.names]
    known = dict(zip(plain, names, strict=True))
    return [
        {**pair, "first": known[at, pair["first"]]}
        for at, run in enumerate(runs)
        for pair in ([] if run.evidence is None else run.evidence["against_yardstick"])
    ]


def _capital(sentence: str) -> str:
    return sentence[:1].upper() + sentence[1:]


def _pair(one: Comparison, first: str, second: str) -> dict[str, Any]:
    named = {"first": first, "second": second, "verdict": one.verdict}
    return {**named, **one.as_dict(), "flip_premium": None, "flip_spread": None}


def _basis(whole: RunFolder) -> Mapping[str, Any]:
    days = float((whole.dates[-1] - whole.dates[0]).astype(np.int64))
    values = {
        "level": KNOWN.confidence,
        "draws": KNOWN.replications,
        "seed": KNOWN.seed,
        "years": days / DAYS_A_CALENDAR_YEAR,
        "sessions": len(whole.dates) - 1,
    }
    return {name: {"value": value, "unit": "", "meaning": ""} for name, value in values.items()}
