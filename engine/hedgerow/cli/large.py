"""Large studies on the command line: where they are worked on, on what they run, and what is said of them."""

from __future__ import annotations

import json
import sys
from collections.abc import Iterator
from contextlib import contextmanager
from dataclasses import dataclass
from pathlib import Path
from typing import TYPE_CHECKING

import typer

if TYPE_CHECKING:
    from hedgerow.study.declare import Study
    from hedgerow.study.large import LargeResult, Stage
    from hedgerow.study.pool import Pool
    from hedgerow.study.shards import Shards

__all__ = ["How", "run_large_study"]


@dataclass(frozen=True, slots=True)
class How:
    """Where a large study goes, on what it runs, and how it is told."""

    out: Path | None = None
    replace: bool = False
    as_json: bool = False
    quiet: bool = False
    workers: int | str = 2  # threads, or the address of a cluster


def run_large_study(study: Study, how: How, usual: Iterator[Path]) -> None:
    """Run a large study, going on where it was stopped; leave its folder and say what it found.

    `usual` are the places to take, in order, when none is given.
    """
    from hedgerow.cli.remember import remember
    from hedgerow.report.large_files import refuse_foreign, write_large
    from hedgerow.report.place import check_place
    from hedgerow.study.large import finish, stage
    from hedgerow.study.places import told_in_place

    if how.out is not None:
        check_place(how.out, how.replace)
        refuse_foreign(how.out)
    ready = stage(study)
    place = how.out or _place(usual, ready.key)
    shards = _walked(ready, place, how)
    keys, before = _tries(ready, place.parent)
    with told_in_place(study.path):
        result = finish(ready, shards, len(before | set(keys.values())))
    write_large(place, result, how.replace)
    remember(place.parent, study, ready.job.market, keys)
    if how.as_json:
        _tell_json(result, place)
    elif how.quiet:
        typer.echo(place)
    else:
        _show(result, place)


def _place(usual: Iterator[Path], key: str) -> Path:
    """The first usual place that is free, or where an unfinished run of this study waits."""
    from hedgerow.report.large_files import continues, unfinished

    return next(
        place
        for place in usual
        if not place.exists() and (not unfinished(place).exists() or continues(place, key))
    )


def _tries(ready: Stage, beside: Path) -> tuple[dict[str, str], frozenset[str]]:
    """The keys of the study's variants, and of all that were tried before, beside it, on the same prices."""
    from hedgerow.study.tries import keys_of, tried_before

    return keys_of(ready.study), tried_before(beside, ready.job.market)


def _walked(ready: Stage, place: Path, how: How) -> Shards:
    """Run what is missing, behind a progress bar."""
    from hedgerow.cli.progress import progress
    from hedgerow.report.large_files import SHARDS, unfinished
    from hedgerow.study.places import told_in_place
    from hedgerow.study.pool import fill
    from hedgerow.study.shards import Shards

    shards = Shards.begin(unfinished(place) / SHARDS, ready.contents)
    if shards.done:
        done = sum(len(ready.contents.numbers(batch)) for batch in shards.done)
        typer.echo(
            f"Going on where it was stopped: {done:,} of {len(ready.trials):,} variants are there.", err=True
        )
    else:
        ready.trials.check(str(ready.study.path or "the study"))
    told = told_in_place(ready.study.path)
    with told, _pool(how) as pool, progress("Variants", len(ready.trials)) as counter:
        fill(ready.job, shards, pool, counter.advance)
    return shards


@contextmanager
def _pool(how: How) -> Iterator[Pool]:
    """The threads of this machine, or a cluster that is there already."""
    from hedgerow.kernels.jit import is_compiled
    from hedgerow.study.pool import Threads

    if isinstance(how.workers, int):
        if not is_compiled() and sys.stderr.isatty():
            typer.echo(
                "First run on this machine: compiling, about half a minute; later runs start at once.",
                err=True,
            )
        yield Threads(how.workers)
        return
    from hedgerow.study.cluster import Cluster

    cluster = Cluster(how.workers)
    try:
        yield cluster
    finally:
        cluster.close()


def _cautions(result: LargeResult) -> tuple[str, ...]:
    from hedgerow.report.cautions import Basis, cautions

    whole = result.whole
    return cautions(Basis(result.findings.worth.trials, whole.assumptions, whole.ended))


def _tell_json(result: LargeResult, place: Path) -> None:
    from hedgerow.report.large_files import findings_plain

    summary = result.best.summary
    described = {
        "folder": str(place),
        "variants": {summary.variant: summary.as_dict()},
        "grid": findings_plain(result),
        "cautions": list(_cautions(result)),
    }
    typer.echo(json.dumps(described, ensure_ascii=False, indent=2))


def _show(result: LargeResult, place: Path) -> None:
    from hedgerow.report.large_text import print_large

    print_large(result, _cautions(result))
    typer.echo(f"\nEvery variant, and every trade of the best one: {place}")
