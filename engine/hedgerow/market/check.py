"""What a person should know of a market before trusting a result on it: nothing here changes the data."""

from __future__ import annotations

import datetime
from collections.abc import Callable, Iterable

import numpy as np
from numpy.typing import NDArray

from hedgerow.kernels.layout import DAYS_A_YEAR, Floats, Ints
from hedgerow.market.calendar import EXACT_FROM, sessions_between
from hedgerow.market.dates import iso
from hedgerow.market.recover import RATIOS
from hedgerow.market.table import Finding, Market

Mask = NDArray[np.bool_]
SILENCE_SESSIONS = 5  # without a price, after which the walk closes a position (kernels.day.LONGEST_SILENCE)
LEAST_SYMBOLS = 3  # a majority needs as many
CALENDAR_FITS = 0.02  # share of sessions that may differ where the US calendar is tried unasked
STALE_BARS = 4  # repeats of a whole bar
STALE_CLOSES = 10  # repeats of a close
NEAR_RATIO = 0.03  # of the overnight move to a split's, in logarithms
STAYS_NEAR = 0.12  # of the close's move to a split's
LARGE_MOVE = float(np.log(1.6))
LARGE_DIVIDEND = 0.2  # of the close before
SURVIVORS = 5  # as many stocks, for so many years, and none is gone
SURVIVED_YEARS = 3.0
DECIMAL_PRICES_FROM = datetime.date(2001, 4, 9).toordinal()  # US exchanges quote in cents from that day
_SHOWN = 3


def market_findings(market: Market, calendar: str = "") -> list[Finding]:
    """Return every finding of a market; `calendar` is "us", "own", or "" to try the US one where it fits."""
    checks: Iterable[Callable[[], list[Finding]]] = (
        lambda: missing_sessions(market),
        lambda: extra_sessions(market),
        lambda: calendar_sessions(market, calendar),
        lambda: long_gaps(market),
        lambda: stale_runs(market),
        lambda: jumps(market),
        lambda: splits_unseen(market),
        lambda: large_dividends(market),
        lambda: looks_adjusted(market),
        lambda: survivors(market),
        lambda: alike_names(market),
    )
    return [finding for check in checks for finding in check()]


def _by_symbol(market: Market, rows: Mask, code: str, severity: str, text: str) -> list[Finding]:
    """Return one finding for each symbol with rows; `{n}` of the text is how many, `{s}` the plural."""
    findings = []
    for index in np.flatnonzero(rows.any(axis=0)):
        count = int(rows[:, index].sum())
        day = iso(market.ordinals[rows[:, index].argmax()])
        told = text.format(n=count, s="" if count == 1 else "s")
        findings.append(Finding(code, severity, market.symbols[index], day, told))
    return findings


def _listed(ordinals: Ints) -> str:
    """Return a few days and how many more there are."""
    shown = ", ".join(iso(day) for day in ordinals[:_SHOWN])
    more = len(ordinals) - _SHOWN
    return f"{shown} and {more:,} more" if more > 0 else shown


def _sessions(count: int) -> str:
    return f"{count:,} session{'' if count == 1 else 's'}"


def _presence(market: Market) -> tuple[Mask, Mask]:
    """Return where a symbol has a bar, and where it is between its first and last one, (T, N)."""
    has = ~np.isnan(market.close)
    session = np.arange(len(market.dates))[:, None]
    return has, (session >= market.first_bar) & (session <= market.last_bar)


def missing_sessions(market: Market) -> list[Finding]:
    """Find the sessions a symbol misses while most of the others have them."""
    has, active = _presence(market)
    most = (2 * has.sum(axis=1) > active.sum(axis=1)) & (active.sum(axis=1) >= LEAST_SYMBOLS)
    missing = active & ~has & most[:, None]
    return _by_symbol(
        market, missing, "missing-session", "warning", "{n:,} session{s} missing that most others have"
    )


