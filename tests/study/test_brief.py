"""The figures kept of every variant beside those of an ordinary summary."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest

from hedgerow.errors import ReconcileError
from hedgerow.events.log import EventLog
from hedgerow.evidence import summarise
from hedgerow.ledger import Ledger
from hedgerow.study.brief import FIGURES, brief_of
from hedgerow.walk.run import Window
from walks import RULES, lively_market, walked

MARKET = lively_market()


@pytest.mark.parametrize("rule", list(RULES))
def test_each_figure_is_that_of_the_summary(rule: str) -> None:
    """To the last bit but for sums of money, which are added up in another order."""
    log = walked(MARKET, rule)
    assert log.terms.size > 20
    summary, brief = summarise(Ledger.checked(log), rate=MARKET.rate), brief_of(log, MARKET.rate)
    for name in FIGURES:
        expected = getattr(summary, name) if hasattr(summary, name) else getattr(summary.account, name)
        assert getattr(brief, name) == pytest.approx(expected, rel=1e-12, nan_ok=True), name


def test_a_rule_that_never_trades_has_no_figures_of_trades() -> None:
    """The same beside the summary when no position was opened."""
    log = walked(MARKET, "collar", window=Window(0, 5))
    assert log.terms.size == 0
    summary, brief = summarise(Ledger(log), rate=MARKET.rate), brief_of(log, MARKET.rate)
    assert np.isnan([brief.win_rate, brief.average_win, brief.expectancy, summary.win_rate]).all()
    assert brief.sharpe == summary.account.sharpe
    assert (brief.positions, brief.costs, brief.time_invested) == (0, 0, 0)


@pytest.mark.parametrize(("table", "field"), [("events", "cash"), ("days", "cash"), ("days", "equity")])
def test_money_that_does_not_add_up_is_caught(table: str, field: str) -> None:
    """A cent put into one posting, one day's cash or one day's equity."""
    log = walked(MARKET, "collar")
    records = getattr(log, table).copy()
    records[field][records.size // 2] += 0.01
    with pytest.raises(ReconcileError, match="does not add up at"):
        brief_of(_with(log, table, records), MARKET.rate)


def _with(log: EventLog, table: str, records: np.ndarray) -> EventLog:
    return replace(log, **{table: records})
