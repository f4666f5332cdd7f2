"""The C loop, compiled with gcc -O3 into a temporary folder and called through ctypes."""

from __future__ import annotations

import ctypes
import shutil
import subprocess
import tempfile
from collections.abc import Callable
from functools import cache
from pathlib import Path

import numpy as np
from bench_market import PUT_DISTANCE, Inputs

from hedgerow.kernels import exercise
from hedgerow.kernels.layout import Costs, Floats, SmileModel

__all__ = ["COMPILER", "prepare_c", "run_c"]

COMPILER = shutil.which("gcc")
SOURCE = Path(__file__).with_name("collar.c")
GRID = (  # of the table of early exercise, names of its constants
    "LEAST",
    "MOST",
    "ROWS",
    "NARROWEST",
    "WIDEST",
    "COLUMNS",
    "FARTHEST",
    "PLACES",
    "BEND",
    "FIRST_ROOT",
    "PER_ROOT",
    "PER_DEVIATION",
    "PER_STRETCHED",
)
DOUBLES = ctypes.POINTER(ctypes.c_double)
LONGS = ctypes.POINTER(ctypes.c_int64)
BYTES = ctypes.POINTER(ctypes.c_uint8)
TAPE = {
    "open": DOUBLES,
    "close": DOUBLES,
    "level": DOUBLES,
    "anchor": DOUBLES,
    "allowed": BYTES,
    "ordinal": LONGS,
    "expiry": LONGS,
    "rate": DOUBLES,
    "low_tick": DOUBLES,
    "high_tick": DOUBLES,
    "threshold": DOUBLES,
    "exercise": DOUBLES,
}


class _Smile(ctypes.Structure):
    _fields_ = [(name, ctypes.c_double) for name in SmileModel._fields]


class _Costs(ctypes.Structure):
    _fields_ = [(name, ctypes.c_double) for name in Costs._fields]


class _Account(ctypes.Structure):
    _fields_ = [
        *((name, ctypes.c_double) for name in ("cash", "per_position", "put_distance")),
        *(
            (name, ctypes.c_int64)
            for name in ("most_positions", "most_new", "interest", "sessions", "symbols")
        ),
    ]


class _Tape(ctypes.Structure):
    _fields_ = list(TAPE.items())


@cache
def _library() -> ctypes.CDLL:
    """The compiled loop; raises RuntimeError with the compiler's words when it does not compile."""
    if COMPILER is None:
        raise RuntimeError("the C loop needs gcc, and there is no gcc on the search path of this machine")
    with tempfile.TemporaryDirectory() as folder:
        library = Path(folder) / "collar.so"
        sizes = [f"-D{name}={getattr(exercise, name)!r}" for name in GRID]
        flags = ["-O3", "-std=c11", "-Wall", "-Wextra", "-Werror", "-shared", "-fPIC", *sizes]
        command = [COMPILER, *flags, "-o", str(library)]
        done = subprocess.run([*command, str(SOURCE), "-lm"], capture_output=True, text=True, check=False)
        if done.returncode != 0:
            raise RuntimeError(f"gcc could not compile the C loop of the benchmark: {done.stderr}")
        return ctypes.CDLL(str(library))


def prepare_c(inputs: Inputs) -> Callable[[], tuple[Floats, int]]:
    """The C loop with its inputs bound; returns equity at every close (T,) and positions opened."""
    sessions, symbols = inputs.shape
    arrays = {name: np.ascontiguousarray(getattr(inputs, name)) for name in TAPE if name != "exercise"}
    arrays["exercise"] = exercise.TABLE
    tape = _Tape(*(arrays[name].ctypes.data_as(kind) for name, kind in TAPE.items()))
    most, new = inputs.account.most_positions, inputs.account.most_new_a_day
    account = _Account(
        inputs.account.cash,
        inputs.account.per_position,
        PUT_DISTANCE,
        most,
        new,
        int(inputs.account.interest),
        sessions,
        symbols,
    )
    smile, costs, equity = _Smile(*inputs.smile), _Costs(*inputs.costs), np.empty(sessions)
    loop = _library().collar
    loop.restype = ctypes.c_int64

    def call() -> tuple[Floats, int]:
        assert arrays  # the pointers in `tape` are theirs
        parts = (ctypes.byref(part) for part in (tape, account, smile, costs))
        opened = int(loop(*parts, equity.ctypes.data_as(DOUBLES)))
        if opened < 0:
            raise MemoryError("the C loop of the benchmark could not get memory for its positions")
        return equity, opened

    return call


def run_c(inputs: Inputs) -> tuple[Floats, int]:
    """Equity at every close (T,) and how many positions were opened, by the C loop."""
    return prepare_c(inputs)()
