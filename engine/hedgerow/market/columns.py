"""Which column of a table is what: the ordinary names of each role, in any case and order."""

from __future__ import annotations

import re
from collections.abc import Iterable, Mapping
from dataclasses import dataclass

from hedgerow.errors import Fault, nearest_word

_NAMES = {
    "symbol": "symbol ticker tic code instrument asset security stock sym",
    "date": "date day session datetime timestamp tradedate tradingday exdate",
    "open": "open o openprice opening pxopen first",
    "high": "high h highprice max pxhigh",
    "low": "low l lowprice min pxlow",
    "close": "close c closeprice closing last lastprice price pxlast pxclose settle",
    "volume": "volume vol v sharestraded pxvolume",
    "adjusted_close": "adjustedclose adjclose adjclosed closeadj closeadjusted adjustedprice",
    "dividend": "dividend dividends div cashdividend divcash",
    "special": "special specialdividend specialdividends",
    "split": "split splits splitratio stocksplit stocksplits splitfactor",
    "implied": "implied impliedvolatility impliedvol iv",
    "amount": "amount dividend dividends cash value divcash",
    "kind": "kind type",
    "ratio": "ratio split splits splitratio factor newforold",
    "eps": "eps earningspershare earnings",
    "announced": "announced announcedon known knownfrom",
    "time": "time when timing",
    "rate": "rate yield value close interest",
}
_SYNONYMS = {role: frozenset(names.split()) for role, names in _NAMES.items()}


_SHORT = 4  # names up to this length are near to too much


@dataclass(frozen=True, slots=True)
class Wanted:
    """The roles a table must and may have; in the order they are told to a person."""

    must: tuple[str, ...]
    may: tuple[str, ...] = ()


PRICES = Wanted(
    ("date", "open", "high", "low", "close"),
    ("symbol", "volume", "dividend", "special", "split", "implied", "adjusted_close"),
)
DIVIDENDS = Wanted(("symbol", "date", "amount"), ("kind",))
SPLITS = Wanted(("symbol", "date", "ratio"))
REPORTS = Wanted(("symbol", "date", "eps"), ("announced", "time"))
RATES = Wanted(("date", "rate"))


def plain_name(name: str) -> str:
    """Return a column's name as letters and digits alone, lower case: "Adj. Close" is "adjclose"."""
    return re.sub(r"[^a-z0-9%]", "", name.lower())


def assign(
    names: Iterable[str], wanted: Wanted, mapping: Mapping[str, str], where: str
) -> tuple[dict[str, str], list[Fault]]:
    """Return which column of a table plays each role, and what is wrong with its columns.

    `mapping` (role to column, from dataset.yaml) goes before the ordinary names. Two columns for one role
    and a role without a column are faults.
    """
    columns = list(names)
    found: dict[str, str] = {}
    faults: list[Fault] = []
    for role in (*wanted.must, *wanted.may):
        fits = _fitting(role, columns, mapping.get(role))
        if len(fits) > 1:
            faults.append(_several(role, fits, where))
        elif fits:
            found[role] = fits[0]
        elif role in mapping and mapping[role] != "":
            faults.append(_not_there(role, mapping[role], columns, where))
        elif role in wanted.must:
            faults.append(_missing(role, columns, found, where))
    if len(faults) > 1 and sum(name.strip().replace(".", "", 1).isdigit() for name in columns) > 1:
        told = ("the first line names the columns", f"write a line like {','.join(wanted.must)} above it")
        return {}, [Fault(where, 1, 0, "no-names", "the first line holds numbers, not names", *told)]
    return found, faults


def _fitting(role: str, columns: list[str], named: str | None) -> list[str]:
    if named is not None:
        return [name for name in columns if name.strip() == named.strip()]
    exact = [name for name in columns if plain_name(name) == plain_name(role)]
    return exact or [name for name in columns if plain_name(name) in _SYNONYMS[role]]


def _several(role: str, fits: list[str], where: str) -> Fault:
    listed = " and ".join(f"`{name}`" for name in fits)
    found = f"{len(fits)} columns could be the {role}: {listed}"
    remedy = f"take one away, or say which in dataset.yaml: `columns: {{{role}: {fits[0].strip()}}}`"
    return Fault(where, 1, 0, "column-twice", found, "one column plays a role", remedy)


def _not_there(role: str, named: str, columns: list[str], where: str) -> Fault:
    found = f"the column `{named}` that dataset.yaml names for {role} is not there"
    return Fault(where, 1, 0, "column-missing", found, _listed(columns), nearest_word(named, columns))


def _missing(role: str, columns: list[str], taken: Mapping[str, str], where: str) -> Fault:
    free = {plain_name(name): name for name in columns if name not in taken.values() and plain_name(name)}
    near = nearest_word(role.replace("_", ""), free)
    for plain, name in free.items():
        near = near.replace(f"`{plain}`", f"`{name.strip()}`")
        if not near and nearest_word(plain, (word for word in _SYNONYMS[role] if len(word) > _SHORT)):
            near = f"did you mean `{name.strip()}`?"
    remedy = f"name it in dataset.yaml: `columns: {{{role}: NAME OF THE COLUMN}}`"
    told = f"{near} {remedy}" if near else remedy
    return Fault(where, 1, 0, "column-missing", f"there is no column for `{role}`", _listed(columns), told)


def _listed(columns: list[str]) -> str:
    shown = ", ".join(f"`{name.strip()}`" for name in columns[:12])
    return (
        f"the columns are {shown}{' and others' if len(columns) > 12 else ''}"
        if columns
        else "it has no column"
    )
