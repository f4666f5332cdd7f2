"""Statistics of a ledger: what the trades and the account's curve say, with units and definitions."""

from hedgerow.evidence.figures import Curve, Summary
from hedgerow.evidence.summary import summarise

__all__ = ["Curve", "Summary", "summarise"]
