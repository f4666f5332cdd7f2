"""Small price tables for tests: text, frames and folders, and what loading them says."""

from __future__ import annotations

from collections.abc import Mapping
from pathlib import Path
from typing import Any

import numpy as np
import pandas as pd
import pytest

from hedgerow.errors import DataError, Fault
from hedgerow.market import Finding, Market, load_market

HEADER = "symbol,date,open,high,low,close,volume\n"
ROWS = "ASH,2020-01-02,10,11,9,10.5,100\nASH,2020-01-03,10.5,11.5,10,11,200\n"
PRICES = HEADER + ROWS


def write(folder: Path, files: Mapping[str, str | bytes]) -> Path:
    """Write files into a folder, made with what lies between; return the folder."""
    for name, content in files.items():
        path = folder / name
        path.parent.mkdir(parents=True, exist_ok=True)
        path.write_bytes(content if isinstance(content, bytes) else content.encode("utf-8"))
    return folder


def faults_of(place: Any, **words: Any) -> tuple[Fault, ...]:
    """Every fault of a place that must be refused."""
    with pytest.raises(DataError) as caught:
        load_market(place, **words)
    assert caught.value.exit_code == 2
    return caught.value.faults


def told(faults: tuple[Fault, ...], folder: Path) -> list[str]:
    """Faults as sentences, the folder's own path left out."""
    return [str(fault).replace(f"{folder}/", "") for fault in faults]


def codes(market: Market) -> list[str]:
    """The codes of a market's findings, without the note that no adjustment is stated."""
    return [finding.code for finding in market.findings if finding.code != "adjustment-not-stated"]


def finding(market: Market, code: str) -> Finding:
    """The one finding of a code."""
    found = [each for each in market.findings if each.code == code]
    assert len(found) == 1, market.findings
    return found[0]


def sessions(count: int, first: str = "2015-01-05") -> np.ndarray:
    """So many weekdays from a Monday on, as datetime64[D]."""
    return np.busday_offset(np.datetime64(first), np.arange(count))


def walk_frame(symbols: str, count: int, seed: int = 7, first: str = "2015-01-05") -> pd.DataFrame:
    """A frame of random walks in whole cents, one letter a symbol; the range holds open and close."""
    random = np.random.default_rng(seed)
    frames = []
    for symbol in symbols:
        close = np.round(40.0 * np.exp(np.cumsum(random.normal(0.0, 0.012, count))), 2)
        opened = np.round(close * (1.0 + random.normal(0.0, 0.004, count)), 2)
        top, bottom = np.maximum(opened, close), np.minimum(opened, close)
        frames.append(
            pd.DataFrame(
                {
                    "symbol": symbol,
                    "date": sessions(count, first).astype("datetime64[s]"),
                    "open": opened,
                    "high": np.round(top + 0.2, 2),
                    "low": np.round(bottom - 0.2, 2),
                    "close": close,
                    "volume": random.integers(1_000, 90_000, count).astype(float),
                }
            )
        )
    return pd.concat(frames, ignore_index=True)


def flat_frame(closes: list[float], symbol: str = "ASH", first: str = "2015-01-05") -> pd.DataFrame:
    """A frame of one symbol whose bars are single points at the given closes."""
    close = np.array(closes, dtype=float)
    return pd.DataFrame(
        {
            "symbol": symbol,
            "date": sessions(len(close), first).astype("datetime64[s]"),
            "open": close,
            "high": close,
            "low": close,
            "close": close,
        }
    )


def same_content(one: Market, other: Market) -> bool:
    """Whether two markets hold the same content, by fingerprint and array by array."""
    grids = ("open", "high", "low", "close", "volume", "dividend", "special", "split", "rate", "implied")
    alike = all(np.array_equal(getattr(one, g), getattr(other, g), equal_nan=True) for g in grids)
    assert alike is (one.fingerprint == other.fingerprint)
    return alike and one.symbols == other.symbols
