"""How fast the walk is: `python tests/benchmarks/walk.py --json` prints one JSON object.

ns_per_symbol_session   the walk on a weekly collar, time over sessions x symbols
over_c                  its time over that of a single-purpose C loop for the same collar, gcc -O3, here
plain_python_over       the time of a straightforward loop in plain Python over the walk's, on a small market
structures              the walk on other structures: the same time, and over that of the weekly collar
threads_2_speedup       two walks one after the other, over the two at once on two threads

Each time is the best of a few; what is compared is run in turns, so that a busy moment of the machine falls
on both. All loops must end with the same equity, or nothing is printed.
"""

from __future__ import annotations

import argparse
import json
import resource
import sys
import time
from collections.abc import Callable
from concurrent.futures import ThreadPoolExecutor
from typing import Any

import numpy as np
from bench_market import Stage, make_stage, run_walk, with_rule
from c_collar import prepare_c
from plain_loop import prepare_plain

from hedgerow.kernels.layout import Floats

STRUCTURES = {
    "different_month_collar": "collar-different-month.yaml",
    "married_put_with_income": "married-put-with-income.yaml",
    "put_spread_collar": "put-spread-collar.yaml",
}
TOLERANCE = 1e-6  # relative, of equity at every close: rounding can move a cent, and a cent can move a lot


def best(times: int, *jobs: Callable[[], object]) -> list[float]:
    """The shortest of a few runs of each job, in seconds; the jobs take turns."""
    taken: list[list[float]] = [[] for _ in jobs]
    for _ in range(times):
        for job, runs in zip(jobs, taken, strict=True):
            start = time.perf_counter()
            job()
            runs.append(time.perf_counter() - start)
    return [min(runs) for runs in taken]


def gap(found: Floats, expected: Floats) -> float:
    """The greatest relative difference of two equity curves."""
    return float(np.abs(found / expected - 1.0).max())


def peak_gigabytes() -> float:
    """The most memory this process has held so far."""
    return round(resource.getrusage(resource.RUSAGE_SELF).ru_maxrss / 2**20, 2)


def at_once(job: Callable[[], object], threads: int) -> None:
    """Run a job on several threads at the same time."""
    with ThreadPoolExecutor(threads) as pool:
        for done in [pool.submit(job) for _ in range(threads)]:
            done.result()


def same_result(stage: Stage) -> float:
    """The greatest difference between the walk's equity and the C loop's; ends the program if too large."""
    found, opened = run_walk(stage)
    expected, wanted = prepare_c(stage.inputs)()
    difference = gap(found, expected)
    if difference > TOLERANCE or opened != wanted:
        sys.exit(
            f"the walk and the C loop differ: {opened} and {wanted} positions, equity by {difference:.2g}"
        )
    return difference


def time_structures(stage: Stage, times: int) -> dict[str, dict[str, float]]:
    """Nanoseconds a symbol and session of further structures, and over the weekly collar, in turns."""
    others = [with_rule(stage, file) for file in STRUCTURES.values()]
    for other in others:
        run_walk(other)  # warms every cache
    collar, *taken = best(times, *(lambda one=one: run_walk(one) for one in (stage, *others)))
    cells = stage.inputs.shape[0] * stage.inputs.shape[1]
    return {
        name: {
            "ns_per_symbol_session": round(seconds / cells * 1e9, 1),
            "over_weekly_collar": round(seconds / collar, 2),
        }
        for name, seconds in zip(STRUCTURES, taken, strict=True)
    }


def measure(sessions: int, symbols: int, rate: float, times: int) -> dict[str, Any]:
    """All figures of one market."""
    start = time.perf_counter()
    stage = make_stage(sessions, symbols, rate=rate)
    prepared = time.perf_counter() - start
    difference = same_result(stage)  # compiles, and warms every cache
    memory = peak_gigabytes()
    cells = sessions * symbols
    walk, plain_c = best(times, lambda: run_walk(stage), prepare_c(stage.inputs))
    one_after_other, together = best(
        times, lambda: (run_walk(stage), run_walk(stage)), lambda: at_once(lambda: run_walk(stage), 2)
    )
    small = make_stage(min(sessions, 1500), min(symbols, 20), rate=rate)
    same_result(small)
    (plain_python,) = best(1, prepare_plain(small.inputs))  # its books are used up by one run
    (small_walk,) = best(times, lambda: run_walk(small))
    return {
        "sessions": sessions,
        "symbols": symbols,
        "ns_per_symbol_session": round(walk / cells * 1e9, 1),
        "over_c": round(walk / plain_c, 3),
        "plain_python_over": round(plain_python / small_walk, 1),
        "threads_2_speedup": round(one_after_other / together, 2),
        "structures": time_structures(stage, times),
        "c_ns_per_symbol_session": round(plain_c / cells * 1e9, 1),
        "prepare_seconds": round(prepared, 2),
        "walk_seconds": round(walk, 3),
        "largest_equity_difference": difference,
        "peak_memory_gb": memory,
        "peak_memory_two_walks_gb": peak_gigabytes(),
    }


def main() -> None:
    """Read the arguments, measure, print."""
    parser = argparse.ArgumentParser(description="Time the walk against C and plain Python.")
    parser.add_argument("--json", action="store_true", help="print one JSON object")
    parser.add_argument("--sessions", type=int, default=5000)
    parser.add_argument("--symbols", type=int, default=500)
    parser.add_argument(
        "--rate", type=float, default=0.03, help="interest a year; 0: no put is exercised early"
    )
    parser.add_argument("--times", type=int, default=5, help="runs of which the shortest counts")
    given = parser.parse_args()
    figures = measure(given.sessions, given.symbols, given.rate, given.times)
    if given.json:
        print(json.dumps(figures))
    else:
        print("\n".join(f"{name:28} {value!s:>12}" for name, value in figures.items()))


if __name__ == "__main__":
    main()
