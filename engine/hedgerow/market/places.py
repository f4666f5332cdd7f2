"""Where the tables of a market lie: a file, a folder, or frames."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field, replace
from pathlib import Path
from typing import Any

import pandas as pd

from hedgerow.errors import Fault
from hedgerow.market.dataset import Dataset, from_node
from hedgerow.market.sources import Source, from_frame, read_table
from hedgerow.market.table import Finding
from hedgerow.market.words import node_of
from hedgerow.yamltext import Node, scan_file

ENDINGS = (".csv", ".tsv", ".txt", ".parquet", ".pq")
EXTRAS = ("dividends", "splits", "reports", "rates")
WORDS_FILE = "dataset.yaml"


@dataclass
class Tables:
    """The tables of a market as far as they can be read, with what is wrong and what should be known."""

    source: str
    prices: list[Source] = field(default_factory=list)
    extras: dict[str, Source] = field(default_factory=dict)
    dataset: Dataset = field(default_factory=Dataset)
    faults: list[Fault] = field(default_factory=list)
    findings: list[Finding] = field(default_factory=list)


def gather(
    place: str | Path | pd.DataFrame, frames: Mapping[str, pd.DataFrame], words: Mapping[str, Any]
) -> Tables:
    """Return the tables of a place, read; `frames` are extra tables, `words` those of dataset.yaml."""
    if isinstance(place, str | Path):
        path = Path(place)
        tables = Tables(str(path))
        node = _read_place(path, tables)
    else:
        tables = Tables("frame")
        node = None
        source, tables.faults = from_frame(place)
        tables.prices = [source] if source is not None else []
    _read_frames(tables, frames)
    given = node_of(words)
    if node is not None and isinstance(node.value, dict) and isinstance(given.value, dict):
        given = Node(node.value | given.value, node.line, node.column, keys=given.keys | node.keys)
    elif node is not None and node.value is not None:
        given = node
    where = tables.source if node is None else str(Path(tables.source) / WORDS_FILE)
    tables.dataset, faults = from_node(given, where)
    tables.faults += faults
    return tables


def _read_frames(tables: Tables, frames: Mapping[str, pd.DataFrame]) -> None:
    for name, frame in frames.items():
        source, faults = from_frame(frame, f"frame of {name}")
        tables.faults += [fault for fault in faults if fault.code != "no-row"]
        if source is not None:
            tables.extras[name] = source


def _read_place(path: Path, tables: Tables) -> Node | None:
    """Read a file or a folder into `tables`; return the tree of its dataset.yaml, None without one."""
    if path.is_dir():
        try:
            return _read_folder(path, tables)
        except OSError as error:
            found = f"the folder cannot be read: {error.strerror or type(error).__name__}"
            tables.faults.append(Fault(str(path), 0, 0, "folder-unreadable", found))
            return None
    if path.suffix.lower() not in ENDINGS and path.exists():
        found = f"the ending `{path.suffix}` is not known" if path.suffix else "the file has no ending"
        allowed = f"one of {', '.join(ENDINGS)} is read"
        tables.faults.append(
            Fault(str(path), 0, 0, "file-ending", found, allowed, "rename or convert the file")
        )
        return None
    source, faults = read_table(path)
    tables.faults += faults
    tables.prices = [source] if source is not None else []
    if path.with_name(WORDS_FILE).exists():
        text = f"{WORDS_FILE} beside the file was not read; name the folder to have it read"
        tables.findings.append(Finding("dataset-not-read", "warning", "", "", text))
    return None


def _read_folder(folder: Path, tables: Tables) -> Node | None:
    files = _price_files(folder, tables)
    for file in files:
        source, faults = read_table(file)
        if len(files) > 1 and [fault.code for fault in faults] == ["no-row"]:
            text = f"{file.name} has no row; the symbol is left out"
            tables.findings.append(Finding("empty-symbol", "warning", file.stem, "", text))
            continue
        tables.faults += faults
        tables.prices += [source] if source is not None else []
    for name in EXTRAS:
        _read_extra(folder, name, tables)
    words = folder / WORDS_FILE
    if not words.exists():
        return None
    node, faults = scan_file(words)
    tables.faults += faults
    return node


def _read_extra(folder: Path, name: str, tables: Tables) -> None:
    files = _with_ending(folder, name)
    if len(files) > 1:
        tables.faults.append(_two_places(folder, files))
    for file in files[:1]:
        source, faults = read_table(file)
        tables.faults += [fault for fault in faults if fault.code != "no-row"]
        if source is not None:
            tables.extras[name] = source


def _price_files(folder: Path, tables: Tables) -> list[Path]:
    """Return the files of prices of a folder, in the order of their names."""
    long = _with_ending(folder, "prices")
    inner = folder / "prices"
    each = sorted(f for f in inner.iterdir() if f.suffix.lower() in ENDINGS) if inner.is_dir() else []
    if len(long) > 1 or (long and each):
        tables.faults.append(_two_places(folder, [*long, *each]))
        return []
    if not long and not each:
        has = "nothing" if not any(folder.iterdir()) else "no prices"
        told = ("prices.csv, prices.parquet or a folder prices/ with a file a symbol is read", "put it there")
        tables.faults.append(Fault(str(folder), 0, 0, "no-prices", f"the folder holds {has}", *told))
    return long or each


def _with_ending(folder: Path, stem: str) -> list[Path]:
    files = [folder / f"{stem}{ending}" for ending in ENDINGS]
    return [file for file in files if file.is_file()]


def _two_places(folder: Path, files: list[Path]) -> Fault:
    shown = " and ".join(str(file.relative_to(folder)) for file in files[:2])
    told = ("one place is read", "take one of them away")
    return Fault(str(folder), 0, 0, "two-places", f"the same is in {shown}", *told)


def named(source: Source, symbol: str) -> Source:
    """Return a table without a column of symbols as the table of one symbol."""
    return Source(source.table, source.where, symbol)


def for_symbol(tables: Tables, symbol: str) -> Tables:
    """Return the tables with the first table of prices taken as one symbol's."""
    return replace(tables, prices=[named(source, symbol) for source in tables.prices])
