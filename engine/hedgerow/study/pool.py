"""Running the batches of a large study on this machine: threads over the compiled walk."""

from __future__ import annotations

from collections.abc import Callable, Iterator
from concurrent.futures import FIRST_COMPLETED, Future, ThreadPoolExecutor, wait
from contextlib import contextmanager
from threading import Event
from typing import Protocol

from hedgerow.errors import RunError
from hedgerow.study.batches import Job, ready, run_batch
from hedgerow.study.shards import Shards

__all__ = ["Pool", "Progress", "Threads", "fill"]

Progress = Callable[[int], None]


class Pool(Protocol):
    """Something that runs batches: threads here, or the workers of a cluster."""

    def run(
        self, job: Job, shards: Shards, batches: list[int], tell: Progress
    ) -> Iterator[tuple[int, bytes]]:
        """Each batch's number and the bytes of its shard, as they are done; `tell` counts variants."""
        ...


def fill(job: Job, shards: Shards, pool: Pool, progress: Progress | None = None) -> None:
    """Run every batch that is missing and write its shard. The bytes do not depend on the pool.

    `progress` is called with the number of variants newly done, those of earlier runs first. Raises what a
    variant raised.
    """
    tell = progress if progress is not None else _nobody
    tell(sum(len(shards.contents.numbers(batch)) for batch in shards.done))
    missing = shards.missing
    if missing:
        for batch, data in pool.run(job, shards, missing, tell):
            shards.add(batch, data)


def _nobody(_variants: int) -> None:
    """Nobody watches."""


class Threads:
    """A pool of threads; the walk releases the interpreter's lock."""

    def __init__(self, workers: int = 2) -> None:
        self.workers = max(workers, 1)

    def run(
        self, job: Job, shards: Shards, batches: list[int], tell: Progress
    ) -> Iterator[tuple[int, bytes]]:
        """Batches as they are done, at most two a thread in work. Raises what a variant raised."""
        ready(job)
        stopped = Event()

        def watched(variants: int) -> None:
            if stopped.is_set():
                raise RunError("the study was stopped before every variant was done")
            tell(variants)

        with ThreadPoolExecutor(self.workers) as pool, _set_at_the_end(stopped):
            left, running = iter(batches), dict[Future[bytes], int]()
            while True:
                for batch in left:
                    work = pool.submit(run_batch, job, shards.contents.numbers(batch), watched)
                    running[work] = batch
                    if len(running) >= 2 * self.workers:
                        break
                if not running:
                    return
                for work in wait(running, return_when=FIRST_COMPLETED).done:
                    yield running.pop(work), work.result()


@contextmanager
def _set_at_the_end(stopped: Event) -> Iterator[None]:
    """Tell the threads to stop when the pool is left, whatever the reason."""
    try:
        yield
    finally:
        stopped.set()
