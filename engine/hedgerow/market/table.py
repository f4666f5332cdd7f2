"""The market as the rest of the package sees it: frozen arrays on one axis of sessions.

Shapes: T sessions, N symbols in alphabetical order. Prices are as traded on their day, per share; money is
in `currency`. An array of a Market is C-contiguous and read-only.
"""

from __future__ import annotations

import datetime
import hashlib
from collections.abc import Iterable
from dataclasses import dataclass, replace
from functools import cached_property
from typing import TYPE_CHECKING, Any, NamedTuple

import numpy as np
from numpy.typing import NDArray

from hedgerow.errors import DataError, Fault, nearest_word
from hedgerow.kernels.layout import Floats, Ints

if TYPE_CHECKING:
    import pandas as pd

Days = NDArray[np.datetime64]
EPOCH_ORDINAL = datetime.date(1970, 1, 1).toordinal()
GRIDS = ("open", "high", "low", "close", "volume", "dividend", "special", "split", "implied")
KINDS = ("stock", "index")


@dataclass(frozen=True, slots=True, order=True)
class Finding:
    """Something a person should know of the data; `severity` is "note" or "warning".

    `symbol` and `date` (ISO) are empty where the finding is about the whole market.
    """

    code: str
    severity: str
    symbol: str
    date: str
    text: str

    @property
    def told(self) -> str:
        """The text with the symbol and the date it is about, as far as there are any."""
        about = ", ".join(part for part in (self.symbol, self.date) if part)
        return f"{about}: {self.text}" if about else self.text


class Report(NamedTuple):
    """One earnings report; the days are proleptic ordinals, `eps` is money per share as reported.

    `reaction_ordinal` is the first calendar day whose session reacts; `announced_ordinal` is the day from
    which the date of the report was known. `eps` is NaN when unknown.
    """

    symbol_index: int
    ordinal: int
    announced_ordinal: int
    reaction_ordinal: int
    eps: float


class Adjusted(NamedTuple):
    """Prices in units of the first share, arrays of shape (T, N)."""

    open: Floats
    high: Floats
    low: Floats
    close: Floats


