"""Steps of the walk have no door from Python once compiled: their tests run where nothing is compiled."""

from __future__ import annotations

from hedgerow.kernels.jit import COMPILED

collect_ignore = ["uncompiled"] if COMPILED else []
