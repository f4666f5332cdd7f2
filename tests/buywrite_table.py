"""The buy-write rule on S&P 500 prices beside the published index, calendar year by calendar year.

`python tests/buywrite_table.py` prints the table; the test of the same subject holds its bounds.

Sources. S&P 500 total returns a calendar year: public record. S&P 500 BuyWrite index: from memory, agreeing
with four published multi-year aggregates; a year may be off by .3. Both in percent. Its rule, from the
methodology its publisher states: the index with dividends, one one-month call written at the first strike at
or above the index, rolled on the third Friday, held to expiry, cash-settled, no costs.
"""

from __future__ import annotations

import sys
from collections.abc import Mapping
from dataclasses import dataclass, replace
from pathlib import Path
from typing import Any

import numpy as np
from numpy.typing import NDArray

import hedgerow as hr
from hedgerow.market import samples
from hedgerow.market.table import Market

RULE = Path(__file__).parents[1] / "strategies" / "index-buywrite.yaml"
FIRST_ROLL = "1999-12-17"  # the last third Friday before the first year compared
YEARS = tuple(range(2000, 2019))
TOTAL_RETURN = (
    *(-9.10, -11.89, -22.10, 28.68, 10.88, 4.91, 15.79, 5.49, -37.00, 26.46),
    *(15.06, 2.11, 16.00, 32.39, 13.69, 1.38, 11.96, 21.83, -4.38),
)
BUY_WRITE = (
    *(7.40, -10.92, -7.64, 19.37, 8.30, 4.25, 13.33, 6.59, -28.65, 25.91),
    *(5.86, 5.72, 5.20, 13.26, 5.64, 5.24, 7.07, 13.00, -4.77),
)

Rule = Mapping[str, Any] | str | Path


@dataclass(frozen=True)
class Comparison:
    """Calendar-year returns of a run beside published ones, percent, in the order of YEARS."""

    found: tuple[float, ...]
    published: tuple[float, ...] = BUY_WRITE

    @property
    def misses(self) -> NDArray[np.float64]:
        """What was found less what was published, percentage points."""
        return np.array(self.found) - np.array(self.published)

    @property
    def mean_error(self) -> float:
        """Mean miss, percentage points."""
        return float(self.misses.mean())

    @property
    def rms_error(self) -> float:
        """Root of the mean squared miss, percentage points."""
        return float(np.sqrt(np.mean(self.misses**2)))

    @property
    def correlation(self) -> float:
        """Correlation of the years found with the years published."""
        return float(np.corrcoef(self.found, self.published)[0, 1])


def month_ends(market: Market) -> NDArray[np.int64]:
    """Sessions that are the last of their calendar month."""
    months = market.dates.astype("datetime64[M]").astype(np.int64)
    return np.append(np.flatnonzero(np.diff(months)), len(months) - 1)


def calendar_years(market: Market) -> NDArray[np.int64]:
    """Calendar year of every session."""
    return market.dates.astype("datetime64[Y]").astype(np.int64) + 1970


def with_dividends(market: Market, total_returns: Mapping[int, float]) -> Market:
    """The index with a cash dividend at each month's end, the same share of price through a year.

    Put into the index at that close, the twelve of a year and its prices compound to the year's published
    total return: (1 + share)^12 is what that return holds beyond the price's.
    """
    years, ends = calendar_years(market), month_ends(market)
    close = market.close[:, 0]
    dividend = np.zeros_like(market.close)
    for year, percent in total_returns.items():
        mine = ends[years[ends] == year]
        before = int(np.flatnonzero(years < year)[-1])
        share = ((1.0 + percent / 100.0) * close[before] / close[mine[-1]]) ** (1.0 / len(mine)) - 1.0
        dividend[mine, 0] = close[mine] * share
    return replace(market, dividend=dividend)


def index_with_dividends() -> Market:
    """S&P 500 prices 1999-2018 with bill rates and the dividends that the total returns hold."""
    return with_dividends(samples.index(), dict(zip(YEARS, TOTAL_RETURN, strict=True)))


def yearly_returns(result: hr.Result) -> tuple[float, ...]:
    """Calendar-year returns of an account's equity, percent, in the order of YEARS."""
    frame = result.equity
    last = frame.groupby(frame["date"].dt.year)["equity"].last()
    return tuple(float(last[year] / last[year - 1] - 1.0) * 100.0 for year in YEARS)


def compared(
    pricing: Mapping[str, Any] | str | None = None, rule: Rule = RULE, market: Market | None = None
) -> Comparison:
    """Run a rule on the whole account, without costs, and set its years beside the published index's.

    `pricing` are the words of a volatility model or the name of one, as in a study; None is the default.
    """
    account = hr.Account(cash=1e9, per_position=1.0)
    prices = index_with_dividends() if market is None else market
    result = hr.run(prices, rule, account=account, pricing=pricing, costs="none", first=FIRST_ROLL)
    return Comparison(yearly_returns(result))


def table(columns: Mapping[str, Comparison]) -> str:
    """The years as text, percent: published index, then each run and its miss in points."""
    head = f"{'year':<13}{'S&P 500':>9}{'published':>11}"
    lines = [head + "".join(f"{name:>12}{'miss':>8}" for name in columns)]
    for n, year in enumerate(YEARS):
        cells = f"{year:<13}{TOTAL_RETURN[n]:>9.2f}{BUY_WRITE[n]:>11.2f}"
        lines.append(
            cells + "".join(f"{one.found[n]:>12.2f}{one.misses[n]:>+8.2f}" for one in columns.values())
        )
    for name, figure in (("mean error", "mean_error"), ("rms error", "rms_error")):
        values = "".join(f"{'':>12}{getattr(one, figure):>+8.2f}" for one in columns.values())
        lines.append(f"{name:<33}{values}")
    lines.append(f"{'correlation':<33}" + "".join(f"{one.correlation:>20.4f}" for one in columns.values()))
    return "\n".join(lines)


def main() -> int:
    """Print the table for the default volatility model and for plain 21-session volatility."""
    market = index_with_dividends()
    models = ("default", "plain-21")
    print(table({name: compared(name, market=market) for name in models}))
    return 0


if __name__ == "__main__":
    sys.exit(main())
