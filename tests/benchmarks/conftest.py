"""Lets the test of the benchmarks import the scripts beside it by name, as running them does."""

from __future__ import annotations

import sys
from pathlib import Path

sys.path.insert(0, str(Path(__file__).parent))
