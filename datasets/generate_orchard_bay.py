"""Write the invented exchange Orchard Bay: a dozen companies, an index, fifteen years of sessions.

Run `python datasets/generate_orchard_bay.py [FOLDER]`; without a folder the files beside this script are
written again, byte for byte the same. Every random stream is keyed by a name ("market", "QLFN/books", ...),
so that a change to one company leaves the others alone.

The market
    log return = beta x market + sector loading x sector + own noise, each with a volatility of its own that
    clusters (a slow log-volatility that rises after falls, on two regimes for the market), fat-tailed days
    (Student's t, eight degrees of freedom) and jumps. A report moves its company overnight by about four to
    five ordinary days' moves. Whatever the state, the expected simple return of a session is the short rate
    plus beta x 5 % a year: no rule that looks at prices, reports or the calendar has an edge by construction.
    Two stories are written by hand and are exceptions: one company slides into bankruptcy, one is bid for.

SEED is the first of 1, 2, 3, ... for which the index, held with its dividends, grew by 3 % to 7 % a year more
than the short rate (in logs) at a volatility of 14 % to 20 %, and no company but the failing one ever closed
below 5.00, where cents and strikes get coarse. Nothing else was looked at to choose it; that much hindsight
is in the data.
"""

from __future__ import annotations

import datetime as dt
import sys
from dataclasses import dataclass, field
from pathlib import Path

import numpy as np
from invented_moves import (
    A_YEAR,
    STEPS,
    Factor,
    Floats,
    Stream,
    add_jumps,
    at_or_after,
    bars,
    factor,
    nth_weekday,
    regime_levels,
    sessions,
    short_rate,
)

SEED = 4
FIRST, LAST = dt.date(2010, 1, 4), dt.date(2024, 12, 31)
PREMIUM = 0.05  # expected simple return over the short rate, a year, at beta 1
INDEX, INDEX_NAME, INDEX_START = "OBAYC", "Orchard Bay Composite", 1000.0
# The short rate is set by hand, as (year, month, level): years near zero, a climb, a cut, a steeper climb.
RATE_STEPS = (
    (2010, 1, 0.0025), (2011, 5, 0.0050), (2011, 12, 0.0025), (2014, 9, 0.0050), (2015, 6, 0.0075),
    (2016, 3, 0.0100), (2016, 12, 0.0125), (2017, 6, 0.0150), (2018, 1, 0.0200), (2018, 9, 0.0225),
    (2019, 10, 0.0175), (2020, 4, 0.0050), (2021, 11, 0.0100), (2022, 3, 0.0200), (2022, 7, 0.0325),
    (2022, 12, 0.0425), (2023, 6, 0.0475), (2024, 5, 0.0450), (2024, 9, 0.0400),
)  # fmt: skip


@dataclass(frozen=True)
class Company:
    """One invented company. Volatilities are annual fractions, shares are in millions at the start."""

    symbol: str
    name: str
    sector: str
    price: float
    shares: float
    beta: float
    sector_load: float
    own_volatility: float
    payout: float  # share of earnings paid as dividends
    report_moves: float  # size of the move on a report, in ordinary daily moves
    fiscal: int  # reports from 0: February, 1: March, 2: January on, every third month
    time: str  # the report comes "before" the open or "after" the close
    split_above: float = 1e9
    split_ratio: float = 2.0
    multiple: float = 17.0  # price over a year's earnings, in the long run
    listed: dt.date = FIRST


