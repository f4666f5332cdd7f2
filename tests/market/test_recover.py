"""Dividends and splits read off a raw and an adjusted close: published ones, and made-up ones again."""

from __future__ import annotations

import numpy as np
import pandas as pd
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from hedgerow.errors import DataError
from hedgerow.market import Market
from hedgerow.market.recover import REINVESTED, convention, dividends, shortest_decimal, steps_of
from hedgerow.market.recovery import special_part
from hedgerow.market.samples import stocks
from price_tables import codes, finding, flat_frame, walk_frame


@pytest.fixture(scope="module")
def real() -> Market:
    """Five US stocks, 2000 to 2013, recovered."""
    return stocks()


def on(market: Market, symbol: str, grid: str) -> dict[str, float]:
    """What a symbol has in a grid of dividends, by ISO date."""
    column = getattr(market, grid)[:, market.index_of(symbol)]
    return {str(market.dates[row]): float(column[row]) for row in np.flatnonzero(column)}


@pytest.mark.parametrize(
    ("symbol", "splits"),
    [
        ("AAPL", {"2000-06-21": 2.0, "2005-02-28": 2.0}),  # Apple's split history, from memory
        ("MSFT", {"2003-02-18": 2.0}),  # Microsoft's, from memory
        ("IBM", {}),  # last split in May 1999, from memory
        ("GOOG", {}),
        ("FB", {}),
    ],
)
def test_the_splits_of_real_stocks(real: Market, symbol: str, splits: dict[str, float]) -> None:
    """The companies' own records (source beside each)."""
    column = real.split[:, real.index_of(symbol)]
    found = {str(real.dates[row]): float(column[row]) for row in np.flatnonzero(column != 1.0)}
    assert found == splits


def test_the_dividends_of_ibm(real: Market) -> None:
    """52 quarterly dividends; amounts from memory of IBM's dividend history, a change each spring."""
    paid = on(real, "IBM", "dividend")
    assert len(paid) == 52
    springs = {year: paid[day] for year in range(2000, 2013) for day in paid if day.startswith(f"{year}-05")}
    assert list(springs.values()) == [
        0.13, 0.14, 0.15, 0.16, 0.18, 0.20, 0.30, 0.40, 0.50, 0.55, 0.65, 0.75, 0.85
    ]  # fmt: skip
    assert on(real, "IBM", "special") == {}


def test_the_dividends_of_microsoft(real: Market) -> None:
    """Microsoft's dividend history, from memory: 0.08 in 2003, its first; 3.00 special on 2004-11-15."""
    regular = on(real, "MSFT", "dividend")
    assert on(real, "MSFT", "special") == {"2004-11-15": 3.0}
    assert regular["2003-02-19"] == 0.08
    assert regular["2003-10-15"] == 0.16
    assert regular["2004-11-15"] == 0.08
    assert regular["2013-02-19"] == 0.23
    assert min(regular) == "2003-02-19"


def test_the_dividends_of_apple(real: Market) -> None:
    """Apple's dividend history, from memory: 2.65 a quarter from August 2012, the first since 1995."""
    assert on(real, "AAPL", "dividend") == {"2012-08-09": 2.65, "2012-11-07": 2.65, "2013-02-07": 2.65}
    assert on(real, "GOOG", "dividend") == on(real, "FB", "dividend") == {}


def test_what_was_recovered_is_told(real: Market) -> None:
    """One note a symbol, one for the special dividend, and nothing that could not be explained."""
    told = {f.symbol: f.text for f in real.findings if f.code == "recovered"}
    assert told["IBM"].startswith("52 dividends recovered from the adjusted close")
    assert told["AAPL"].startswith("3 dividends, 2 splits recovered")
    assert "ex-date close" in told["MSFT"]
    assert finding(real, "special-recovered").date == "2004-11-15"
    assert not {"recovery-drift", "unrecorded-split", "split-unseen"} & set(codes(real))


