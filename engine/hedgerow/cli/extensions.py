"""`hedgerow extensions`: hold signals, estimators and costs of your own to the rules of the house."""

from __future__ import annotations

from typing import Annotated

import typer

__all__ = ["app"]

app = typer.Typer(
    name="extensions", help="Check signals, estimators and costs of your own.", no_args_is_help=True
)


@app.callback()
def _extensions() -> None:
    """Check signals, estimators and costs of your own."""


@app.command()
def check(
    sources: Annotated[
        list[str],
        typer.Argument(help="Files of Python, or names of installed extensions.", show_default=False),
    ],
) -> None:
    """Read files of extensions and hold each item to every rule of its kind.

    Prints a line for each item that keeps them, and every fault of the others; raises Exit 2 for those.
    """
    from hedgerow.errors import ExtensionError
    from hedgerow.extend import load_extension
    from hedgerow.extend.check import CHECKS, faults_of

    faulty = False
    for source in sources:
        try:
            extension = load_extension(source, check=False)
        except ExtensionError as error:
            typer.echo(str(error))
            faulty = True
            continue
        for item in extension.items:
            faults = faults_of(item)
            faulty = faulty or bool(faults)
            lines = [str(fault) for fault in faults] or [
                f"ok  {item.path}:{item.line}: {item.title} {', '.join(CHECKS[item.kind])}"
            ]
            typer.echo("\n".join(lines))
    if faulty:
        raise typer.Exit(2)
