"""Columns of a page as short text: whole multiples of a quantum, differences, byte planes, deflate, base64.

Neighbours in a column of money, prices or days are near each other, so their differences are small numbers,
whose upper bytes are alike; laid out plane by plane they deflate to about a byte a value.
"""

from __future__ import annotations

import base64
import zlib
from collections.abc import Sequence
from typing import Any

import numpy as np
from numpy.typing import ArrayLike

__all__ = ["MISSING", "column", "deflated", "words"]

MISSING = -(2**31)
"""Stands for a value that is not known."""
LARGEST = 2.0**30


def deflated(data: bytes) -> str:
    """Return bytes deflated (zlib) in base64; the same bytes every time."""
    return base64.b64encode(zlib.compress(data, 6)).decode("ascii")


def column(values: ArrayLike, quantum: float = 1.0) -> dict[str, Any]:
    """Return a column as {n, step, z}: n values, each a whole multiple of `step` in the text z.

    `step` is `quantum`, or that power of ten times it with which the largest value fits 31 bits. What is not
    finite becomes MISSING.
    """
    numbers = np.asarray(values, dtype=np.float64)
    known = np.isfinite(numbers)
    largest = float(np.max(np.abs(numbers[known]), initial=0.0))
    step = quantum
    while largest / step > LARGEST:
        step *= 10.0
    whole = np.full(numbers.shape, MISSING, dtype=np.int64)
    whole[known] = np.rint(numbers[known] / step).astype(np.int64)
    change = np.diff(whole, prepend=0).astype(np.int64)
    small = (change & 0xFFFFFFFF).astype("<u4")
    folded = ((small << 1) ^ (0 - (small >> 31))).astype("<u4")  # small either way is small
    planes = folded.view(np.uint8).reshape(-1, 4).T
    return {"n": int(numbers.size), "step": step, "z": deflated(planes.tobytes())}


def words(values: Sequence[str]) -> dict[str, Any]:
    """Return a column of words as {words, codes}: the different words in order of first use, and a column."""
    known = {word: code for code, word in enumerate(dict.fromkeys(values))}
    return {"words": list(known), "codes": column([known[word] for word in values])}