def adjusted(close: np.ndarray, paid: np.ndarray, split: np.ndarray, reinvested: str) -> np.ndarray:
    """The adjusted close of a raw one, step by step from the end, in full precision."""
    out = close.copy()
    factor = 1.0
    for bar in range(len(close) - 1, 0, -1):
        if reinvested == REINVESTED[0]:
            factor *= 1.0 / split[bar] - paid[bar] / close[bar - 1]
        else:
            factor *= close[bar] / (split[bar] * (close[bar] + paid[bar]))
        out[bar - 1] = close[bar - 1] * factor
    return out


def made_up(seed: int) -> tuple[np.ndarray, np.ndarray, np.ndarray]:
    """Closes in cents over eight years with quarterly dividends and two splits that the price shows."""
    random = np.random.default_rng(seed)
    count = 2016
    paid, split = np.zeros(count), np.ones(count)
    paid[63::63] = np.round(random.uniform(0.05, 0.6, len(paid[63::63])), 2)
    split[[500, 1400]] = random.choice([2.0, 3.0, 1.5, 4.0], 2)
    moves = np.exp(np.cumsum(random.normal(0.0002, 0.015, count))) / np.cumprod(split)
    return np.round(400.0 * moves, 2), paid, split


@given(st.integers(0, 10**6), st.sampled_from(REINVESTED), st.sampled_from([4, 6, 8]))
@settings(max_examples=30)
def test_made_up_actions_are_found_again(seed: int, reinvested: str, decimals: int) -> None:
    """Property: exact dates, exact splits, amounts to the cent, and how dividends were reinvested.

    Four decimals of prices above 10 leave at most 0.0002 of a dividend open, far below half a cent.
    """
    close, paid, split = made_up(seed)
    steps = steps_of(close, np.round(adjusted(close, paid, split, reinvested), decimals))
    acts = np.flatnonzero((paid != 0.0) | (split != 1.0))
    assert steps.bar.tolist() == acts.tolist()
    assert steps.split.tolist() == split[acts].tolist()
    assert convention([steps]) == reinvested
    assert dividends(steps, reinvested).tolist() == paid[acts].tolist()
    assert len(steps.crooked) == 0


@given(st.integers(0, 10**6))
@settings(max_examples=20)
def test_tables_that_went_through_32_bits(seed: int) -> None:
    """Property: closes rounded to single precision, as many tables are, give no dividends that never were."""
    close, paid, split = made_up(seed)
    after = adjusted(close, paid, split, REINVESTED[0])
    steps = steps_of(close.astype(np.float32).astype(float), after.astype(np.float32).astype(float))
    acts = np.flatnonzero((paid != 0.0) | (split != 1.0))
    assert steps.bar.tolist() == acts.tolist()
    np.testing.assert_allclose(dividends(steps, REINVESTED[0]), paid[acts], atol=0.001)


def test_prices_in_sixteenths_written_in_cents() -> None:
    """Before 2001 US prices moved in sixteenths: 130.3125 stands as 130.31, which is no dividend."""
    random = np.random.default_rng(3)
    close = np.round(np.exp(np.cumsum(random.normal(0.0, 0.02, 600))) * 80.0 * 16.0) / 16.0
    paid, split = np.zeros(600), np.ones(600)
    paid[[100, 200, 300, 400, 500]] = 0.5
    steps = steps_of(np.round(close, 2), np.round(adjusted(close, paid, split, REINVESTED[0]), 6))
    assert steps.bar.tolist() == [100, 200, 300, 400, 500]
    np.testing.assert_allclose(dividends(steps, REINVESTED[0]), 0.5, atol=0.01)


def test_an_adjusted_close_of_something_else_gives_nothing() -> None:
    """A column that is no adjusted close (its ratio moves every day) is told, and nothing is made of it."""
    frame = walk_frame("A", 300)
    frame["adj close"] = frame["close"] * np.random.default_rng(1).uniform(0.9, 1.1, 300)
    market = Market.from_frame(frame, adjustment="none", recover={})
    assert market.dividend.sum() == market.special.sum() == 0.0
    assert (market.split == 1.0).all()
    assert finding(market, "recovery-drift").severity == "warning"


