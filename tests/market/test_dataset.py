"""The words of dataset.yaml: what they mean, and what is said of wrong ones."""

from __future__ import annotations

from pathlib import Path
from typing import Any

import pytest

from hedgerow.market import load_market
from hedgerow.market.dataset import Dataset, Known, Recover, from_node, from_words
from hedgerow.market.words import WordReader, node_of
from hedgerow.yamltext import load
from price_tables import PRICES, codes, faults_of, finding, told, write

ALL = """
name: My market
about: two lines
source: invented
currency: EUR
adjustment: splits and dividends
reinvested: ex-date close
amounts: split adjusted
columns: {date: Tag, close: Kurs}
dates: day first
decimal: comma
symbols:
  ASH: {kind: index, sector: Timber, name: Ash and Sons}
  ELM:
rate: 2.5%
compounding: annual
calendar: own
"""


def dataset(text: str) -> tuple[Dataset, list[str]]:
    """The dataset of a text, and its faults as sentences."""
    found, faults = from_node(load(text, "dataset.yaml"), "dataset.yaml")
    return found, [str(fault) for fault in faults]


def test_every_word_is_read() -> None:
    """One text with all words but `recover`, against the values written in it."""
    found, faults = dataset(ALL)
    assert faults == []
    assert (found.name, found.source, found.currency) == ("My market", "invented", "EUR")
    assert (found.adjustment, found.reinvested) == ("splits and dividends", "ex-date close")
    assert (found.amounts, found.compounding, found.calendar) == ("split adjusted", "annual", "own")
    assert found.words.columns == {"date": "Tag", "close": "Kurs"}
    assert (found.words.dates, found.words.decimal_comma) == ("day first", True)
    assert found.symbols == {"ASH": Known("index", "Timber", "Ash and Sons"), "ELM": Known()}
    assert found.rate == pytest.approx(0.025, abs=1e-15)
    assert found.recover is None


def test_nothing_said_means_the_defaults() -> None:
    """One word alone leaves the others as documented."""
    found, faults = dataset("name: x")
    assert faults == []
    assert found == Dataset(name="x")
    assert (found.currency, found.adjustment, found.rate) == ("USD", "", None)


@pytest.mark.parametrize(
    ("text", "recover", "column"),
    [
        ("recover: {}", Recover(True, True), None),
        ("recover: {splits: no}", Recover(False, True), None),
        ("recover: {dividends: false, adjusted_close: Adj}", Recover(True, False), "Adj"),
    ],
)
def test_recovery(text: str, recover: Recover, column: str | None) -> None:
    """Both by default; each can be left out; the column can be named."""
    found, faults = dataset(text)
    assert faults == []
    assert found.recover == recover
    assert found.words.columns.get("adjusted_close") == column


@pytest.mark.parametrize(
    ("text", "sentence"),
    [
        ("currncy: USD", "dataset.yaml:1:1: unknown word `currncy` in dataset.yaml; one of name,"),
        (
            "adjustment: split",
            "dataset.yaml:1:13: `split` stands for adjustment; one of none, splits",
        ),
        ("adjustment: [none]", "dataset.yaml:1:13: adjustment holds a list; text is wanted"),
        (
            "dates: US",
            "dataset.yaml:1:8: `US` stands for dates; one of iso, month first, day first is allowed",
        ),
        ("decimal: ','", "dataset.yaml:1:10: `,` stands for decimal; one of point, comma is allowed"),
        ("columns: [a]", "dataset.yaml:1:10: columns holds a list; words and values are wanted"),
        ("columns: {clse: a}", "dataset.yaml:1:11: unknown word `clse` in columns; one of date, open, high,"),
        ("recover: yes", "dataset.yaml:1:10: recover holds text; words and values are wanted"),
        (
            "recover: {splits: maybe}",
            "dataset.yaml:1:19: `maybe` stands for splits; true or false is allowed",
        ),
        ("symbols: {A: {knd: stock}}", "dataset.yaml:1:15: unknown word `knd` in the symbol A; one of kind,"),
        (
            "symbols: {A: {kind: etf}}",
            "dataset.yaml:1:21: `etf` stands for kind; one of stock, index is allowed",
        ),
        ("symbols: [A]", "dataset.yaml:1:10: symbols holds a list; words and values are wanted"),
        ("rate: 2", "dataset.yaml:1:7: `2` stands for rate; a percentage is wanted, with its sign; write 2%"),
        (
            "rate: two",
            "dataset.yaml:1:7: `two` stands for rate; a percentage is wanted, with its sign; write 2%",
        ),
        ("calendar: uk", "dataset.yaml:1:11: `uk` stands for calendar; one of us, own is allowed"),
        ("- a", "dataset.yaml:1:1: dataset.yaml holds a list; words and values are wanted"),
    ],
)
def test_wrong_words(text: str, sentence: str) -> None:
    """One fault each, with its line and column counted by hand."""
    _, faults = dataset(text)
    assert len(faults) == 1
    assert faults[0].startswith(sentence)


