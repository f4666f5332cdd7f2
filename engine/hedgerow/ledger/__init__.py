"""What a log amounts to: positions, legs, days, where money came from, and whether it adds up."""

from hedgerow.ledger.book import Ledger

__all__ = ["Ledger"]
