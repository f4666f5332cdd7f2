"""How fast large studies are: `python tests/benchmarks/study.py --json` prints one JSON object.

variants_a_second      a grid of a thousand variants on 12 symbols x 15 years, one thread, shards written
overhead               its processor time over that of the bare walks of the same variants, less one
overhead_of_findings   what summing up the shards adds, likewise
threads_2_speedup      seconds of the same grid on one thread over two
peak_megabytes         the most memory of a process that runs 250 variants, and of one that runs 1,000
resume_seconds         from the start of a process until a study, half of it done, walks on

With --quick 200 variants. Parts of the same work are timed in turns. Processor time is what a busy machine
leaves comparable; the speedup needs two idle cores.
"""

from __future__ import annotations

import argparse
import json
import resource
import subprocess
import sys
import tempfile
import time
from dataclasses import dataclass
from pathlib import Path
from typing import Any

import numpy as np
from bench_market import COLLAR, make_market

from hedgerow.study.batches import terms_of
from hedgerow.study.declare import load_study
from hedgerow.study.large import Stage, finish, stage
from hedgerow.study.pool import Threads, fill
from hedgerow.study.shards import Shards
from hedgerow.walk.run import walk_program

SYMBOLS, SESSIONS = 12, 15 * 252
DAYS = [7, 14, 21, 28, 35]


def grid_of(variants: int) -> dict[str, Any]:
    """Five lengths, ten puts and as many calls as make up the number."""
    calls = variants // 50
    return {
        "legs.call.expiry.days": DAYS,
        "legs.call.strike.from_spot": [f"{half / 2:g}%" for half in range(calls)],
        "legs.put.strike.from_spot": {"from": "-10%", "to": "-1%", "step": "1%"},
    }


def make_stage(variants: int, folder: Path) -> Stage:
    """A study of so many collars on random walks."""
    (folder / "prices.csv").touch()
    words = {
        "name": "benchmark",
        "market": "prices.csv",
        "account": {"cash": 2_400_000, "per_position": "1/12"},
        "strategy": COLLAR,
        "grid": grid_of(variants),
    }
    ready = stage(load_study(words, folder), make_market(SESSIONS, SYMBOLS))
    assert len(ready.trials) == variants, len(ready.trials)
    return ready


def filled(ready: Stage, folder: Path, workers: int) -> float:
    """Seconds for all shards of a study, or for those that are missing."""
    start = time.perf_counter()
    fill(ready.job, Shards.begin(folder, ready.contents), Threads(workers))
    return time.perf_counter() - start


def bare(ready: Stage, numbers: list[int]) -> float:
    """Processor seconds a variant for the walk alone, programs made before."""
    job = ready.job
    terms = terms_of(job)
    taken = 0.0
    for number in numbers:
        program = job.bench.program(job.trials.strategy(number))
        start = time.process_time()
        walk_program(job.market, job.bench.tape, program, terms)
        taken += time.process_time() - start
    return taken / len(numbers)


def peak_megabytes() -> float:
    """The most memory this process has held so far."""
    return round(resource.getrusage(resource.RUSAGE_SELF).ru_maxrss / 2**10, 1)


@dataclass
class Taken:
    """Seconds on one thread and on two, and processor seconds on one thread and of the bare walks."""

    one: float = 0.0
    two: float = 0.0
    busy: float = 0.0
    walks: float = 0.0