def test_nearest_words_are_named() -> None:
    """A slip of the keyboard in a key and in a value."""
    _, faults = dataset("adjustmnt: none\ncompounding: anual\n")
    assert faults[0].endswith("did you mean `adjustment`?")
    assert faults[1].endswith("did you mean `annual`?")


def test_all_wrong_words_come_in_one_pass(tmp_path: Path) -> None:
    """A repeated key beside words that are wrong: syntax and meaning are told together."""
    text = "currncy: USD\nadjustment: split\nadjustment: none\nrate: 2\n"
    found = told(faults_of(write(tmp_path, {"prices.csv": PRICES, "dataset.yaml": text})), tmp_path)
    assert [sentence.split(": ")[0] for sentence in found] == [
        "dataset.yaml:1:1",
        "dataset.yaml:2:13",
        "dataset.yaml:3:1",
        "dataset.yaml:4:7",
    ]


@pytest.mark.parametrize(
    ("content", "code"),
    [
        (b"a: [1\n", "yaml-syntax"),
        (b"", "yaml-empty"),
        (b"\x00\x01", "file-binary"),
        (b"a: \xe9", "file-encoding"),
    ],
)
def test_files_that_are_no_yaml(tmp_path: Path, content: bytes, code: str) -> None:
    """The prices beside them do not hide it."""
    faults = faults_of(write(tmp_path, {"prices.csv": PRICES, "dataset.yaml": content}))
    assert [fault.code for fault in faults] == [code]


def test_symbols_without_prices_are_told(tmp_path: Path) -> None:
    """A slip in a symbol would lose its kind in silence."""
    files = {"prices.csv": PRICES, "dataset.yaml": "adjustment: none\nsymbols: {ASHH: {kind: index}}\n"}
    market = load_market(write(tmp_path, files))
    assert market.kinds == ("stock",)
    assert codes(market) == ["unknown-symbol"]
    assert finding(market, "unknown-symbol").text.endswith("which has no prices; did you mean `ASH`?")


def test_words_given_in_python_mean_the_same() -> None:
    """Mappings, lists, flags, numbers and nothing, as a caller writes them."""
    words: dict[str, Any] = {
        "name": "My market",
        "rate": "2.5%",
        "recover": {"splits": False},
        "symbols": {"ASH": {"kind": "index"}, "ELM": None},
        "columns": {"close": "Kurs"},
    }
    found, faults = from_words(words, "keywords")
    assert faults == []
    assert found.recover == Recover(False, True)
    assert found.symbols == {"ASH": Known("index"), "ELM": Known()}
    assert node_of([1, True, None, "x"]).plain() == ["1", "true", None, "x"]


def test_the_reader_of_words_takes_what_is_there() -> None:
    """Texts lose spaces around them, percentages take signs and decimals; absent ones are defaults."""
    reader = WordReader("f")
    node = node_of({"a": " x ", "p": "-0.25 %", "y": "YES"})
    words = reader.mapping(node, None, "f")
    assert reader.text(words["a"], "a") == "x"
    assert reader.percent(words["p"], "p") == -0.0025
    assert reader.flag(words["y"], "y", False) is True
    assert (reader.text(None, "z"), reader.percent(None, "z"), reader.flag(None, "z", True)) == (
        "",
        None,
        True,
    )
    assert reader.choice(None, "z", ("b", "c"), "c") == "c"
    assert reader.faults == []
