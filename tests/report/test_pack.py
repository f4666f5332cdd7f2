"""Columns of a page: what is packed is what is read."""

from __future__ import annotations

import base64
import zlib
from typing import Any

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from hedgerow.report.pack import MISSING, column, words


def read(packed: dict[str, Any]) -> np.ndarray:
    """A column read in plain Python integers, one value after the other, by the words of `report/pack.py`."""
    planes = zlib.decompress(base64.b64decode(packed["z"]))
    count, running, out = packed["n"], 0, []
    for at in range(count):
        folded = sum(planes[plane * count + at] << (8 * plane) for plane in range(4))
        running += (folded >> 1) ^ -(folded & 1)
        running = (running + 2**31) % 2**32 - 2**31
        out.append(np.nan if running == MISSING else running * packed["step"])
    return np.array(out, dtype=np.float64)


@given(st.lists(st.one_of(st.floats(-1e7, 1e7), st.sampled_from([np.nan, np.inf, 0.0]))))
def test_a_column_comes_back_to_half_its_step(values: list[float]) -> None:
    """Against the values themselves: within half a step, unknown where not finite."""
    packed = column(values, 0.01)
    back, given_ = read(packed), np.array(values, dtype=np.float64)
    known = np.isfinite(given_)
    assert np.isnan(back[~known]).all()
    assert np.abs(back[known] - given_[known]).max(initial=0.0) <= packed["step"] * 0.5000001


def test_a_step_grows_where_values_are_large() -> None:
    """A billion in cents does not fit 31 bits: the step is a unit, and the value is still there."""
    packed = column([1.0e9, 3.0], 0.01)
    assert packed["step"] == pytest.approx(1.0)
    assert read(packed).tolist() == pytest.approx([1.0e9, 3.0])


def test_words_keep_their_order() -> None:
    """Worked by hand: codes count the words as they first come."""
    packed = words(["b", "a", "b", "<c>"])
    assert packed["words"] == ["b", "a", "<c>"]
    assert read(packed["codes"]).tolist() == [0.0, 1.0, 0.0, 2.0]


def test_the_same_values_are_the_same_text() -> None:
    """Two packings beside each other."""
    values = np.sin(np.arange(500.0))
    assert column(values, 1e-4) == column(values.copy(), 1e-4)