def extra_sessions(market: Market) -> list[Finding]:
    """Find the sessions on which at most half of the symbols have a bar."""
    has, active = _presence(market)
    few = (2 * has.sum(axis=1) <= active.sum(axis=1)) & (active.sum(axis=1) >= LEAST_SYMBOLS)
    days = market.ordinals[few]
    if len(days) == 0:
        return []
    text = f"{_sessions(len(days))} on which at most half of the symbols have a price: {_listed(days)}"
    return [Finding("extra-session", "warning", "", iso(days[0]), text)]


def calendar_sessions(market: Market, calendar: str) -> list[Finding]:
    """Compare the sessions with the US calendar, where it is asked for or nearly fits."""
    days = market.ordinals[market.ordinals >= EXACT_FROM]
    if calendar == "own" or len(days) == 0:
        return []
    wanted = sessions_between(int(days[0]), int(days[-1]))
    missing, extra = np.setdiff1d(wanted, days), np.setdiff1d(days, wanted)
    if calendar == "" and len(missing) + len(extra) > CALENDAR_FITS * len(wanted):
        return []
    findings = []
    for code, found, word in (("missing-session", missing, "missing"), ("extra-session", extra, "extra")):
        if len(found):
            text = f"{_sessions(len(found))} {word} against the US calendar: {_listed(found)}"
            findings.append(Finding(code, "warning", "", iso(found[0]), text))
    return findings


def _runs(same: Mask) -> Ints:
    """Return how many sessions in a row have been the same as the one before, up to each session, (T, N)."""
    session = np.arange(len(same))[:, None]
    return np.asarray(session - np.maximum.accumulate(np.where(same, 0, session), axis=0), dtype=np.int64)


def long_gaps(market: Market) -> list[Finding]:
    """Find gaps inside a symbol's history that are so long that a position is closed in them."""
    has, active = _presence(market)
    length = _runs(active & ~has)
    ends = np.zeros(market.shape, dtype=np.bool_)
    ends[:-1] = (length[:-1] >= SILENCE_SESSIONS) & (length[1:] == 0)
    findings = []
    for index, session in np.argwhere(ends.T):
        count = int(length[session, index])
        first, last = (iso(market.ordinals[one]) for one in (session - count + 1, session))
        text = f"no price for {count:,} sessions, {first} to {last}: a position is closed at the price before"
        findings.append(Finding("long-gap", "warning", market.symbols[index], first, text))
    return findings


def stale_runs(market: Market) -> list[Finding]:
    """Find runs of repeated bars, and of repeated closes."""
    same_close = np.zeros(market.shape, dtype=np.bool_)
    same_close[1:] = market.close[1:] == market.close[:-1]
    same_bar = same_close.copy()
    for grid in (market.open, market.high, market.low):
        same_bar[1:] &= grid[1:] == grid[:-1]
    bars, closes = _runs(same_bar), _runs(same_close)
    stale = (bars == STALE_BARS) | ((closes == STALE_CLOSES) & (bars < STALE_BARS))
    longest = np.maximum(np.where(bars >= STALE_BARS, bars, 0).max(axis=0), closes.max(axis=0)) + 1
    findings = _by_symbol(market, stale, "stale-run", "warning", "{n:,} run{s} of a price that stands still")
    length = dict(zip(market.symbols, longest, strict=True))
    return [
        Finding(
            f.code, f.severity, f.symbol, f.date, f"{f.text}; the longest is {length[f.symbol]:,} sessions"
        )
        for f in findings
    ]


def last_close(close: Floats) -> Floats:
    """Return the close of the last bar before each session, (T, N); NaN before the first."""
    session = np.arange(len(close))[:, None]
    at = np.maximum.accumulate(np.where(np.isnan(close), 0, session), axis=0)
    before = np.full(close.shape, np.nan)
    before[1:] = np.take_along_axis(close, at, axis=0)[:-1]
    return before


