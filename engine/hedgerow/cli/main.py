"""The command line: its commands, and the one place where errors become messages and exit codes."""

from __future__ import annotations

import sys
from typing import Annotated

import typer

from hedgerow import __version__
from hedgerow.cli import data, rules
from hedgerow.cli.run import run
from hedgerow.errors import HedgerowError, InputError

__all__ = ["app", "main"]

app = typer.Typer(
    name="hedgerow",
    help="Replay rules for protected stock over daily prices, and say which rule to trade.",
    no_args_is_help=True,
    pretty_exceptions_enable=False,
)
app.command()(run)
app.add_typer(data.app, name="data")
app.add_typer(rules.app, name="rules")


def _version(wanted: bool) -> None:
    """Print the version and end."""
    if wanted:
        typer.echo(__version__)
        raise typer.Exit


@app.callback()
def _main(
    version: Annotated[
        bool, typer.Option("--version", callback=_version, is_eager=True, help="Say the version.")
    ] = False,
) -> None:
    """Replay rules for protected stock over daily prices, and say which rule to trade.

    Results are hypothetical, premiums synthesized; nothing here is advice.
    """


def main() -> None:
    """Run the command line; errors become one message each and an exit code, never a traceback."""
    try:
        app()
    except InputError as error:
        for fault in error.faults:
            sys.stderr.write(f"{fault}\n")
        sys.exit(error.exit_code)
    except HedgerowError as error:
        sys.stderr.write(f"{error}\n")
        sys.exit(error.exit_code)
    except KeyboardInterrupt:
        sys.stderr.write("Stopped. Nothing was written.\n")
        sys.exit(130)
