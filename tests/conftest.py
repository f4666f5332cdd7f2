"""What every test shares: how hypothesis draws its examples, and a room of extensions left as it was."""

from __future__ import annotations

from collections.abc import Iterator

import pytest
from hypothesis import settings

# The first example of a test may compile code, so none has a deadline; every run draws the same examples.
settings.register_profile("house", deadline=None, derandomize=True)
settings.load_profile("house")


@pytest.fixture
def forgotten() -> Iterator[None]:
    """Extensions that a test reads are forgotten after it: every registry is as it was before."""
    from hedgerow.extend import load

    before = {kind: dict(registry) for kind, registry in load._REGISTRIES.items()}
    yield
    load._LOADED.clear()
    for kind, registry in load._REGISTRIES.items():
        registry.clear()
        registry.update(before[kind])
