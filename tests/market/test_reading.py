"""Tables as people have them: names, delimiters, encodings, dates and layouts that are read alike."""

from __future__ import annotations

import io
from pathlib import Path

import numpy as np
import pandas as pd
import pytest

from hedgerow.market import Market, load_market
from price_tables import HEADER, PRICES, ROWS, codes, finding, same_content, walk_frame, write


@pytest.fixture(scope="module")
def frame() -> pd.DataFrame:
    """Three symbols of sixty sessions each."""
    return walk_frame("ABC", 60)


@pytest.fixture(scope="module")
def market(frame: pd.DataFrame) -> Market:
    """The same as a market."""
    return Market.from_frame(frame)


def as_csv(frame: pd.DataFrame, **how: object) -> str:
    """A frame as CSV text."""
    text = io.StringIO()
    frame.to_csv(text, index=False, **how)
    return text.getvalue()


def test_a_small_table_is_read_cell_by_cell(tmp_path: Path) -> None:
    """Two rows against the numbers written in them."""
    market = load_market(write(tmp_path, {"prices.csv": PRICES}) / "prices.csv")
    assert market.symbols == ("ASH",)
    assert market.dates.tolist() == [np.datetime64("2020-01-02").item(), np.datetime64("2020-01-03").item()]
    assert market.ordinals.tolist() == [737426, 737427]  # date(2020, 1, 2).toordinal()
    assert market.open[:, 0].tolist() == [10.0, 10.5]
    assert market.high[:, 0].tolist() == [11.0, 11.5]
    assert market.low[:, 0].tolist() == [9.0, 10.0]
    assert market.close[:, 0].tolist() == [10.5, 11.0]
    assert market.volume[:, 0].tolist() == [100.0, 200.0]
    assert market.dividend.sum() == market.special.sum() == market.rate.sum() == 0.0
    assert (market.split == 1.0).all()
    assert np.isnan(market.implied).all()
    assert (market.currency, market.adjustment, market.reports) == ("USD", "none", ())


@pytest.mark.parametrize(
    "encode",
    [
        lambda text: text.encode(),
        lambda text: b"\xef\xbb\xbf" + text.encode(),
        lambda text: text.encode("utf-16"),
        lambda text: text.replace("\n", "\r\n").encode(),
        lambda text: text.replace("\n", "\r").encode(),
        lambda text: text.replace(",", ";").encode(),
        lambda text: text.replace(",", "\t").encode(),
        lambda text: ("\n\n" + text + "\n\n").encode(),
        lambda text: text.replace("symbol,date", '"symbol","date"').replace("A,", '"A",').encode(),
        lambda text: text.replace(",", " , ").encode(),
    ],
)
def test_encodings_delimiters_and_line_ends(
    tmp_path: Path, frame: pd.DataFrame, market: Market, encode
) -> None:
    """The same table in each form is the same market."""
    write(tmp_path, {"prices.csv": encode(as_csv(frame))})
    assert same_content(load_market(tmp_path), market)


@pytest.mark.parametrize(
    "form",
    ["%Y-%m-%d", "%Y/%m/%d", "%Y%m%d", "%d.%m.%Y", "%d %b %Y", "%d-%b-%Y", "%B %d, %Y", "%m/%d/%Y",
     "%d/%m/%Y", "%Y-%m-%d %H:%M:%S", "%Y-%m-%dT%H:%M:%SZ", "%Y-%m-%d 16:00:00-05:00"],
)  # fmt: skip
def test_forms_of_dates(tmp_path: Path, frame: pd.DataFrame, market: Market, form: str) -> None:
    """Python's own strftime writes each form; sixty sessions show which of day and month comes first."""
    text = as_csv(frame.assign(date=frame["date"].dt.strftime(form)))
    assert same_content(load_market(write(tmp_path, {"prices.csv": text})), market)


def test_an_order_of_day_and_month_that_is_stated_holds(tmp_path: Path) -> None:
    """01/02/2020 is the 2nd of January or the 1st of February; what does not fit the words is refused."""
    text = HEADER + "ASH,01/02/2020,10,11,9,10,1\nASH,02/02/2020,10,11,9,10,1\n"
    first = {}
    for order in ("day first", "month first"):
        write(tmp_path, {"prices.csv": text, "dataset.yaml": f"dates: {order}\n"})
        first[order] = str(load_market(tmp_path).dates[0])
    assert first == {"day first": "2020-02-01", "month first": "2020-01-02"}
    write(tmp_path, {"prices.csv": text.replace("02/02", "02/22"), "dataset.yaml": "dates: day first\n"})
    with pytest.raises(Exception, match="`02/22/2020` is no day of the calendar"):
        load_market(tmp_path)


@pytest.mark.parametrize(
    "names",
    [
        ["Ticker", "Date", "Open", "High", "Low", "Close", "Volume"],
        ["SYM", "Trade Date", "OPEN", "HIGH", "LOW", "LAST", "VOL."],
        ["code", "timestamp", "o", "h", "l", "c", "v"],
        ["instrument", "day", "Open Price", "High Price", "Low Price", "Close Price", "Shares Traded"],
    ],
)
def test_ordinary_names_in_any_case(
    tmp_path: Path, frame: pd.DataFrame, market: Market, names: list[str]
) -> None:
    """Names as tables in use have them (common practice)."""
    text = as_csv(frame.set_axis(names, axis=1))
    assert same_content(load_market(write(tmp_path, {"prices.csv": text})), market)