MILL, FREIGHT, KILN, LARDER, SIGNAL = (
    "Mill and Loom", "Ferry and Freight", "Kiln and Timber", "Lamp and Larder", "Instrument and Signal",
)  # fmt: skip
COMPANIES = (
    Company("BKHO", "Brackenholt Timber", KILN, 27.40, 310, 1.05, 0.9, 0.18, 0.45, 4.0, 2, "before", 60.0),
    Company("CWWK", "Corriewell Waterworks", LARDER, 33.10, 290, 0.65, 0.6, 0.13, 0.62, 3.5, 2, "before"),
    Company("DNMW", "Dunmarrow Dairy", LARDER, 41.85, 260, 0.70, 0.9, 0.15, 0.55, 4.0, 1, "before", 75.0),
    Company("FHYT", "Fernhythe Bank", FREIGHT, 38.60, 330, 1.25, 0.7, 0.17, 0.40, 4.0, 2, "before", 90.0),
    Company("MRWB", "Marrowby Kilns", KILN, 46.20, 120, 1.20, 1.0, 0.22, 0.30, 4.5, 2, "before"),
    Company("OSTL", "Osier & Tallow", LARDER, 22.75, 240, 0.80, 1.0, 0.18, 0.50, 4.5, 0, "after"),
    Company("PLGT", "Pellgate Instruments", SIGNAL, 52.30, 300, 1.15, 1.1, 0.19, 0.20, 5.0, 2, "after", 95.0),
    Company("QLFN", "Quillfen Mills", MILL, 61.50, 210, 0.95, 0.9, 0.17, 0.42, 4.5, 2, "after", 110.0, 1.5),
    Company(
        "SDGL", "Sedgelow Lanterns", SIGNAL, 38.90, 220, 1.30, 1.1, 0.23, 0.0, 5.0, 0, "after", 90.0, 3.0,
        multiple=26.0,
    ),
    Company("TWKF", "Thornwick Ferries", FREIGHT, 29.95, 190, 1.10, 1.0, 0.19, 0.35, 4.0, 2, "before", 80.0),
    Company("VSRY", "Vessary Apothecaries", MILL, 72.40, 150, 0.85, 0.8, 0.19, 0.35, 4.5, 1, "before", 120.0),
    Company(
        "YRMS", "Yarrowmere Signals", SIGNAL, 34.00, 230, 1.25, 1.1, 0.24, 0.0, 5.0, 1, "after", 80.0,
        multiple=30.0, listed=dt.date(2013, 5, 15),
    ),
)  # fmt: skip
FAILED, SLIDE_FROM, FAILED_LAST = "MRWB", dt.date(2015, 2, 2), dt.date(2016, 6, 17)
BID_FOR, BID_DAY, BID_LAST, BID_PREMIUM = "TWKF", dt.date(2018, 10, 9), dt.date(2019, 1, 31), 0.34
SPECIAL, SPECIAL_DAY, SPECIAL_SHARE = "OSTL", dt.date(2013, 12, 10), 0.07


@dataclass
class History:
    """What one company leaves behind; `path` is (T, STEPS + 1) prices as traded, open first."""

    company: Company
    path: Floats
    first: int
    last: int
    dividends: list[tuple[int, float, str]] = field(default_factory=list)
    splits: list[tuple[int, float]] = field(default_factory=list)
    reports: list[tuple[int, float, dt.date]] = field(default_factory=list)
    shares: Floats = field(default_factory=lambda: np.empty(0))
    volume: Floats = field(default_factory=lambda: np.empty(0))


def report_sessions(company: Company, days: list[dt.date], stream: Stream) -> dict[int, dt.date]:
    """Sessions on which the company reports, each with the day the date was announced."""
    found: dict[int, dt.date] = {}
    first_month = {0: 2, 1: 3, 2: 1}[company.fiscal]
    for year in range(FIRST.year, LAST.year + 1):
        for quarter in range(4):
            week, weekday, ahead = stream.uniform(3)
            third = nth_weekday(year, first_month + 3 * quarter, 1, 3)
            index = at_or_after(days, third + dt.timedelta(days=7 * int(2 * week) + int(3 * weekday)))
            if index < len(days) and days[index] > company.listed + dt.timedelta(days=30):
                found[index] = days[index] - dt.timedelta(days=18 + int(15 * ahead))
    return found


