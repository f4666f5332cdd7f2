"""Real prices that install from the package index: what they hold, and what is said when they are missing."""

from __future__ import annotations

import importlib.util
import subprocess
import sys

import numpy as np
import pandas as pd
import pytest

from hedgerow.errors import DataError
from hedgerow.market import load_market, samples
from price_tables import codes


def test_five_stocks_as_they_traded() -> None:
    """Closes from memory: AAPL 130.31 and 430.47 at the ends, FB 38.23 on 2012-05-18, its first day."""
    market = samples.stocks()
    assert market.symbols == ("AAPL", "FB", "GOOG", "IBM", "MSFT")
    assert (str(market.dates[0]), str(market.dates[-1])) == ("2000-03-01", "2013-03-01")
    assert market.shape == (3270, 5)
    apple, facebook = market.index_of("AAPL"), market.index_of("FB")
    assert market.close[[0, -1], apple].tolist() == [130.31, 430.47]
    assert market.close[market.first_bar[facebook], facebook] == pytest.approx(38.23, abs=0.005)
    assert str(market.dates[market.first_bar[facebook]]) == "2012-05-18"
    assert (market.currency, market.adjustment) == ("USD", "none")
    assert "public domain" in market.source


def test_the_findings_of_five_real_stocks() -> None:
    """AAPL fell by half on 2000-09-29 (profit warning); none of the five failed."""
    market = samples.stocks()
    assert set(codes(market)) == {"survivorship", "large-move", "recovered", "special-recovered"}
    moves = [(f.symbol, f.date) for f in market.findings if f.code == "large-move"]
    assert moves == [("AAPL", "2000-09-29")]


def test_first_share_prices_move_like_the_adjusted_close() -> None:
    """Away from dividends, returns in units of the first share are those of the adjusted close."""
    market = samples.stocks()
    frame = samples.stocks_frame()
    for name in ("AAPL", "GOOG", "IBM"):
        mine = frame[frame["Ticker"] == name]
        vendor = mine["Adj Close"].astype(float).to_numpy()
        column = market.index_of(name)
        bars = ~np.isnan(market.close[:, column])
        paid = (market.dividend + market.special)[bars, column]
        own = market.adj_close[bars, column]
        moved = np.abs(own[1:] / own[:-1] / (vendor[1:] / vendor[:-1]) - 1.0)
        assert moved[paid[1:] == 0.0].max() < 1e-6


def test_samples_by_name() -> None:
    """`sample:` and a name give the same market as the function, with the bill rate."""
    for name, made in (("five-stocks", samples.stocks(bills=True)), ("sp500", samples.index())):
        market = load_market(f"sample:{name}")
        assert market.fingerprint == made.fingerprint
        assert market.rate.max() > 0.05  # bills in 2000, public record: about 6 %


@pytest.mark.parametrize(
    ("place", "words", "told"),
    [
        ("sample:sp501", {}, "did you mean `sample:sp500`?"),
        ("sample:", {}, "`sample:five-stocks`, `sample:sp500`"),
        ("sample:sp500", {"adjustment": "none"}, "leave them out"),
    ],
)
def test_a_sample_that_cannot_be(place: str, words: dict[str, str], told: str) -> None:
    """One sentence that says what is allowed, or what to leave out."""
    with pytest.raises(DataError) as caught:
        load_market(place, **words)
    assert len(caught.value.faults) == 1
    assert told in str(caught.value)


def test_the_index() -> None:
    """S&P 500 closes, public record: 1469.25 at the end of 1999, 2506.85 of 2018; no dividends."""
    market = samples.index()
    assert (market.symbols, market.kinds, market.shape) == (("SPX",), ("index",), (5031, 1))
    assert (str(market.dates[0]), str(market.dates[-1])) == ("1999-01-04", "2018-12-31")
    close = dict(zip(market.dates.astype(str), market.close[:, 0], strict=True))
    assert close["1999-12-31"] == pytest.approx(1469.25, abs=0.005)
    assert close["2018-12-31"] == pytest.approx(2506.85, abs=0.005)
    assert market.dividend.sum() == 0.0
    assert codes(market) == []


def test_bill_rates() -> None:
    """About 5.8 % in 2000, nearly nothing in 2012 (public record); one rate a month, from its start."""
    rates = samples.bill_rates().set_index("date")["rate"]
    assert rates.loc["2000"].mean() == pytest.approx(0.058, abs=0.003)
    assert 0.0 <= rates.loc["2012"].mean() < 0.001
    market = samples.index()
    by_month = pd.Series(market.rate, index=pd.DatetimeIndex(market.dates)).resample("MS").agg(["min", "max"])
    assert (by_month["min"] == by_month["max"]).all()
    assert by_month["min"]["2008-01-01"] == rates["2008-01-01"]
    assert (samples.index(bills=False).rate == 0.0).all()


def test_a_package_that_is_missing_names_the_extra(monkeypatch: pytest.MonkeyPatch) -> None:
    """The message says what to install."""
    monkeypatch.setattr(importlib.util, "find_spec", lambda name: None)
    with pytest.raises(DataError, match=r"pip install 'hedgerow\[samples\]'") as caught:
        samples.stocks()
    assert caught.value.exit_code == 2


def test_the_packages_are_not_imported() -> None:
    """Reading their files by path leaves them out of sys.modules, in a fresh interpreter."""
    code = (
        "import sys; from hedgerow.market import samples; samples.stocks(); samples.index(); "
        "print([name for name in ('arch', 'bokeh_sampledata') if name in sys.modules])"
    )
    run = subprocess.run([sys.executable, "-c", code], capture_output=True, text=True, check=True)
    assert run.stdout.strip() == "[]"
