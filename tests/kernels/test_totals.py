"""A log's money in one pass beside its postings, and compiled beside plain Python."""

from __future__ import annotations

import numpy as np
import pytest

from hedgerow.events.kinds import KIND_WORDS
from hedgerow.events.log import EventLog
from hedgerow.kernels import layout as at
from hedgerow.kernels.totals import COSTS_ROW, SUMS, add_up
from hedgerow.ledger.postings import COSTS, post
from hedgerow.units import to_cents
from walks import RULES, lively_market, walked

MARKET = lively_market()


def added(log: EventLog, plain: bool = False) -> tuple[np.ndarray, np.ndarray, np.ndarray]:
    """Cents posted up to each close, sums, and closed positions, compiled or as plain Python."""
    function = getattr(add_up, "py_func", add_up) if plain else add_up
    posted, sums, closed = np.zeros(log.days.size), np.zeros(SUMS), np.zeros((log.terms.size, 3))
    over = function(log.events.view(np.recarray), log.days.view(np.recarray), posted, sums, closed)
    return posted, sums, closed[:over]


@pytest.mark.parametrize("rule", list(RULES))
def test_sums_are_those_of_the_postings(rule: str) -> None:
    """Cash by kind, costs and results, in cents, beside the ledger's postings."""
    log = walked(MARKET, rule)
    posted, sums, closed = added(log)
    cents = to_cents(log.events["cash"])
    by_kind = [int(cents[log.events["kind"] == kind].sum()) for kind in range(len(KIND_WORDS))]
    assert sums[: len(KIND_WORDS)].tolist() == by_kind
    postings = post(log)
    assert sums[COSTS_ROW] == -postings.by_day()[:, COSTS].sum()
    np.testing.assert_array_equal(posted, to_cents(log.days["cash"]))
    ends = log.events[log.events["kind"] == at.KIND_CLOSED]
    expected = np.stack([ends["position"], to_cents(ends["price"]), ends["session"]], axis=1)
    np.testing.assert_array_equal(closed, expected)
    assert len(closed) > 20


def test_compiled_and_plain_agree() -> None:
    """To the last bit."""
    log = walked(MARKET, "married put")
    for one, other in zip(added(log), added(log, plain=True), strict=True):
        np.testing.assert_array_equal(one, other)


def test_there_is_a_row_for_every_kind() -> None:
    """One of the sums for each word of the log, and the costs after them."""
    assert SUMS == len(KIND_WORDS) + 1 == COSTS_ROW + 1
