"""Earnings reports and interest rates: read, put in time, refused where wrong."""

from __future__ import annotations

import datetime as dt
from pathlib import Path

import numpy as np
import pandas as pd
import pytest
from hypothesis import given
from hypothesis import strategies as st

from hedgerow.market import Market, load_market
from hedgerow.market.rates import on_sessions
from price_tables import PRICES, codes, faults_of, flat_frame, told, write

DAY = dt.date(2020, 1, 3).toordinal()


def with_reports(folder: Path, lines: str, header: str = "symbol,date,eps,announced,time\n") -> Market:
    """The market of two sessions with the given lines of reports."""
    files = {"prices.csv": PRICES, "reports.csv": header + lines, "dataset.yaml": "adjustment: none\n"}
    return load_market(write(folder, files))


@pytest.mark.parametrize(
    ("line", "announced", "reaction"),
    [
        ("ASH,2020-01-03,1.5,2019-12-20,before", dt.date(2019, 12, 20).toordinal(), DAY),
        ("ASH,2020-01-03,1.5,2020-01-03,after", DAY, DAY + 1),
        ("ASH,2020-01-03,1.5,,", DAY - 21, DAY + 1),
        ("ASH,2020-01-03,1.5,,BMO", DAY - 21, DAY),
        ("ASH,2020-01-03,1.5,,After close", DAY - 21, DAY + 1),
    ],
)
def test_when_a_report_is_known_and_reacted_to(
    tmp_path: Path, line: str, announced: int, reaction: int
) -> None:
    """Announced as written or 21 days ahead; the day itself reacts to a report before its open."""
    market = with_reports(tmp_path, line + "\n")
    assert [tuple(report) for report in market.reports] == [(0, DAY, announced, reaction, 1.5)]


def test_reports_need_no_more_than_three_columns(tmp_path: Path) -> None:
    """Symbol, date and EPS; an EPS that is not known is NaN; reports after the last session are kept."""
    market = with_reports(tmp_path, "ASH,2020-02-03,\nASH,2020-01-03,-0.2\n", "symbol,date,eps\n")
    assert market.reports[0].eps == -0.2
    assert np.isnan(market.reports[1].eps)
    assert market.reports[1].ordinal == DAY + 31


@pytest.mark.parametrize("cell", ["", "NA", "-"])
def test_an_empty_column_of_announcements_is_three_weeks_ahead(tmp_path: Path, cell: str) -> None:
    """Thirty reports, none with a day of announcement: each is known 21 days before it comes."""
    days = [DAY + 91 * number for number in range(30)]
    lines = [f"ASH,{dt.date.fromordinal(day)},1,{cell},before\n" for day in days]
    market = with_reports(tmp_path, "".join(lines))
    assert [report.announced_ordinal for report in market.reports] == [day - 21 for day in days]


def test_a_wrong_announcement_among_empty_ones_has_its_line(tmp_path: Path) -> None:
    """One day after its report, in the 31st line: the line is that of the file, not of the filled cells."""
    days = [dt.date.fromordinal(DAY + 91 * number) for number in range(30)]
    lines = [f"ASH,{day},1,,\n" for day in days[:-1]] + [f"ASH,{days[-1]},1,2099-01-01,\n"]
    files = {"prices.csv": PRICES, "reports.csv": "symbol,date,eps,announced,time\n" + "".join(lines)}
    found = told(faults_of(write(tmp_path, files)), tmp_path)
    assert [line.split(";")[0] for line in found] == [
        "reports.csv:31: announced on 2099-01-01, after the report"
    ]


def test_an_announcement_that_is_no_date_has_its_line(tmp_path: Path) -> None:
    """`soon` in the fourth line, after two empty cells."""
    lines = "ASH,2020-01-03,1,,\nASH,2020-04-03,1,,\nASH,2020-07-03,1,soon,\n"
    files = {"prices.csv": PRICES, "reports.csv": "symbol,date,eps,announced,time\n" + lines}
    found = told(faults_of(write(tmp_path, files)), tmp_path)
    assert found[0].startswith("reports.csv:4: `soon` is not written like the others")


def test_reports_of_symbols_without_prices_are_left_out(tmp_path: Path) -> None:
    """Told once, with the nearest symbol."""
    market = with_reports(tmp_path, "AHS,2020-01-03,1,,\n")
    assert market.reports == ()
    assert codes(market) == ["unknown-symbol"]


