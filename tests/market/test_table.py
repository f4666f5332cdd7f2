"""The frozen Market: what it holds, how it is cut, and that a cut knows nothing of what came later."""

from __future__ import annotations

import datetime as dt

import numpy as np
import pandas as pd
import pytest
from hypothesis import given
from hypothesis import strategies as st

from hedgerow.errors import DataError
from hedgerow.market import Market
from hedgerow.market.table import GRIDS, Finding, bar_range
from price_tables import flat_frame, same_content, walk_frame

COUNT = 80


def full_market() -> Market:
    """Three symbols with actions, reports and rates; one ends early, one starts late."""
    frame = walk_frame("ABC", COUNT)
    days = frame["date"].unique()
    gone = (frame["symbol"] == "B") & (frame["date"] > days[60])
    early = (frame["symbol"] == "C") & (frame["date"] < days[20])
    frame = frame[~gone & ~early]
    return Market.from_frame(
        frame,
        adjustment="none",
        splits=pd.DataFrame(
            {"symbol": ["A", "A", "C"], "date": days[[30, 50, 40]], "ratio": [2.0, 1.5, 0.1]}
        ),
        dividends=pd.DataFrame(
            {
                "symbol": ["A", "B", "B", "C"],
                "date": days[[10, 20, 70, 45]],
                "amount": [0.25, 0.5, 0.5, 3.0],
                "kind": ["", "regular", "", "special"],
            }
        ),
        reports=pd.DataFrame(
            {
                "symbol": ["A", "A", "B"],
                "date": days[[25, 60, 35]],
                "eps": [1.0, 1.25, 0.4],
                "time": ["before", "after", ""],
            }
        ),
        rates=pd.DataFrame({"date": days[[5, 41]], "rate": [0.02, 0.03]}),
        symbols={"C": {"kind": "index", "sector": "Timber"}},
    )


MARKET = full_market()


def test_arrays_are_what_the_package_builds_on() -> None:
    """Shapes, dtypes, order and protection of every array, as compiled code needs them."""
    for name in GRIDS:
        array = getattr(MARKET, name)
        assert (array.shape, array.dtype) == ((COUNT, 3), np.float64), name
        assert array.flags.c_contiguous, name
        assert not array.flags.writeable, name
    assert (MARKET.dates.dtype, MARKET.ordinals.dtype, MARKET.rate.dtype) == ("M8[D]", np.int64, np.float64)
    assert MARKET.ordinals[0] == dt.date(2015, 1, 5).toordinal()
    assert (np.diff(MARKET.ordinals) > 0).all()
    assert MARKET.kinds == ("stock", "stock", "index")
    assert MARKET.sectors == ("", "", "Timber")
    with pytest.raises(ValueError, match="read-only"):
        MARKET.close[0, 0] = 1.0
    with pytest.raises(AttributeError):
        MARKET.__setattr__("currency", "EUR")


def test_first_and_last_bars_are_the_ends_of_each_history() -> None:
    """B ended after session 60, C began at session 20."""
    assert MARKET.first_bar.tolist() == [0, 0, 20]
    assert MARKET.last_bar.tolist() == [79, 60, 79]
    assert np.isnan(MARKET.close[61:, 1]).all()
    assert np.isnan(MARKET.close[:20, 2]).all()
    first, last = bar_range(np.full((4, 2), np.nan))
    assert (first.tolist(), last.tolist()) == ([4, 4], [-1, -1])


def test_prices_in_first_shares_use_only_the_past() -> None:
    """A share of A is 2 from session 30, 3 from session 50; one of C is a tenth from session 40."""
    shares = np.ones((COUNT, 3))
    shares[30:, 0], shares[50:, 0], shares[40:, 2] = 2.0, 3.0, 0.1
    adjusted = MARKET.first_share()
    for name in ("open", "high", "low", "close"):
        wanted = getattr(MARKET, name) * shares
        np.testing.assert_array_equal(getattr(adjusted, name), wanted)
        assert getattr(MARKET, f"adj_{name}") is getattr(adjusted, name)
        assert not getattr(adjusted, name).flags.writeable
    later = MARKET.until(MARKET.dates[49])
    np.testing.assert_array_equal(later.adj_close, adjusted.close[:50])