class Books:
    """The earnings, dividends and splits of one company as its price goes along."""

    def __init__(self, history: History, days: list[dt.date], surprise: Floats, stream: Stream) -> None:
        company = history.company
        self.history, self.days, self.surprise = history, days, surprise
        self.plan = report_sessions(company, days, stream)
        self.slow, self.factor = np.log(company.price), 1.0
        self.season = 1.0 + 0.12 * np.array([-1.0, 0.2, -0.2, 1.0]) * stream.uniform(1)[0]
        self.year: list[float] = []
        self.paid, self.ex_session, self.split_session = 0.0, -1, -1

    def before_open(self, t: int, price: float) -> float:
        """Apply what happens before the open of session t to yesterday's close; return the base for today."""
        base, history, company = price, self.history, self.history.company
        if t == self.split_session:
            ratio = company.split_ratio
            history.splits.append((t, ratio))
            self.factor, self.paid, base = self.factor * ratio, self.paid / ratio, base / ratio
        if t == self.ex_session and round(self.paid, 3) > 0.0:
            history.dividends.append((t, round(self.paid, 3), "regular"))
            base -= round(self.paid, 3)
        if company.symbol == SPECIAL and self.days[t] == SPECIAL_DAY:
            amount = round(SPECIAL_SHARE * base * 4) / 4
            history.dividends.append((t, amount, "special"))
            base -= amount
        return base

    def after_close(self, t: int, price: float, distress: float) -> None:
        """Report, declare and decide at the close of session t; `distress` 0..1 eats the earnings."""
        if t not in self.plan:
            return
        company, quarter = self.history.company, (self.days[t].month - 1) // 3
        self.slow += 0.2 * (np.log(price * self.factor) - self.slow)
        earned = np.exp(self.slow + 0.05 * self.surprise[t]) / (4.0 * company.multiple) * self.season[quarter]
        earned *= (1.0 - 2.5 * distress) / self.factor
        self.history.reports.append((t, round(float(earned), 2), self.plan[t]))
        self.year = [*self.year[-3:], float(earned) * self.factor]
        self._declare(t, distress)
        if price > company.split_above and t > self.split_session:
            self.split_session = t + 40

    def _declare(self, t: int, distress: float) -> None:
        """Set the next quarterly dividend: raised once a year, cut when earnings fall far or vanish."""
        company = self.history.company
        target = company.payout * sum(self.year) / len(self.year) / self.factor
        due = self.paid == 0.0 or (self.days[t].month - 1) // 3 == 3
        if distress > 0.0:
            self.paid = 0.0
        elif due or self.paid > 1.5 * target:
            kept = self.paid if self.paid <= 1.5 * target else 0.0
            self.paid = max(kept, float(np.floor(target * 200.0)) / 200.0)
        self.ex_session = t + 14


def company_moves(company: Company, market: Factor, sector: Factor, seed: int) -> tuple[Factor, Floats]:
    """Total log moves of a company before reports and stories, and its ordinary daily volatility (T,)."""
    nervous = np.log(market.volatility * np.sqrt(A_YEAR) / 0.13)
    own = factor(company.symbol, np.log(company.own_volatility) + 0.35 * nervous - 0.12, 0.04, 0.10, seed)
    add_jumps(own, company.symbol + "/jumps", 1.0, 0.0, 0.04, seed)
    beta, load = company.beta, company.sector_load
    spread = beta * market.volatility, load * sector.volatility, own.volatility
    # beta x (log market) has the drift -beta v/2 where -beta^2 v/2 is fair; the same for the sector.
    fix = 0.5 * (beta - beta**2) * market.volatility**2 + 0.5 * (load - load**2) * sector.volatility**2
    night = beta * market.night + load * sector.night + own.night + fix
    steps = beta * market.steps + load * sector.steps + own.steps
    return Factor(night, steps, own.volatility), np.sqrt(sum(part**2 for part in spread))


def add_reports(moves: Factor, company: Company, ordinary: Floats, books: Books, stream: Stream) -> None:
    """Move the price on each report: overnight, up with the surprise, fair on average."""
    typical = float(np.median(ordinary))
    noise = stream.normal(len(ordinary))
    for t in books.plan:
        reacts = t if company.time == "before" else t + 1
        if reacts < len(ordinary):
            size = (company.report_moves**2 - 1.0) ** 0.5 * typical**0.5 * ordinary[reacts] ** 0.5
            moves.night[reacts] += size * (0.7 * books.surprise[t] + 0.51**0.5 * noise[t]) - 0.5 * size**2


def add_slide(moves: Factor, days: list[dt.date], stream: Stream) -> Floats:
    """Write the failing company's fall: gaps down and rising noise. Returns distress (T,), 0..1."""
    start, end = at_or_after(days, SLIDE_FROM), at_or_after(days, FAILED_LAST)
    distress = np.zeros(len(days))
    distress[start : end + 1] = np.linspace(0.0, 1.0, end + 1 - start)
    wild = 1.0 + 2.2 * distress
    moves.steps[:] *= wild[:, None]
    moves.night[:] *= wild
    gaps = np.sort(stream.uniform(11))
    for gap, depth in zip(gaps, stream.uniform(11), strict=True):
        moves.night[start + int(gap * (end - start - 8))] -= 0.12 + 0.25 * depth
    moves.night[end - 4] -= 1.3
    return distress


