"""`hedgerow report`: make the page of a run again from its folder, or one page of several runs."""

from __future__ import annotations

import sys
from pathlib import Path
from threading import Timer
from typing import Annotated

import typer

__all__ = ["report", "reported"]

TOLD_AFTER_SECONDS = 2.0

Folders = Annotated[list[Path], typer.Argument(help="Folders of finished runs.", show_default=False)]
Out = Annotated[Path | None, typer.Option("--out", help="File for a page of several runs; comparison.html.")]


def report(folders: Folders, out: Out = None) -> None:
    """Make the report.html of a finished run again, from its folder alone; or one page of several runs."""
    place = _one(folders[0], out) if len(folders) == 1 else _several(folders, out or Path("comparison.html"))
    typer.echo(place)


def _one(folder: Path, out: Path | None) -> Path:
    """The report of one run; raises PlaceError when a place was named for it."""
    from hedgerow.errors import PlaceError

    if out is not None:
        found = "one run was named, whose report lies in its folder, and --out was given too"
        raise PlaceError.one(f"--out {out}", "two places", found, remedy="leave --out out")
    return reported(folder)


def _several(folders: list[Path], out: Path) -> Path:
    """The page of several runs."""
    from hedgerow.report.build import write_comparison

    with _Told():
        return write_comparison(folders, out)


def reported(folder: Path) -> Path:
    """Write the report of a folder and return it; say that it is being built when that takes a while."""
    from hedgerow.report.build import write_report

    with _Told():
        return write_report(folder)


class _Told:
    """Says aside, where somebody watches, that a page is being built, once that has taken two seconds."""

    def __enter__(self) -> None:
        self._timer = Timer(TOLD_AFTER_SECONDS, lambda: typer.echo("Building the report ...", err=True))
        self._timer.daemon = True
        if sys.stderr.isatty():
            self._timer.start()

    def __exit__(self, *_: object) -> None:
        self._timer.cancel()
