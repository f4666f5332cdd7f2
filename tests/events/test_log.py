"""The log as an object: checked at the door, read-only, with words for codes."""

from __future__ import annotations

import datetime as dt

import numpy as np
import pandas as pd
import pytest

from builders import collar_that_is_called
from hedgerow.events import EventLog, LogMeta, kinds
from hedgerow.events.log import dates_of
from hedgerow.kernels import layout as at


def test_frame_has_words_and_dates() -> None:
    """Compares the rows of the frame with what the bookkeeper was told."""
    frame = collar_that_is_called().log().to_frame()
    call = frame.iloc[3]
    assert (call["kind"], call["leg"], call["reason"], call["symbol"]) == ("leg", "call", "entry", "ASH")
    assert (call["date"], call["expiry"]) == (pd.Timestamp("2011-01-04"), pd.Timestamp("2011-01-07"))
    assert (call["quantity"], call["price"], call["cash"]) == (-200.0, 0.78, 154.70)
    first = frame.iloc[0]
    assert (first["kind"], first["symbol"], first["leg"], first["position"]) == ("deposit", "", "", -1)
    assert pd.isna(first["expiry"])
    assert frame["kind"].iloc[-1] == "closed"
    assert frame["leg"].iloc[2] == "shares"


def test_every_code_has_its_own_word() -> None:
    """Compares the number of words with the number of codes in the layout; words of one table differ."""
    kind_codes = {name: code for name, code in vars(at).items() if name.startswith("KIND_")}
    why_codes = {name: code for name, code in vars(at).items() if name.startswith("WHY_")}
    del why_codes["WHY_EXIT_RULE"]
    assert sorted(kind_codes.values()) == list(range(len(kinds.KIND_WORDS)))
    assert sorted(why_codes.values()) == list(range(len(kinds.WHY_WORDS)))
    assert len(set(kinds.KIND_WORDS)) == len(kinds.KIND_WORDS)
    assert len(set(kinds.WHY_WORDS)) == len(kinds.WHY_WORDS)
    assert kinds.KIND_WORDS[at.KIND_DECLINED] == "declined"
    assert kinds.WHY_WORDS[at.WHY_NO_LOT] == "capital too small for one lot"
    assert at.WHY_NO_LOT in kinds.DECLINED_REASONS
    assert at.WHY_STOP not in kinds.DECLINED_REASONS


def test_exit_rules_are_named() -> None:
    """Compares reasons from 100 on with the names in the order of the file."""
    assert kinds.reason_word(at.WHY_EXIT_RULE + 1, ("trend turned", "cut")) == "cut"
    assert kinds.reason_word(at.WHY_EXIT_RULE + 2, ("trend turned", "cut")) == "exit rule 3"
    words = kinds.reason_words(("trend turned",))
    assert words[at.WHY_EXIT_RULE] == "trend turned"
    assert words[at.WHY_STOP] == "stop"


def test_tables_cannot_be_written() -> None:
    """Compares writing to a table of a log with: refused."""
    log = collar_that_is_called().log()
    with pytest.raises(ValueError, match="read-only"):
        log.events["cash"][0] = 1.0
    with pytest.raises(ValueError, match="read-only"):
        log.meta.dates[0] = np.datetime64("2000-01-01")


@pytest.mark.parametrize(
    ("field", "value", "word"), [("session", 99, "session"), ("symbol", 2, "symbol"), ("leg", 2, "leg")]
)
def test_codes_without_meaning_are_refused(field: str, value: int, word: str) -> None:
    """Negative control: a code that the meta does not know."""
    log = collar_that_is_called().log()
    events = np.array(log.events)
    events[field][3] = value
    with pytest.raises(ValueError, match=f"a {word} that"):
        EventLog(log.meta, events, log.terms, log.days, log.marks)


def test_wrong_layout_is_refused() -> None:
    """Negative control: the days handed in where the terms belong."""
    log = collar_that_is_called().log()
    with pytest.raises(ValueError, match="table `terms`"):
        EventLog(log.meta, log.events, log.days, log.days, log.marks)


def test_chunks_join_to_the_same_log() -> None:
    """Compares a log cut into chunks and joined with the whole, and with one that differs in one bit."""
    log = collar_that_is_called().log()
    cut = EventLog.join(
        log.meta, [log.events[:4], log.events[4:]], [log.terms], [log.days[:1], log.days[1:]], [log.marks]
    )
    assert cut.same_as(log)
    events = np.array(log.events)
    events["spot"][3] = np.nextafter(events["spot"][3], 1.0)
    assert not EventLog(log.meta, events, log.terms, log.days, log.marks).same_as(log)


def test_meta_round_trip() -> None:
    """Compares the meta with what its dictionary makes again."""
    meta = collar_that_is_called().log().meta
    again = LogMeta.from_dict(meta.as_dict())
    assert again.as_dict() == meta.as_dict()
    assert again.leg_names == ("call", "put")
    assert again.dates.dtype == np.dtype("datetime64[D]")


@pytest.mark.parametrize("text", ["1970-01-01", "2011-01-07", "1968-02-29"])
def test_dates_of_ordinals(text: str) -> None:
    """Compares ordinals turned into dates with the standard library's calendar."""
    day = dt.date.fromisoformat(text)
    assert str(dates_of(np.array([day.toordinal()]))[0]) == f"{text}T00:00:00"
    assert np.isnat(dates_of(np.array([0]))[0])
