"""The same content is the same market: in whatever order and layout it comes (property tests)."""

from __future__ import annotations

import tempfile
from pathlib import Path

import numpy as np
import pandas as pd
from hypothesis import given, settings
from hypothesis import strategies as st

from hedgerow.market import Market, load_market
from price_tables import same_content, walk_frame

FRAME = walk_frame("ABCD", 40)
DAYS = FRAME["date"].unique()
SPLITS = pd.DataFrame({"symbol": ["A", "C", "D"], "date": DAYS[[12, 20, 33]], "ratio": [2.0, 3.0, 1.5]})
DIVIDENDS = pd.DataFrame({"symbol": ["B", "A", "D"], "date": DAYS[[5, 25, 30]], "amount": [0.1, 0.2, 0.3]})
REPORTS = pd.DataFrame({"symbol": ["D", "A", "B"], "date": DAYS[[9, 3, 35]], "eps": [0.3, 0.1, 0.2]})
RATES = pd.DataFrame({"date": DAYS[[0, 15, 22]], "rate": [0.01, 0.02, 0.015]})
EXTRAS = {"splits": SPLITS, "dividends": DIVIDENDS, "reports": REPORTS, "rates": RATES}
WORDS = {"symbols": {"A": {"kind": "index"}, "D": {"sector": "Timber"}}, "adjustment": "none"}
WHOLE = Market.from_frame(FRAME, **WORDS, **EXTRAS)
SEEDS = st.integers(0, 2**32 - 1)


def shuffled(frame: pd.DataFrame, seed: int, columns: bool = True) -> pd.DataFrame:
    """A frame with its rows, and its columns, in another order."""
    mixed = frame.sample(frac=1.0, random_state=np.random.default_rng(seed)).reset_index(drop=True)
    order = np.random.default_rng(seed).permutation(frame.shape[1]) if columns else range(frame.shape[1])
    return mixed.iloc[:, list(order)]


@given(SEEDS)
@settings(max_examples=40)
def test_the_order_of_rows_and_columns_does_not_matter(seed: int) -> None:
    """Property: every table shuffled by rows and by columns is the same market."""
    extras = {name: shuffled(table, seed + place) for place, (name, table) in enumerate(EXTRAS.items())}
    assert same_content(Market.from_frame(shuffled(FRAME, seed), **WORDS, **extras), WHOLE)


@given(SEEDS, st.booleans(), st.booleans())
@settings(max_examples=25)
def test_the_layout_in_files_does_not_matter(seed: int, parquet: bool, each: bool) -> None:
    """Property: a file a symbol or one long one, CSV or Parquet, is the same market."""
    with tempfile.TemporaryDirectory() as name:
        folder = Path(name)
        parts = {"prices": FRAME}
        if each:
            (folder / "prices").mkdir()
            parts = {f"prices/{symbol}": part for symbol, part in FRAME.groupby("symbol")}
        for stem, table in (parts | EXTRAS).items():
            mixed = shuffled(table, seed)
            if parquet:
                mixed.to_parquet(folder / f"{stem}.parquet")
            else:
                mixed.to_csv(folder / f"{stem}.csv", index=False)
        assert same_content(load_market(folder, **WORDS), WHOLE)


@given(st.permutations(["A", "B", "C", "D"]))
def test_renaming_symbols_carries_everything_with_them(names: list[str]) -> None:
    """Property: other names mean another alphabetical order, and every symbol keeps what is its own."""
    new = dict(zip("ABCD", names, strict=True))
    tables = {
        name: table.assign(symbol=table["symbol"].map(new)) if "symbol" in table else table
        for name, table in EXTRAS.items()
    }
    words = {"adjustment": "none", "symbols": {new[s]: known for s, known in WORDS["symbols"].items()}}
    market = Market.from_frame(FRAME.assign(symbol=FRAME["symbol"].map(new)), **words, **tables)
    for old, name in new.items():
        i, j = WHOLE.index_of(old), market.index_of(name)
        for grid in ("close", "split", "dividend"):
            np.testing.assert_array_equal(getattr(market, grid)[:, j], getattr(WHOLE, grid)[:, i])
        assert (market.kinds[j], market.sectors[j]) == (WHOLE.kinds[i], WHOLE.sectors[i])
        mine = [report[1:] for report in market.reports if report.symbol_index == j]
        assert mine == [report[1:] for report in WHOLE.reports if report.symbol_index == i]


@given(st.integers(1, 39))
@settings(max_examples=20)
def test_loading_a_shorter_table_is_cutting_the_longer_one(last: int) -> None:
    """Property: rows up to a day, loaded, hold what `until` that day holds."""
    day = DAYS[last]
    tables = {name: table[table["date"] <= day] for name, table in EXTRAS.items() if name != "reports"}
    short = Market.from_frame(FRAME[FRAME["date"] <= day], **WORDS, **tables)
    cut = Market.from_frame(FRAME, **WORDS, **{name: EXTRAS[name] for name in tables}).until(day)
    assert same_content(short, cut)


@given(st.lists(st.tuples(st.sampled_from("ABCD"), st.integers(0, 39)), max_size=20, unique=True))
@settings(max_examples=40)
def test_rows_left_out_are_holes_and_nothing_else(holes: list[tuple[str, int]]) -> None:
    """Property: the bars that are left are untouched, on the sessions that are left."""
    keys = set(holes)
    at = {day: session for session, day in enumerate(DAYS)}
    kept = [(s, at[d]) not in keys for s, d in zip(FRAME["symbol"], FRAME["date"], strict=True)]
    market = Market.from_frame(FRAME[kept], adjustment="none")
    whole = Market.from_frame(FRAME, adjustment="none")
    wanted = whole.close.copy()
    for symbol, session in holes:
        wanted[session, whole.index_of(symbol)] = np.nan
    np.testing.assert_array_equal(market.close, wanted[~np.isnan(wanted).all(axis=1)])
