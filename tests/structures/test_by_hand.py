"""Every shipped structure in markets that stand still, rise, fall and gap: each event in order, each cent.

What must happen was followed by hand from the words of the file and stands in the tables; what it comes to is
worked out by `ledger_lines` with arithmetic of its own.
"""

from __future__ import annotations

import math
from dataclasses import replace
from pathlib import Path

import pytest

from hedgerow.events.log import EventLog
from structures import collars, covered, kept, locked, on_margin, protected
from structures.hand_case import STRATEGIES, Case, events_of
from structures.ledger_lines import Reckoner

TABLES = (collars, covered, kept, locked, on_margin, protected)
STRUCTURES = [structure for table in TABLES for structure in table.STRUCTURES]
CASES = [case for structure in STRUCTURES for case in structure.cases()]
NEITHER = {"cash", "index-buywrite"}  # no position at all; the covered call on another market


def differences(case: Case, log: EventLog) -> list[str]:
    """Where events or equities are not those worked out."""
    reckoner, wrong, found = case.reckoner(), [], list(events_of(log))
    days = log.days["equity"].tolist()
    for place, line in enumerate(case.lines):
        session = int(line.split()[0])
        wrong += equities(reckoner, days, session)
        expected = reckoner.event(line)
        if place >= len(found):
            return [*wrong, f"{line}: nothing more happened"]
        for name, value in expected.items():
            if not math.isclose(value, found[place][name], rel_tol=1e-9, abs_tol=1e-9):
                wrong.append(f"{line}: {name} is {found[place][name]}, by hand {value}")
    wrong += equities(reckoner, days, len(days))
    wrong += [f"more happened: {event}" for event in found[len(case.lines) :]]
    return wrong + reckoner.wrong


def equities(reckoner: Reckoner, days: list[float], until: int) -> list[str]:
    """Closes before the session `until` whose equity is not the one worked out."""
    wrong = []
    for session in range(reckoner.closed, until):
        by_hand = reckoner.equity(session)
        if abs(by_hand - days[session]) > 0.005:
            wrong.append(f"equity of session {session} is {days[session]:.4f}, by hand {by_hand:.4f}")
    reckoner.closed = until
    return wrong


@pytest.mark.parametrize("case", CASES, ids=lambda case: case.name)
def test_events_and_cents(case: Case) -> None:
    """The walk beside lines worked out by hand: kind, leg, quantity, strike, expiry, reason, price, cash."""
    assert differences(case, case.walked()) == []


@pytest.mark.parametrize("case", CASES[::7], ids=lambda case: case.name)
def test_a_wrong_cent_is_seen(case: Case) -> None:
    """A negative control: the same log does not fit lines with another strike, quantity or end."""
    log = case.walked()
    for old, new in ((" 50 ", " 51 "), ("+200", "+100"), ("expired", "assigned"), ("opened 2", "opened 3")):
        spoiled = replace(case, told=case.told.replace(old, new))
        if spoiled.told != case.told:
            assert differences(spoiled, log)


def test_no_shipped_structure_is_missing() -> None:
    """The tables against the folder of strategies."""
    shipped = {path.stem for path in Path(STRATEGIES).glob("*.yaml")}
    assert {structure.file for structure in STRUCTURES} | NEITHER == shipped


@pytest.mark.parametrize("market", ["still", "rising", "falling", "gapping"])
def test_cash_does_nothing(market: str) -> None:
    """Nothing happens, and 12,000 stay 12,000."""
    case = next(case for case in CASES if case.name == f"shares alone, {market}")
    log = Case("cash", "cash", case.closes, "").walked()
    assert list(events_of(log)) == []
    assert log.days["equity"].tolist() == [12_000.0] * 10


def results(name: str) -> dict[str, float]:
    """The written result of the first position of a structure on each market."""
    (structure,) = (one for one in STRUCTURES if one.name == name)
    out = {}
    for case in structure.cases():
        over = next(line for line in case.lines if " over " in line)
        out[case.name.split(", ")[-1]] = float(over.split()[-1])
    return out


def test_a_call_spread_is_the_collar_of_the_same_strikes() -> None:
    """Common practice: without carry and costs the two come to the same cent, wherever the stock ends."""
    assert results("call debit spread") == results("collar")


def test_a_conversion_is_flat_wherever_the_stock_ends() -> None:
    """Strike less net debit: nothing without costs, and with them what spread, fees and slippage take: 31.19.

    Entry: 10.00 slippage, 1.00 for the shares, 2 x 200 x 2 % of 1.5742 = 12.59, 4 contracts at .65 = 2.60; an
    exercise or assignment 5.00.
    """
    assert set(results("conversion").values()) == {0.0}
    assert set(results("reversal").values()) == {0.0}
    assert set(results("conversion with costs").values()) == {-31.19}
