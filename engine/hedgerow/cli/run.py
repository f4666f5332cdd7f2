"""`hedgerow run`: replay a study, or one strategy on a market."""

from __future__ import annotations

import itertools
import json
import os
import shlex
import sys
from collections.abc import Iterator
from pathlib import Path
from typing import TYPE_CHECKING, Annotated, Any

import typer

from hedgerow.cli.remember import RUNS, remember

if TYPE_CHECKING:
    from hedgerow.study.compare import StudyResult
    from hedgerow.study.declare import Study

__all__ = ["run", "study_of", "tell_first_run"]

File = Annotated[
    Path,
    typer.Argument(
        help="A study file, a strategy file with --market, or an earlier run.yaml.", show_default=False
    ),
]
MarketOption = Annotated[
    Path | None, typer.Option("--market", help="Prices for a strategy file: a folder, CSV or Parquet.")
]
Extensions = Annotated[
    list[str] | None,
    typer.Option("--extension", help="A file of your own signals or costs, for a strategy file."),
]


def _folder(text: str) -> Path:
    """The folder that was named. Raises BadParameter for an empty name, which would be the current one."""
    if not text.strip():
        raise typer.BadParameter("an empty name is no folder; name one, or leave --out away")
    return Path(text)


Out = Annotated[
    Any,
    typer.Option(
        "--out", parser=_folder, metavar="FOLDER", help="Folder for the ledgers; runs/NAME when not given."
    ),
]
Replace = Annotated[bool, typer.Option("--replace", help="Overwrite a finished run in that folder.")]
Form = Annotated[
    bool | None,
    typer.Option(
        "--json/--quiet",
        help="Print one JSON object for programs, or only the folder's name.",
        show_default=False,
    ),
]
NoReport = Annotated[bool, typer.Option("--no-report", help="Write no report.html into the folder.")]
MOST_WORKERS = 64


def _where(text: str) -> int | str:
    """Where variants run: so many threads, or the address of a cluster. Raises BadParameter."""
    if "://" in text:
        return text
    if not text.isdecimal() or not 1 <= int(text) <= MOST_WORKERS:
        told = f"{text!r} is neither a number of threads from 1 to {MOST_WORKERS} nor an address"
        raise typer.BadParameter(f"{told} such as tls://host:8786")
    return int(text)


Workers = Annotated[
    Any,
    typer.Option(
        "--workers",
        "--cluster",
        parser=_where,
        metavar="N|ADDRESS",
        help="Threads for the variants; for a large study also a Dask scheduler, such as tls://host:8786.",
    ),
]


def run(
    file: File,
    market: MarketOption = None,
    out: Out = None,
    replace: Replace = False,
    form: Form = None,
    workers: Workers = "2",
    extension: Extensions = None,
    no_report: NoReport = False,
) -> None:
    """Replay a study and compare its variants; leave a folder of ledgers."""
    from hedgerow.cli.report import reported
    from hedgerow.report.background import background_of, cautions_of
    from hedgerow.report.files import write_run
    from hedgerow.report.place import check_place

    as_json, quiet = form is True, form is False
    study = study_of(file, market, extension or [])
    if study.is_large:
        from hedgerow.cli.large import How, run_large_study

        run_large_study(study, How(out, replace, as_json, quiet, workers), _usual_places(study.name))
        return
    _no_cluster(workers)
    usual = (place for place in _usual_places(study.name) if not place.exists())
    place = out or next(usual)
    check_place(place, replace)
    result = _walked(study, workers, place.parent)
    ledgers = [one.ledger for one in result.results]
    summaries = [one.summary for one in result.results]
    place = write_run(
        place,
        ledgers,
        summaries,
        result.record(),
        replace=replace,
        evidence=result.evidence,
        extra=background_of(result),
        others=None if out else usual,
    )
    page = None if no_report else reported(place)
    remember(place.parent, result.study, result.market)
    _hint(summaries)
    if as_json:
        told: dict[str, Any] = {"variants": {one.variant: one.as_dict() for one in summaries}}
        if result.evidence is not None:
            told["evidence"] = result.evidence.as_dict()
        told |= {"cautions": list(cautions_of(result))}
        made = {"folder": str(place), "report": None if page is None else str(page)}
        typer.echo(json.dumps(made | told, ensure_ascii=False, indent=2))
    elif quiet:
        typer.echo(place)
    else:
        _show(result, place, page)


