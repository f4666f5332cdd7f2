"""Logs that obey the conventions add up; one cent or one share off is caught and named."""

from __future__ import annotations

from collections.abc import Callable

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as some

from builders import Builder, collar_that_is_called
from hedgerow.errors import ReconcileError
from hedgerow.events.log import EventLog
from hedgerow.kernels import layout as at
from hedgerow.ledger import Ledger
from hedgerow.ledger.postings import is_trade
from hedgerow.ledger.reconcile import reconcile
from random_logs import random_log_builder

SEEDS = some.integers(0, 10**6)


def changed(log: EventLog, table: str, change: Callable[[np.ndarray], None]) -> EventLog:
    """The same log with one of its tables changed in a copy."""
    tables = {name: np.array(getattr(log, name)) for name in ("events", "terms", "days", "marks")}
    change(tables[table])
    return EventLog(log.meta, **tables)


@settings(max_examples=40, deadline=None)
@given(SEEDS)
def test_random_logs_add_up(seed: int) -> None:
    """Compares every identity of the ledger on random lives that a separate bookkeeper wrote."""
    log = random_log_builder(seed).log()
    ledger = Ledger.checked(log)
    trades, parts = ledger.trades, ledger.by_position
    split = (
        trades["stock_pnl"]
        + trades["option_pnl"]
        + trades["dividends"]
        + trades["interest"]
        - trades["costs"]
    )
    assert split.to_numpy() == pytest.approx(trades["pnl"].to_numpy(), abs=1e-6)
    assert parts["pnl"].to_numpy() == pytest.approx(trades["pnl"].to_numpy(), abs=1e-6)
    cash = np.array([log.events["cash"][log.events["position"] == p].sum() for p in trades["position"]])
    over = trades["closed"].notna().to_numpy()
    assert trades["pnl"].to_numpy()[over] == pytest.approx(cash[over], abs=1e-6)
    by_leg = ledger.legs.groupby("position")["mid_pnl"].sum()
    assert by_leg.to_numpy() == pytest.approx(trades["option_pnl"].to_numpy(), abs=0.011 * 6)


@settings(max_examples=40, deadline=None)
@given(SEEDS)
def test_account_gain_is_the_sum_of_its_parts(seed: int) -> None:
    """Compares the change of equity with the results plus account interest, and with the days' parts."""
    log = random_log_builder(seed).log()
    ledger = Ledger(log)
    account = (log.events["kind"] == at.KIND_INTEREST) & (log.events["position"] == -1)
    gain = log.days["equity"][-1] - log.meta.opening_cash
    total = ledger.trades["pnl"].sum() + log.events["cash"][account].sum()
    assert total == pytest.approx(gain, abs=0.02 * max(len(ledger.trades), 1))
    days = ledger.by_day
    parts = days.drop(columns=["variant", "date", "change"]).sum(axis=1)
    assert parts.to_numpy() == pytest.approx(days["change"].to_numpy(), abs=1e-6)
    assert ledger.by_month["change"].sum() == pytest.approx(gain + log.meta.opening_cash, abs=1e-6)


@settings(max_examples=40, deadline=None)
@given(SEEDS, some.data())
def test_one_cent_more_is_caught(seed: int, data: some.DataObject) -> None:
    """Negative control: one cent on any event's cash, or on any day's cash, must be refused."""
    log = random_log_builder(seed).log()
    index = data.draw(some.integers(0, log.events.size - 1))
    bent = changed(
        log, "events", lambda events: events["cash"].__setitem__(index, events["cash"][index] + 0.01)
    )
    with pytest.raises(ReconcileError, match="does not add up"):
        reconcile(bent)
    day = data.draw(some.integers(0, log.days.size - 1))
    bent = changed(log, "days", lambda days: days["cash"].__setitem__(day, days["cash"][day] + 0.01))
    with pytest.raises(ReconcileError, match="does not add up"):
        reconcile(bent)


@settings(max_examples=40, deadline=None)
@given(SEEDS, some.data())
def test_one_share_more_is_caught(seed: int, data: some.DataObject) -> None:
    """Negative control: one share more on any trade must be refused, with its cash made to fit or not."""
    log = random_log_builder(seed).log()
    trades = np.flatnonzero(is_trade(log))
    if not trades.size:
        return
    index = int(data.draw(some.sampled_from(list(trades))))

    def bend(events: np.ndarray, fit: bool) -> None:
        events["quantity"][index] += 1.0
        if fit:
            cash = -events["quantity"][index] * events["price"][index] - events["fee"][index]
            events["cash"][index] = np.round(cash, 2)

    for fit in (False, True):
        with pytest.raises(ReconcileError, match="does not add up"):
            reconcile(changed(log, "events", lambda events, fit=fit: bend(events, fit)))


def test_message_names_the_place_and_the_amounts() -> None:
    """Compares the text of a refused log with what a person needs: date, symbol, position, amounts."""
    log = collar_that_is_called().log()
    bent = changed(log, "events", lambda events: events["cash"].__setitem__(2, events["cash"][2] + 1.25))
    with pytest.raises(ReconcileError) as caught:
        reconcile(bent)
    text = str(caught.value)
    assert "2011-01-04, ASH, position 0, event 2 (shares)" in text
    assert "-10,001.75, expected -10,003.00, off by 1.25" in text


