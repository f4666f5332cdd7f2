"""Files as they go wrong in life: what is refused, in one pass, with the place and the way out."""

from __future__ import annotations

from pathlib import Path

import pandas as pd
import pytest

from hedgerow.errors import DataError
from hedgerow.market import Market, load_market
from price_tables import HEADER, PRICES, ROWS, codes, faults_of, told, write

ONE = "ASH,2020-01-06,"
EMPTY = "leave the cell empty when nothing is known"


@pytest.mark.parametrize(
    ("content", "sentence"),
    [
        (b"", "prices.csv: the file is empty"),
        (b"\n \n", "prices.csv: the file is empty"),
        (HEADER, "prices.csv: there is no row; at least one row is wanted below the names"),
        (bytes(range(256)) * 10, "prices.csv: this is not a text file"),
        (PRICES.encode() + b"\xe9LM,2020-01-06,1,1,1,1,1\n", "prices.csv:4:1: byte 0xe9 is not UTF-8 text"),
        (PRICES + ",2020-01-06,10,11,9,10,1\n", "prices.csv:4: the symbol is empty; every row has one"),
        (ROWS, "prices.csv:1: the first line holds numbers, not names"),
        (PRICES + "ASH,,10,11,9,10,1\n", "prices.csv:4: the date is missing"),
        (PRICES + "ASH,2020-02-30,10,11,9,10,1\n", "prices.csv:4: `2020-02-30` is no day of the calendar"),
        (
            PRICES + "ASH,06.01.2020,10,11,9,10,1\n",
            "prices.csv:4: `06.01.2020` is not written like the others",
        ),
        (
            PRICES + "ASH,1577923200,10,11,9,10,1\n",
            "prices.csv:4: `1577923200` is not written like the others",
        ),
        (
            PRICES + "ASH,0020-01-02,10,11,9,10,1\n",
            "prices.csv:4: the date 0020-01-02; 1700-01-01 to 2199-12-30",
        ),
        (
            PRICES + ONE + "10,11,9,10\n",
            "prices.csv:4: 6 cells stand in this row; the line of names has 7; fill",
        ),
        (
            PRICES + ONE + "1,234,11,9,10,1\n",
            "prices.csv:4: 8 cells stand in this row; the line of names has 7",
        ),
        (
            PRICES + '"ASH,2020-01-06\n',
            "prices.csv:4: 1 cell stands in this row; the line of names has 7; close",
        ),
        (
            PRICES + "\nASH,2020-01-03,10.5,11.5,10,11.25,200\n",
            "prices.csv:5: ASH has a second, different row for 2020-01-03; the first is on line 3",
        ),
        (
            PRICES.replace("2020-01-0", "0").replace("02,", "01/02/2020,").replace("03,", "02/02/2020,"),
            "prices.csv:2: dates like `01/02/2020` can be read day first or month first; a date",
        ),
    ],
)
def test_one_wrong_thing_in_a_table_of_prices(tmp_path: Path, content: str | bytes, sentence: str) -> None:
    """Each fault alone; its line counted by hand."""
    write(tmp_path, {"prices.csv": content})
    found = told(faults_of(tmp_path), tmp_path)
    assert len(found) == 1
    assert found[0].startswith(sentence)


@pytest.mark.parametrize(
    ("cell", "sentence"),
    [
        ("ten", "a number is wanted; leave the cell empty when nothing is known"),
        ("1.1.1", "a number is wanted"),
        ("0x1F", "a number is wanted"),
        ("1_000", "a number has no thousands separator; write the digits alone"),
        ('"1,234.5"', "a number has no thousands separator; write 1234.5"),
        ("1 234", "a number has no thousands separator; write the digits alone"),
        ('"10,5"', "a number has a decimal point; write a point, or say `decimal: comma` in dataset.yaml"),
        ("$10.6", "a bare number is wanted; take the sign away"),
        ("10 €", "a bare number is wanted; take the sign away"),
        ("inf", "a finite number is wanted"),
        ("-Infinity", "a finite number is wanted"),
        ("1e999", "a finite number is wanted"),
    ],
)
def test_cells_that_are_no_numbers(tmp_path: Path, cell: str, sentence: str) -> None:
    """Each wrong cell is shown, with its column and the way out that fits it."""
    write(tmp_path, {"prices.csv": PRICES + f"{ONE}10,11,9,{cell},1\n"})
    bare = cell.strip('"')
    found = told(faults_of(tmp_path), tmp_path)
    assert len(found) == 1
    assert found[0].startswith(f"prices.csv:4: `{bare}` stands in the column `close`; {sentence}")


