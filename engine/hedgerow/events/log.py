"""The event log: the only output of a walk, and the only input of everything after it.

Four tables of records (layouts in `hedgerow.kernels.layout`) and what is needed to read their codes.
Events stand in the order in which they happened.
"""

from __future__ import annotations

from collections.abc import Iterable, Mapping
from dataclasses import InitVar, dataclass
from typing import Any

import numpy as np
import pandas as pd
from numpy.typing import NDArray

from hedgerow.events.kinds import KIND_WORDS, leg_word, reason_words
from hedgerow.kernels.layout import DAY, EVENT, MARK, NO_ROW, TERMS, Records

__all__ = ["EventLog", "LegName", "LogMeta", "dates_of"]

Dates = NDArray[np.datetime64]
_BLOCK_ROWS = 1 << 13
LAYOUTS: dict[str, np.dtype[np.void]] = {"events": EVENT, "terms": TERMS, "days": DAY, "marks": MARK}


@dataclass(frozen=True, slots=True)
class LegName:
    """One leg of the strategy: its name, `sell` or `buy`, `call` or `put`."""

    name: str
    side: str
    right: str


@dataclass(frozen=True, eq=False)
class LogMeta:
    """What the codes of a log stand for. `dates` (datetime64[D]) is the session axis."""

    symbols: tuple[str, ...]
    dates: Dates
    legs: tuple[LegName, ...] = ()
    exits: tuple[str, ...] = ()
    strategy: str = ""
    variant: str = ""
    opening_cash: float = 0.0
    currency: str = ""

    def __post_init__(self) -> None:
        dates = np.array(self.dates, dtype="datetime64[D]")
        dates.flags.writeable = False
        object.__setattr__(self, "dates", dates)
        object.__setattr__(self, "symbols", tuple(self.symbols))
        object.__setattr__(self, "exits", tuple(self.exits))
        object.__setattr__(self, "legs", tuple(self.legs))

    @property
    def leg_names(self) -> tuple[str, ...]:
        """Names of the legs, in the order of their codes."""
        return tuple(leg.name for leg in self.legs)

    def as_dict(self) -> dict[str, Any]:
        """Return everything as plain values; dates as ISO text."""
        return {
            "symbols": list(self.symbols),
            "dates": [str(day) for day in self.dates],
            "legs": [[leg.name, leg.side, leg.right] for leg in self.legs],
            "exits": list(self.exits),
            "strategy": self.strategy,
            "variant": self.variant,
            "opening_cash": self.opening_cash,
            "currency": self.currency,
        }

    @classmethod
    def from_dict(cls, values: Mapping[str, Any]) -> LogMeta:
        """Return the meta that `as_dict` described."""
        rest = {key: value for key, value in values.items() if key not in ("dates", "legs")}
        legs = tuple(LegName(*leg) for leg in values["legs"])
        return cls(dates=np.array(values["dates"], dtype="datetime64[D]"), legs=legs, **rest)


