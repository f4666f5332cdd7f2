"""Where compiled code is kept: in the user's cache, or elsewhere; and what a broken file does."""

from __future__ import annotations

import os
import subprocess
import sys
from pathlib import Path

import pytest

SNAP = """
from hedgerow.kernels.jit import cache_folder
from hedgerow.kernels.listing import snap
print(cache_folder())
print(snap(101.3, 2.5, 1))
print(sum(snap.stats.cache_hits.values()))
"""


def compiled(home: Path, code: str = SNAP) -> list[str]:
    """Run code in a process whose cache lies below `home`; the lines it prints."""
    env = {**os.environ, "XDG_CACHE_HOME": str(home), "HOME": str(home), "HEDGEROW_UNCOMPILED": "0"}
    command = [sys.executable, "-W", "error", "-c", code]
    done = subprocess.run(command, env=env, capture_output=True, text=True, check=False)
    assert done.returncode == 0, done.stderr
    return done.stdout.splitlines()


@pytest.mark.parametrize(("kind", "size"), [("nbi", 0), ("nbc", 30)])
def test_a_file_that_was_cut_short(tmp_path: Path, kind: str, size: int) -> None:
    """The first process compiles and keeps; one that finds it broken compiles afresh; the next finds it."""
    folder, value, hits = compiled(tmp_path)
    assert Path(folder).is_relative_to(tmp_path)
    assert (value, hits) == ("102.5", "0")
    broken = list(Path(folder).rglob(f"*.{kind}"))
    assert broken
    for path in broken:
        os.truncate(path, size)
    assert compiled(tmp_path) == [folder, "102.5", "0"]
    assert compiled(tmp_path) == [folder, "102.5", "1"]


def test_a_home_that_cannot_be_written(tmp_path: Path) -> None:
    """A fresh temporary folder serves instead."""
    home = tmp_path / "file"
    home.write_text("no folder", encoding="utf-8")
    folder, value, _ = compiled(home)
    assert not Path(folder).is_relative_to(tmp_path)
    assert value == "102.5"
    assert home.read_text(encoding="utf-8") == "no folder"


def test_a_disk_that_fills_up(tmp_path: Path) -> None:
    """Compiled code that cannot be kept is used all the same."""
    code = (
        "import errno\n"
        "from numba.core.caching import IndexDataCacheFile\n"
        "def full(*_):\n    raise OSError(errno.ENOSPC, 'No space left on device')\n"
        "IndexDataCacheFile._save_data = full\n" + SNAP
    )
    assert compiled(tmp_path, code)[1:] == ["102.5", "0"]
