"""Text files read at the door: their bytes, their encoding, and a cap on the faults told of one file."""

from __future__ import annotations

from collections.abc import Iterable
from pathlib import Path

from hedgerow.errors import Fault

MOST_FAULTS = 50
_BYTE_ORDER_MARKS = {b"\xff\xfe": "utf-16", b"\xfe\xff": "utf-16", b"\xef\xbb\xbf": "utf-8-sig"}
_BINARY = bytes(n for n in range(32) if n not in b"\t\n\r\f\x1a\x1b")


def capped(faults: Iterable[Fault], most: int = MOST_FAULTS) -> list[Fault]:
    """At most `most` faults of each file, in order, then one that says how many more there are."""
    kept: list[Fault] = []
    counts: dict[str, int] = {}
    for fault in faults:
        counts[fault.where] = counts.get(fault.where, 0) + 1
        if counts[fault.where] <= most:
            kept.append(fault)
    for where, count in counts.items():
        if count > most:
            found = f"{count - most:,} more faults of this file are not listed"
            kept.append(Fault(where, 0, 0, "more-faults", found))
    return kept


def read_bytes(path: Path, most_bytes: int | None = None) -> tuple[bytes | None, list[Fault]]:
    """Return the bytes of a file, or None with the fault that keeps it from being read."""
    where = str(path)
    try:
        size = path.stat().st_size
        if most_bytes is not None and size > most_bytes:
            return None, [too_large(where, size, most_bytes)]
        data = path.read_bytes()
    except FileNotFoundError:
        return None, [Fault(where, 0, 0, "file-missing", "there is no such file", remedy="check the path")]
    except IsADirectoryError:
        return None, [Fault(where, 0, 0, "file-is-folder", "this is a folder", "a file is wanted here")]
    except OSError as error:
        reason = error.strerror or type(error).__name__
        return None, [Fault(where, 0, 0, "file-unreadable", f"the file cannot be read: {reason}")]
    return data, []


def too_large(where: str, size: int, most_bytes: int) -> Fault:
    """Return the fault of a file over its limit, sizes in bytes."""
    return Fault(where, 0, 0, "file-too-large", f"{size:,} bytes", f"at most {most_bytes:,} bytes are read")


def decode(data: bytes, where: str) -> tuple[str | None, list[Fault]]:
    """Return the text of a file's bytes (UTF-8, or UTF-16 with its mark), or None with what is wrong.

    A mark at the beginning is taken away; line ends are left as they are.
    """
    encoding = next((name for mark, name in _BYTE_ORDER_MARKS.items() if data.startswith(mark)), "utf-8")
    if encoding != "utf-16" and data[:65536].translate(None, _BINARY) != data[:65536]:
        remedy = "give a text file; a spreadsheet can save itself as CSV UTF-8"
        return None, [Fault(where, 0, 0, "file-binary", "this is not a text file", "text is wanted", remedy)]
    try:
        return data.decode(encoding), []
    except UnicodeDecodeError as error:
        return None, [_undecodable(data, where, encoding, error.start)]


def _undecodable(data: bytes, where: str, encoding: str, start: int) -> Fault:
    line = data.count(b"\n", 0, start) + 1
    column = start - data.rfind(b"\n", 0, start)
    shown = f"0x{data[start]:02x}" if start < len(data) else "the end"
    name = "UTF-16" if encoding == "utf-16" else "UTF-8"
    found = f"byte {shown} is not {name} text"
    return Fault(where, line, column, "file-encoding", found, "UTF-8 text is read", "save the file as UTF-8")