def test_rates_are_carried_forward_only() -> None:
    """Nothing before the first rate, then the last one stated on or before each session."""
    assert MARKET.rate[:5].tolist() == [0.0] * 5
    assert MARKET.rate[5:41].tolist() == [0.02] * 36
    assert MARKET.rate[41:].tolist() == [0.03] * 39


def test_reports_know_their_reaction() -> None:
    """Before the open the day itself reacts, after the close (and unsaid) the next; known 21 days ahead."""
    days = MARKET.ordinals
    assert [tuple(report) for report in MARKET.reports] == [
        (0, days[25], days[25] - 21, days[25], 1.0),
        (0, days[60], days[60] - 21, days[60] + 1, 1.25),
        (1, days[35], days[35] - 21, days[35] + 1, 0.4),
    ]


def test_selecting_keeps_sessions_and_renumbers_reports() -> None:
    """B and A alone: alphabetical, the same sessions, their own reports, C's findings gone."""
    part = MARKET.select(["B", "A"])
    assert part.symbols == ("A", "B")
    assert part.shape == (COUNT, 2)
    assert part.reports == MARKET.reports
    assert MARKET.select(["B"]).reports == (MARKET.reports[2]._replace(symbol_index=0),)
    np.testing.assert_array_equal(part.close, MARKET.close[:, :2])
    assert part.close.flags.c_contiguous
    assert {finding.symbol for finding in MARKET.select(["C"]).findings} <= {"", "C"}
    assert same_content(MARKET.select(MARKET.symbols), MARKET)


def test_selecting_what_is_not_there_names_the_nearest() -> None:
    """Every unknown symbol is told; nothing at all is refused too."""
    long = Market.from_frame(flat_frame([10.0, 11.0], symbol="ALDER"))
    with pytest.raises(DataError) as caught:
        long.select(["ALDRE", "OAK"])
    first, second = (str(fault) for fault in caught.value.faults)
    assert first == "frame: there is no symbol `ALDRE`; known are ALDER; did you mean `ALDER`?"
    assert second == "frame: there is no symbol `OAK`; known are ALDER"
    with pytest.raises(DataError, match="no symbol is selected"):
        long.select([])
    assert long.index_of("ALDER") == 0
    with pytest.raises(DataError, match="did you mean `ALDER`"):
        long.index_of("ALDR")


@pytest.mark.parametrize("date", ["2015-01-04", "1999-12-31"])
def test_a_cut_before_the_history_is_refused(date: str) -> None:
    """No session is left before the first one, 2015-01-05."""
    with pytest.raises(DataError, match="the first session is 2015-01-05"):
        MARKET.until(date)


def test_a_cut_at_no_date_is_refused() -> None:
    """Neither words nor days that do not exist; every kind of date that does is taken."""
    for wrong in ("soon", "2015-02-30"):
        with pytest.raises(DataError, match="is not a date"):
            MARKET.until(wrong)
    day = MARKET.dates[10]
    for right in (str(day), day.item(), np.datetime64(day, "s"), pd.Timestamp(day), day):
        assert MARKET.until(right).shape == (11, 3)


def test_a_cut_on_a_day_without_a_session_ends_with_the_one_before() -> None:
    """A Sunday's close is Friday's."""
    assert MARKET.until("2015-01-11").dates[-1] == np.datetime64("2015-01-09")


def test_a_cut_hides_results_and_unannounced_reports() -> None:
    """Around A's report of session 60, after the close: unknown, then a date without a result, then both."""
    report = MARKET.reports[1]

    def seen(ordinal: int) -> list[tuple[int, float]]:
        cut = MARKET.until(dt.date.fromordinal(ordinal))
        return [
            (r.ordinal, r.eps) for r in cut.reports if r.symbol_index == 0 and r.ordinal == report.ordinal
        ]

    assert seen(report.announced_ordinal - 1) == []
    assert np.isnan(seen(report.announced_ordinal)[0][1])
    assert np.isnan(seen(report.ordinal)[0][1])
    assert seen(report.reaction_ordinal) == [(report.ordinal, 1.25)]


