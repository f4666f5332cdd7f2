"""The invented exchange: its files come from its generator, are consistent, and look like a stock market."""

from __future__ import annotations

import importlib
import sys
import warnings
from functools import cache
from pathlib import Path
from types import ModuleType
from typing import Any

import numpy as np
import numpy.typing as npt
import pandas as pd
import pytest

Floats = npt.NDArray[np.float64]

DATASETS = Path(__file__).parents[2] / "datasets"
FOLDER = DATASETS / "orchard-bay"
FILES = ("dataset.yaml", "dividends.csv", "prices.csv", "rates.csv", "reports.csv", "splits.csv")
INDEX, FAILED, BID_FOR = "OBAYC", "MRWB", "TWKF"


@cache
def generator() -> ModuleType:
    """The generator as a module: a script beside the data, not part of the package."""
    sys.path.insert(0, str(DATASETS))
    return importlib.import_module("generate_orchard_bay")


@cache
def table(name: str) -> pd.DataFrame:
    """One of the data files."""
    dates = [column for column in ("date", "announced") if column in (FOLDER / name).read_text()[:60]]
    return pd.read_csv(FOLDER / name, parse_dates=dates)


@cache
def wide(column: str) -> pd.DataFrame:
    """One column of prices, sessions by symbols."""
    return table("prices.csv").pivot_table(index="date", columns="symbol", values=column)


def events(name: str, column: str, empty: float) -> pd.DataFrame:
    """Dividends or splits on the axes of the prices, `empty` where there are none."""
    found = table(name).pivot_table(index="date", columns="symbol", values=column, aggfunc="sum")
    return found.reindex_like(wide("close")).fillna(empty)


@cache
def total_returns() -> pd.DataFrame:
    """Log returns of each session with dividends, as the holder of one share yesterday has them."""
    close, ratio = wide("close"), events("splits.csv", "ratio", 1.0)
    return np.log((close + events("dividends.csv", "amount", 0.0)) * ratio / close.shift()).iloc[1:]


def of(symbol: str) -> Floats:
    """Total log returns of one symbol while it traded."""
    return total_returns()[symbol].dropna().to_numpy()


def quiet() -> list[str]:
    """The companies that neither failed nor were bid for."""
    return [s for s in total_returns().columns if s not in (INDEX, FAILED, BID_FOR)]


def kurtosis(returns: Floats) -> float:
    """Fourth moment over squared variance; 3 for a normal law."""
    gap = returns - returns.mean()
    return float((gap**4).mean() / (gap**2).mean() ** 2)


def clustering(returns: Floats, lags: int = 20) -> float:
    """Mean autocorrelation of absolute returns over lags 1..20."""
    size = np.abs(returns)
    return float(np.mean([np.corrcoef(size[k:], size[:-k])[0, 1] for k in range(1, lags + 1)]))


def leverage(returns: Floats, lags: int = 10) -> float:
    """Mean correlation of a return with the squared returns of the next 1..10 sessions."""
    square = returns**2
    return float(np.mean([np.corrcoef(returns[:-k], square[k:])[0, 1] for k in range(1, lags + 1)]))


def annual_volatility(returns: Floats) -> float:
    """Standard deviation of a year of 252 sessions."""
    return float(returns.std() * np.sqrt(252.0))


# --- the files --------------------------------------------------------------------------------------------


def test_files_are_what_the_generator_writes(tmp_path: Path) -> None:
    """Running the generator reproduces every file, byte for byte, and writes no other."""
    generator().write(tmp_path)
    assert sorted(path.name for path in tmp_path.iterdir()) == sorted(FILES)
    assert sorted(path.name for path in FOLDER.iterdir()) == sorted(FILES)
    for name in FILES:
        assert (tmp_path / name).read_bytes() == (FOLDER / name).read_bytes(), name


def test_another_seed_gives_another_market() -> None:
    """Negative control of the comparison above: the seed decides what comes out."""
    made = generator()
    days = made.sessions(made.FIRST, made.LAST)
    rows = [made.short_rate(days, made.RATE_STEPS, made.Stream("rates", made.SEED + i))[0] for i in (0, 0, 1)]
    assert rows[0] == rows[1] != rows[2]


def test_folder_is_light() -> None:
    """The whole folder stays under six megabytes, so that a clone stays small."""
    assert sum(path.stat().st_size for path in FOLDER.iterdir()) < 6_000_000


