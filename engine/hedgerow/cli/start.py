"""Where the command begins: it takes care of being stopped before anything heavy is imported."""

from __future__ import annotations

import os
import signal
import sys
from types import FrameType
from typing import NoReturn

__all__ = ["main"]

WORDS = {signal.SIGINT: "by the keyboard", signal.SIGTERM: "from outside"}
OF_SIGNALS = 128  # a command that a signal stopped ends with this and the signal's number, as shells have it


def main() -> NoReturn:
    """Run the command line. Stopped while it loads, it says so in one line; afterwards it cleans up first.

    Raises SystemExit as `cli.main.main` does. Signals that whoever started the command had ignored stay so.
    """
    heard = [one for one in WORDS if signal.getsignal(one) is not signal.SIG_IGN]
    for one in heard:
        signal.signal(one, _leave)
    from hedgerow.cli.main import main as begun

    after = {signal.SIGINT: signal.default_int_handler, signal.SIGTERM: _end}
    for one in heard:
        signal.signal(one, after[one])
    try:
        begun()
    finally:
        for one in heard:  # nothing is left to stop but Python's own farewell
            signal.signal(one, signal.SIG_IGN)
    sys.exit(0)


def _leave(number: int, _frame: FrameType | None) -> NoReturn:
    """Leave at once: nothing was begun, and out of a half-imported module an exception is a traceback."""
    told = f"Stopped {WORDS[signal.Signals(number)]} before anything was begun.\n"
    os.write(2, told.encode())
    os._exit(OF_SIGNALS + number)


def _end(number: int, _frame: FrameType | None) -> NoReturn:
    """End as an exception, so that what is half-written is taken away on the way out."""
    sys.exit(OF_SIGNALS + number)
