"""A progress bar that appears only where somebody watches, and only when the work takes a while."""

from __future__ import annotations

import os
import sys
from collections.abc import Iterator
from contextlib import contextmanager
from threading import Lock, Timer
from typing import TYPE_CHECKING, TextIO

if TYPE_CHECKING:
    from rich.progress import Progress

__all__ = ["SHOWN_AFTER_SECONDS", "Counter", "progress"]

SHOWN_AFTER_SECONDS = 2.0


class Counter:
    """How many pieces of work are done; several threads may count at once."""

    def __init__(self, label: str, total: int, stream: TextIO) -> None:
        self.done = 0
        self._label, self._total, self._stream = label, total, stream
        self._bar: Progress | None = None
        self._over = False
        self._lock = Lock()

    def advance(self, pieces: int = 1) -> None:
        """Count `pieces` more as done."""
        with self._lock:
            self.done += pieces
            if self._bar is not None:
                self._bar.update(self._bar.task_ids[0], completed=self.done)

    def show(self) -> None:
        """Draw the bar from now on: label, bar, pieces done and in all, time left; not once it is over."""
        from rich.console import Console
        from rich.progress import BarColumn, MofNCompleteColumn, Progress, TextColumn, TimeRemainingColumn

        columns = (TextColumn("{task.description}"), BarColumn(), MofNCompleteColumn(), TimeRemainingColumn())
        with self._lock:
            if self._over or self._bar is not None:
                return
            self._bar = Progress(*columns, console=Console(file=self._stream), transient=True)
            self._bar.add_task(self._label, total=self._total, completed=self.done)
            self._bar.start()

    def close(self) -> None:
        """Take the bar away; it does not come back."""
        with self._lock:
            self._over = True
            if self._bar is not None:
                self._bar.stop()


def _watched(stream: TextIO) -> bool:
    """Whether the stream is a terminal on which a bar can move."""
    return stream.isatty() and os.environ.get("TERM", "") not in ("dumb", "unknown")


@contextmanager
def progress(
    label: str, total: int, stream: TextIO | None = None, after_seconds: float = SHOWN_AFTER_SECONDS
) -> Iterator[Counter]:
    """Count `total` pieces of work; call `advance` on what this yields after each.

    After some seconds a bar with the time left appears on `stream` (standard error), if that is a terminal;
    it is taken away at the end, and when the work is interrupted or fails.
    """
    stream = sys.stderr if stream is None else stream
    counter = Counter(label, total, stream)
    timer = Timer(after_seconds, counter.show)
    timer.daemon = True
    if total > 0 and _watched(stream):
        timer.start()
    try:
        yield counter
    finally:
        timer.cancel()
        counter.close()
