"""Small markets made of arrays, and hypothesis strategies for random ones and for random rules."""

from __future__ import annotations

import datetime as dt
from collections.abc import Mapping, Sequence
from dataclasses import replace
from typing import Any

import numpy as np
from hypothesis import strategies as st

from hedgerow.market.sessions import sessions_between
from hedgerow.market.table import Market, Report, bar_range

EPOCH = dt.date(1970, 1, 1).toordinal()


def ordinals_from(first: str, count: int) -> np.ndarray:
    """The first `count` sessions of the calendar from a day on, as ordinals."""
    start = dt.date.fromisoformat(first).toordinal()
    return np.asarray(sessions_between(start, start + 2 * count + 20)[:count], np.int64)


def make_market(
    symbols: Sequence[str],
    ordinals: np.ndarray,
    close: np.ndarray,
    *,
    kinds: Mapping[str, str] | None = None,
    rate: float | np.ndarray = 0.0,
    reports: Sequence[Report] = (),
    source: str = "made up",
    **columns: np.ndarray,
) -> Market:
    """A market of closes (T, N); other columns default to the close, or to nothing happening."""
    order = np.argsort(np.array(symbols))
    close = np.asarray(close, float)
    hole = np.isnan(close)
    default = {
        "open": close,
        "high": np.fmax(columns.get("open", close), close),
        "low": np.fmin(columns.get("open", close), close),
        "volume": np.full(close.shape, np.nan),
        "dividend": np.zeros(close.shape),
        "special": np.zeros(close.shape),
        "split": np.ones(close.shape),
        "implied": np.full(close.shape, np.nan),
    }
    grids = {name: np.array(columns.get(name, values), float) for name, values in default.items()}
    for name in ("open", "high", "low"):
        grids[name][hole] = np.nan
    grids["close"] = close
    grids = {name: np.ascontiguousarray(values[:, order]) for name, values in grids.items()}
    first, last = bar_range(grids["close"])
    names = tuple(symbols[i] for i in order)
    place = {int(old): new for new, old in enumerate(order)}
    return Market(
        symbols=names,
        kinds=tuple((kinds or {}).get(name, "stock") for name in names),
        sectors=("",) * len(names),
        dates=(np.asarray(ordinals) - EPOCH).astype("datetime64[D]"),
        ordinals=np.asarray(ordinals, np.int64),
        rate=np.broadcast_to(np.asarray(rate, float), (len(ordinals),)).copy(),
        reports=tuple(sorted(r._replace(symbol_index=place[r.symbol_index]) for r in reports)),
        first_bar=first,
        last_bar=last,
        currency="USD",
        adjustment="none",
        source=source,
        findings=(),
        **grids,
    )


def one_stock(closes: Sequence[float], first: str = "2024-01-08", **columns: Any) -> Market:
    """A market of one stock, HILL, with closes on consecutive sessions."""
    ordinals = ordinals_from(first, len(closes))
    words = {k: columns.pop(k) for k in ("rate", "kinds", "reports") if k in columns}
    grids = {name: np.array(values, float)[:, None] for name, values in columns.items()}
    return make_market(["HILL"], ordinals, np.array(closes, float)[:, None], **words, **grids)


FIRST_DAYS = ("2003-12-15", "2006-08-01", "2008-05-05", "2012-09-04", "2019-11-04")
SYMBOLS = ("ASH", "ELM", "FIR", "OAK")
RATIOS = (2.0, 3.0, 1.5, 0.5)
SECTORS = ("", "wood", "wood", "stone")


def walk_of_prices(dice: np.random.Generator, sessions: int, symbols: int) -> tuple[np.ndarray, np.ndarray]:
    """Opens and closes (T, N) of stocks that wander and jump now and then, before splits and dividends."""
    daily = dice.uniform(0.006, 0.035, symbols)
    night = dice.normal(0.0, 0.5, (sessions, symbols)) * daily
    night += (dice.random((sessions, symbols)) < 0.02) * dice.normal(0.0, 5.0, (sessions, symbols)) * daily
    day = dice.normal(0.0, 0.8, (sessions, symbols)) * daily
    log = np.log(dice.uniform(6.0, 260.0, symbols)) + np.cumsum(night + day, axis=0)
    return np.exp(log - day), np.exp(log)


