"""The account: what may not be, sectors as numbers, and the plan that the walk reads."""

from __future__ import annotations

import datetime as dt
from dataclasses import replace
from typing import Any

import numpy as np
import pytest

from array_market import array_market
from hedgerow.errors import StudyError
from hedgerow.kernels import layout
from hedgerow.market.calendar import sessions_between
from hedgerow.rules.load import load_strategy
from hedgerow.rules.program import compile_strategy
from hedgerow.study.words import AccountWords
from hedgerow.walk.account import Account
from hedgerow.walk.run import _plan
from hedgerow.walk.sectors import sector_codes
from rule_words import collar

ORDINALS = sessions_between(dt.date(2013, 1, 2).toordinal(), dt.date(2013, 1, 31).toordinal())


@pytest.mark.parametrize(
    ("words", "told"),
    [
        ({"cash": 0.0}, "the cash is 0"),
        ({"per_position": 1.5}, "the share of equity a position is 1.5"),
        ({"most_positions": 0}, "`most_positions` is 0"),
        ({"most_new_a_day": -1}, "`most_new_a_day` is -1"),
        ({"most_per_sector": 0}, "`most_per_sector` is 0"),
        ({"margin": "regulations"}, "did you mean `regulation`?"),
    ],
)
def test_wrong_accounts(words: dict[str, Any], told: str) -> None:
    """Each fault names what was found."""
    with pytest.raises(StudyError, match=told.replace("?", r"\?")):
        Account(**words)


def test_every_fault_at_once() -> None:
    """Three wrong words are three faults."""
    with pytest.raises(StudyError) as caught:
        Account(cash=-1.0, most_per_sector=0, margin="none")
    assert len(caught.value.faults) == 3


def test_words_make_the_account() -> None:
    """Compares the account of words with the one made by hand; defaults agree."""
    made = AccountWords.model_validate({"most_per_sector": 2, "margin": "regulation", "cash": 5000}).account()
    assert made == replace(Account(cash=5000.0), most_per_sector=2, margin="regulation")
    assert AccountWords().account() == Account()


def plan_of(account: Account, enter: dict[str, Any]) -> Any:
    """The plan of a collar with such an entry."""
    strategy = load_strategy(collar(enter=enter))
    program = compile_strategy(strategy, lambda wanted: np.zeros((0, 0)), ORDINALS, 2, "modern")
    return _plan(program, account, "modern", True)[0]


def test_account_in_the_plan() -> None:
    """Limits and margin go to their fields."""
    plan = plan_of(Account(most_per_sector=2, margin="regulation"), {})
    assert (plan["most_sector"], plan["margin"]) == (2, layout.MARGIN_REGULATION)
    assert plan_of(Account(), {})["margin"] == layout.MARGIN_CASH


def test_a_ladder_shares_the_money_of_one_position() -> None:
    """Three positions of a quarter of equity take a twelfth each (1/4 / 3)."""
    ladder = {"ladder": {"positions": 3, "spacing": 5}}
    assert plan_of(Account(per_position=0.25), ladder)["per_position"] == pytest.approx(1 / 12, rel=1e-15)
    assert plan_of(Account(per_position=0.25), {})["per_position"] == 0.25


def test_sectors_as_numbers() -> None:
    """Hand-worked: the same number for the same sector, -1 where none is known."""
    market = array_market(np.full((3, 4), 20.0), sectors=("Timber", "", "Bank", "Timber"))
    codes = sector_codes(market)
    assert codes[0] == codes[3]
    assert codes[1] == layout.NO_SECTOR
    assert len({int(code) for code in codes}) == 3
