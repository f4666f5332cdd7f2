"""`hedgerow look`: replay the best rule of a large study on the part of the prices that was kept aside."""

from __future__ import annotations

import json
from pathlib import Path
from typing import TYPE_CHECKING, Annotated, Any

import typer

if TYPE_CHECKING:
    from hedgerow.study.large import Stage

__all__ = ["look"]

Folder = Annotated[
    Path, typer.Argument(help="The folder of a finished study with `held_out`.", show_default=False)
]
Again = Annotated[bool, typer.Option("--look-again", help="Look although this study has looked before.")]


def look(folder: Folder, look_again: Again = False) -> None:
    """Replay the best rule of a study on the part kept aside, once; the look is written down."""
    from hedgerow.report.large_text import aside_text
    from hedgerow.study.held_out import Looks
    from hedgerow.study.large import look_aside

    ready, best = _finished(folder)
    job, study = ready.job, ready.study
    aside = look_aside(ready, best, Looks(folder.absolute().parent), look_again)
    name = job.trials.name(best)
    before = job.bench.run(job.trials.strategy(best), study.account, study.costs, job.window, name)
    looks = {"looks": aside.looks, "looks_of_all_studies": aside.looks_of_all}
    described: dict[str, Any] = {"format": 1, **looks}
    described |= {"kept_aside": aside.result.summary.as_dict()}
    text = json.dumps(described, indent=2, ensure_ascii=False, allow_nan=False)
    (folder / "held-out.json").write_text(text + "\n", encoding="utf-8")
    typer.echo(aside_text(ready, before.summary, aside), nl=False)


def _finished(folder: Path) -> tuple[Stage, int]:
    """The study of a finished folder made ready, and the number of its best variant. Raises InputError."""
    from hedgerow.errors import DataError, PlaceError, StudyError
    from hedgerow.report.place import FINISHED
    from hedgerow.rules.document import tree_of_file
    from hedgerow.study.declare import load_study
    from hedgerow.study.large import stage

    try:
        tree = tree_of_file(folder / FINISHED)
        study = load_study(tree.plain["study"])
        known: Any = json.loads((folder / "summary.json").read_text(encoding="utf-8"))
        best = int(known["grid"]["best"]["variant"]) - 1
        fingerprint = tree.plain["data"]["fingerprint"]
    except (OSError, ValueError, KeyError, TypeError):
        found, wanted = (
            "this is not the folder of a finished large study",
            "expected one that `hedgerow run` left",
        )
        raise PlaceError.one(str(folder), "no-run", found, wanted) from None
    if study.held_out is None:
        found = "this study keeps no part of the prices aside"
        raise StudyError.one(
            str(folder), "no-part", found, remedy="write held_out: {from: DATE} and run it again"
        )
    ready = stage(study)
    if ready.job.market.fingerprint != fingerprint:
        found = "the prices are not those that the study was run on"
        raise DataError.one(str(study.market), "other-prices", found, remedy="run the study again")
    return ready, best
