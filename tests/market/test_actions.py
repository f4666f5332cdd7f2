"""Dividends and splits: where they are put, what is left out and told, and adjusted prices undone."""

from __future__ import annotations

from pathlib import Path

import numpy as np
import pandas as pd
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from hedgerow.market import Market, load_market
from hedgerow.market.adjust import later_splits, undo_dividends, undo_splits
from hedgerow.market.recover import REINVESTED
from price_tables import HEADER, PRICES, codes, faults_of, finding, sessions, told, walk_frame, write

WEEK = PRICES + "ASH,2020-01-06,11,12,10,11,1\nASH,2020-01-08,11,12,10,11,1\n"


def with_actions(folder: Path, dividends: str = "", splits: str = "", prices: str = WEEK) -> Market:
    """The market of a few sessions with the given lines of dividends and splits."""
    files = {"prices.csv": prices, "dataset.yaml": "adjustment: none\n"}
    if dividends:
        files["dividends.csv"] = "symbol,date,amount,kind\n" + dividends
    if splits:
        files["splits.csv"] = "symbol,date,ratio\n" + splits
    return load_market(write(folder, files))


def test_actions_stand_on_their_ex_dates(tmp_path: Path) -> None:
    """A regular and a special dividend on one day, and a split."""
    lines = "ASH,2020-01-03,0.25,\nASH,2020-01-03,3,special\nASH,2020-01-06,0.30,Regular\n"
    market = with_actions(tmp_path, lines, "ASH,2020-01-06,1.5\n")
    assert market.dividend[:, 0].tolist() == [0.0, 0.25, 0.30, 0.0]
    assert market.special[:, 0].tolist() == [0.0, 3.0, 0.0, 0.0]
    assert market.split[:, 0].tolist() == [1.0, 1.0, 1.5, 1.0]
    assert "action-moved" not in codes(market)


def test_an_action_on_a_day_without_a_price_moves_on(tmp_path: Path) -> None:
    """The 4th of January 2020 is a Saturday, the 7th has no row: both move to the next one."""
    market = with_actions(tmp_path, "ASH,2020-01-04,0.5,\n", "ASH,2020-01-07,2\n")
    assert market.dividend[:, 0].tolist() == [0.0, 0.0, 0.5, 0.0]
    assert market.split[:, 0].tolist() == [1.0, 1.0, 1.0, 2.0]
    told_of = finding(market, "action-moved")
    assert (told_of.severity, told_of.symbol, told_of.date) == ("warning", "ASH", "2020-01-04")
    assert (
        told_of.text == "1 split and 1 dividend on a day without a price, moved to the symbol's next session"
    )


def test_actions_outside_the_history_are_left_out(tmp_path: Path) -> None:
    """One before the first row, one after the last; each symbol has its own history."""
    prices = WEEK + "ELM,2020-01-06,5,6,4,5,1\n"
    lines = "ASH,2019-12-31,0.5,\nASH,2020-01-09,0.5,\nELM,2020-01-03,0.1,\nELM,2020-01-06,0.2,\n"
    market = with_actions(tmp_path, lines, prices=prices)
    assert market.dividend.sum() == 0.2
    outside = [f.text for f in market.findings if f.code == "action-outside"]
    assert outside == [
        "2 dividends outside the symbol's prices, left out",
        "1 dividend outside the symbol's prices, left out",
    ]


def test_repeated_and_several_dividends_of_a_day(tmp_path: Path) -> None:
    """A row repeated word for word counts once, two amounts of one kind add up; both are told."""
    lines = "ASH,2020-01-03,0.25,\nASH,2020-01-03,0.25,\nASH,2020-01-03,0.10,\n"
    market = with_actions(tmp_path, lines)
    assert market.dividend[1, 0] == pytest.approx(0.35, abs=1e-15)
    assert {"repeated-row", "dividends-added"} <= set(codes(market))


def test_rows_of_symbols_without_prices_are_left_out(tmp_path: Path) -> None:
    """The nearest symbol is named, be it in another case."""
    market = with_actions(tmp_path, "ash,2020-01-03,0.25,\nOAK,2020-01-03,0.25,\n")
    assert market.dividend.sum() == 0.0
    text = finding(market, "unknown-symbol").text
    assert text == "dividends.csv has rows of symbols without prices, left out: OAK, ash"
    market = with_actions(tmp_path, "ash,2020-01-03,0.25,\n")
    assert finding(market, "unknown-symbol").text.endswith("left out: ash; did you mean `ASH`?")


