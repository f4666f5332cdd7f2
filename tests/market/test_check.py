"""Findings: each one is raised by what it is about, and not by what only looks like it."""

from __future__ import annotations

from pathlib import Path

import numpy as np
import pandas as pd
import pytest

from hedgerow.kernels.day import LONGEST_SILENCE
from hedgerow.market import Market, load_market
from hedgerow.market.check import SILENCE_SESSIONS, last_close
from price_tables import HEADER, codes, finding, flat_frame, sessions, walk_frame, write


def market_of(rows: str, folder: Path) -> Market:
    """A market of CSV rows."""
    return load_market(write(folder, {"prices.csv": HEADER + rows}), adjustment="none")


def test_a_clean_market_has_no_finding() -> None:
    """Four random walks over three years of US weekdays, one of which ended: nothing to say."""
    frame = walk_frame("ABCD", 700)
    frame = frame[(frame["symbol"] != "D") | (frame["date"] < "2016-01-01")]
    assert Market.from_frame(frame, adjustment="none", calendar="own").findings == ()


@pytest.mark.parametrize(
    ("row", "code", "text"),
    [
        ("0,11,9,10.5,1", "price-not-positive", "1 row with a price of 0 or less, dropped"),
        ("10,11,-9,10.5,1", "price-not-positive", "1 row with a price of 0 or less, dropped"),
        ("10,9,11,10.5,1", "high-below-low", "1 row with the high below the low, dropped"),
        ("10,11,9,,1", "missing-price", "1 row without some price, dropped"),
        (",,,,", "no-prices", "1 row without any price, dropped"),
        (
            "12,11,9,10,1",
            "outside-range",
            "1 row with an open or close more than 1% outside the day's low and high",
        ),
        (
            "10,11,9,8.9,1",
            "outside-range",
            "1 row with an open or close more than 1% outside the day's low and high",
        ),
    ],
)
def test_rows_that_cannot_be_used_are_dropped(tmp_path: Path, row: str, code: str, text: str) -> None:
    """The bar is gone, its neighbours are not, and the day is named."""
    rows = f"ASH,2020-01-02,10,11,9,10,1\nASH,2020-01-03,{row}\nASH,2020-01-06,10,11,9,10,1\n"
    market = market_of(rows, tmp_path)
    assert [str(day) for day in market.dates] == ["2020-01-02", "2020-01-06"]
    found = finding(market, code)
    assert (found.symbol, found.date) == ("ASH", "2020-01-03")
    assert found.text.startswith(text)


@pytest.mark.parametrize(
    ("row", "high", "low"),
    [("11.05,11,9,10,1", 11.05, 9.0), ("10,11,9,8.95,1", 11.0, 8.95), ("10,10,10,10.05,1", 10.05, 10.0)],
)
def test_a_range_just_too_narrow_is_widened(tmp_path: Path, row: str, high: float, low: float) -> None:
    """Within 1 % the open and close are believed; the change is a warning."""
    market = market_of(f"ASH,2020-01-03,{row}\n", tmp_path)
    assert (market.high[0, 0], market.low[0, 0]) == (high, low)
    assert finding(market, "range-widened").severity == "warning"


def test_volumes_below_nothing_are_unknown(tmp_path: Path) -> None:
    """-5 shares are taken as unknown, 0 as 0."""
    market = market_of("ASH,2020-01-02,10,11,9,10,-5\nASH,2020-01-03,10,11,9,10,0\n", tmp_path)
    assert np.isnan(market.volume[0, 0])
    assert market.volume[1, 0] == 0.0
    assert codes(market) == ["volume-impossible"]


def test_repeated_and_unsorted_rows_are_told(tmp_path: Path) -> None:
    """A row twice word for word, even with an empty volume; dates that descend."""
    row = "ASH,2020-01-03,10,11,9,10,\n"
    market = market_of(row + "ASH,2020-01-02,10,11,9,10,1\n" + row, tmp_path)
    assert market.shape == (2, 1)
    assert finding(market, "repeated-row").text == "1 row repeated word for word; each was kept once"
    assert finding(market, "unsorted").text == "the dates of prices.csv do not ascend; the rows were sorted"


def test_a_file_without_rows_among_others_is_left_out(tmp_path: Path) -> None:
    """One symbol whose file holds only the names."""
    files = {"prices/ASH.csv": HEADER + "ASH,2020-01-02,10,11,9,10,1\n", "prices/ELM.csv": HEADER}
    market = load_market(write(tmp_path, files), adjustment="none")
    assert market.symbols == ("ASH",)
    assert finding(market, "empty-symbol").text == "ELM.csv has no row; the symbol is left out"


