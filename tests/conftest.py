"""What every test shares: how hypothesis draws its examples."""

from __future__ import annotations

from hypothesis import settings

# The first example of a test may compile code, so none has a deadline; every run draws the same examples.
settings.register_profile("house", deadline=None, derandomize=True)
settings.load_profile("house")
