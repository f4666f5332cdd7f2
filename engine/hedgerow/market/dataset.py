"""What dataset.yaml says of the tables beside it."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field
from typing import Any

from hedgerow.errors import Fault
from hedgerow.market.bars import Words
from hedgerow.market.columns import PRICES
from hedgerow.market.dates import ORDERS
from hedgerow.market.recover import REINVESTED
from hedgerow.market.table import KINDS
from hedgerow.market.words import WordReader, node_of
from hedgerow.yamltext import Node

ADJUSTMENTS = ("none", "splits", "splits and dividends")
PAID = ("as paid", "split adjusted")
COMPOUNDING = ("continuous", "annual")
CALENDARS = ("us", "own")
WORDS = (
    *("name", "about", "source", "currency", "adjustment", "reinvested", "amounts", "recover"),
    *("columns", "dates", "decimal", "symbols", "rate", "compounding", "calendar"),
)


@dataclass(frozen=True)
class Recover:
    """What is to be recovered from the adjusted close."""

    splits: bool = True
    dividends: bool = True


@dataclass(frozen=True)
class Known:
    """What is said of one symbol."""

    kind: str = "stock"
    sector: str = ""
    name: str = ""


@dataclass(frozen=True)
class Dataset:
    """The words of dataset.yaml, checked; "" where nothing is said of adjustment, reinvested or calendar."""

    name: str = ""
    source: str = ""
    currency: str = "USD"
    adjustment: str = ""
    reinvested: str = ""
    amounts: str = PAID[0]
    words: Words = field(default_factory=Words)
    recover: Recover | None = None
    symbols: Mapping[str, Known] = field(default_factory=dict)
    rate: float | None = None
    compounding: str = COMPOUNDING[0]
    calendar: str = ""


def from_words(words: Mapping[str, Any], where: str) -> tuple[Dataset, list[Fault]]:
    """Return the dataset that words given in Python describe, and their faults."""
    return from_node(node_of(words), where)


def from_node(node: Node, where: str) -> tuple[Dataset, list[Fault]]:
    """Return the dataset that a tree of text describes, and its faults."""
    reader = WordReader(where)
    words = reader.mapping(node, WORDS, "dataset.yaml")
    recover, adjusted_close = _recover(reader, words.get("recover"))
    columns = _columns(reader, words.get("columns"), adjusted_close)
    dataset = Dataset(
        name=reader.text(words.get("name"), "name"),
        source=reader.text(words.get("source"), "source"),
        currency=reader.text(words.get("currency"), "currency") or "USD",
        adjustment=reader.choice(words.get("adjustment"), "adjustment", ADJUSTMENTS, ""),
        reinvested=reader.choice(words.get("reinvested"), "reinvested", REINVESTED, ""),
        amounts=reader.choice(words.get("amounts"), "amounts", PAID, PAID[0]),
        words=Words(
            columns,
            reader.choice(words.get("dates"), "dates", ("iso", *ORDERS), "").replace("iso", ""),
            reader.choice(words.get("decimal"), "decimal", ("point", "comma"), "point") == "comma",
        ),
        recover=recover,
        symbols=_symbols(reader, words.get("symbols")),
        rate=reader.percent(words.get("rate"), "rate"),
        compounding=reader.choice(words.get("compounding"), "compounding", COMPOUNDING, COMPOUNDING[0]),
        calendar=reader.choice(words.get("calendar"), "calendar", CALENDARS, ""),
    )
    _together(reader, words, dataset)
    return dataset, reader.faults


def _together(reader: WordReader, words: Mapping[str, Node], dataset: Dataset) -> None:
    if dataset.recover is not None and dataset.adjustment not in ("", "none"):
        found = f"`recover` stands beside `adjustment: {dataset.adjustment}`"
        told = ("recovery needs the close as traded", "say `adjustment: none`, or take `recover` away")
        reader.refuse(words["recover"], "recover-adjusted", found, *told)


def _columns(reader: WordReader, node: Node | None, adjusted_close: str) -> dict[str, str]:
    roles = (*PRICES.must, *PRICES.may)
    columns = {key: reader.text(child, key) for key, child in reader.mapping(node, roles, "columns").items()}
    return columns | ({"adjusted_close": adjusted_close} if adjusted_close else {})


def _recover(reader: WordReader, node: Node | None) -> tuple[Recover | None, str]:
    """Return what is to be recovered, and the column it is recovered from ("" the ordinary one)."""
    if node is None:
        return None, ""
    words = reader.mapping(node, ("adjusted_close", "splits", "dividends"), "recover")
    recover = Recover(
        reader.flag(words.get("splits"), "splits", True),
        reader.flag(words.get("dividends"), "dividends", True),
    )
    return recover, reader.text(words.get("adjusted_close"), "adjusted_close")


def _symbols(reader: WordReader, node: Node | None) -> dict[str, Known]:
    known = {}
    for symbol, child in reader.mapping(node, None, "symbols").items():
        words = reader.mapping(child, ("kind", "sector", "name"), f"the symbol {symbol}")
        kind = reader.choice(words.get("kind"), "kind", KINDS, KINDS[0])
        known[symbol] = Known(
            kind, reader.text(words.get("sector"), "sector"), reader.text(words.get("name"), "name")
        )
    return known