def test_a_fall_is_no_split() -> None:
    """The ratio of adjusted to raw close steps, by a split; a fall by half without a step is none."""
    frame = flat_frame([40.0] * 10 + [20.0] * 10)
    fell = Market.from_frame(frame.assign(**{"Adj Close": frame["close"]}), adjustment="none", recover={})
    assert (fell.split == 1.0).all()
    halved = frame.assign(**{"Adj Close": 20.0})
    assert Market.from_frame(halved, adjustment="none", recover={}).split[10, 0] == 2.0


def test_a_large_dividend_is_no_split() -> None:
    """Half of the price paid out steps the ratio like a split; with the price unmoved it is a dividend."""
    frame = flat_frame([40.0] * 20)
    after = frame.assign(**{"Adj Close": [20.0] * 10 + [40.0] * 10})
    market = Market.from_frame(after, adjustment="none", recover={}, reinvested="close before")
    assert (market.split == 1.0).all()
    assert market.dividend[10, 0] == 20.0


def test_what_is_not_wanted_is_not_recovered() -> None:
    """Splits alone, dividends alone with the splits given, and a table beside a recovery of the same."""
    frame = flat_frame([80.0] * 10 + [40.0] * 10 + [39.5] * 10)
    after = frame.assign(adjusted_close=[39.5] * 10 + [39.5] * 10 + [39.5] * 10)
    splits = pd.DataFrame({"symbol": ["ASH"], "date": [frame["date"][10]], "ratio": [2.0]})
    alone = Market.from_frame(after, adjustment="none", recover={"dividends": False})
    assert (alone.split[10, 0], alone.dividend.sum()) == (2.0, 0.0)
    given_splits = Market.from_frame(after, adjustment="none", recover={"splits": False}, splits=splits)
    assert (given_splits.split[10, 0], given_splits.dividend[20, 0]) == (2.0, 0.5)
    with pytest.raises(DataError, match="or say `splits: false` or"):
        Market.from_frame(after, adjustment="none", recover={}, splits=splits)


def test_a_recovery_without_its_column_is_refused() -> None:
    """No adjusted close at all, and one that is named but is not there."""
    frame = flat_frame([10.0] * 5)
    with pytest.raises(DataError, match="there is no adjusted close to recover from"):
        Market.from_frame(frame, recover={})
    with pytest.raises(DataError, match="the column `Adjusted` that"):
        Market.from_frame(frame, recover={"adjusted_close": "Adjusted"})
    with pytest.raises(DataError, match="recovery needs the close as traded"):
        Market.from_frame(frame.assign(adj_close=1.0), recover={}, adjustment="splits")


def test_bars_without_an_adjusted_close_are_told() -> None:
    """Nothing is recovered over a hole; what lies on both sides of it is."""
    frame = flat_frame([40.0] * 30)
    column = np.where(np.arange(30) < 20, 39.0, 40.0)
    column[5:8] = np.nan
    market = Market.from_frame(frame.assign(adj_close=column), adjustment="none", recover={})
    assert market.dividend[20, 0] == 1.0
    assert finding(market, "no-adjusted-close").text.startswith("3 sessions without an adjusted close")


@pytest.mark.parametrize(
    ("low", "high", "amount"),
    [
        (0.2496, 0.2502, 0.25),
        (0.12497, 0.12503, 0.125),
        (0.0, 0.0004, 0.0),
        (-0.3, 0.3, 0.0),
        (2.99996, 3.00004, 3.0),
        (0.07, 0.09, 0.08),
    ],
)
def test_the_shortest_decimal_that_fits(low: float, high: float, amount: float) -> None:
    """Worked by hand: the fewest decimals near the middle, nothing where nothing fits."""
    assert shortest_decimal(low, high) == amount


def test_the_special_part_of_dividends() -> None:
    """Over five times the usual and over 2 % of the price; the first one of all is taken as usual."""
    before = np.full(6, 30.0)
    paid = np.array([0.08, 0.08, 3.08, 0.08, 0.50, 0.0])
    assert special_part(paid, before).tolist() == [0.0, 0.0, 3.0, 0.0, 0.0, 0.0]
    assert special_part(np.array([5.0, 5.0]), before[:2]).tolist() == [0.0, 0.0]
