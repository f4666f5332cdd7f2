"""`hedgerow report`: make the page of a run again from its folder."""

from __future__ import annotations

from pathlib import Path
from typing import Annotated

import typer

__all__ = ["report", "reported"]

Folder = Annotated[Path, typer.Argument(help="The folder of a finished run.", show_default=False)]


def report(folder: Folder) -> None:
    """Make the report.html of a finished run again, from its folder alone."""
    typer.echo(reported(folder))


def reported(folder: Path) -> Path:
    """Write the report of a folder behind a progress bar and return it."""
    from hedgerow.report.build import write_report

    return write_report(folder)