@dataclass(frozen=True, eq=False, kw_only=True)
class Market:
    """Prices, dividends, splits, reports and rates of some symbols on one axis of sessions.

    `open`, `high`, `low`, `close`: (T, N) as traded, NaN where the symbol has no bar; `volume`: (T, N), NaN
    unknown. `dividend`, `special`: (T, N) cash per share on the ex-date, 0 none. `split`: (T, N) new shares
    for one old, effective before the open, 1 none. `implied`: (T, N) observed volatility, annual fraction,
    NaN none. `rate`: (T,) annual fraction, continuously compounded. `ordinals`: (T,) proleptic ordinals of
    `dates`. `first_bar`, `last_bar`: (N,) sessions; T and -1 for a symbol without a bar.
    """

    symbols: tuple[str, ...]
    kinds: tuple[str, ...]
    sectors: tuple[str, ...]
    dates: Days
    ordinals: Ints
    open: Floats
    high: Floats
    low: Floats
    close: Floats
    volume: Floats
    dividend: Floats
    special: Floats
    split: Floats
    rate: Floats
    reports: tuple[Report, ...]
    implied: Floats
    first_bar: Ints
    last_bar: Ints
    currency: str
    adjustment: str
    source: str
    findings: tuple[Finding, ...]

    def __post_init__(self) -> None:
        """Freeze the arrays; raises DataError when their shapes do not belong together."""
        shape = (len(self.dates), len(self.symbols))
        wanted = dict.fromkeys(GRIDS, shape) | {"dates": shape[:1], "ordinals": shape[:1]}
        wanted |= {"rate": shape[:1], "first_bar": shape[1:], "last_bar": shape[1:]}
        for name, expected in wanted.items():
            array = np.ascontiguousarray(getattr(self, name))
            if array.shape != expected:
                raise DataError.one(
                    "market",
                    "market-shape",
                    f"the array `{name}` has the shape {array.shape}",
                    f"{expected} belongs to this market",
                )
            array.setflags(write=False)
            object.__setattr__(self, name, array)

    @classmethod
    def from_frame(cls, frame: pd.DataFrame, **words: Any) -> Market:
        """Return the market of a frame with symbol, date, open, high, low, close and what else it holds.

        The keyword arguments are those of `load_market`. Raises DataError with every fault of the frame.
        """
        from hedgerow.market.load import load_market

        return load_market(frame, **words)

    @property
    def shape(self) -> tuple[int, int]:
        """The counts of sessions and of symbols, (T, N)."""
        return len(self.dates), len(self.symbols)

    def index_of(self, symbol: str) -> int:
        """Return the column of a symbol; raises DataError, with the nearest symbol, when it is unknown."""
        try:
            return self.symbols.index(symbol)
        except ValueError:
            raise DataError([unknown_symbol(symbol, self.symbols, self.source)]) from None

    def select(self, symbols: Iterable[str]) -> Market:
        """Return the market of some symbols on the same sessions.

        Raises DataError when none is given, or with every symbol that is unknown.
        """
        wanted = sorted(set(symbols))
        faults = [
            unknown_symbol(name, self.symbols, self.source) for name in wanted if name not in self.symbols
        ]
        if faults:
            raise DataError(faults)
        if not wanted:
            raise DataError.one(self.source, "no-symbols", "no symbol is selected", "at least one is wanted")
        columns = [self.symbols.index(name) for name in wanted]
        place = {old: new for new, old in enumerate(columns)}
        grids: dict[str, Any] = {name: getattr(self, name)[:, columns] for name in GRIDS}
        return replace(
            self,
            symbols=tuple(wanted),
            kinds=tuple(self.kinds[i] for i in columns),
            sectors=tuple(self.sectors[i] for i in columns),
            reports=tuple(
                sorted(
                    r._replace(symbol_index=place[r.symbol_index])
                    for r in self.reports
                    if r.symbol_index in place
                )
            ),
            first_bar=self.first_bar[columns],
            last_bar=self.last_bar[columns],
            findings=tuple(f for f in self.findings if f.symbol in ("", *wanted)),
            **grids,
        )

    def until(self, date: str | datetime.date | np.datetime64) -> Market:
        """Return what was known at the close of a day: later sessions, reports and findings are gone.

        A report announced by then keeps its date; its EPS is NaN when its session of reaction is later. The
        symbols stay. Raises DataError when the date is none or no session is left.
        """
        last = _as_day(date)
        count = int(np.searchsorted(self.ordinals, last.toordinal(), side="right"))
        if count == 0:
            raise DataError.one(
                self.source,
                "before-history",
                f"there is no session up to {last}",
                f"the first session is {self.dates[0]}",
                "name a later date",
            )
        ordinal = last.toordinal()
        known = (r for r in self.reports if r.announced_ordinal <= ordinal)
        first, final = bar_range(self.close[:count])
        arrays: dict[str, Any] = {
            name: getattr(self, name)[:count] for name in (*GRIDS, "dates", "ordinals", "rate")
        }
        return replace(
            self,
            reports=tuple(r if r.reaction_ordinal <= ordinal else r._replace(eps=np.nan) for r in known),
            first_bar=first,
            last_bar=final,
            findings=tuple(f for f in self.findings if f.date <= last.isoformat()),
            **arrays,
        )

    def first_share(self) -> Adjusted:
        """Return the prices in units of the first share: as traded, times the splits up to that session.

        Only the past is used: a later split changes nothing before it. Arrays of shape (T, N).
        """
        return self._adjusted

    @cached_property
    def _adjusted(self) -> Adjusted:
        shares = np.cumprod(self.split, axis=0)
        adjusted = Adjusted(*(getattr(self, name) * shares for name in Adjusted._fields))
        for array in adjusted:
            array.setflags(write=False)
        return adjusted

    @property
    def adj_open(self) -> Floats:
        """The open in units of the first share, (T, N)."""
        return self._adjusted.open

    @property
    def adj_high(self) -> Floats:
        """The high in units of the first share, (T, N)."""
        return self._adjusted.high

    @property
    def adj_low(self) -> Floats:
        """The low in units of the first share, (T, N)."""
        return self._adjusted.low

    @property
    def adj_close(self) -> Floats:
        """The close in units of the first share, (T, N)."""
        return self._adjusted.close

    @cached_property
    def fingerprint(self) -> str:
        """The SHA-256 of the content in hexadecimal; the same for any order of files, symbols or rows."""
        digest = hashlib.sha256()
        text = (self.symbols, self.kinds, self.sectors, self.currency)
        digest.update(repr(text).encode())
        digest.update(self.ordinals.astype("<i8").tobytes())
        reports = np.array([tuple(r) for r in self.reports], dtype=np.float64)
        for array in (*(getattr(self, name) for name in GRIDS), self.rate, reports):
            digest.update(np.where(np.isnan(array), np.nan, array + 0.0).astype("<f8", copy=False).data)
        return digest.hexdigest()


def bar_range(close: Floats) -> tuple[Ints, Ints]:
    """Return the first and the last session with a bar of each symbol, (N,); T and -1 where there is none."""
    has = ~np.isnan(close)
    some = has.any(axis=0)
    sessions = len(close)
    first = np.where(some, has.argmax(axis=0) if sessions else 0, sessions)
    last = np.where(some, sessions - 1 - has[::-1].argmax(axis=0) if sessions else 0, -1)
    return first.astype(np.int64), last.astype(np.int64)


def unknown_symbol(symbol: str, known: Iterable[str], where: str) -> Fault:
    """Return the fault of a symbol that is not in the data."""
    names = tuple(known)
    allowed = f"known are {', '.join(names[:12])}{' and others' if len(names) > 12 else ''}"
    found = f"there is no symbol `{symbol}`"
    return Fault(where, 0, 0, "unknown-symbol", found, allowed, nearest_word(symbol, names))


def _as_day(date: str | datetime.date | np.datetime64) -> datetime.date:
    try:
        if isinstance(date, datetime.date):
            return datetime.date.fromordinal(date.toordinal())
        return datetime.date.fromisoformat(str(date)[:10] if isinstance(date, np.datetime64) else date)
    except ValueError:
        raise DataError.one(
            "date", "bad-date", f"{date!r} is not a date", "a date is written like 2012-03-30"
        ) from None