def test_all_faults_of_all_files_come_in_one_pass(tmp_path: Path) -> None:
    """Seven faults in five files; each file's in the order of its lines."""
    files = {
        "prices.csv": PRICES + f"{ONE}ten,11,9,10,1\nASH,2020-13-06,10,11,9,x,1\n",
        "dividends.csv": "symbol,date,amount\nASH,2020-01-03,-1\n",
        "splits.csv": "symbol,date,ratio\nASH,2020-01-03,2:1\n",
        "rates.csv": "date,rate\n2020-01-01,4.5\n",
        "dataset.yaml": "currncy: USD\n",
    }
    assert told(faults_of(write(tmp_path, files)), tmp_path) == [
        "dataset.yaml:1:1: unknown word `currncy` in dataset.yaml; one of name, about, source, currency, "
        "adjustment, reinvested, amounts, recover, columns, dates, decimal, symbols, rate, compounding, "
        "calendar is allowed; did you mean `currency`?",
        "prices.csv:4: `ten` stands in the column `open`; a number is wanted; " + EMPTY,
        "prices.csv:5: `2020-13-06` is no day of the calendar; the dates of this column are written like "
        "2012-03-30; write every date like 2012-03-30",
        "prices.csv:5: `x` stands in the column `close`; a number is wanted; " + EMPTY,
        "dividends.csv:2: a dividend of -1; cash per share, above 0; leave the cell empty for none",
        "splits.csv:2: `2:1` stands in the column `ratio`; a ratio is one number: new shares for one old; "
        "write 2",
        "rates.csv:2: an annual rate of 4.5; a fraction below 0.5, or a percentage with its sign; write "
        "0.045 or 4.5%",
    ]


def test_a_thousand_faults_are_counted_not_listed(tmp_path: Path) -> None:
    """Twenty cells of a column are listed, the others counted; no file tells more than fifty and one."""
    lines = [f"ASH,{day:%Y-%m-%d},x,y,z,w,v" for day in pd.bdate_range("2015-01-01", periods=1000)]
    faults = faults_of(write(tmp_path, {"prices.csv": HEADER + "\n".join(lines) + "\n"}))
    assert len(faults) == 51
    assert "more faults of this file are not listed" in str(faults[-1])
    alone = HEADER + "\n".join(line.replace("x,y,z,w,v", "x,3,1,2,5") for line in lines)
    found = told(faults_of(write(tmp_path, {"prices.csv": alone})), tmp_path)
    assert len(found) == 21
    assert found[-1] == "prices.csv: 980 more cells of the column `open` are wrong in this way"


@pytest.mark.parametrize(
    ("files", "sentence"),
    [
        (
            {},
            ": the folder holds nothing; prices.csv, prices.parquet or a folder prices/ with a file a symbol",
        ),
        ({"notes.md": "x"}, ": the folder holds no prices"),
        ({"prices/readme.md": "x"}, ": the folder holds no prices"),
        ({"prices.csv": PRICES, "prices.parquet": "x"}, ": the same is in prices.csv and prices.parquet"),
        ({"prices.csv": PRICES, "prices/ASH.csv": PRICES}, ": the same is in prices.csv and prices/ASH.csv"),
        (
            {"prices.parquet": "hello"},
            "prices.parquet: this is not a Parquet file that can be read: Parquet file",
        ),
        ({"prices.parquet": ""}, "prices.parquet: the file is empty"),
        ({"prices/ASH.csv": PRICES, "prices/ELM.csv": ""}, "prices/ELM.csv: the file is empty"),
        (
            {"prices.csv": "date,open,high,low,close\n2020-01-02,1,1,1,1\n"},
            "prices.csv:1: there is no column for `s",
        ),
    ],
)
def test_folders_that_hold_no_prices_or_too_many(
    tmp_path: Path, files: dict[str, str], sentence: str
) -> None:
    """A folder says what it lacks, or which two places hold the same."""
    found = [line.replace(str(tmp_path), "") for line in told(faults_of(write(tmp_path, files)), tmp_path)]
    assert found[0].startswith(sentence)


def test_places_that_are_not_there(tmp_path: Path) -> None:
    """A missing path, and a file of a kind that is not read."""
    assert faults_of(tmp_path / "no.csv")[0].code == "file-missing"
    assert faults_of(tmp_path / "no")[0].code == "file-missing"
    write(tmp_path, {"prices.xlsx": "PK"})
    fault = faults_of(tmp_path / "prices.xlsx")[0]
    assert (fault.code, fault.found) == ("file-ending", "the ending `.xlsx` is not known")


@pytest.mark.parametrize(
    ("header", "sentence"),
    [
        (
            "symbol,date,opn,high,low,close",
            "prices.csv:1: there is no column for `open`; the columns are `symbol`, `date`, `opn`, `high`, "
            "`low`, `close`; did you mean `opn`? name it in dataset.yaml: `columns: {open: "
            "NAME OF THE COLUMN}`",
        ),
        (
            "symbol,date,open,high,low,Closing Pric",
            "prices.csv:1: there is no column for `close`; the columns are `symbol`, `date`, `open`, `high`, "
            "`low`, `Closing Pric`; did you mean `Closing Pric`? name it in dataset.yaml: `columns: {close: "
            "NAME OF THE COLUMN}`",
        ),
        (
            "symbol,date,open,high,low,close,Last",
            "",
        ),
        (
            "symbol,date,open,high,low,last,Close Price",
            "prices.csv:1: 2 columns could be the close: `last` and `Close Price`; one column plays a role; "
            "take one away, or say which in dataset.yaml: `columns: {close: last}`",
        ),
    ],
)
def test_columns_that_are_missing_or_could_be_two(tmp_path: Path, header: str, sentence: str) -> None:
    """The nearest column is named; a plain `close` goes before other names of the same."""
    row = ",".join(["ASH", "2020-01-02", "10", "11", "9", "10", "10"][: header.count(",") + 1])
    write(tmp_path, {"prices.csv": f"{header}\n{row}\n"})
    if not sentence:
        assert load_market(tmp_path).shape == (1, 1)
        return
    assert told(faults_of(tmp_path), tmp_path) == [sentence]