def test_sessions_are_those_of_the_us_exchange() -> None:
    """The dates are the sessions of XNYS in exchange_calendars, an independent calendar."""
    import exchange_calendars

    with warnings.catch_warnings():
        warnings.simplefilter("ignore")  # the package itself calls what pandas 3.1 deprecates
        sessions = exchange_calendars.get_calendar("XNYS", start="2010-01-01", end="2024-12-31").sessions
    assert list(wide("close").index) == list(sessions)


def test_seed_is_the_first_that_fits_the_stated_rule() -> None:
    """The rule in the generator's docstring, recomputed: growth over cash, volatility and lowest close."""

    def fits(exchange: Any) -> bool:
        level = exchange.index[:, -1]
        moves = np.log((level[1:] + exchange.index_points[1:]) / level[:-1])
        over_cash = moves.mean() * 252.0 - exchange.rate.mean()
        others = [h for h in exchange.histories if h.company.symbol != FAILED]
        lowest = min(float(np.nanmin(h.path[:, -1])) for h in others)
        return 0.03 <= over_cash <= 0.07 and 0.14 <= annual_volatility(moves) <= 0.20 and lowest >= 5.0

    seeds = range(1, generator().SEED + 1)
    assert [fits(generator().build(seed)) for seed in seeds] == [False] * (len(seeds) - 1) + [True]


# --- consistency ------------------------------------------------------------------------------------------


def test_bars_are_consistent() -> None:
    """Low <= open, close <= high, all positive and in whole cents; volume positive: what a bar means."""
    prices = table("prices.csv")
    body = prices[["open", "close"]]
    assert (prices["low"] <= body.min(axis=1)).all()
    assert (prices["high"] >= body.max(axis=1)).all()
    quotes = prices[["open", "high", "low", "close"]].to_numpy()
    assert (quotes > 0.0).all()
    assert np.abs(quotes * 100.0 - np.rint(quotes * 100.0)).max() < 1e-6
    assert (prices["volume"] > 0).all()
    assert not prices.duplicated(["symbol", "date"]).any()


def test_range_and_close_tell_the_same_volatility() -> None:
    """Parkinson 1980 on intraday ranges against open-to-close moves: the same variance for a continuous path.

    The ratio of two estimates of one variance from about 3,700 fat-tailed sessions: within 12 % of one.
    """
    for symbol in [*quiet(), INDEX]:
        high, low = wide("high")[symbol], wide("low")[symbol]
        body = np.log(wide("close")[symbol] / wide("open")[symbol])
        parkinson = (np.log(high / low) ** 2).mean() / (4.0 * np.log(2.0))
        assert parkinson / (body**2).mean() == pytest.approx(1.0, abs=0.12), symbol


def test_splits_divide_the_price_and_dividends_are_taken_off() -> None:
    """Prices are as traded: the session of a split opens near the last close over its ratio."""
    splits, opens, before = table("splits.csv"), wide("open"), wide("close").shift()
    assert len(splits) >= 4
    for row in splits.itertuples():
        gap = opens.loc[row.date, row.symbol] * row.ratio / before.loc[row.date, row.symbol]
        assert gap == pytest.approx(1.0, abs=0.08)
    special = table("dividends.csv").query("kind == 'special'")
    assert len(special) == 1
    for row in special.itertuples():
        gap = (opens.loc[row.date, row.symbol] + row.amount) / before.loc[row.date, row.symbol]
        assert gap == pytest.approx(1.0, abs=0.04)
        assert 0.01 < row.amount / before.loc[row.date, row.symbol] < 0.15


def test_dividends_are_quarterly_and_of_an_ordinary_size() -> None:
    """Four a year, each at most 1.5 % of the price: large payers yield 1 to 5 % a year (common practice)."""
    regular = table("dividends.csv").query("kind == 'regular' and symbol != @INDEX")
    before = wide("close").shift()
    for symbol, rows in regular.groupby("symbol"):
        share = rows["amount"].to_numpy() / before[symbol].loc[rows["date"]].to_numpy()
        assert share.max() < 0.02, symbol
        assert 0.005 < 4.0 * share.mean() < 0.05, symbol
        assert rows["date"].sort_values().diff().dropna().dt.days.between(60, 125).all(), symbol