def study_of(file: Path, market: Path | None, extensions: list[str]) -> Study:
    """The study of a file; a strategy file needs the market beside it. Raises InputError."""
    from hedgerow.cli.rules import is_study
    from hedgerow.errors import StudyError
    from hedgerow.rules.document import tree_of_file
    from hedgerow.study.declare import load_study, read_study, study_of_strategy
    from hedgerow.textfile import capped

    tree = tree_of_file(file)
    recorded = tree.plain.get("study") if isinstance(tree.plain, dict) and not tree.faults else None
    earlier = isinstance(recorded, dict)
    if extensions and (earlier or is_study(tree)):
        found = "a study file names its own extensions, and --extension was given too"
        raise StudyError.one(
            str(file),
            "two-extensions",
            found,
            "",
            "write it under `extensions` in the study, and leave it out here",
        )
    if earlier:  # the run.yaml of an earlier run, on the prices it names or, elsewhere, on those given
        again = tree.below(("study",))
        if market is not None:
            again.plain = again.plain | {"market": os.path.abspath(market)}
        study, faults = read_study(again, file.parent, file)
        if study is None:
            raise StudyError(capped(faults))
        return study
    if is_study(tree):
        if market is not None:
            found = "a study file names its own market, and --market was given too"
            raise StudyError.one(str(file), "two-markets", found, "either is enough", "leave --market out")
        return load_study(file)
    if tree.faults:
        raise StudyError(capped(tree.faults))
    if not isinstance(tree.plain, dict) or file.suffix.lower() in (".csv", ".parquet"):
        found = "this is no file of words: it is neither a study nor a strategy"
        remedy = "where it holds prices, give it beside a strategy: hedgerow run STRATEGY --market FILE"
        raise StudyError.one(str(file), "no-words", found, "a study or a strategy is needed", remedy)
    if market is None:
        found = "this is a strategy file, which does not say on which prices to run"
        raise StudyError.one(str(file), "no-market", found, "a market is needed", "add --market FOLDER")
    if not market.exists() and not str(market).startswith("sample:"):
        found = "there is no such file or folder of prices"
        raise StudyError.one(
            f"--market {market}", "file-missing", found, "a folder, CSV or Parquet is needed"
        )
    named = {"extensions": extensions} if extensions else {}
    return study_of_strategy(file, market, **named)


def _no_cluster(workers: int | str) -> None:
    """Raise StudyError when a cluster was asked for what is not worth one."""
    from hedgerow.errors import StudyError

    if isinstance(workers, str):
        found = "this study names its variants one by one, and only a large study runs on a cluster"
        remedy = "leave --cluster out, or write a grid"
        raise StudyError.one(f"--cluster {workers}", "not-large", found, remedy=remedy)


def _usual_places(name: str) -> Iterator[Path]:
    """runs/ and the study's name as a file name, then the same with numbers."""
    plain = "".join(letter if letter.isalnum() else "-" for letter in name.lower()).strip("-") or "run"
    yield RUNS / plain
    yield from (RUNS / f"{plain}-{number}" for number in itertools.count(2))


def tell_first_run() -> None:
    """Say to who watches that the first run takes longer."""
    from hedgerow.kernels.jit import is_compiled

    if not is_compiled() and sys.stderr.isatty():
        typer.echo(
            "First run on this machine: compiling, about half a minute; later runs start at once.", err=True
        )


def _walked(study: Study, workers: int, beside: Path) -> StudyResult:
    """Run a study behind a progress bar; `beside` is the folder in which its tries are counted."""
    from hedgerow.cli.progress import progress
    from hedgerow.study.compare import bench_of, costed, run_study
    from hedgerow.study.evidence_of import sessions_of_evidence
    from hedgerow.study.tries import tried_before

    tell_first_run()
    bench, window = bench_of(study)
    _tell_other_prices(study, bench.market.fingerprint)
    whole = (window.stop - window.start) * len(study.variants) + sessions_of_evidence(
        costed(study, bench.market), window
    )
    before = tried_before(beside, bench.market)
    with progress("Replaying", whole) as counter:
        return run_study(study, market=bench.market, workers=workers, progress=counter.advance, tried=before)


def _tell_other_prices(study: Study, fingerprint: str) -> None:
    """Say aside, and first, that an earlier run is repeated on other prices than it was made on."""
    from hedgerow.rules.document import tree_of_file

    plain = {} if study.path is None else tree_of_file(study.path).plain
    data = plain.get("data") if isinstance(plain, dict) and "study" in plain else None
    if isinstance(data, dict) and str(data.get("fingerprint")) != fingerprint:
        told = "these are not the prices of the run that is repeated: its fingerprint of them is another"
        typer.echo(f"{study.path}: {told}; figures may differ", err=True)


def _show(result: StudyResult, place: Path, page: Path | None) -> None:
    """Print the comparison, what the data check found, and where the ledgers lie."""
    from hedgerow.report.background import cautions_of
    from hedgerow.report.text import Comparison, print_comparison

    study = result.study
    summaries = [one.summary for one in result.results]
    findings = [found for found in result.market.findings if found.severity == "warning"]
    if findings:
        several = "1 warning" if len(findings) == 1 else f"{len(findings):,} warnings, the first"
        typer.echo(f"Mind the data: {several}: {findings[0].told}\n")
    print_comparison(Comparison(summaries, study.name, study.question, cautions_of(result), result.evidence))
    if result.evidence is None and study.evidence is not None:
        typer.echo("\nNo verdict: the record is too short for one, or every account fell to nothing.")
    if findings:
        several = "1 warning" if len(findings) == 1 else f"{len(findings):,} warnings"
        typer.echo(f"\nThe data check has {several}: hedgerow data check {shlex.quote(str(study.market))}")
    typer.echo(f"\nEvery trade and every cent: {place}")
    if page is not None:
        typer.echo(f"The report: {page}")


def _hint(summaries: list[Any]) -> None:
    """Say aside, and first, why a variant never traded."""
    for summary in summaries:
        if summary.positions == 0:
            reasons = ", ".join(f"{word} ({count:,})" for word, count in summary.declined.items())
            told = f"{summary.variant}: no position was ever opened. Declined: {reasons or 'nothing'}."
            typer.echo(told, err=True)
