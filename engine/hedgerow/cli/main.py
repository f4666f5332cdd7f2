"""The command line: its commands, and the one place where errors become messages and exit codes."""

from __future__ import annotations

import errno
import os
import sys
from typing import Annotated

import typer

from hedgerow import __version__
from hedgerow.cli import data, extensions, rules
from hedgerow.cli.look import look
from hedgerow.cli.new import new
from hedgerow.cli.report import report
from hedgerow.cli.run import run
from hedgerow.cli.today import today
from hedgerow.errors import HedgerowError

__all__ = ["STOPPED", "app", "main"]

STOPPED = 130  # the exit code of a command stopped by the keyboard, as shells have it
ENDED = 143  # of one that was told to end, as by shutting down; `cli.start` turns that into an exit
WHO = {STOPPED: "by the keyboard", ENDED: "from outside"}

app = typer.Typer(
    name="hedgerow",
    help="Replay rules for protected stock over daily prices, and say which rule to trade.",
    no_args_is_help=True,
    pretty_exceptions_enable=False,
)
app.command()(run)
app.command()(report)
app.command()(look)
app.command()(today)
app.command()(new)
app.add_typer(data.app, name="data")
app.add_typer(rules.app, name="rules")
app.add_typer(extensions.app, name="extensions")


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
    """Run the command line; errors become one message each and an exit code, never a traceback.

    Raises SystemExit: 0 when all is well, 2 when the input is wrong, 130 or 143 when stopped, 1 else.
    """
    try:
        code = _code()
        sys.stdout.flush()
    except OSError as error:
        _give_up(error)
        code = 1
    sys.exit(code)


def _code() -> int:
    """Run the command; return its exit code, what went wrong having been told."""
    try:
        app()
    except HedgerowError as error:  # an input error has one line a fault
        sys.stderr.write(f"{error}\n")
        return error.exit_code
    except KeyboardInterrupt:
        return _stopped(STOPPED)
    except SystemExit as done:
        if isinstance(done.code, int) and done.code in WHO:
            return _stopped(done.code)
        return done.code if isinstance(done.code, int) else int(done.code is not None)
    return 0


def _stopped(code: int) -> int:
    """Say that the command was stopped, and by whom; return its exit code."""
    sys.stderr.write(f"Stopped {WHO[code]}: nothing was left half-written.\n")
    return code


def _give_up(error: OSError) -> None:
    """Say why the output cannot be written, unless its reader has left; let nothing more be written to it."""
    if error.errno != errno.EPIPE:
        sys.stderr.write(f"The output could not be written: {error.strerror or error}.\n")
    os.dup2(os.open(os.devnull, os.O_WRONLY), sys.stdout.fileno())