def test_index_is_the_weighted_sum_of_its_members() -> None:
    """The index return and its dividends recomputed from members: closes, share counts, splits, dividends."""
    companies = {c.symbol: c.shares for c in generator().COMPANIES}
    close, level = wide("close")[list(companies)], wide("close")[INDEX]
    shares = events("splits.csv", "ratio", 1.0)[list(companies)].cumprod() * pd.Series(companies)
    dividends = table("dividends.csv")

    def money(kind: str) -> pd.DataFrame:
        rows = dividends[(dividends["kind"] == kind) & (dividends["symbol"] != INDEX)]
        amounts = rows.pivot_table(index="date", columns="symbol", values="amount")
        return amounts.reindex_like(close).fillna(0.0) * shares

    before = ((close * shares).shift() - money("special")).where(close.notna())
    now = (close * shares).where(before.notna())
    expected = now.sum(axis=1) / before.sum(axis=1)
    # the level is kept in cents, of a level never under 500
    np.testing.assert_allclose((level / level.shift())[1:], expected[1:], rtol=2e-5)
    points = money("regular").where(before.notna()).sum(axis=1) / before.sum(axis=1) * level.shift()
    found = events("dividends.csv", "amount", 0.0)[INDEX]
    np.testing.assert_allclose(found, points.fillna(0.0), atol=6e-5)  # kept to four decimals


def test_one_company_failed_and_one_was_bought() -> None:
    """One history ends after a loss of over nine tenths; one jumps by a fifth or more, lies flat and ends."""
    last = wide("close").apply(lambda column: column.last_valid_index())
    assert set(last.index[last < wide("close").index[-1]]) == {FAILED, BID_FOR}
    failed, bought = wide("close")[FAILED].dropna(), wide("close")[BID_FOR].dropna()
    assert failed.iloc[-1] < 0.1 * failed.max()
    jump = int(np.argmax(bought.diff()))
    assert bought.iloc[jump] / bought.iloc[jump - 1] > 1.2
    assert 40 < len(bought) - jump < 130
    assert annual_volatility(np.log(bought.iloc[jump:]).diff().dropna().to_numpy()) < 0.03
    assert bought.iloc[-1] == bought.max() or bought.iloc[-1] == bought.iloc[jump:].max()


def test_reports_are_quarterly_announced_ahead_and_move_prices() -> None:
    """Report days move far more than others: 3.5 to 5 ordinary moves were put in, so 2 to 6 come out."""
    reports = table("reports.csv")
    assert (reports["announced"] < reports["date"]).all()
    assert reports.groupby("symbol").size().drop([FAILED, BID_FOR]).between(46, 60).all()
    for symbol in quiet():
        rows, moves = reports[reports["symbol"] == symbol], total_returns()[symbol].dropna()
        at = moves.index.get_indexer(rows["date"]) + (rows["time"] == "after").to_numpy()
        reacted = np.zeros(len(moves), bool)
        reacted[at[at < len(moves)]] = True
        ratio = moves[reacted].std() / moves[~reacted].std()
        assert 2.0 < ratio < 6.0, symbol


def test_earnings_follow_prices_and_not_the_other_way() -> None:
    """Growth of earnings a share goes with the past year's return; yields are 2 to 12 %, from memory."""
    ratio = events("splits.csv", "ratio", 1.0).cumprod()
    for symbol in quiet():
        rows = table("reports.csv").query("symbol == @symbol").set_index("date")
        whole = rows["eps"] * ratio[symbol].loc[rows.index]
        price = (wide("close")[symbol] * ratio[symbol]).loc[rows.index]
        growth, past = np.log(whole).diff(4).dropna(), np.log(price).diff(4).dropna()
        assert np.corrcoef(growth, past)[0, 1] > 0.2, symbol
        assert 0.02 < float((whole.rolling(4).sum() / price).median()) < 0.12, symbol


def test_rate_path_is_realistic() -> None:
    """Between zero and six percent, low for years, then higher: like the US 2010 to 2024, from memory."""
    rates = table("rates.csv")
    assert rates["rate"].between(0.0, 0.06).all()
    assert len(rates) == 180
    assert rates["rate"].max() > 0.04
    assert (rates["rate"] < 0.01).sum() > 48
    assert set(rates["date"]) <= set(wide("close").index)


# --- stylised facts ---------------------------------------------------------------------------------------


def test_volatility_clusters() -> None:
    """Absolute returns stay correlated for weeks, at .04 to .45 (Cont 2001, Quantitative Finance 1, fact 8).

    S&P 500 1999-2018 by the same measure, package `arch`, recomputed: .28.
    Report days are jumps that do not cluster and dilute the figure of single companies.
    """
    assert 0.10 < clustering(of(INDEX)) < 0.45
    assert 0.04 < float(np.mean([clustering(of(symbol)) for symbol in quiet()])) < 0.45