def test_sessions_missing_against_the_others() -> None:
    """B misses two sessions in its middle; not having begun, or having ended, is not missing."""
    frame = walk_frame("ABCD", 50)
    days = frame["date"].unique()
    hole = (frame["symbol"] == "B") & frame["date"].isin(days[[20, 30]])
    late = (frame["symbol"] == "C") & (frame["date"] < days[10])
    over = (frame["symbol"] == "D") & (frame["date"] > days[40])
    market = Market.from_frame(frame[~hole & ~late & ~over], adjustment="none", calendar="own")
    assert codes(market) == ["missing-session"]
    found = finding(market, "missing-session")
    assert (found.symbol, found.date) == ("B", str(days[20])[:10])
    assert found.text == "2 sessions missing that most others have"


def test_sessions_that_only_few_have() -> None:
    """One symbol of four has a Saturday."""
    frame = walk_frame("ABCD", 50)
    extra = frame[frame["symbol"] == "A"].iloc[[10]].assign(date=pd.Timestamp("2015-01-24"))
    market = Market.from_frame(pd.concat([frame, extra]), adjustment="none", calendar="own")
    found = finding(market, "extra-session")
    assert found.date == "2015-01-24"
    assert found.text.endswith("on which at most half of the symbols have a price: 2015-01-24")


def test_the_us_calendar_is_tried_where_it_fits() -> None:
    """NYSE closings of January to July 2015 (NYSE group calendar); plain weekdays hold them all.

    Over half a year five of 130 weekdays are too many to fit unasked; asked for, they are told. Without the
    holidays, one missing day and one Saturday are told unasked.
    """
    holidays = ["2015-01-19", "2015-02-16", "2015-04-03", "2015-05-25", "2015-07-03"]
    frame = walk_frame("A", 130)
    assert codes(Market.from_frame(frame, adjustment="none")) == []
    asked = Market.from_frame(frame, adjustment="none", calendar="us")
    assert finding(asked, "extra-session").text == (
        "5 sessions extra against the US calendar: 2015-01-19, 2015-02-16, 2015-04-03 and 2 more"
    )
    wrong = frame[~frame["date"].isin(pd.to_datetime([*holidays, "2015-03-10"]))]
    saturday = frame.iloc[[50]].assign(date=pd.Timestamp("2015-03-14"))
    off = pd.concat([wrong, saturday]).sort_values("date")
    market = Market.from_frame(off, adjustment="none")
    assert finding(market, "missing-session").text == "1 session missing against the US calendar: 2015-03-10"
    assert finding(market, "extra-session").date == "2015-03-14"
    assert codes(Market.from_frame(off, adjustment="none", calendar="own")) == []


def test_prices_that_stand_still() -> None:
    """Five equal bars, or eleven equal closes, are a run; four and ten are none."""
    steps = [10.0 + n for n in range(8)]
    still = Market.from_frame(flat_frame([*steps, 20.0, 20.0, 20.0, 20.0, 20.0, 21.0]), adjustment="none")
    assert finding(still, "stale-run").text == "1 run of a price that stands still; the longest is 5 sessions"
    assert codes(Market.from_frame(flat_frame([*steps, *[20.0] * 4, 21.0]), adjustment="none")) == []
    for count, found in ((10, []), (11, ["stale-run"])):
        frame = flat_frame([*steps, *[20.0] * count, 21.0])
        frame["high"] = frame["close"] + np.linspace(0.1, 0.5, len(frame))
        assert codes(Market.from_frame(frame, adjustment="none")) == found


@pytest.mark.parametrize("ratio", [2.0, 3.0, 1.5, 4.0, 10.0, 0.5, 0.1, 1.0 / 15.0])
def test_a_split_nobody_recorded(ratio: float) -> None:
    """The price divided by a split's ratio from one close to the next open; recorded, it is no finding."""
    frame = walk_frame("A", 60)
    for name in ("open", "high", "low", "close"):
        frame.loc[30:, name] = frame.loc[30:, name] / ratio
    day = frame["date"][30]
    found = finding(Market.from_frame(frame, adjustment="none"), "unrecorded-split")
    assert (found.symbol, found.date) == ("A", str(day)[:10])
    splits = pd.DataFrame({"symbol": ["A"], "date": [day], "ratio": [ratio]})
    assert codes(Market.from_frame(frame, adjustment="none", splits=splits)) == []
    index = Market.from_frame(frame, adjustment="none", symbols={"A": {"kind": "index"}})
    assert "unrecorded-split" not in codes(index)


def test_a_crash_is_a_large_move_and_no_split() -> None:
    """Down 52 % with the open at 0.527 of the close before, as AAPL on 2000-09-29 (53.50, 28.19, 25.75)."""
    frame = flat_frame([53.5] * 3 + [25.75] * 3)
    frame.loc[3, ["open", "high"]] = 28.19
    market = Market.from_frame(frame, adjustment="none")
    assert codes(market) == ["large-move"]
    assert finding(market, "large-move").text == "1 move beyond +60 % or -37 % in one session"