def in_turns(ready: Stage, folder: Path) -> Taken:
    """A part of the grid after the other, each on one thread, on two, and as bare walks.

    So a machine that slows down for a while slows all three.
    """
    batches = list(range(ready.contents.batches))
    taken = Taken()
    block = max(4, len(batches) // 6)
    for at in range(0, len(batches), block):
        part = batches[at : at + block]
        busy = time.process_time()
        taken.one += _part(ready, folder / "one", part, 1)
        taken.busy += time.process_time() - busy
        taken.two += _part(ready, folder / "two", part, 2)
        numbers = [number for batch in part for number in ready.contents.numbers(batch)]
        taken.walks += bare(ready, numbers[::4]) * len(numbers)
    return taken


def _part(ready: Stage, folder: Path, batches: list[int], workers: int) -> float:
    shards = Shards.begin(folder, ready.contents)
    start = time.perf_counter()
    for batch, data in Threads(workers).run(ready.job, shards, batches, lambda _variants: None):
        shards.add(batch, data)
    return time.perf_counter() - start


def resumed(variants: int, folder: Path) -> float:
    """Seconds until the first variant that was missing is done, from the start of the process."""
    started = time.time()
    code = f"import study; study.walk_one({variants}, {str(folder)!r})"
    done = subprocess.run(
        [sys.executable, "-c", code], cwd=Path(__file__).parent, check=True, capture_output=True, text=True
    )
    return round(float(done.stdout) - started, 2)


def walk_one(variants: int, folder: str) -> None:
    """Go on with a study until one variant is done; print the time."""

    class OverError(Exception):
        """Enough was seen."""

    told = []

    def tell(count: int) -> None:
        told.append(count)
        if len(told) == 2:  # what was there before, and one more
            print(time.time(), flush=True)
            raise OverError

    ready = make_stage(variants, Path(folder))
    try:
        fill(ready.job, Shards.begin(Path(folder, "half"), ready.contents), Threads(1), tell)
    except OverError:
        return


def memory_of(variants: int) -> float:
    """The most memory of a process that runs so many variants and sums them up."""
    code = f"import study; study.run_all({variants})"
    done = subprocess.run(
        [sys.executable, "-c", code], cwd=Path(__file__).parent, check=True, capture_output=True, text=True
    )
    return float(done.stdout)


def run_all(variants: int) -> None:
    """Run a study from beginning to end; print the most memory held."""
    with tempfile.TemporaryDirectory() as folder:
        ready = make_stage(variants, Path(folder))
        filled(ready, Path(folder, "shards"), 2)
        finish(ready, Shards.begin(Path(folder, "shards"), ready.contents))
    print(peak_megabytes())


def measure(variants: int) -> dict[str, Any]:
    """All figures of one grid."""
    with tempfile.TemporaryDirectory() as name:
        folder = Path(name)
        ready = make_stage(variants, folder)
        bare(ready, [0])  # compiles, and warms every cache
        taken = in_turns(ready, folder)
        same = all(
            path.read_bytes() == (folder / "two" / path.name).read_bytes()
            for path in (folder / "one").iterdir()
        )
        if not same:
            sys.exit("one thread and two left different bytes")
        busy = time.process_time()
        finish(ready, Shards.begin(folder / "one", ready.contents))
        findings = time.process_time() - busy
        half = Shards.begin(folder / "half", ready.contents)
        source = Shards.begin(folder / "one", ready.contents)
        for batch in range(ready.contents.batches // 2):
            half.add(batch, source.path(batch).read_bytes())
        resume = resumed(variants, folder)
    small = variants // 4 // 50 * 50
    return {
        "variants": variants,
        "symbols": SYMBOLS,
        "sessions": SESSIONS,
        "variants_a_second": round(variants / taken.one, 1),
        "variants_a_second_two_threads": round(variants / taken.two, 1),
        "walk_ms_a_variant": round(1e3 * taken.walks / variants, 2),
        "overhead": round(taken.busy / taken.walks - 1.0, 3),
        "overhead_of_findings": round(findings / taken.walks, 3),
        "threads_2_speedup": round(taken.one / taken.two, 2),
        "peak_megabytes": {str(small): memory_of(small), str(variants): memory_of(variants)},
        "resume_seconds": resume,
        "same_bytes": same,
    }


def main() -> None:
    """Measure and print."""
    parser = argparse.ArgumentParser(description=__doc__, formatter_class=argparse.RawTextHelpFormatter)
    parser.add_argument("--json", action="store_true", help="one JSON object")
    parser.add_argument("--quick", action="store_true", help="200 variants in place of 1,000")
    given = parser.parse_args()
    figures = measure(200 if given.quick else 1000)
    if given.json:
        print(json.dumps(figures))
    else:
        for name, value in figures.items():
            print(f"{name:<32}{value}")


if __name__ == "__main__":
    np.seterr(all="raise", under="ignore")
    main()