def _set(field: str, index: int, value: float) -> Callable[[np.ndarray], None]:
    return lambda table: table[field].__setitem__(index, value)


# events of the called collar:
# 0 deposit, 1 opened, 2 shares, 3 call, 4 put, 5 dividend, 6 assigned, 7 shares, 8 expired, 9 closed
BENT = [
    ("events", _set("session", 9, 1), "stands before an earlier session"),
    ("events", _set("session", 0, 6), "stands before an earlier session"),
    ("events", _set("position", 5, 7), "belongs to a position that has no terms"),
    ("events", _set("symbol", 5, 1), "names another symbol"),
    ("events", _set("kind", 1, at.KIND_SIGNALLED), "was opened is 0.00"),
    ("events", _set("kind", 9, at.KIND_OPENED), "was opened is 2.00"),
    ("events", _set("cash", 5, 30.004), "not in whole cents"),
    ("events", _set("mid", 3, 0.70), "the fill is better than the middle price"),
    ("events", _set("price", 9, 291.41), "not the sum of its cash"),
    ("events", _set("price", 7, 51.01), "not what quantity, price and fee come to"),
    ("events", _set("strike", 6, 52.0), "not followed by its shares at the strike"),
    ("events", _set("kind", 9, at.KIND_SIGNALLED), "open positions is not opened less closed"),
    ("terms", _set("net_debit", 0, 9930.5), "net debit is not what the fills at entry paid"),
    ("days", _set("equity", 2, 100_000.0), "equity is not cash and stock and options"),
    ("days", _set("positions", 2, 2), "open positions is not opened less closed"),
    ("days", _set("session", 2, 1), "no day for the session|not in order"),
    ("marks", _set("shares", 1, 201.0), "shares marked are not the shares held"),
    ("marks", _set("leg0", 1, -1.0), "do not sum to the options"),
    ("marks", _set("spot", 1, 51.4), "do not sum to the stock"),
    ("marks", _set("spot", 1, np.nan), "do not sum to the stock"),
    ("marks", _set("position", 1, 3), "belongs to a position that has no terms"),
]


@pytest.mark.parametrize(("table", "change", "text"), BENT)
def test_each_check_catches_its_own(table: str, change: Callable[[np.ndarray], None], text: str) -> None:
    """Negative control: every check refuses a log that breaks just what it watches."""
    log = collar_that_is_called().log()
    with pytest.raises(ReconcileError, match=text):
        reconcile(changed(log, table, change))


def test_dividend_on_other_shares_is_caught() -> None:
    """Negative control: a dividend on 300 shares while 200 are held, its cash made to fit."""
    log = collar_that_is_called().log()

    def bend(events: np.ndarray) -> None:
        events["quantity"][5], events["cash"][5] = 300.0, 45.0
        events["price"][9] += 15.0

    bent = changed(log, "events", bend)
    bent = changed(
        bent, "days", lambda days: days["cash"].__setitem__(slice(2, None), days["cash"][2:] + 15.0)
    )
    with pytest.raises(ReconcileError, match=r"dividend is not on the shares held 300.00, expected 200.00"):
        reconcile(bent)


def test_trade_after_the_end_is_caught() -> None:
    """Negative control: shares bought for a position that is over."""
    book = collar_that_is_called()
    book.held[0] = {}
    book.shares(0, 100.0, 50.0, 50.0)
    book.night({0: 50.0})
    with pytest.raises(ReconcileError, match="before it is opened or after it is over"):
        reconcile(book.log())


def test_quantity_left_at_the_end_is_caught() -> None:
    """Negative control: a position closed while its put is still held."""
    book = Builder(marked=False)
    place = book.open(0, shares=100.0, net_debit=5050.0)
    book.shares(place, 100.0, 50.0, 50.0)
    book.leg(place, 1, 100.0, (0.5, 0.5), (48.0, "2011-01-07"))
    book.night({0: 50.0}, {(place, 1): 0.5})
    book.shares(place, -100.0, 50.0, 50.0, reason=at.WHY_STOP)
    book.close(place, at.WHY_STOP)
    book.night()
    with pytest.raises(ReconcileError, match=r"a quantity is left when the position is over: 100.00"):
        reconcile(book.log())


def test_empty_log_adds_up() -> None:
    """Compares an account that never traded with its deposit."""
    book = Builder()
    book.night()
    ledger = Ledger.checked(book.log())
    assert len(ledger.trades) == len(ledger.legs) == len(ledger.marks) == 0
    assert ledger.equity["equity"].to_list() == [100_000.0]
    assert ledger.by_day["deposits"].to_list() == [100_000.0]


def test_frames_without_rows_have_the_same_columns() -> None:
    """Compares the types of every frame of an account that never traded with those of one that did."""
    book = Builder()
    book.night()
    none, some_rows = Ledger(book.log()), Ledger(collar_that_is_called().log())
    for name in ("trades", "legs", "equity", "marks", "by_position"):
        empty, full = getattr(none, name), getattr(some_rows, name)
        assert empty.dtypes.to_dict() == full.dtypes.to_dict(), name
    assert none.log.to_frame().dtypes.to_dict() == some_rows.log.to_frame().dtypes.to_dict()