def test_other_names_are_mapped_by_dataset_yaml(tmp_path: Path, frame: pd.DataFrame, market: Market) -> None:
    """Names nobody could guess, and a plain `close` that must not be taken."""
    renamed = frame.rename(columns={"date": "Tag", "close": "Kurs"}).assign(close=1.0)
    words = "columns:\n  date: Tag\n  close: Kurs\n"
    loaded = load_market(write(tmp_path, {"prices.csv": as_csv(renamed), "dataset.yaml": words}))
    assert same_content(loaded, market)
    assert finding(loaded, "columns-unused").text == "columns that are not used: close"


def test_decimal_commas_are_read_when_they_are_stated(
    tmp_path: Path, frame: pd.DataFrame, market: Market
) -> None:
    """A table with semicolons and decimal commas, as spreadsheets of many countries write it."""
    text = as_csv(frame, sep=";", decimal=",")
    loaded = load_market(write(tmp_path, {"prices.csv": text, "dataset.yaml": "decimal: comma\n"}))
    assert same_content(loaded, market)


def test_a_file_a_symbol_and_one_long_file_are_the_same(
    tmp_path: Path, frame: pd.DataFrame, market: Market
) -> None:
    """With the symbol as a column, and as the name of the file alone."""
    for place, part in (("with", frame), ("without", frame.drop(columns="symbol"))):
        files = {f"prices/{s}.csv": as_csv(part[frame["symbol"] == s]) for s in "CAB"}
        assert same_content(load_market(write(tmp_path / place, files)), market)
    alone = load_market(tmp_path / "without" / "prices" / "B.csv")
    assert same_content(alone, market.select(["B"]))


def test_parquet_of_several_kinds_of_columns(tmp_path: Path, frame: pd.DataFrame, market: Market) -> None:
    """Stamps with and without a zone, days, text, categories and whole numbers."""
    kinds = {
        "stamps": frame,
        "zones": frame.assign(date=frame["date"].dt.tz_localize("America/New_York")),
        "days": frame.assign(date=frame["date"].dt.date),
        "text": frame.assign(date=frame["date"].dt.strftime("%Y-%m-%d"), close=frame["close"].astype(str)),
        "categories": frame.assign(symbol=frame["symbol"].astype("category")),
        "whole": frame.assign(
            volume=frame["volume"].astype("int64"), date=frame["date"].dt.strftime("%Y%m%d").astype(int)
        ),
    }
    for name, kind in kinds.items():
        kind.to_parquet(tmp_path / f"{name}.parquet")
        assert same_content(load_market(tmp_path / f"{name}.parquet"), market), name
        assert same_content(Market.from_frame(kind), market), name


def test_frames_with_their_dates_in_the_index(frame: pd.DataFrame, market: Market) -> None:
    """An index of dates without a name, an index of symbol and date, and one symbol named by the caller."""
    both = frame.set_index(["symbol", "date"])
    assert same_content(Market.from_frame(both), market)
    one = frame[frame["symbol"] == "B"].drop(columns="symbol").set_index("date").rename_axis(None)
    assert same_content(Market.from_frame(one, symbol="B"), market.select(["B"]))


def test_nothing_known_is_written_in_many_ways(tmp_path: Path) -> None:
    """Words for nothing in a column of volumes; a symbol named like one stays a symbol."""
    words = ["", "NA", "N/A", "NaN", "nan", "null", "None", "-", "."]
    rows = [f"NA,2020-01-{day:02d},10,11,9,10,{word}" for day, word in enumerate(words, start=1)]
    market = load_market(write(tmp_path, {"prices.csv": HEADER + "\n".join(rows)}))
    assert market.symbols == ("NA",)
    assert market.shape == (len(words), 1)
    assert np.isnan(market.volume).all()


def test_columns_that_are_not_known_are_told(tmp_path: Path) -> None:
    """An unnamed index column passes in silence, any other unknown one is a note."""
    text = ",".join(["", HEADER.strip(), "beta\n"]) + "".join(
        f"{n},{row},1\n" for n, row in enumerate(ROWS.split())
    )
    market = load_market(write(tmp_path, {"prices.csv": text}))
    assert codes(market) == ["columns-unused"]
    assert finding(market, "columns-unused").text == "columns that are not used: beta"


def test_an_observed_volatility_is_a_fraction(tmp_path: Path) -> None:
    """25 where 0.25 is meant is refused for the whole column; a zero is taken as unknown and told."""
    text = "symbol,date,open,high,low,close,IV\nASH,2020-01-02,10,11,9,10,{}\nASH,2020-01-03,10,11,9,10,{}\n"
    market = load_market(write(tmp_path, {"prices.csv": text.format("0.25", "0")}))
    assert market.implied[0, 0] == 0.25
    assert np.isnan(market.implied[1, 0])
    assert codes(market) == ["implied-impossible"]
    write(tmp_path, {"prices.csv": text.format("25", "26")})
    with pytest.raises(Exception, match=r"around 25\.5; they are annual fractions"):
        load_market(tmp_path)
