"""Events as sentences."""

from __future__ import annotations

import pytest

from builders import Builder, collar_that_is_called
from hedgerow.events import LegName, sentence, story
from hedgerow.kernels import layout as at


def test_story_of_a_called_collar() -> None:
    """Compares the whole story of one position with the text a person would write."""
    assert story(collar_that_is_called().log(), 0) == [
        "2011-01-04: Position 0 in ASH is opened (entry).",
        "2011-01-04: Bought 200 shares of ASH at 50.0100 (middle 50.0000) (entry): "
        "10,003.00 paid, 1.00 of fees counted in.",
        "2011-01-04: Sold 2 contracts of the call struck at 51.00 to 2011-01-07 on ASH at 0.7800 "
        "(middle 0.8000) (entry): 154.70 received, 1.30 of fees counted in.",
        "2011-01-04: Bought 2 contracts of the put struck at 48.00 to 2011-01-07 on ASH at 0.4200 "
        "(middle 0.4000) (entry): 85.30 paid, 1.30 of fees counted in.",
        "2011-01-05: 200 shares of ASH earned a dividend of 0.1500 a share: 30.00 received.",
        "2011-01-07: 2 contracts of the call struck at 51.00 to 2011-01-07 on ASH were assigned with the "
        "stock at 53.00 (expiry): 5.00 paid, 5.00 of fees counted in.",
        "2011-01-07: Sold 200 shares of ASH at 51.0000 (expiry): 10,200.00 received.",
        "2011-01-07: 2 contracts of the put struck at 48.00 to 2011-01-07 on ASH ended worthless with the "
        "stock at 53.00.",
        "2011-01-07: Position 0 in ASH is over (expiry): result +291.40.",
    ]


def test_sentences_of_the_account() -> None:
    """Compares sentences about the account, a split, a decline, a signal and an end with plain English."""
    book = Builder(legs=(LegName("hedge", "buy", "put"),))
    place = book.open(1, shares=-100.0)
    book.shares(place, -100.0, 20.0, 20.0)
    book.leg(place, 0, 100.0, (1.0, 1.0), (18.0, "2011-01-07"))
    book.write(at.KIND_INTEREST, -1, cash=1.5, symbol=-1)
    book.write(at.KIND_BORROW, place, cash=-0.4)
    book.write(at.KIND_DECLINED, -1, symbol=0, reason=at.WHY_NET_CREDIT, quantity=3.0)
    book.write(at.KIND_SIGNALLED, place, reason=at.WHY_EXIT_RULE)
    book.write(at.KIND_GONE, place)
    book.split(place, 2.0)
    book.dividend(place, 0.1)
    book.settled(place, 0, 8.0, 1.0)
    log = book.log()
    assert [sentence(log, n) for n in (0, 3, 4, 5, 6, 7, 8, 9, 10, 11)] == [
        "2011-01-03: The account opens with 100,000.00.",
        "2011-01-03: Bought 1 contract of the hedge, a put, struck at 18.00 to 2011-01-07 on ELM at 1.0000 "
        "(entry): 100.00 paid.",
        "2011-01-03: Interest on cash: 1.50 received.",
        "2011-01-03: Cost of borrowing shares of ELM: 0.40 paid.",
        "2011-01-03: An entry in ASH was declined 3 times: not a net credit.",
        "2011-01-03: At the close, an order for ELM was decided: trend turned.",
        "2011-01-03: ELM has had no price for 5 sessions.",
        "2011-01-03: ELM was split, 2 new shares for one old.",
        "2011-01-03: 200 shares of ELM owed a dividend of 0.1000 a share: 20.00 paid.",
        "2011-01-03: 2 contracts of the hedge, a put, struck at 9.00 to 2011-01-07 on ELM were exercised "
        "with the stock at 8.00, settled at 1.0000 (expiry): 200.00 received.",
    ]


def test_unknown_position_is_refused() -> None:
    """Negative control: a position that the log does not have."""
    with pytest.raises(KeyError, match="no position of the number 5"):
        story(collar_that_is_called().log(), 5)
