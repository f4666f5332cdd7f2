"""What an option would cost: estimates of volatility, their blend, and the surface built on it."""

from hedgerow.volatility import close, ranges
from hedgerow.volatility.surface import Surface, SurfaceModel, build
from hedgerow.volatility.words import surface_words

__all__ = ["Surface", "SurfaceModel", "build", "close", "ranges", "surface_words"]