def test_a_split_the_price_does_not_show() -> None:
    """Prices already adjusted, loaded as traded with the split table: the price does not halve."""
    frame = walk_frame("A", 60)
    splits = pd.DataFrame({"symbol": ["A"], "date": [frame["date"][30]], "ratio": [2.0]})
    market = Market.from_frame(frame, adjustment="none", splits=splits)
    assert codes(market) == ["split-unseen"]
    assert finding(market, "split-unseen").text.startswith("1 split recorded that the price does not show")
    assert codes(Market.from_frame(frame, adjustment="splits", splits=splits)) == []


def test_a_dividend_of_a_quarter_of_the_price() -> None:
    """Ten on a price near forty is told; as a special dividend it is not."""
    frame = walk_frame("A", 60)
    table = pd.DataFrame({"symbol": ["A"], "date": [frame["date"][30]], "amount": [10.0], "kind": [""]})
    assert codes(Market.from_frame(frame, adjustment="none", dividends=table)) == ["large-dividend"]
    special = table.assign(kind="special")
    assert codes(Market.from_frame(frame, adjustment="none", dividends=special)) == []


def test_prices_that_look_adjusted() -> None:
    """Early closes divided by 1.0734, late ones in whole cents; said to be adjusted, it is no finding."""
    frame = walk_frame("A", 500)
    for name in ("open", "high", "low", "close"):
        frame.loc[:299, name] = frame.loc[:299, name] / 1.0734
    assert codes(Market.from_frame(frame, adjustment="none", calendar="own")) == ["looks-adjusted"]
    assert codes(Market.from_frame(walk_frame("A", 500), adjustment="none", calendar="own")) == []
    said = Market.from_frame(frame, adjustment="splits and dividends", calendar="own")
    assert codes(said) == ["dividends-not-undone"]


@pytest.mark.parametrize(
    ("symbols", "count", "ended", "found"),
    [
        ("ABCDE", 800, False, True),
        ("ABCDE", 800, True, False),
        ("ABCD", 800, False, False),
        ("ABCDE", 700, False, False),
    ],
)
def test_a_universe_in_which_nothing_died(symbols: str, count: int, ended: bool, found: bool) -> None:
    """Five stocks over three years, none ended; with fewer, in less time, or with an end: nothing to say."""
    frame = walk_frame(symbols, count)
    if ended:
        frame = frame[(frame["symbol"] != "C") | (frame["date"] < "2017-06-01")]
    market = Market.from_frame(frame, adjustment="none", calendar="own")
    assert ("survivorship" in codes(market)) is found


def test_names_that_differ_only_in_case() -> None:
    """`Ash` and `ASH` are two symbols, which is told."""
    frame = pd.concat([flat_frame([10.0, 11.0]), flat_frame([10.0, 11.0], symbol="Ash")])
    market = Market.from_frame(frame, adjustment="none")
    assert market.symbols == ("ASH", "Ash")
    assert (
        finding(market, "alike-names").text
        == "ASH and Ash differ only in case; they are taken as two symbols"
    )


def test_warnings_come_before_notes() -> None:
    """The order in which a person reads them."""
    frame = flat_frame([10.0, 11.0, 30.0, 31.0]).assign(beta=1.0)
    frame.loc[0, "close"] = 10.05
    assert [f.severity for f in Market.from_frame(frame).findings] == ["warning", "note", "note", "note"]


def test_the_last_close_looks_over_holes() -> None:
    """By hand: the close of the last bar before each session."""
    close = np.array([[np.nan, 1.0], [2.0, np.nan], [np.nan, np.nan], [3.0, 4.0]])
    wanted = np.array([[np.nan, np.nan], [np.nan, 1.0], [2.0, 1.0], [2.0, 1.0]])
    np.testing.assert_array_equal(last_close(close), wanted)
    assert len(sessions(4)) == 4


@pytest.mark.parametrize("missing", [SILENCE_SESSIONS - 1, SILENCE_SESSIONS])
def test_gaps_in_which_a_position_is_closed(missing: int) -> None:
    """One session too few is no finding; as many as the walk waits are one, with symbol and both days."""
    assert SILENCE_SESSIONS == LONGEST_SILENCE
    frame = walk_frame("AB", 60)
    days = sorted(frame["date"].unique())[20 : 20 + missing]
    frame = frame[(frame["symbol"] != "B") | ~frame["date"].isin(days)]
    found = [one for one in Market.from_frame(frame, adjustment="none").findings if one.code == "long-gap"]
    first, last = (str(pd.Timestamp(day).date()) for day in (days[0], days[-1]))
    told = [
        f"B, {first}: no price for 5 sessions, {first} to {last}: a position is closed at the price before"
    ]
    assert [one.told for one in found] == (told if missing == SILENCE_SESSIONS else [])