@pytest.mark.parametrize(
    ("lines", "sentence"),
    [
        ("ASH,2020-01-03,-0.1,\n", "dividends.csv:2: a dividend of -0.1; cash per share, above 0"),
        ("ASH,2020-01-03,0,\n", "dividends.csv:2: a dividend of 0; cash per share, above 0"),
        ("ASH,2020-01-03,,\n", "dividends.csv:2: the amount is missing; a number is wanted"),
        ("ASH,2020-01-03,x,\n", "dividends.csv:2: `x` stands in the column `amount`"),
        ("ASH,2020-01-33,1,\n", "dividends.csv:2: `2020-01-33` is no day of the calendar"),
        (
            "ASH,2020-01-03,1,speical\n",
            "dividends.csv:2: `speical` is no kind of dividend; `regular` or `special`",
        ),
        (",2020-01-03,1,\n", "dividends.csv:2: the symbol is empty"),
    ],
)
def test_dividends_that_are_refused(tmp_path: Path, lines: str, sentence: str) -> None:
    """One fault each, its line counted by hand."""
    files = {"prices.csv": WEEK, "dividends.csv": "symbol,date,amount,kind\n" + lines}
    found = told(faults_of(write(tmp_path, files)), tmp_path)
    assert len(found) == 1
    assert found[0].startswith(sentence)


@pytest.mark.parametrize(
    ("lines", "sentence"),
    [
        ("ASH,2020-01-03,0\n", "splits.csv:2: a split ratio of 0; new shares for one old, above 0"),
        ("ASH,2020-01-03,-2\n", "splits.csv:2: a split ratio of -2"),
        (
            "ASH,2020-01-03,3:2\n",
            "splits.csv:2: `3:2` stands in the column `ratio`; a ratio is one number: new",
        ),
        (
            "ASH,2020-01-03,2\nASH,2020-01-03,3\n",
            "splits.csv: ASH has two splits on 2020-01-03; a symbol has one",
        ),
    ],
)
def test_splits_that_are_refused(tmp_path: Path, lines: str, sentence: str) -> None:
    """One fault each."""
    files = {"prices.csv": WEEK, "splits.csv": "symbol,date,ratio\n" + lines}
    found = told(faults_of(write(tmp_path, files)), tmp_path)
    assert len(found) == 1
    assert found[0].startswith(sentence)


def test_actions_in_columns_of_the_prices(tmp_path: Path) -> None:
    """Empty, 0 and a ratio of 1 mean none; the dividend of a row that is dropped moves on."""
    header = "symbol,date,open,high,low,close,Dividends,Stock Splits\n"
    rows = "ASH,2020-01-02,10,11,9,10,0,0\nASH,2020-01-03,0,11,9,10,0.25,\nASH,2020-01-06,5,6,4,5,,2\n"
    market = load_market(write(tmp_path, {"prices.csv": header + rows}), adjustment="none")
    assert market.dividend[:, 0].tolist() == [0.0, 0.25]
    assert market.split[:, 0].tolist() == [1.0, 2.0]
    assert codes(market) == ["action-moved", "price-not-positive"]
    wrong = rows.replace("0.25,", "-1,-2")
    assert told(faults_of(write(tmp_path, {"prices.csv": header + wrong})), tmp_path) == [
        "prices.csv:3: a dividend of -1; cash per share, above 0; leave the cell empty for none",
        "prices.csv:3: a split ratio of -2; new shares for one old, above 0; 2 is two for one, "
        "0.1 one for ten",
    ]


def test_one_thing_in_two_places_is_refused(tmp_path: Path) -> None:
    """Dividends as a column and as a table would count twice; a split beside them is no conflict."""
    text = HEADER.replace("volume", "dividend") + "ASH,2020-01-02,10,11,9,10,0.5\n"
    files = {"prices.csv": text, "dividends.csv": "symbol,date,amount\nASH,2020-01-02,0.5\n"}
    assert [fault.code for fault in faults_of(write(tmp_path / "a", files))] == ["two-places"]
    files = {"prices.csv": text, "splits.csv": "symbol,date,ratio\nASH,2020-01-02,2\n"}
    assert load_market(write(tmp_path / "b", files)).split[0, 0] == 2.0