@dataclass(frozen=True, eq=False)
class EventLog:
    """A whole run: events (E,), terms (P,), days (T,) and marks (M,), read-only records.

    `marks` may be empty, or hold only the last session, or every position at every close. Codes are looked
    through unless they are `known` to lie within the meta, as those a walk has just written are.
    """

    meta: LogMeta
    events: Records
    terms: Records
    days: Records
    marks: Records
    known: InitVar[bool] = False

    def __post_init__(self, known: bool) -> None:
        for name, layout in LAYOUTS.items():
            table = np.asarray(getattr(self, name))
            if table.dtype != layout or table.ndim != 1:
                raise ValueError(f"the table `{name}` of a log must be a flat array of its record layout")
            view = table.view()
            view.flags.writeable = False
            object.__setattr__(self, name, view)
        if not known:
            _check_codes(self)

    @classmethod
    def join(
        cls,
        meta: LogMeta,
        events: Iterable[Records],
        terms: Iterable[Records],
        days: Iterable[Records],
        marks: Iterable[Records] = (),
    ) -> EventLog:
        """Return one log from chunks of its tables, in the order given."""
        return cls(
            meta, _joined(events, EVENT), _joined(terms, TERMS), _joined(days, DAY), _joined(marks, MARK)
        )

    def same_as(self, other: EventLog) -> bool:
        """Whether another log has the same meta and every field of every record the same, bit for bit."""
        return self.meta.as_dict() == other.meta.as_dict() and all(
            _same_bits(getattr(self, name), getattr(other, name)) for name in LAYOUTS
        )

    def to_frame(self) -> pd.DataFrame:
        """Return the events with words instead of codes and dates instead of session numbers.

        One row an event, in order: variant, date, symbol, position (-1: of the account), kind, leg, reason,
        expiry (NaT none), quantity (shares), price, mid (per share), fee, cash (money), strike, spot,
        volatility (annual fraction).
        """
        events, meta = self.events, self.meta
        count = events.size
        columns: dict[str, Any] = {
            "variant": np.full(count, meta.variant, dtype=object),
            "date": meta.dates[events["session"]].astype("datetime64[s]"),
            "symbol": words_by_code(("", *meta.symbols), events["symbol"], 1),
            "position": events["position"].astype(np.int64),
            "kind": words_by_code(KIND_WORDS, events["kind"], 0),
            "leg": self.leg_column(events["leg"]),
            "reason": words_by_code(reason_words(meta.exits), events["reason"], 0),
            "expiry": dates_of(events["expiry"]),
        }
        for name in ("quantity", "price", "mid", "fee", "cash", "strike", "spot", "volatility"):
            columns[name] = np.array(events[name])
        return frame_of(columns)

    def leg_column(self, legs: NDArray[Any]) -> NDArray[np.object_]:
        """Return the word of each leg code of an array."""
        names = self.meta.leg_names
        return words_by_code([leg_word(leg, names) for leg in range(-2, max(len(names), 1))], legs, 2)


def frame_of(columns: Mapping[str, Any]) -> pd.DataFrame:
    """Return a frame of columns; words are text columns even where there are no rows."""
    frame = pd.DataFrame(columns)
    words = [name for name, kind in frame.dtypes.items() if kind == np.dtype(object)]
    return frame.astype(dict.fromkeys(words, "str"))


def words_by_code(words: Iterable[str], codes: NDArray[Any], offset: int) -> NDArray[np.object_]:
    """Return the word of each code: words[code + offset]."""
    table = np.array(list(words), dtype=object)
    return np.asarray(table[codes.astype(np.int64) + offset])


def dates_of(ordinals: NDArray[Any]) -> Dates:
    """Return proleptic ordinals as datetime64[s]; NaT where the ordinal is 0 or less."""
    days = ordinals.astype(np.int64) - 719163
    dates = days.astype("datetime64[D]").astype("datetime64[s]")
    dates[ordinals <= 0] = np.datetime64("NaT")
    return dates


def _joined(chunks: Iterable[Records], layout: np.dtype[np.void]) -> Records:
    parts = list(chunks)
    return np.concatenate(parts) if parts else np.empty(0, dtype=layout)


def _same_bits(mine: Records, other: Records) -> bool:
    return mine.shape == other.shape and all(
        mine[name].tobytes() == other[name].tobytes() for name in mine.dtype.names or ()
    )


def _check_codes(log: EventLog) -> None:
    """Look through each table once, a block at a time, so that a block is read from memory only once."""
    meta = log.meta
    limits = {"session": len(meta.dates), "symbol": len(meta.symbols), "leg": len(meta.legs)}
    for name in LAYOUTS:
        table = getattr(log, name)
        fields = [field for field in limits if field in table.dtype.names]
        for start in range(0, table.size, _BLOCK_ROWS):
            for field in fields:
                codes = table[field][start : start + _BLOCK_ROWS]
                if codes.max() >= limits[field] or codes.min() < (NO_ROW if field == "leg" else -1):
                    raise ValueError(
                        f"the table `{name}` of a log names a {field} that its meta does not have"
                    )