def jumps(market: Market) -> list[Finding]:
    """Find overnight moves that look like a split nobody recorded, and other very large moves."""
    before = last_close(market.adj_close)
    with np.errstate(invalid="ignore"):
        overnight = np.log(before / market.adj_open)
        whole = np.log(before / market.adj_close)
    paid = market.dividend + market.special > 0
    stock = np.array([kind == "stock" for kind in market.kinds])
    large = (np.abs(whole) > np.log(1.5) - NEAR_RATIO) & (market.split == 1.0) & ~paid
    findings = []
    seen = np.zeros(market.shape, dtype=np.bool_)
    for session, index in np.argwhere(large & stock):
        distance = np.abs(np.log(RATIOS) - overnight[session, index])
        ratio = float(RATIOS[distance.argmin()])
        stays = abs(np.log(ratio) - whole[session, index]) < STAYS_NEAR
        if distance.min() < NEAR_RATIO and stays and abs(np.log(ratio)) > np.log(1.45):
            seen[session, index] = True
            text = f"the price opens at {1.0 / ratio:.4g} times the close before; no split is recorded"
            day = iso(market.ordinals[session])
            findings.append(Finding("unrecorded-split", "warning", market.symbols[index], day, text))
    moved = (np.abs(whole) > LARGE_MOVE) & ~seen & (market.split == 1.0)
    return findings + _by_symbol(
        market, moved, "large-move", "note", "{n:,} move{s} beyond +60 % or -37 % in one session"
    )


def splits_unseen(market: Market) -> list[Finding]:
    """Find recorded splits that the prices as traded do not show."""
    before = last_close(market.close)
    with np.errstate(invalid="ignore"):
        overnight = np.log(before / market.open)
    unseen = (market.split != 1.0) & (np.abs(overnight) < np.abs(overnight - np.log(market.split)))
    text = (
        "{n:,} split{s} recorded that the price does not show; is it already adjusted (`adjustment: splits`)?"
    )
    return _by_symbol(market, unseen, "split-unseen", "warning", text)


def large_dividends(market: Market) -> list[Finding]:
    """Find dividends of more than a fifth of the close before."""
    with np.errstate(invalid="ignore"):
        large = market.dividend > LARGE_DIVIDEND * last_close(market.close)
    return _by_symbol(
        market, large, "large-dividend", "warning", "{n:,} dividend{s} of more than 20 % of the price"
    )


def looks_adjusted(market: Market) -> list[Finding]:
    """Find stocks whose early closes are no whole cents while the late ones are."""
    if market.adjustment != "none":
        return []
    findings = []
    for index in np.flatnonzero([kind == "stock" for kind in market.kinds]):
        close = market.close[market.ordinals >= DECIMAL_PRICES_FROM, index]
        cents = close[~np.isnan(close)] * 100.0
        quarter = len(cents) // 4
        odd = np.abs(cents - np.round(cents)) > 0.02 + 1e-6 * cents
        if quarter >= 60 and odd[:quarter].mean() > 0.8 and odd[-quarter:].mean() < 0.2:
            text = "early closes are no whole cents, late ones are: are the prices adjusted (`adjustment`)?"
            findings.append(Finding("looks-adjusted", "warning", market.symbols[index], "", text))
    return findings


def survivors(market: Market) -> list[Finding]:
    """Find a universe in which nothing ever died."""
    stocks = np.array([kind == "stock" for kind in market.kinds])
    years = (int(market.ordinals[-1]) - int(market.ordinals[0])) / DAYS_A_YEAR
    if stocks.sum() < SURVIVORS or years < SURVIVED_YEARS:
        return []
    if (market.last_bar[stocks] < len(market.dates) - SURVIVORS).any():
        return []
    text = f"none of {stocks.sum():,} stocks ended in {years:.0f} years: those that failed are not here"
    return [Finding("survivorship", "warning", "", "", text)]


def alike_names(market: Market) -> list[Finding]:
    """Find symbols that differ only in case."""
    seen: dict[str, str] = {}
    findings = []
    for name in market.symbols:
        first = seen.setdefault(name.upper(), name)
        if first != name:
            text = f"{first} and {name} differ only in case; they are taken as two symbols"
            findings.append(Finding("alike-names", "warning", name, "", text))
    return findings