def test_frames_tell_the_row(tmp_path: Path) -> None:
    """A frame has no lines: its rows count from 1; no symbol, text among prices, a date twice, no rows."""
    frame = pd.DataFrame(
        {
            "symbol": ["ASH", None, "ASH", "ASH"],
            "date": pd.to_datetime(["2020-01-02", "2020-01-02", "2020-01-03", "2020-01-03"]),
            "open": [10.0, 10.0, "ten", 10.0],
            "high": 11.0,
            "low": 9.0,
            "close": [10.0, 10.0, 10.0, float("inf")],
        }
    )
    found = [str(fault) for fault in faults_of(frame)]
    assert found[0].startswith("frame:2: the symbol is empty")
    assert found[1].startswith("frame:3: `ten` stands in the column `open`")
    assert found[2].startswith("frame:4: `inf` stands in the column `close`")
    assert found[3].startswith(
        "frame:4: ASH has a second, different row for 2020-01-03; the first is on line 3"
    )
    assert faults_of(frame.iloc[:0])[0].code == "no-row"
    assert faults_of([1, 2])[0].found == "a list was given"
    typed = frame.assign(open=True, close=1.0, symbol="ASH").drop_duplicates("date")
    assert [fault.code for fault in faults_of(typed)] == ["not-numbers"]


def test_the_words_of_python_are_checked_like_the_file_s(tmp_path: Path) -> None:
    """A wrong keyword is refused with the nearest one; a right one goes before the file's."""
    write(tmp_path, {"prices.csv": PRICES, "dataset.yaml": "currency: EUR\nadjustment: none\n"})
    assert "did you mean `adjustment`?" in str(faults_of(tmp_path, adjustmnt="none")[0])
    assert load_market(tmp_path).currency == "EUR"
    assert load_market(tmp_path, currency="NOK").currency == "NOK"
    with pytest.raises(DataError, match="did you mean `splits`"):
        Market.from_frame(pd.read_csv(tmp_path / "prices.csv"), adjustment="split")


def test_a_file_beside_a_dataset_says_that_it_was_read_alone(tmp_path: Path) -> None:
    """The words of a dataset.yaml are the folder's: naming the file leaves them out, which is told."""
    write(tmp_path, {"prices.csv": PRICES, "dataset.yaml": "currency: EUR\n"})
    market = load_market(tmp_path / "prices.csv")
    assert market.currency == "USD"
    assert codes(market) == ["dataset-not-read"]


def test_a_table_where_nothing_can_be_used(tmp_path: Path) -> None:
    """Rows that are all dropped leave no market; the sentence says why they were."""
    write(tmp_path, {"prices.csv": HEADER + "ASH,2020-01-02,0,11,9,10,1\n"})
    assert told(faults_of(tmp_path), tmp_path)[0].endswith(
        "no row can be used; 1 row with a price of 0 or less, dropped; check the columns of prices"
    )


def test_prices_that_no_share_has_had_are_refused(tmp_path: Path) -> None:
    """Their line, column and the limit are told; a price at the limit is read (700,000 has been traded)."""
    row = "ASH,2020-01-06,10,1e300,9,10.5,1\n"
    found = told(faults_of(write(tmp_path, {"prices.csv": PRICES + row})), tmp_path)
    assert found == [
        "prices.csv:4: the price 1e300 stands in the column `high`; at most 10,000,000 a share is read; "
        "correct the price, or take the row away"
    ]
    rows = PRICES + "ASH,2020-01-06,10,1e7,9,10.5,1\n"
    assert load_market(write(tmp_path, {"prices.csv": rows})).high[-1, 0] == 1e7


@pytest.mark.parametrize("sign", ["\x1b[31m", "\u202e", "\x9b"])
def test_symbols_that_would_steer_a_terminal_are_refused(tmp_path: Path, sign: str) -> None:
    """Escape, reversal of writing, a control sequence: told by line, and never sent raw."""
    row = f"A{sign}SH,2020-01-06,10,11,9,10.5,1\n"
    found = told(faults_of(write(tmp_path, {"prices.csv": PRICES + row})), tmp_path)
    assert len(found) == 1
    assert sign not in found[0]
    assert "a symbol is written in letters, digits and signs that show" in found[0]
