"""Running the batches of a large study on a Dask cluster that is there already.

The job with its market travels once to every worker. A worker that dies loses only what it was walking: those
batches are run again by others. The bytes are the same as on threads, wherever versions are the same, and a
worker with other versions is refused.
"""

from __future__ import annotations

import importlib.metadata
import platform
from collections.abc import Iterator, Mapping
from concurrent.futures import CancelledError
from dataclasses import replace
from threading import Lock
from typing import Any

from hedgerow.errors import ExtensionError, RunError, StudyError
from hedgerow.extend import load_extension
from hedgerow.study.batches import Job, ready, run_batch
from hedgerow.study.pool import Progress
from hedgerow.study.shards import Shards

__all__ = ["Cluster", "versions"]

VERSIONED = ("hedgerow", "numpy", "pandas", "numba", "pyarrow")
CONNECT_SECONDS = 20
AHEAD = 3  # batches waiting or running for each thread of the cluster
MOST_LOSSES = 10  # how often the data may be lost with every worker that held them

_kept: dict[str, Job] = {}
_keeping = Lock()


def versions() -> dict[str, str]:
    """The versions a result depends on."""
    found = {name: importlib.metadata.version(name) for name in VERSIONED}
    return found | {"python": platform.python_version()}


class Cluster:
    """A pool of the workers behind a scheduler's address, such as `tls://host:8786`.

    Certificates for `tls://` are those of Dask's own configuration. Raises StudyError when the extra package
    is not installed or nobody answers.
    """

    def __init__(self, address: str) -> None:
        where = f"--cluster {address}"
        try:
            from distributed import Client
        except ImportError:
            remedy = "install it: pip install 'hedgerow[cluster]'"
            raise StudyError.one(where, "no-package", "needs the package distributed", "", remedy) from None
        self.address = address
        try:
            self.client: Any = Client(address, timeout=CONNECT_SECONDS, set_as_default=False)
        except (OSError, ValueError, TypeError, RuntimeError) as error:
            why = (str(error).splitlines() or [type(error).__name__])[0]
            remedy = "start a scheduler and workers, see README.md"
            raise StudyError.one(
                where, "no-cluster", f"no cluster answers there ({why})", "", remedy
            ) from error

    def close(self) -> None:
        """Leave the cluster as it is and go."""
        self.client.close()

    def run(
        self, job: Job, shards: Shards, batches: list[int], tell: Progress
    ) -> Iterator[tuple[int, bytes]]:
        """Batches as they are done. Raises what a variant raised, or RunError when data are lost for good."""
        from distributed import as_completed

        clean = replace(job)  # without what was made ready here
        data = self.client.scatter(clean, broadcast=True, hash=False)
        left, running = list(reversed(batches)), dict[str, int]()
        done = as_completed(loop=self.client.loop)
        losses = 0
        while left or running:
            while left and len(running) < AHEAD * max(self._threads(), 1):
                work = self._submit(data, shards.contents.numbers(left[-1]))
                running[work.key] = left.pop()
                done.add(work)
            work = next(done)
            batch = running.pop(work.key)
            try:
                result: bytes = work.result()
            except CancelledError:
                losses += 1
                if losses > MOST_LOSSES * len(shards.contents.numbers(0)):
                    raise RunError("the cluster lost the data of the study again and again") from None
                left.append(batch)
                data = self.client.scatter(clean, broadcast=True, hash=False)
                continue
            tell(len(shards.contents.numbers(batch)))
            yield batch, result

    def _threads(self) -> int:
        return sum(self.client.nthreads().values())

    def _submit(self, data: Any, numbers: range) -> Any:
        return self.client.submit(on_worker, data, numbers.start, numbers.stop, versions(), pure=False)


def on_worker(job: Job, start: int, stop: int, wanted: Mapping[str, str]) -> bytes:
    """Run a batch inside a worker. Raises RunError where its versions are others."""
    here = versions()
    other = [
        f"{name} {here.get(name)} and not {version}"
        for name, version in wanted.items()
        if here.get(name) != version
    ]
    if other:
        raise RunError(f"a worker of the cluster has {', '.join(other)}: results would not be the same bytes")
    with _keeping:
        if job.key not in _kept:
            _extend(job)
            _kept.clear()
            _kept[job.key] = job.copied()
        own = _kept[job.key]
    ready(own)
    return run_batch(own, range(start, stop))


def _extend(job: Job) -> None:
    """Use the study's own signals, estimators and costs inside a worker. Raises RunError for others."""
    for source, known in job.extensions:
        try:
            here = load_extension(source, check=False).sha256
        except ExtensionError as error:
            raise RunError(f"a worker of the cluster cannot read {source}: {error}") from error
        if here != known:
            raise RunError(f"a worker of the cluster has another {source} than the study was read with")
