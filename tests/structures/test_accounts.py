"""What the account adds to a structure: ranking by its figures, full sectors, interest on what is kept."""

from __future__ import annotations

import math
from dataclasses import replace
from datetime import date
from typing import Any

import numpy as np
import pytest

import hedgerow as hr
from hedgerow.events.log import EventLog
from hedgerow.kernels import layout as at
from hedgerow.market.table import Market
from properties.markets import make_market
from structures.hand_case import MONTH, PRICING, STRATEGIES

NAMES = ("ASH", "ELM", "FIR")
DAYS = [date.fromisoformat(f"2024-{day}") for day in MONTH.split()]


def three_stocks(sectors: tuple[str, ...] = ("", "", ""), rate: float = 0.0) -> Market:
    """Ten sessions at 50.00; volatility is 20, 40 and 30 %."""
    ordinals = np.array([day.toordinal() for day in DAYS], np.int64)
    implied = np.tile([0.2, 0.4, 0.3], (10, 1))
    made = make_market(NAMES, ordinals, np.full((10, 3), 50.0), implied=implied, rate=rate)
    return replace(made, sectors=sectors)


def ran(market: Market, file: str, enter: dict[str, Any] | None = None, **account: Any) -> EventLog:
    """A shipped strategy with another way to enter, without costs."""
    words = hr.load_strategy(STRATEGIES / f"{file}.yaml").plain() | (
        {} if enter is None else {"enter": enter}
    )
    terms = hr.Account(**({"per_position": 1.0, "interest": False} | account))
    return hr.run(market, words, account=terms, pricing=PRICING, costs="none").log


def opened(log: EventLog) -> list[str]:
    """Symbols in the order in which positions were opened."""
    return [NAMES[symbol] for symbol in log.terms["symbol"].tolist()]


@pytest.mark.parametrize(
    ("figure", "order", "first"),
    [
        ("net_credit", "high", "ELM"),
        ("net_credit", "low", "ASH"),
        ("best_gain", "high", "ELM"),
        ("worst_loss", "low", "ELM"),
        ("worst_loss", "high", "ASH"),
        ("best_over_worst", "high", "ELM"),
        ("odds_of_best", "low", "ASH"),
    ],
)
def test_who_comes_first_by_a_figure_of_the_collar(figure: str, order: str, first: str) -> None:
    """A 51 call against a 47 put at 20, 40 and 30 %: the more volatile, the more is received for the two.

    So best gain and its share of the worst rise with it, the worst falls, and the chance of ending above 51
    rises: N(d2) is .350, .407, .390.
    """
    rule = {"rank": {"by": {"figure": figure}, "order": order}}
    assert opened(ran(three_stocks(), "collar", rule, cash=6000.0)) == [first]


def test_a_sector_is_full() -> None:
    """One a sector: ELM waits for ASH; FIR is of another, and where none is known nothing is limited."""
    account = {"cash": 1e6, "per_position": 0.1, "most_per_sector": 1}
    log = ran(three_stocks(("wood", "wood", "bush")), "shares-alone", **account)
    assert opened(log) == ["ASH", "FIR"]
    declined = log.events[log.events["kind"] == at.KIND_DECLINED]
    assert set(declined["reason"].tolist()) == {at.WHY_LIMIT}
    assert {NAMES[symbol] for symbol in declined["symbol"].tolist()} == {"ELM"}
    assert len(declined) == 10  # at every close
    assert opened(ran(three_stocks(), "shares-alone", **account)) == ["ASH", "ELM", "FIR"]


@pytest.mark.parametrize("file", ["reversal", "cash-secured-put"])
def test_interest_on_what_is_set_aside(file: str) -> None:
    """Five percent: each day's interest is that of all cash, the position's own part that of its reserve.

    Reserve: 5,000 a lot of the reversal, its proceeds; the put's whole strike.
    """
    rate = 0.05
    log = ran(three_stocks(rate=rate), file, cash=6000.0, most_positions=1, interest=True)
    strike = log.events["strike"][log.events["kind"] == at.KIND_LEG][0]
    kept = 100.0 * (50.0 if file == "reversal" else strike)
    assert log.terms["reserve"].tolist() == [kept]
    for session in range(1, 9):
        growth = math.exp(rate * (DAYS[session] - DAYS[session - 1]).days / 365.0) - 1.0
        rows = log.events[(log.events["kind"] == at.KIND_INTEREST) & (log.events["session"] == session)]
        before = log.days["cash"][session - 1]
        own = rows["cash"][rows["position"] >= 0].tolist()
        assert own == ([] if session == 1 else [round(kept * growth, 2)])
        assert rows["cash"].sum() == pytest.approx(before * growth, abs=0.0101)
        assert log.days["reserved"][session] == kept
