"""Nothing is made or lost, the same run is the same bytes, and order does not matter."""

from __future__ import annotations

from collections import Counter
from pathlib import Path
from typing import Any

import numpy as np
import pandas as pd
import pytest
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st

from hedgerow.errors import ReconcileError
from hedgerow.events.log import EventLog
from hedgerow.events.store import read_log, write_logs
from hedgerow.kernels import layout
from hedgerow.ledger.reconcile import reconcile
from hedgerow.market import Market, load_market
from oracle.bridge import walked
from oracle.words import Setting
from properties.accounts import COSTS, SHORT_BLEND, accounts
from properties.markets import SYMBOLS, wild_market, wild_markets
from properties.rules import Rule, rules

CALM = [HealthCheck.too_slow]
COLLAR: Rule = {
    "name": "Collar",
    "legs": {
        "call": {
            "sell": "call",
            "expiry": {"days": 7, "listed": "weekly"},
            "strike": {"from_spot": "1%", "snap": "up"},
        },
        "put": {"buy": "put", "expiry": {"with": "call"}, "strike": {"from_spot": "-4%", "snap": "down"}},
    },
}
PLENTY = Setting(cash=5_000_000.0, per_position=0.05, costs=COSTS)


@settings(max_examples=120, suppress_health_check=CALM)
@given(market=wild_markets(), rule=rules(), setting=accounts())
def test_random_logs_add_up(market: Market, rule: Rule, setting: Setting) -> None:
    """Cash, quantities, results, marks and equity of any rule on any market reconcile to the cent.

    Beside the package's own check: opening cash and all event cash, in whole cents, are the last day's cash.
    """
    log = walked(market, rule, setting, SHORT_BLEND)
    reconcile(log)
    cents = int(np.rint(log.events["cash"] * 100.0).sum())
    assert cents == round(float(log.days["cash"][-1]) * 100.0)
    assert np.isfinite(log.days["equity"]).all()
    assert len(log.days) == len(market.dates)


@settings(max_examples=60, suppress_health_check=CALM)
@given(market=wild_markets(), rule=rules(), setting=accounts())
def test_twice_is_the_same(market: Market, rule: Rule, setting: Setting) -> None:
    """Two walks of the same inputs give the same records, bit for bit."""
    assert walked(market, rule, setting, SHORT_BLEND).same_as(walked(market, rule, setting, SHORT_BLEND))


def test_twice_is_the_same_file(tmp_path: Path) -> None:
    """Two runs written to two files: the files are the same bytes, and read back to the same log."""
    market = wild_market(11, 110, 3)
    paths = [tmp_path / "one.parquet", tmp_path / "two.parquet"]
    for path in paths:
        write_logs(path, [walked(market, COLLAR, PLENTY, SHORT_BLEND)])
    assert paths[0].read_bytes() == paths[1].read_bytes()
    assert read_log(paths[0]).same_as(walked(market, COLLAR, PLENTY, SHORT_BLEND))


def frame_of(market: Market) -> pd.DataFrame:
    """The bars, dividends and splits of a market as one long frame, a symbol after the other."""
    parts = []
    for n, symbol in enumerate(market.symbols):
        columns: dict[str, Any] = {"symbol": symbol, "date": market.dates}
        for name in ("open", "high", "low", "close", "dividend", "split"):
            columns[name] = getattr(market, name)[:, n]
        parts.append(pd.DataFrame(columns).dropna())
    return pd.concat(parts, ignore_index=True)


def log_of(market: Market) -> EventLog:
    """The log of a collar on a market."""
    return walked(market, COLLAR, PLENTY, SHORT_BLEND)


@settings(max_examples=15, suppress_health_check=CALM)
@given(seed=st.integers(0, 1000), order=st.randoms(use_true_random=False))
def test_order_of_rows_and_symbols(seed: int, order: Any) -> None:
    """Rows of a frame in any order make the same market and the same log, bit for bit."""
    frame = frame_of(wild_market(seed, 110, 3))
    rows = list(range(len(frame)))
    order.shuffle(rows)
    straight, mixed = Market.from_frame(frame), Market.from_frame(frame.iloc[rows])
    assert straight.fingerprint == mixed.fingerprint
    assert log_of(straight).same_as(log_of(mixed))


def test_order_of_files(tmp_path: Path) -> None:
    """One long file, and a file a symbol written in either order, make the same market and the same log."""
    frame = frame_of(wild_market(11, 110, 3))
    symbols = sorted(set(frame["symbol"]))
    logs = []
    for number, names in enumerate((symbols, symbols[::-1])):
        folder = tmp_path / f"folder{number}" / "prices"
        folder.mkdir(parents=True)
        for name in names:
            rows = frame[frame["symbol"] == name].drop(columns=["symbol", "dividend", "split"])
            rows.to_csv(folder / f"{name}.csv", index=False)
        logs.append(log_of(load_market(folder.parent)))
    long = tmp_path / "long.csv"
    frame.drop(columns=["dividend", "split"]).to_csv(long, index=False)
    logs.append(log_of(load_market(long)))
    assert len(logs[0].events) > 100
    assert logs[0].same_as(logs[1])
    assert logs[0].same_as(logs[2])


def told(log: EventLog, names: dict[str, str]) -> Counter[tuple[Any, ...]]:
    """Every event of a log by the name of its symbol, without its place and its position's number."""
    fields = ["session", "kind", "leg", "reason", "quantity", "price", "cash", "strike", "expiry"]
    rows = log.events[fields].tolist()
    owners = [names[log.meta.symbols[n]] if n >= 0 else "" for n in log.events["symbol"]]
    return Counter((owner, *row) for owner, row in zip(owners, rows, strict=True))


def renamed(market: Market, names: dict[str, str]) -> Market:
    """The market with its symbols called otherwise, which puts them in another order."""
    frame = frame_of(market)
    return Market.from_frame(frame.assign(symbol=frame["symbol"].map(names)))


@settings(max_examples=15, suppress_health_check=CALM)
@given(seed=st.integers(0, 1000), rule=rules())
def test_names_of_symbols(seed: int, rule: Rule) -> None:
    """With cash enough for all, symbols under other names, so in another order, do exactly the same."""
    market = wild_market(seed, 110, 3)
    there = dict(zip(SYMBOLS[:3], ("ZINNIA", "ASTER", "MINT"), strict=True))
    back = {new: old for old, new in there.items()}
    same = {name: name for name in there}
    one = walked(renamed(market, same), rule, PLENTY, SHORT_BLEND)
    other = walked(renamed(market, there), rule, PLENTY, SHORT_BLEND)
    assert told(one, same) == told(other, back)


@pytest.mark.parametrize("table", ["events", "days"])
def test_a_lost_cent_is_found(table: str) -> None:
    """A negative control: one cent more in one event, or on one day, does not reconcile."""
    log = log_of(wild_market(11, 110, 3))
    reconcile(log)
    tables = {name: np.array(getattr(log, name)) for name in ("events", "terms", "days", "marks")}
    rows = np.flatnonzero(tables["events"]["kind"] == layout.KIND_LEG)
    place = rows[len(rows) // 2] if table == "events" else 60
    tables[table]["cash"][place] += 0.01
    with pytest.raises(ReconcileError):
        reconcile(EventLog(log.meta, **tables))
