"""Markets made of arrays, for tests that need prices and nothing of a file."""

from hedgerow.extend.invented import array_market, cut, random_market, report, weekdays, with_split

__all__ = ["array_market", "cut", "random_market", "report", "weekdays", "with_split"]