def test_later_splits_is_what_prices_were_divided_by() -> None:
    """Two for one, then three for one: six before the first, three until the second, then one."""
    split = np.array([[1.0], [1.0], [2.0], [1.0], [3.0], [1.0]])
    assert later_splits(split)[:, 0].tolist() == [6.0, 6.0, 3.0, 3.0, 1.0, 1.0]
    assert undo_splits(np.full((6, 1), 10.0), split)[:, 0].tolist() == [60.0, 60.0, 30.0, 30.0, 10.0, 10.0]


def test_a_dividend_undone_by_hand() -> None:
    """Closes 100, 98, 99 with 2.00 paid at the second: both ways of reinvesting wrote 98 for the 100.

    At the close before it is 100 (1 - 2 / 100), at the ex-date's close 100 x 98 / (98 + 2).
    """
    paid, split = np.array([[0.0], [2.0], [0.0]]), np.ones((3, 1))
    adjusted = np.array([[98.0], [98.0], [99.0]])
    for reinvested in REINVESTED:
        factor = undo_dividends(adjusted, paid, split, reinvested)
        np.testing.assert_allclose((adjusted / factor)[:, 0], [100.0, 98.0, 99.0], rtol=1e-15)


def adjusted_closes(raw: np.ndarray, paid: np.ndarray, split: np.ndarray, reinvested: str) -> np.ndarray:
    """Closes adjusted for splits and dividends, written out backward step by step, as vendors describe it."""
    factor = np.ones(len(raw))
    for bar in range(len(raw) - 1, 0, -1):
        step = 1.0 / split[bar]
        if reinvested == "close before":
            step *= 1.0 - paid[bar] * split[bar] / raw[bar - 1]
        else:
            step *= raw[bar] / (raw[bar] + paid[bar])
        factor[bar - 1] = factor[bar] * step
    return raw * factor


ACTIONS = st.lists(
    st.tuples(
        st.integers(0, 59),
        st.sampled_from([0.0, 0.0, 0.12, 0.5, 1.75]),
        st.sampled_from([1.0, 1.0, 2.0, 3.0, 1.5, 0.1]),
    ),
    max_size=8,
    unique_by=lambda action: action[0],
)


@given(ACTIONS, st.sampled_from(REINVESTED), st.integers(0, 40), st.booleans())
@settings(max_examples=60)
def test_adjusting_and_undoing_is_a_round_trip(
    actions: list[tuple[int, float, float]], reinvested: str, start: int, split_adjusted: bool
) -> None:
    """Property: prices adjusted by a plain loop are loaded as they traded.

    Two symbols with other actions, one of which begins later; dividends as paid, or in today's shares.
    """
    days = sessions(60).astype("datetime64[s]")
    frame, raw = walk_frame("AB", 60), {}
    tables: dict[str, list[tuple[str, np.datetime64, float]]] = {"dividends": [], "splits": []}
    for symbol, shift in (("A", 0), ("B", 7)):
        mine = frame["symbol"] == symbol
        raw[symbol] = frame.loc[mine, "close"].to_numpy()
        paid, split = np.zeros(60), np.ones(60)
        for bar, cash, ratio in actions:
            paid[(bar + shift) % 60], split[(bar + shift) % 60] = cash, ratio
        if symbol == "B":
            paid[:start], split[:start] = 0.0, 1.0
        written = adjusted_closes(raw[symbol], paid, split, reinvested)
        for name in ("open", "high", "low", "close"):
            frame.loc[mine, name] = frame.loc[mine, name].to_numpy() * written / raw[symbol]
        later = later_splits(split[:, None])[:, 0]
        amounts = paid / later if split_adjusted else paid
        tables["dividends"] += [(symbol, days[i], amounts[i]) for i in np.flatnonzero(paid)]
        tables["splits"] += [(symbol, days[i], split[i]) for i in np.flatnonzero(split != 1.0)]
        frame.loc[mine, "volume"] *= later
    columns = {"dividends": ["symbol", "date", "amount"], "splits": ["symbol", "date", "ratio"]}
    frames = {n: pd.DataFrame(t, columns=columns[n]) for n, t in tables.items() if t}
    market = Market.from_frame(
        frame[(frame["symbol"] == "A") | (frame["date"] >= days[start])],
        adjustment="splits and dividends" if tables["dividends"] else "splits",
        reinvested=reinvested,
        amounts="split adjusted" if split_adjusted else "as paid",
        **frames,
    )
    np.testing.assert_allclose(market.close[:, 0], raw["A"], rtol=1e-12)
    np.testing.assert_allclose(market.close[start:, 1], raw["B"][start:], rtol=1e-12)
