"""The account at each close."""

from __future__ import annotations

import numpy as np
import pandas as pd

from hedgerow.events.log import EventLog, frame_of

__all__ = ["EQUITY_COLUMNS", "equity_frame"]

EQUITY_COLUMNS = ("variant", "date", "positions", "cash", "stock", "options", "reserved", "equity")


def equity_frame(log: EventLog) -> pd.DataFrame:
    """Return one row a session with the columns EQUITY_COLUMNS: date, open positions, then money."""
    columns = {
        "variant": np.full(log.days.size, log.meta.variant, dtype=object),
        "date": log.meta.dates[log.days["session"]].astype("datetime64[s]"),
        "positions": log.days["positions"].astype(np.int64),
    }
    for name in ("cash", "stock", "options", "reserved", "equity"):
        columns[name] = np.array(log.days[name])
    return frame_of(columns)
