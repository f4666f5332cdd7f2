"""Shards and their manifest: whole or not there, of this study or refused."""

from __future__ import annotations

import json
from dataclasses import replace
from pathlib import Path

import numpy as np
import pytest

from hedgerow.errors import PlaceError
from hedgerow.study.shards import MANIFEST, Contents, Shards, shard_bytes

CONTENTS = Contents(study="s", data="d", versions={"numpy": "2"}, variants=5, batch=2, sessions=3)


def data(numbers: range) -> bytes:
    """A shard whose values tell which variant they are of."""
    own = np.array(list(numbers), float)
    return shard_bytes(numbers, {"sharpe": own / 7}, own[:, None] + np.arange(3.0))


def filled(folder: Path, batches: tuple[int, ...] = (2, 0, 1)) -> Shards:
    """A folder with some batches written, in that order."""
    shards = Shards.begin(folder, CONTENTS)
    for batch in batches:
        shards.add(batch, data(CONTENTS.numbers(batch)))
    return shards


def test_what_is_written_is_read_back_to_the_last_bit(tmp_path: Path) -> None:
    """Figures and equity of five variants in three shards, the last one shorter."""
    shards = list(filled(tmp_path).all())
    assert [list(shard.numbers) for shard in shards] == [[0, 1], [2, 3], [4]]
    np.testing.assert_array_equal(
        np.concatenate([shard.figures["sharpe"] for shard in shards]), np.arange(5) / 7
    )
    np.testing.assert_array_equal(shards[2].equity, [[4.0, 5.0, 6.0]])


def test_the_order_of_finishing_leaves_no_trace(tmp_path: Path) -> None:
    """The same bytes of every file, whichever batch came first."""
    for name, order in (("a", (0, 1, 2)), ("b", (2, 1, 0))):
        filled(tmp_path / name, order)
    for path in (tmp_path / "a").iterdir():
        assert path.read_bytes() == (tmp_path / "b" / path.name).read_bytes()


def test_begun_again_only_what_is_missing_is_left(tmp_path: Path) -> None:
    """A shard that is not in the manifest, is gone, or is no longer what it was counts as missing."""
    filled(tmp_path, (0, 2))
    assert Shards.begin(tmp_path, CONTENTS).missing == [1]
    (tmp_path / "batch-00001.parquet").write_bytes(b"killed here")
    assert Shards.begin(tmp_path, CONTENTS).missing == [1]
    (tmp_path / "batch-00000.parquet").write_bytes(b"cut short")
    (tmp_path / "batch-00002.parquet").unlink()
    assert Shards.begin(tmp_path, CONTENTS).missing == [0, 1, 2]


@pytest.mark.parametrize(
    ("change", "told"),
    [
        ({"study": "x"}, "begun with another study"),
        ({"data": "x"}, "begun with other prices"),
        ({"versions": {"numpy": "1"}}, "begun with other versions"),
        ({"batch": 3}, "does not fit the study"),
    ],
)
def test_a_manifest_of_something_else_is_refused_in_a_sentence(
    tmp_path: Path, change: dict[str, object], told: str
) -> None:
    """Each says what differs and what to do, on one line."""
    filled(tmp_path)
    with pytest.raises(PlaceError) as caught:
        Shards.begin(tmp_path, replace(CONTENTS, **change))
    assert told in str(caught.value)
    assert "--out" in str(caught.value)
    assert "\n" not in str(caught.value)


@pytest.mark.parametrize("text", ["", "{", "[]", "null", '{"format": 1}', "\x00\xff"])
def test_a_damaged_manifest_is_refused_in_a_sentence(tmp_path: Path, text: str) -> None:
    """Cut short, of another shape, or no text at all."""
    filled(tmp_path)
    (tmp_path / MANIFEST).write_bytes(text.encode("latin-1"))
    with pytest.raises(PlaceError, match="cannot be read") as caught:
        Shards.begin(tmp_path, CONTENTS)
    assert "\n" not in str(caught.value)


def test_a_shard_that_is_damaged_while_it_is_read_is_told(tmp_path: Path) -> None:
    """One sentence with the file's name, and no traceback of the file format."""
    shards = filled(tmp_path)
    (tmp_path / "batch-00001.parquet").write_bytes(b"PAR1 cut")
    with pytest.raises(PlaceError, match=r"batch-00001\.parquet: this shard is gone or cannot be read"):
        list(shards.all())


def test_the_manifest_says_what_is_there(tmp_path: Path) -> None:
    """Contents in plain words, and the hash of every shard in order; no time and no place."""
    filled(tmp_path)
    plain = json.loads((tmp_path / MANIFEST).read_text(encoding="utf-8"))
    assert list(plain) == ["format", "study", "data", "versions", "variants", "batch", "sessions", "shards"]
    assert list(plain["shards"]) == [f"batch-0000{n}.parquet" for n in range(3)]