def test_falls_raise_volatility() -> None:
    """Leverage effect: negative, and stronger for the index (Bouchaud, Matacz & Potters 2001, PRL 87)."""
    stocks = float(np.mean([leverage(of(symbol)) for symbol in quiet()]))
    assert -0.25 < leverage(of(INDEX)) < -0.02
    assert leverage(of(INDEX)) < stocks < 0.0


def test_order_makes_clusters_and_leverage() -> None:
    """Negative control: shuffled in time, the same returns fail both tests above."""
    shuffled = np.random.default_rng(1).permutation(of(INDEX))
    assert abs(clustering(shuffled)) < 0.02
    assert abs(leverage(shuffled)) < 0.02


def test_tails_are_fat_and_thin_out_over_months() -> None:
    """Kurtosis above 3 by day, and for companies nearer to 3 by month (Cont 2001, facts 2 and 4).

    Not for the index: the leverage effect keeps its tail over a month (S&P 500 1999-2018, package `arch`,
    recomputed: 11.2 by day and 9.8 by 21 sessions).
    """
    assert 4.0 < kurtosis(of(INDEX)) < 15.0
    for symbol in quiet():
        daily = of(symbol)
        monthly = np.add.reduceat(daily, np.arange(0, len(daily) - 21, 21))
        assert 4.0 < kurtosis(daily) < 40.0, symbol
        assert kurtosis(monthly) < kurtosis(daily), symbol
    assert kurtosis(np.random.default_rng(1).standard_normal(3774)) < 4.0  # what the bound tells apart


def test_returns_themselves_are_hardly_correlated() -> None:
    """No linear autocorrelation (Cont 2001, fact 1): three standard errors of a fat-tailed estimate."""
    for symbol in [*quiet(), INDEX]:
        daily = of(symbol)
        assert abs(np.corrcoef(daily[1:], daily[:-1])[0, 1]) < 3.0 * 1.5 / np.sqrt(len(daily)), symbol


def test_volatilities_are_those_of_large_stocks() -> None:
    """Stocks 15 to 45 % a year, the index 12 to 25 % and below their mean; pairs correlate .15 to .6.

    Bands from memory of large US stocks and their indices, 1990-2024.
    """
    stocks = [annual_volatility(of(symbol)) for symbol in quiet()]
    index = annual_volatility(of(INDEX))
    assert min(stocks) > 0.15
    assert max(stocks) < 0.45
    assert 0.12 < index < 0.25
    assert index < 0.8 * float(np.mean(stocks))
    pairs = total_returns()[quiet()].corr().to_numpy()
    assert 0.15 < pairs[np.triu_indices_from(pairs, 1)].mean() < 0.6


def test_volume_rises_with_moves() -> None:
    """Volume and absolute returns go together (Karpoff 1987, JFQA 22)."""
    for symbol in quiet():
        size = total_returns()[symbol].abs().dropna()
        assert np.corrcoef(size, np.log(wide("volume")[symbol].loc[size.index]))[0, 1] > 0.1, symbol


def test_the_index_earned_a_modest_premium() -> None:
    """Three to seven percent a year over cash: equity premia of the long run, from memory."""
    rate = table("rates.csv").set_index("date")["rate"].reindex(wide("close").index).ffill()
    over = of(INDEX).mean() * 252.0 - rate.mean()
    assert 0.03 <= over <= 0.07


# --- fairness ---------------------------------------------------------------------------------------------


def test_a_factor_gives_no_edge_to_what_is_known() -> None:
    """The expected simple return is zero whatever the session before was and however wild the market is.

    Over 60,000 sessions each mean must lie within 3.5 of its standard errors. Negative control: with the half
    variance that is taken off the log return left in, the wild half alone would already fail.
    """
    base = np.full(60_000, np.log(0.7))
    moves = generator().factor("fairness", base, 0.1, 0.07, 7)
    simple = np.expm1(moves.night + moves.steps.sum(axis=1))
    wild = moves.volatility > np.median(moves.volatility)
    after_fall = np.concatenate([[False], simple[:-1] < 0.0])
    for state in (wild, ~wild, after_fall, ~after_fall):
        part = simple[state]
        assert abs(part.mean()) < 3.5 * part.std() / np.sqrt(len(part))
    unfair = simple[wild] + 0.5 * moves.volatility[wild] ** 2
    assert unfair.mean() > 3.5 * unfair.std() / np.sqrt(len(unfair))
