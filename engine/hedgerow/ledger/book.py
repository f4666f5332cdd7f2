"""All frames of one log, computed once each."""

from __future__ import annotations

from functools import cached_property

import pandas as pd

from hedgerow.events.log import EventLog
from hedgerow.ledger import attribution
from hedgerow.ledger.equity import equity_frame
from hedgerow.ledger.legs import legs_frame
from hedgerow.ledger.lives import Holdings, hold
from hedgerow.ledger.marks import marks_frame
from hedgerow.ledger.positions import trades_frame
from hedgerow.ledger.postings import Postings, post
from hedgerow.ledger.reconcile import reconcile

__all__ = ["Ledger"]


class Ledger:
    """What a log amounts to; every frame is made when first asked for and kept."""

    def __init__(self, log: EventLog) -> None:
        self.log = log

    @classmethod
    def checked(cls, log: EventLog) -> Ledger:
        """Return the ledger of a log that adds up. Raises ReconcileError when it does not."""
        ledger = cls(log)
        reconcile(log, ledger.postings, ledger.holdings)
        return ledger

    @cached_property
    def postings(self) -> Postings:
        """Every cent under its heading."""
        return post(self.log)

    @cached_property
    def holdings(self) -> Holdings:
        """Running quantities of shares and legs."""
        return hold(self.postings)

    @cached_property
    def trades(self) -> pd.DataFrame:
        """One row a position (`positions.TRADE_COLUMNS`)."""
        return trades_frame(self.postings)

    @cached_property
    def legs(self) -> pd.DataFrame:
        """One row a life of a leg (`legs.LEG_COLUMNS`)."""
        return legs_frame(self.postings, self.holdings)

    @cached_property
    def equity(self) -> pd.DataFrame:
        """One row a session (`equity.EQUITY_COLUMNS`)."""
        return equity_frame(self.log)

    @cached_property
    def marks(self) -> pd.DataFrame:
        """One row a position and close, as far as the log holds marks."""
        return marks_frame(self.log)

    @cached_property
    def by_position(self) -> pd.DataFrame:
        """Money of every position under every heading."""
        return attribution.by_position(self.postings)

    @cached_property
    def by_day(self) -> pd.DataFrame:
        """Money of every session under every heading."""
        return attribution.by_day(self.postings)

    @cached_property
    def by_month(self) -> pd.DataFrame:
        """Money of every month under every heading."""
        return attribution.by_month(self.postings)