def simulate(
    company: Company, days: list[dt.date], factors: dict[str, Factor], rate: Floats, seed: int
) -> History:
    """Run one company from its listing to its end."""
    stream, count = Stream(company.symbol + "/books", seed), len(days)
    moves, ordinary = company_moves(company, factors["market"], factors[company.sector], seed)
    first, last = at_or_after(days, company.listed), count - 1
    history = History(company, np.full((count, STEPS + 1), np.nan), first, last)
    books = Books(history, days, stream.normal(count), stream)
    add_reports(moves, company, ordinary, books, stream)
    distress = np.zeros(count)
    if company.symbol == FAILED:
        distress, history.last = add_slide(moves, days, stream), at_or_after(days, FAILED_LAST)
    moves.night[:] += np.log1p((rate + PREMIUM * company.beta) / A_YEAR)
    if company.symbol == BID_FOR:
        history.last = at_or_after(days, BID_LAST)
    _walk(history, books, moves, distress, stream)
    return history


def _walk(history: History, books: Books, moves: Factor, distress: Floats, stream: Stream) -> None:
    """Turn log moves into prices in cents, session by session."""
    company, price, bid = history.company, history.company.price, 0.0
    shares = np.full(len(distress), np.nan)
    bid_session = at_or_after(books.days, BID_DAY) if company.symbol == BID_FOR else len(distress)
    quiet = stream.normal(len(distress), STEPS + 1) * 0.00025
    for t in range(history.first, history.last + 1):
        if t == bid_session:
            bid = round(price * (1.0 + BID_PREMIUM) * 4) / 4
        if t >= bid_session:
            wait = 0.022 * (history.last - t) / (history.last - bid_session)
            history.path[t] = np.minimum(np.round(bid * np.exp(quiet[t] * (wait > 0) - wait), 2), bid)
        else:
            base = books.before_open(t, price)
            logs = np.concatenate([[moves.night[t]], moves.steps[t]]).cumsum()
            if t == history.first:
                logs -= logs[0]
            history.path[t] = np.maximum(0.01, np.round(base * np.exp(logs), 2))
        price = float(history.path[t, -1])
        shares[t] = company.shares * 1e6 * books.factor
        books.after_close(t, price, distress[t])
    history.shares = shares
    history.volume = trading(history, stream)


def trading(history: History, stream: Stream) -> Floats:
    """Shares traded (T,): a slow part, more on large moves and on reports; whole hundreds."""
    close = history.path[:, -1] * history.shares
    move = np.abs(np.diff(np.log(close), prepend=np.nan))
    typical = np.nanmedian(move)
    slow, level, news = np.empty(len(close)), 0.0, stream.normal(len(close), 2)
    for t in range(len(close)):
        level = 0.95 * level + 0.09 * news[t, 0]
        slow[t] = level
    busy = 0.35 * np.log1p(np.nan_to_num(move, nan=0.1) / typical)
    return np.asarray(np.round(0.0042 * history.shares * np.exp(slow + busy + 0.2 * news[:, 1]) / 100) * 100)


# --- the index and the files ------------------------------------------------------------------------------


def index_path(histories: list[History]) -> tuple[Floats, Floats]:
    """The index (T, STEPS + 1), cap-weighted and chain-linked, and its dividends in points (T,).

    Ordinary dividends lower the index; they are its dividends in points. A special dividend, a split, a
    listing and a departure leave the level unchanged.
    """
    count = len(histories[0].path)
    path, points = np.empty((count, STEPS + 1)), np.zeros(count)
    path[0] = INDEX_START
    for t in range(count):
        live = [h for h in histories if h.first < max(t, 1) and t <= h.last]
        now = np.array([h.shares[t] * h.path[t] for h in live]).sum(axis=0)
        if t == 0:
            path[0] = np.round(INDEX_START * now / now[0], 2)
            continue
        before, paid = 0.0, 0.0
        for h in live:
            before += h.shares[t - 1] * h.path[t - 1, -1]
            for session, amount, kind in h.dividends:
                if session == t and kind == "special":
                    before -= amount * h.shares[t]
                elif session == t:
                    paid += amount * h.shares[t]
        path[t] = np.round(path[t - 1, -1] * now / before, 2)
        points[t] = round(float(path[t - 1, -1] * paid / before), 4)
    return path, points


