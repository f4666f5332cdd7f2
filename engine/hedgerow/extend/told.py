"""What goes wrong in a user's own code, told as one sentence with its file and line."""

from __future__ import annotations

import traceback
from pathlib import Path
from types import TracebackType
from typing import Self

from hedgerow.errors import ExtensionError, Fault, HedgerowError

__all__ = ["ToldInFile", "at_line"]


def at_line(path: Path | str, line: int, code: str, found: str, remedy: str = "") -> ExtensionError:
    """An error of one fault in a file of extensions."""
    return ExtensionError([Fault(str(path), line, 0, code, found, "", remedy)])


class ToldInFile:
    """Around a user's own code: whatever it raises becomes an ExtensionError at the line of the file.

    `doing` says what was being done, "while signal `gap` was worked out". Interrupts and the package's own
    errors pass.
    """

    def __init__(self, path: Path | str, doing: str, line: int = 0) -> None:
        self._path, self._doing, self._line = str(path), doing, line

    def __enter__(self) -> Self:
        """Begin to watch."""
        return self

    def __exit__(
        self, kind: type[BaseException] | None, error: BaseException | None, trace: TracebackType | None
    ) -> None:
        """Raise what went wrong as ExtensionError."""
        if not isinstance(error, Exception | SystemExit) or isinstance(error, HedgerowError):
            return
        if isinstance(error, SyntaxError) and error.filename == self._path:
            line, what = error.lineno or 0, f"this is not Python: {error.msg}"
        else:
            line, what = self._last_line(trace), _said(error)
        raise at_line(self._path, line, "extension-failed", f"{self._doing}, {what}") from None

    def _last_line(self, trace: TracebackType | None) -> int:
        """The last line of the file that was being run; where the item stands when none was."""
        lines = [row.lineno or 0 for row in traceback.extract_tb(trace) if row.filename == self._path]
        return lines[-1] if lines else self._line


def _said(error: BaseException) -> str:
    """An exception in words, on one line and not too long."""
    text = " ".join(str(error).split())
    text = text if len(text) <= 200 else text[:197] + "..."
    return f"{type(error).__name__} was raised" + (f": {text}" if text else "")
