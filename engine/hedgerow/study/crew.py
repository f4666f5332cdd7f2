"""Many walks on a few threads: all results in order, and all stop when one fails or the user does."""

from __future__ import annotations

from collections.abc import Callable, Iterable
from concurrent.futures import ThreadPoolExecutor
from threading import Event
from typing import TypeVar

from hedgerow.errors import RunError

__all__ = ["Tell", "together"]

Outcome = TypeVar("Outcome")
Tell = Callable[[int, int], None]
"""Called with sessions done and to do of one walk; raises RunError when the work was stopped."""


def together(
    work: Callable[[int, Tell], Outcome],
    pieces: Iterable[int],
    workers: int,
    progress: Callable[[int], None] | None = None,
) -> list[Outcome]:
    """Return what `work` makes of each piece, in their order, on so many threads.

    `progress` is called with sessions newly walked. Raises what a piece raised; those not begun are dropped.
    """
    stopped = Event()

    def one(piece: int) -> Outcome:
        done = 0

        def tell(walked: int, _whole: int) -> None:
            nonlocal done
            if stopped.is_set():
                raise RunError("the run was stopped before all of it was done")
            if progress is not None:
                progress(walked - done)
            done = walked

        return work(piece, tell)

    with ThreadPoolExecutor(max(workers, 1)) as pool:
        under_way = [pool.submit(one, piece) for piece in pieces]
        try:
            return [future.result() for future in under_way]
        finally:
            stopped.set()
            for future in under_way:
                future.cancel()
