"""The folder of a large study while it runs: one Parquet shard a batch of variants, and a manifest of them.

A shard is written beside its place and moved there, then its hash goes into the manifest, likewise. So a
study that is killed at any moment leaves whole shards, and goes on with the batches that the manifest does
not name. Neither holds a time, a place or an order of finishing: however often it was stopped, the end is
the same bytes.
"""

from __future__ import annotations

import hashlib
import json
import os
from collections.abc import Iterator, Mapping
from dataclasses import asdict, dataclass, field
from pathlib import Path
from typing import Any

import numpy as np
import pyarrow as pa
import pyarrow.parquet as pq
from numpy.typing import NDArray

from hedgerow.errors import PlaceError

__all__ = ["MANIFEST", "Contents", "Shard", "Shards", "shard_bytes"]

Floats = NDArray[np.float64]

MANIFEST = "manifest.json"
FORMAT = 1
EQUITY = "equity"


@dataclass(frozen=True)
class Contents:
    """What a folder of shards holds: fingerprints of study and data, versions, and how it is cut.

    `variants` in batches of `batch`, the last one shorter; `sessions` closes a variant.
    """

    study: str
    data: str
    versions: Mapping[str, str]
    variants: int
    batch: int
    sessions: int

    @property
    def batches(self) -> int:
        """How many batches, and so shards, there are."""
        return -(-self.variants // self.batch)

    def numbers(self, batch: int) -> range:
        """The variants of a batch."""
        return range(batch * self.batch, min((batch + 1) * self.batch, self.variants))


@dataclass(frozen=True, eq=False)
class Shard:
    """One batch: figures (V,) by name, and equity at each close (V, T)."""

    numbers: range
    figures: Mapping[str, Floats]
    equity: Floats


def shard_bytes(numbers: range, figures: Mapping[str, Floats], equity: Floats) -> bytes:
    """A batch as the bytes of a Parquet file; the same values give the same bytes.

    Columns: `variant`, counted from 1, every figure, and `equity`, a list of the closes' values.
    """
    closes = pa.FixedSizeListArray.from_arrays(pa.array(equity.ravel()), equity.shape[1])
    columns = {"variant": pa.array(np.arange(numbers.start, numbers.stop, dtype=np.int32) + 1)}
    columns |= {name: pa.array(values) for name, values in figures.items()}
    sink = pa.BufferOutputStream()
    pq.write_table(
        pa.table(columns | {EQUITY: closes}),
        sink,
        compression="zstd",
        compression_level=1,
        use_dictionary=False,
        use_byte_stream_split=[f"{EQUITY}.list.element"],
    )
    return bytes(sink.getvalue())


@dataclass
class Shards:
    """A folder of shards. `done` has the hash of every finished one, by the number of its batch."""

    folder: Path
    contents: Contents
    done: dict[int, str] = field(default_factory=dict)

    @classmethod
    def begin(cls, folder: Path, contents: Contents) -> Shards:
        """The folder made ready: new, or as an unfinished run of the same contents left it.

        Raises PlaceError when it holds the shards of something else, or a manifest that cannot be read.
        """
        if (folder / MANIFEST).is_file():
            return cls(folder, contents, _kept(folder, contents))
        folder.mkdir(parents=True, exist_ok=True)
        shards = cls(folder, contents)
        shards._write_manifest()
        return shards

    @property
    def missing(self) -> list[int]:
        """The batches still to be run."""
        return [batch for batch in range(self.contents.batches) if batch not in self.done]

    def path(self, batch: int) -> Path:
        """The file of a batch."""
        return self.folder / f"batch-{batch:05d}.parquet"

    def add(self, batch: int, data: bytes) -> None:
        """Write the shard of a batch, and then that it is there."""
        _write(self.path(batch), data)
        self.done[batch] = hashlib.sha256(data).hexdigest()
        self._write_manifest()

    def read(self, batch: int) -> Shard:
        """The shard of a batch. Raises PlaceError when it is no longer there or no longer what it was."""
        try:
            table = pq.read_table(self.path(batch), memory_map=False)
        except (OSError, pa.ArrowException):
            raise _damaged(self.path(batch)) from None
        names = [name for name in table.column_names if name not in ("variant", EQUITY)]
        figures = {name: np.array(table[name].to_numpy()) for name in names}
        flat = table[EQUITY].combine_chunks().flatten().to_numpy(zero_copy_only=False)
        equity = np.array(flat).reshape(-1, self.contents.sessions)
        return Shard(self.contents.numbers(batch), figures, equity)

    def all(self) -> Iterator[Shard]:
        """Every shard in order, one at a time in memory. Raises PlaceError likewise."""
        return (self.read(batch) for batch in range(self.contents.batches))

    def _write_manifest(self) -> None:
        shards = {self.path(batch).name: self.done[batch] for batch in sorted(self.done)}
        plain = {"format": FORMAT, **asdict(self.contents), "shards": shards}
        _write(self.folder / MANIFEST, (json.dumps(plain, indent=1) + "\n").encode("utf-8"))


def _write(path: Path, data: bytes) -> None:
    """Write a file in one step: it is there whole, or not."""
    part = path.with_name(f".{path.name}.part")
    part.write_bytes(data)
    os.replace(part, path)


def _kept(folder: Path, contents: Contents) -> dict[int, str]:
    """The finished shards that a manifest names and that are still what they were. Raises PlaceError."""
    path = folder / MANIFEST
    try:
        plain: Any = json.loads(path.read_text(encoding="utf-8"))
        found, named = {name: plain[name] for name in ("format", *asdict(contents))}, dict(plain["shards"])
    except (OSError, ValueError, KeyError, TypeError):
        raise _refused(path, "this manifest of an unfinished study cannot be read") from None
    wanted = {"format": FORMAT, **asdict(contents)}
    for word, what in (("study", "another study"), ("data", "other prices"), ("versions", "other versions")):
        if found[word] != wanted[word]:
            raise _refused(path, f"the unfinished study in this folder was begun with {what}")
    if found != wanted:
        raise _refused(path, "this manifest of an unfinished study does not fit the study")
    whole = Shards(folder, contents)
    numbers = {whole.path(batch).name: batch for batch in range(contents.batches)}
    return {
        numbers[name]: hash_ for name, hash_ in named.items() if name in numbers and _is(folder / name, hash_)
    }


def _is(path: Path, known: str) -> bool:
    """Whether a shard is there with the bytes it had; if not it is run again."""
    try:
        return hashlib.sha256(path.read_bytes()).hexdigest() == known
    except OSError:
        return False


def _damaged(path: Path) -> PlaceError:
    found = "this shard is gone or cannot be read"
    return PlaceError.one(str(path), "shard", found, remedy="run the study again: it makes what is missing")


def _refused(path: Path, why: str) -> PlaceError:
    remedy = "name another folder with --out, or delete this one to begin anew"
    return PlaceError.one(str(path), "manifest", why, "expected one of this study on these prices", remedy)
