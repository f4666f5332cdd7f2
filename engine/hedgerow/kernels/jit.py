"""The compile decorator, its flags, and where compiled code is kept.

Compiled code is cached in a private folder of the user, named by a hash of every kernel source and of the
versions that produced it: numba itself does not notice an edited callee in another file. Where that folder
cannot be written a fresh temporary one serves. `HEDGEROW_UNCOMPILED=1` runs everything as plain Python,
bit for bit the same.
"""

from __future__ import annotations

import functools
import hashlib
import os
import pickle
import platform
import shutil
import tempfile
import time
from collections.abc import Callable
from pathlib import Path
from typing import Any, TypeVar, cast

__all__ = ["COMPILED", "cache_folder", "compiled", "is_compiled", "step"]

F = TypeVar("F", bound=Callable[..., Any])

# what reading a file of the cache may raise that was cut short, or written by another library
BROKEN = (EOFError, pickle.UnpicklingError, ImportError, AttributeError, LookupError, TypeError, ValueError)

COMPILED = os.environ.get("HEDGEROW_UNCOMPILED", "") in ("", "0")


def _fingerprint() -> str:
    """Hash every kernel source and table, and the versions that turn them into machine code."""
    import llvmlite
    import numba
    import numpy as np

    digest = hashlib.sha256()
    for part in (platform.python_version(), platform.machine(), numba.__version__, llvmlite.__version__):
        digest.update(part.encode())
    digest.update(np.__version__.encode())
    for source in sorted(path for path in Path(__file__).parent.iterdir() if path.suffix in (".py", ".npy")):
        digest.update(source.name.encode())
        digest.update(source.read_bytes())
    return digest.hexdigest()[:16]


def _writable(folder: Path) -> bool:
    """Whether a file can be made in `folder`, which is created when missing."""
    try:
        folder.mkdir(parents=True, exist_ok=True)
        handle, name = tempfile.mkstemp(dir=folder)
    except OSError:
        return False
    os.close(handle)
    os.unlink(name)
    return True


def _choose_folder() -> Path:
    """The user's cache folder for this exact code, or a fresh temporary one."""
    import platformdirs

    folder = Path(platformdirs.user_cache_dir("hedgerow")) / "compiled" / _fingerprint()
    if not _writable(folder):
        return Path(tempfile.mkdtemp(prefix="hedgerow-compiled-"))
    _clear_old(folder)
    return folder


def _clear_old(folder: Path) -> None:
    """Remove the compiled code of other versions that was not written to for a month."""
    oldest = time.time() - 30 * 86_400
    for other in folder.parent.iterdir():
        try:
            if other != folder and other.stat().st_mtime < oldest:
                shutil.rmtree(other, ignore_errors=True)
        except OSError:
            continue  # another process was faster


_folder: Path | None = None


def cache_folder() -> Path:
    """The folder that holds compiled code for this process."""
    global _folder
    if _folder is None:
        _folder = _choose_folder()
    return _folder


def is_compiled() -> bool:
    """Whether the walk has been compiled on this machine, or need not be."""
    return not COMPILED or any(cache_folder().rglob("loop.walk*.nbc"))


@functools.cache
def _cache_kind() -> Any:
    """Numba's cache of one function, except that what cannot be read or written is done without."""
    from numba.core.caching import FunctionCache

    class Cache(FunctionCache):  # type: ignore[misc] # numba ships no type information
        """Compiles afresh where a file of the cache is broken; keeps nothing where the disk is full."""

        def load_overload(self, sig: Any, target_context: Any) -> Any:
            """The compiled code for a signature, None where there is none to be read."""
            try:
                return super().load_overload(sig, target_context)
            except BROKEN:
                self.flush()
                return None

        def save_overload(self, sig: Any, data: Any) -> None:
            """Keep compiled code for the next process, if that can be."""
            try:
                super().save_overload(sig, data)
            except OSError:
                return

    return Cache


def _wrap(function: F, *, alone: bool, **flags: bool) -> F:
    """Compile `function` on first call; keep it as it is when compiling is switched off.

    What stands `alone` may be called from Python and is kept for the next process; the rest is a part of it.
    """
    if not COMPILED:
        return function
    import numba
    from numba.core import config

    from hedgerow.kernels.joining import as_part, for_whole_numbers

    wrapped: Any = numba.njit(nogil=True, error_model="numpy", no_cfunc_wrapper=True, **flags)(function)
    as_part(wrapped, alone)
    for_whole_numbers(wrapped)
    if alone:
        before = config.CACHE_DIR
        config.CACHE_DIR = str(cache_folder())
        try:
            wrapped._cache = _cache_kind()(function)
        finally:
            config.CACHE_DIR = before
    return cast(F, wrapped)


def compiled(function: F) -> F:
    """Compile a function on first call; keep it as it is when compiling is switched off.

    No fast-math, so that compiled and uncompiled runs agree to the bit; the interpreter lock is released.
    """
    return _wrap(
        function, alone=True, _nrt=True
    )  # said aloud: a caller's flags would be taken over otherwise


def step(function: F) -> F:
    """Compile a step of the walk: it makes no arrays, so nothing is counted, and it is laid into its caller.

    Counting references to the walk's arrays at every call made the walk thirty times slower.
    """
    return _wrap(function, alone=False, _nrt=False, no_cpython_wrapper=True)