@pytest.mark.parametrize(
    ("lines", "sentence"),
    [
        ("ASH,2020-01-03,x,,\n", "reports.csv:2: `x` stands in the column `eps`; a number is wanted"),
        ("ASH,2020-01-03,1,,noon\n", "reports.csv:2: `noon` is no time of a report; `before` (the open) or"),
        ("ASH,2020-01-03,1,2020-01-04,\n", "reports.csv:2: announced on 2020-01-04, after the report"),
        ("ASH,2020-01-03,1,soon,\n", "reports.csv:2: `soon` is not written like the others"),
        ("ASH,,1,,\n", "reports.csv:2: the date is missing"),
        (
            "ASH,2020-01-03,1,,\nASH,2020-01-03,2,,\n",
            "reports.csv:3: ASH has a second, different report for 2020-01-03; take away the wrong one",
        ),
    ],
)
def test_reports_that_are_refused(tmp_path: Path, lines: str, sentence: str) -> None:
    """One fault each, its line counted by hand."""
    files = {"prices.csv": PRICES, "reports.csv": "symbol,date,eps,announced,time\n" + lines}
    found = told(faults_of(write(tmp_path, files)), tmp_path)
    assert found[0].startswith(sentence)
    assert len(found) == 1


def test_a_report_repeated_word_for_word_counts_once(tmp_path: Path) -> None:
    """Twice the same row is one report."""
    assert len(with_reports(tmp_path, "ASH,2020-01-03,1,,\n" * 2).reports) == 1


@pytest.mark.parametrize("cell", ["0.02", "2%", "2.0 %", " 2 % "])
def test_rates_as_fractions_and_as_percentages(tmp_path: Path, cell: str) -> None:
    """Four ways to write two percent."""
    market = load_market(
        write(tmp_path, {"prices.csv": PRICES, "rates.csv": f"date,rate\n2020-01-03,{cell}\n"})
    )
    np.testing.assert_allclose(market.rate, [0.0, 0.02], rtol=1e-15)


def test_annual_rates_become_continuous() -> None:
    """2 % once a year is log(1.02) continuously (Hull, ch. 4: Rc = m ln(1 + Rm / m))."""
    frame = flat_frame([10.0, 11.0, 12.0])
    market = Market.from_frame(frame, rate="2%", compounding="annual")
    np.testing.assert_allclose(market.rate, np.log(1.02), rtol=1e-15)
    np.testing.assert_array_equal(Market.from_frame(frame, rate="2%").rate, 0.02)
    table = pd.DataFrame({"date": [pd.Timestamp("2015-01-06")], "rate": [0.02]})
    np.testing.assert_allclose(
        Market.from_frame(frame, rates=table, compounding="annual").rate, [0.0, np.log(1.02), np.log(1.02)]
    )


@pytest.mark.parametrize(
    ("lines", "sentence"),
    [
        ("2020-01-03,4.5\n", "rates.csv:2: an annual rate of 4.5; a fraction below 0.5, or a percentage"),
        ("2020-01-03,x\n", "rates.csv:2: `x` stands in the column `rate`; a number is wanted"),
        ("2020-01-03,80%\n", "rates.csv:2: an annual rate of 80%"),
        ("2020-01-03,1%\n2020-01-03,2%\n", "rates.csv:3: a second, different rate for 2020-01-03"),
        ("someday,1%\n", "rates.csv:2: `someday` is not written like the others"),
    ],
)
def test_rates_that_are_refused(tmp_path: Path, lines: str, sentence: str) -> None:
    """One fault each."""
    found = told(
        faults_of(write(tmp_path, {"prices.csv": PRICES, "rates.csv": "date,rate\n" + lines})), tmp_path
    )
    assert found[0].startswith(sentence)
    assert len(found) == 1


def test_a_rate_in_two_places_is_refused(tmp_path: Path) -> None:
    """A constant beside a table."""
    files = {"prices.csv": PRICES, "rates.csv": "date,rate\n2020-01-01,2%\n", "dataset.yaml": "rate: 2%\n"}
    assert [fault.code for fault in faults_of(write(tmp_path, files))] == ["two-places"]


def test_tables_that_hold_only_their_names_are_empty(tmp_path: Path) -> None:
    """Tables beside the prices may have no row."""
    extras = {
        "dividends.csv": "symbol,date,amount\n",
        "splits.csv": "symbol,date,ratio\n",
        "reports.csv": "symbol,date,eps\n",
        "rates.csv": "date,rate\n",
    }
    market = load_market(write(tmp_path, {"prices.csv": PRICES} | extras), adjustment="none")
    assert market.findings == ()
    assert market.reports == ()


SERIES = st.lists(st.tuples(st.integers(0, 60), st.floats(-0.05, 0.2)), max_size=12, unique_by=lambda x: x[0])


@given(SERIES, st.integers(0, 60))
def test_a_rate_comes_from_the_past_only(series: list[tuple[int, float]], day: int) -> None:
    """Property: a plain search for the last rate on or before the day; later ones change nothing."""
    ordered = sorted(series)
    days = np.array([one for one, _ in ordered], dtype=np.int64)
    rates = np.array([rate for _, rate in ordered])
    wanted = next((rate for one, rate in reversed(ordered) if one <= day), 0.0)
    assert on_sessions((days, rates), np.array([day]), annual=False)[0] == wanted
    known = days <= day
    assert on_sessions((days[known], rates[known]), np.array([day]), annual=False)[0] == wanted