def test_a_cut_moves_last_bars_and_keeps_symbols() -> None:
    """C has no bar yet at session 10; B is not known to end while it trades."""
    cut = MARKET.until(MARKET.dates[10])
    assert cut.symbols == MARKET.symbols
    assert cut.first_bar.tolist() == [0, 0, 11]
    assert cut.last_bar.tolist() == [10, 10, -1]
    assert MARKET.until(MARKET.dates[70]).last_bar.tolist() == [70, 60, 70]


@given(st.integers(0, COUNT - 1), st.integers(0, COUNT - 1))
def test_cutting_twice_is_cutting_at_the_earlier_day(one: int, other: int) -> None:
    """Property: until(a).until(b) is until(min(a, b)), in every field."""
    twice = MARKET.until(MARKET.dates[one]).until(MARKET.dates[min(one, other)])
    once = MARKET.until(MARKET.dates[min(one, other)])
    assert same_content(twice, once)
    assert twice.findings == once.findings
    assert repr(twice.reports) == repr(once.reports)


@given(st.integers(0, COUNT - 2), st.integers(0, 2), st.floats(0.5, 2.0))
def test_what_comes_later_changes_nothing_before(session: int, symbol: int, factor: float) -> None:
    """Property: other prices, splits and dividends after a day leave the cut at that day the same."""
    changed = {name: getattr(MARKET, name).copy() for name in ("close", "high", "split", "dividend")}
    for array in changed.values():
        array[session + 1 :, symbol] *= factor
    other = Market(**{name: getattr(MARKET, name) for name in MARKET.__dataclass_fields__} | changed)
    day = MARKET.dates[session]
    assert other.until(day).fingerprint == MARKET.until(day).fingerprint
    np.testing.assert_array_equal(other.until(day).adj_close, MARKET.until(day).adj_close)


@given(st.sampled_from(("close", "volume", "dividend", "special", "split", "implied")), st.integers(0, 59))
def test_the_fingerprint_sees_every_cell(name: str, session: int) -> None:
    """Property: one cell changed by the least amount gives another fingerprint."""
    array = getattr(MARKET, name).copy()
    array[session, 0] = 0.125 if np.isnan(array[session, 0]) else np.nextafter(array[session, 0], np.inf)
    other = Market(**{field: getattr(MARKET, field) for field in MARKET.__dataclass_fields__} | {name: array})
    assert other.fingerprint != MARKET.fingerprint


def test_the_fingerprint_sees_words_reports_and_rates_but_not_the_path() -> None:
    """Currency, kinds, a report's EPS and a rate are content; source and findings are not."""
    fields = {field: getattr(MARKET, field) for field in MARKET.__dataclass_fields__}
    note = (Finding("x", "note", "", "", "x"),)
    assert Market(**fields | {"source": "elsewhere", "findings": note}).fingerprint == MARKET.fingerprint
    others = {
        "currency": "EUR",
        "kinds": ("stock", "stock", "stock"),
        "reports": (MARKET.reports[0]._replace(eps=1.01), *MARKET.reports[1:]),
        "rate": MARKET.rate + 1e-9,
    }
    prints = {Market(**fields | {name: value}).fingerprint for name, value in others.items()}
    assert len(prints | {MARKET.fingerprint}) == len(others) + 1


def test_arrays_that_do_not_belong_together_are_refused() -> None:
    """A market with one session of dates too few never exists."""
    fields = {field: getattr(MARKET, field) for field in MARKET.__dataclass_fields__}
    with pytest.raises(DataError, match=r"`open` has the shape \(80, 3\)"):
        Market(**fields | {"dates": MARKET.dates[1:]})
