"""Signals of earnings reports: growth of earnings, and sessions to and since a report.

A report's earnings are known from the close of the session that reacts to it. Its date is known from the day
it was announced. Counts of sessions ahead follow the exchange's calendar, never the rows that happen to be
in the data.
"""

from __future__ import annotations

import itertools
from collections.abc import Iterator

import numpy as np

from hedgerow.kernels.layout import Floats, Ints
from hedgerow.market.calendar import sessions_between
from hedgerow.market.table import Market, Report
from hedgerow.signals.panel import Panel
from hedgerow.signals.registry import Number, signal

__all__ = ["NO_REPORT_SESSIONS", "eps_growth", "sessions_since_report", "sessions_to_report"]

NO_REPORT_SESSIONS = 999.0
_YEAR_DAYS, _YEAR_WITHIN_DAYS = 365, 46
_STALE_DAYS = 200


def _by_symbol(market: Market) -> Iterator[tuple[int, list[Report]]]:
    """Reports of each symbol that has any, in the order of their dates."""
    ordered = sorted(market.reports, key=lambda r: (r.symbol_index, r.ordinal))
    for index, reports in itertools.groupby(ordered, key=lambda r: r.symbol_index):
        yield index, list(reports)


def _first_session(market: Market, ordinal: int) -> int:
    """First session on or after a day; T when there is none."""
    return int(np.searchsorted(market.ordinals, ordinal))


def _year_before(report: Report, reports: list[Report]) -> Report | None:
    """Report that lies nearest to one year before, within six weeks of it."""
    gaps = [(abs(report.ordinal - _YEAR_DAYS - past.ordinal), past) for past in reports]
    near = [(gap, past) for gap, past in gaps if gap <= _YEAR_WITHIN_DAYS]
    return min(near, key=lambda pair: pair[0])[1] if near else None


def _first_share_eps(market: Market, shares: Floats, report: Report) -> float:
    """Earnings of what one first share has become by the day of the report, so that splits do not count."""
    session = int(np.searchsorted(market.ordinals, report.ordinal, side="right")) - 1
    return report.eps * (float(shares[session, report.symbol_index]) if session >= 0 else 1.0)


@signal(
    "eps_growth",
    phrase="the growth of earnings per share over a year, as last reported",
    number=Number("fraction", -10.0, 100.0),
    by_bars=False,
)
def eps_growth(panel: Panel) -> Floats:
    """Earnings per share of the last report over those of the report a year before, less one (fraction).

    Known from the session that reacts until the next report, at most 200 days. Unknown without a report
    within six weeks of a year before, and when that one shows no profit: a ratio to a loss says nothing.
    """
    market = panel.market
    shares: Floats = np.cumprod(market.split, axis=0, dtype=np.float64)
    out = np.full(market.close.shape, np.nan)
    for symbol, reports in _by_symbol(market):
        for report in reports:
            start = _first_session(market, report.reaction_ordinal)
            stop = _first_session(market, report.reaction_ordinal + _STALE_DAYS + 1)
            before = _year_before(report, reports)
            base = np.nan if before is None else _first_share_eps(market, shares, before)
            now = _first_share_eps(market, shares, report)
            out[start:, symbol] = np.nan
            out[start:stop, symbol] = now / base - 1.0 if base > 0.0 else np.nan
    return out


def _sessions_ahead(market: Market, first: int, last: int, ordinal: int) -> Ints:
    """Sessions after each of rows first to last - 1, up to and with the one that a day falls in or before."""
    calendar = sessions_between(int(market.ordinals[first]), ordinal)
    reached = np.searchsorted(calendar, ordinal)
    return reached + 1 - np.searchsorted(calendar, market.ordinals[first:last], side="right")


@signal(
    "sessions_to_report",
    phrase="the number of sessions to the next announced report",
    number=Number("sessions", 0.0, NO_REPORT_SESSIONS),
    by_bars=False,
)
def sessions_to_report(panel: Panel) -> Floats:
    """Sessions until the one that will react to the next announced report, 1 on its eve; 999 when none is."""
    market = panel.market
    out = np.full(market.close.shape, NO_REPORT_SESSIONS)
    for symbol, reports in _by_symbol(market):
        for report in reversed(reports):
            first = _first_session(market, report.announced_ordinal)
            last = _first_session(market, report.reaction_ordinal)
            if first < last:
                out[first:last, symbol] = _sessions_ahead(market, first, last, report.reaction_ordinal)
    return out


@signal(
    "sessions_since_report",
    phrase="the number of sessions since the last report",
    number=Number("sessions", 0.0, NO_REPORT_SESSIONS),
    by_bars=False,
)
def sessions_since_report(panel: Panel) -> Floats:
    """Sessions since the one that reacted to the last report, 0 on it; 999 before the first."""
    market = panel.market
    out = np.full(market.close.shape, NO_REPORT_SESSIONS)
    for symbol, reports in _by_symbol(market):
        for report in reports:
            start = _first_session(market, report.reaction_ordinal)
            count = np.arange(len(market.ordinals) - start, dtype=np.float64)
            out[start:, symbol] = np.minimum(count, NO_REPORT_SESSIONS)
    return out
