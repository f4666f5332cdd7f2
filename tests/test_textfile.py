"""Text files at the door: encodings, binaries, and the cap on what is told of one file."""

from __future__ import annotations

from pathlib import Path

import pytest

from hedgerow.errors import Fault
from hedgerow.textfile import MOST_FAULTS, capped, decode, read_bytes


@pytest.mark.parametrize(
    "data",
    [
        "naïve;ä\r\n1".encode(),
        b"\xef\xbb\xbf" + "naïve;ä\r\n1".encode(),
        "naïve;ä\r\n1".encode("utf-16"),
        b"\xfe\xff" + "naïve;ä\r\n1".encode("utf-16-be"),
    ],
)
def test_the_encodings_that_are_read(data: bytes) -> None:
    """UTF-8 with and without a mark, UTF-16 of both orders: the same text each time (Unicode, ch. 3.10)."""
    assert decode(data, "f") == ("naïve;ä\r\n1", [])


@pytest.mark.parametrize(
    ("data", "place", "code"),
    [
        (b"a\nb\xe9c\n", (2, 2), "file-encoding"),
        (b"\xff\xfea\x00b", (1, 5), "file-encoding"),
        (b"\x89PNG\r\n\x1a\n\x00\x00", (0, 0), "file-binary"),
        (b"PK\x03\x04\x14\x00", (0, 0), "file-binary"),
        (b"PAR1\x15\x04\x15\x00", (0, 0), "file-binary"),
    ],
)
def test_what_is_no_text_is_refused_at_its_byte(data: bytes, place: tuple[int, int], code: str) -> None:
    """Latin-1, half of a UTF-16 pair, and the first bytes of PNG, ZIP and Parquet files."""
    text, faults = decode(data, "f")
    assert text is None
    assert [(fault.line, fault.column, fault.code) for fault in faults] == [(*place, code)]


def test_reading_tells_missing_folders_and_sizes(tmp_path: Path) -> None:
    """No such file, a folder, a file over its limit, and one at its limit."""
    (tmp_path / "f").write_bytes(b"12345")
    assert read_bytes(tmp_path / "f", 5) == (b"12345", [])
    assert read_bytes(tmp_path / "f", 4)[1][0].code == "file-too-large"
    assert read_bytes(tmp_path / "no")[1][0].code == "file-missing"
    assert read_bytes(tmp_path)[1][0].code == "file-is-folder"
    assert read_bytes(tmp_path / "f" / "inner")[1][0].code == "file-unreadable"


def test_the_cap_counts_each_file_for_itself() -> None:
    """Sixty faults of one file become fifty and one that counts ten; another file's stay as they are."""
    many = [Fault("a", line, 0, "x", "wrong") for line in range(1, 61)]
    few = [Fault("b", 1, 0, "x", "wrong")]
    kept = capped(many + few)
    assert len(kept) == MOST_FAULTS + 2
    assert kept[-2] == few[0]
    assert str(kept[-1]) == "a: 10 more faults of this file are not listed"
    assert capped(many[:50]) == many[:50]
