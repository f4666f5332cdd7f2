"""`hedgerow new`: a folder to begin with."""

from __future__ import annotations

from pathlib import Path
from typing import Annotated

import typer

__all__ = ["new"]

Folder = Annotated[Path, typer.Argument(help="The folder to be made.", show_default=False)]


def new(folder: Folder) -> None:
    """Make a folder with rules, a study, positions and invented prices, of which everything runs at once."""
    from hedgerow.desk.project import new_folder

    place = new_folder(folder)
    typer.echo(f"Made {place}. Everything in it runs as it is, on invented prices:\n")
    typer.echo(f"  cd {place}")
    typer.echo("  hedgerow run study.yaml")
    typer.echo("  hedgerow today study.yaml --variant collar --positions positions.yaml\n")
    typer.echo("README.md there says how to make it yours.")