def actions_of(dice: np.random.Generator, close: np.ndarray) -> dict[str, np.ndarray]:
    """Splits, regular dividends and special ones, (T, N)."""
    sessions, symbols = close.shape
    out = {"split": np.ones(close.shape), "dividend": np.zeros(close.shape), "special": np.zeros(close.shape)}
    for n in range(symbols):
        if dice.random() < 0.4:
            out["split"][dice.integers(1, sessions), n] = dice.choice(RATIOS)
        if dice.random() < 0.6:
            start, gap = dice.integers(1, 30), int(dice.choice([21, 21, 63]))
            out["dividend"][start::gap, n] = 0.004 * gap / 21.0
        if dice.random() < 0.25:
            out["special"][dice.integers(1, sessions), n] = dice.choice([0.001, 0.02, 0.15])
    return out


def with_holes(dice: np.random.Generator, close: np.ndarray) -> None:
    """Take out single sessions, short runs, a late beginning or everything from some session on."""
    sessions, symbols = close.shape
    for n in range(symbols):
        if dice.random() < 0.3:
            close[dice.integers(0, sessions, 3), n] = np.nan
        if dice.random() < 0.3:
            start = dice.integers(0, sessions)
            close[start : start + dice.integers(2, 8), n] = np.nan
        if dice.random() < 0.15:
            close[: dice.integers(1, sessions // 3), n] = np.nan
        if dice.random() < 0.2:
            close[dice.integers(sessions // 2, sessions) :, n] = np.nan


def reports_of(dice: np.random.Generator, ordinals: np.ndarray, symbols: int) -> list[Report]:
    """A quarterly report for some symbols, each announced three weeks before."""
    out = []
    for n in range(symbols):
        if dice.random() < 0.4:
            for day in range(int(ordinals[0]) + int(dice.integers(5, 90)), int(ordinals[-1]), 91):
                out.append(
                    Report(n, day, day - 21, day + int(dice.integers(0, 2)), float(dice.normal(1.0, 0.3)))
                )
    return out


def wild_market(seed: int, sessions: int = 110, symbols: int = 2) -> Market:
    """A market in which everything happens: splits, dividends, holes, ends, reports, changing interest."""
    dice = np.random.default_rng(seed)
    ordinals = ordinals_from(str(dice.choice(FIRST_DAYS)), sessions)
    opens, closes = walk_of_prices(dice, sessions, symbols)
    acts = actions_of(dice, closes)
    paid = np.cumprod(1.0 - acts["dividend"] - acts["special"], axis=0) / np.cumprod(acts["split"], axis=0)
    before = np.vstack([np.ones(symbols), paid[:-1]]) / acts["split"] * closes
    opens, closes = np.round(opens * paid, 4).clip(0.05), np.round(closes * paid, 4).clip(0.05)
    acts["dividend"] = np.round(acts["dividend"] * before, 4)
    acts["special"] = np.round(acts["special"] * before, 4)
    spread = 1.0 + np.abs(dice.normal(0.0, 0.006, closes.shape))
    high = np.round(np.maximum(opens, closes) * spread, 4)
    low = np.round(np.minimum(opens, closes) / spread, 4).clip(0.01)
    with_holes(dice, closes)
    rate = 0.0 if dice.random() < 0.4 else np.round(dice.uniform(0.0, 0.06, sessions), 4)
    kinds = {name: "index" for name in SYMBOLS[:symbols] if dice.random() < 0.2}
    sectors = tuple(str(word) for word in dice.choice(SECTORS, symbols))
    market = make_market(
        SYMBOLS[:symbols],
        ordinals,
        closes,
        kinds=kinds,
        rate=rate,
        reports=reports_of(dice, ordinals, symbols),
        source=f"wild market {seed} of {sessions} sessions and {symbols} symbols",
        open=opens,
        high=high,
        low=low,
        **acts,
    )
    return replace(market, sectors=sectors)


def wild_markets(sessions: int = 110, most_symbols: int = 3) -> st.SearchStrategy[Market]:
    """Wild markets by seed and number of symbols."""
    return st.builds(wild_market, st.integers(0, 1 << 20), st.just(sessions), st.integers(1, most_symbols))
