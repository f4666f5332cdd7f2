"""Runs the tests of the walk's steps as plain Python, in a process of their own."""

from __future__ import annotations

import os
import re
import subprocess
import sys
from pathlib import Path

FOLDER = Path(__file__).parent / "uncompiled"
LEAST_TESTS = 220


def test_the_steps_as_plain_python() -> None:
    """Every test in the folder passes, and there are as many as there should be."""
    command = [sys.executable, "-m", "pytest", "-n", "0", "-p", "no:cacheprovider", str(FOLDER)]
    env = {**os.environ, "HEDGEROW_UNCOMPILED": "1"}
    done = subprocess.run(command, env=env, capture_output=True, text=True, cwd=FOLDER.parents[2])
    assert done.returncode == 0, done.stdout[-6000:] + done.stderr[-2000:]
    counted = re.search(r"(\d+) passed", done.stdout)
    assert counted is not None, done.stdout
    assert int(counted[1]) >= LEAST_TESTS
