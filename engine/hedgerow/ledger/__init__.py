"""What a log amounts to: positions, legs, days, where money came from, and whether it adds up."""

from hedgerow.ledger.book import Ledger
from hedgerow.ledger.reconcile import reconcile

__all__ = ["Ledger", "reconcile"]