@dataclass(frozen=True)
class Exchange:
    """Everything that goes into the files."""

    days: list[dt.date]
    histories: list[History]
    index: Floats
    index_points: Floats
    rates: list[tuple[int, float]]
    rate: Floats


def build(seed: int = SEED) -> Exchange:
    """Simulate the whole exchange."""
    days = sessions(FIRST, LAST)
    rates, rate = short_rate(days, RATE_STEPS, Stream("rates", seed))
    market = factor("market", regime_levels(Stream("regimes", seed), len(days)), 0.11, 0.07, seed)
    add_jumps(market, "market/jumps", 1.5, -0.015, 0.015, seed)
    factors = {"market": market}
    calm = np.full(len(days), np.log(0.075))
    for sector in sorted({company.sector for company in COMPANIES}):
        factors[sector] = factor("sector/" + sector, calm, 0.03, 0.08, seed)
    histories = [simulate(company, days, factors, rate, seed) for company in COMPANIES]
    path, points = index_path(histories)
    return Exchange(days, histories, path, points, rates, rate)


def data_files(exchange: Exchange) -> dict[str, str]:
    """The text of every data file."""
    days, prices, dividends, splits, reports = exchange.days, [], [], [], []
    for h in exchange.histories:
        symbol, time = h.company.symbol, h.company.time
        for t, bar in zip(range(h.first, h.last + 1), bars(h.path[h.first : h.last + 1]), strict=True):
            prices.append(f"{symbol},{days[t]},{','.join(f'{p:.2f}' for p in bar)},{h.volume[t]:.0f}")
        dividends += [f"{symbol},{days[t]},{amount:.3f},{kind}" for t, amount, kind in h.dividends]
        splits += [f"{symbol},{days[t]},{ratio:g}" for t, ratio in h.splits]
        reports += [f"{symbol},{days[t]},{eps:.2f},{told},{time}" for t, eps, told in h.reports]
    traded = np.nansum([h.volume for h in exchange.histories], axis=0)
    for t, bar in enumerate(bars(exchange.index)):
        prices.append(f"{INDEX},{days[t]},{','.join(f'{p:.2f}' for p in bar)},{traded[t]:.0f}")
    paid = np.flatnonzero(exchange.index_points)
    dividends += [f"{INDEX},{days[t]},{exchange.index_points[t]:.4f},regular" for t in paid]
    rates = [f"{days[t]},{level:.4f}" for t, level in exchange.rates]
    return {
        "prices.csv": _table("symbol,date,open,high,low,close,volume", sorted(prices)),
        "dividends.csv": _table("symbol,date,amount,kind", sorted(dividends)),
        "splits.csv": _table("symbol,date,ratio", sorted(splits)),
        "reports.csv": _table("symbol,date,eps,announced,time", sorted(reports)),
        "rates.csv": _table("date,rate", rates),
    }


def _table(head: str, rows: list[str]) -> str:
    return "\n".join([head, *rows, ""])


def description() -> str:
    """The text of dataset.yaml."""
    lines = [
        "name: Orchard Bay",
        "source: invented; written by datasets/generate_orchard_bay.py",
        "currency: USD",
        "adjustment: none",
        "symbols:",
    ]
    lines += [f"  {c.symbol}: {{name: {c.name}, sector: {c.sector}}}" for c in COMPANIES]
    return "\n".join([*lines, f"  {INDEX}: {{name: {INDEX_NAME}, kind: index}}", ""])


def write(folder: Path, seed: int = SEED) -> None:
    """Write the six files of the data set into a folder, made if it is missing."""
    folder.mkdir(parents=True, exist_ok=True)
    files = data_files(build(seed)) | {"dataset.yaml": description()}
    for name, text in files.items():
        (folder / name).write_bytes(text.encode())


if __name__ == "__main__":
    write(Path(sys.argv[1]) if len(sys.argv) > 1 else Path(__file__).parent / "orchard-bay")
