"""`hedgerow today`: what a rule says at the last close, or at that of a date."""

from __future__ import annotations

from pathlib import Path
from typing import Annotated

import typer

__all__ = ["today"]

File = Annotated[
    Path, typer.Argument(help="A study file, or a strategy file with --market.", show_default=False)
]
MarketOption = Annotated[
    Path | None, typer.Option("--market", help="Prices for a strategy file: a folder, CSV or Parquet.")
]
AsOf = Annotated[
    str | None, typer.Option("--as-of", help="The close, YYYY-MM-DD; the last of the data when not given.")
]
Variant = Annotated[str | None, typer.Option("--variant", help="The variant, of a study with several.")]
Positions = Annotated[
    Path | None, typer.Option("--positions", help="A YAML file of the positions and the cash you hold.")
]
Out = Annotated[
    Path | None,
    typer.Option("--out", help="Folder for today.html, .csv and .json; an earlier sheet there is replaced."),
]
Json = Annotated[bool, typer.Option("--json", help="Print one JSON object for programs.")]
Extensions = Annotated[
    list[str] | None,
    typer.Option("--extension", help="A file of your own signals or costs, for a strategy file."),
]


def today(
    file: File,
    market: MarketOption = None,
    as_of: AsOf = None,
    variant: Variant = None,
    positions: Positions = None,
    out: Out = None,
    as_json: Json = False,
    extension: Extensions = None,
) -> None:
    """Say what a rule does at one close: positions to open, why not elsewhere, what to do with those held."""
    from hedgerow.cli.run import study_of, tell_first_run
    from hedgerow.desk.files import json_of, write_sheet
    from hedgerow.desk.text import print_sheet
    from hedgerow.desk.today import sheet_of

    study = study_of(file, market, extension or [])
    tell_first_run()
    sheet = sheet_of(study, as_of=as_of, variant=variant, positions=positions)
    place = None if out is None else write_sheet(sheet, out)
    if as_json:
        typer.echo(json_of(sheet), nl=False)
    else:
        print_sheet(sheet)
        if place is not None:
            typer.echo(f"\nThe same as a page, a table and JSON: {place}")
