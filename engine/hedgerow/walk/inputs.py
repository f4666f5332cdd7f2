"""The arrays the walk reads about the world, prepared once for a market and surface, shared by variants."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from hedgerow.kernels.layout import FRESH, HAS_BAR, PAYS, REPORTS, SPLITS, Bytes, Floats, Ints, Records, Small
from hedgerow.kernels.rolling import carried
from hedgerow.kernels.state import ACTION, BAR, SESSION
from hedgerow.market.expected import expected_dividends
from hedgerow.market.sessions import Regime, exercise_threshold, tick_rules
from hedgerow.market.table import Market
from hedgerow.volatility.surface import Surface
from hedgerow.walk.sectors import sector_codes

__all__ = ["Tape", "make_tape"]


@dataclass(frozen=True, eq=False)
class Tape:
    """A market and a surface as records for the walk.

    `bars` and `actions` have shape (T, N), `sessions` (T,), `american` (N,); see `kernels.state`.
    """

    bars: Records
    actions: Records
    sessions: Records
    american: Bytes
    sectors: Ints
    surface: Surface


def next_reports(market: Market) -> Small:
    """Ordinal of the reaction to the next report announced by each close, 0 when none is; shape (T, N)."""
    out = np.zeros(market.close.shape, np.int32)
    days = market.ordinals
    for report in sorted(market.reports, key=lambda item: -item.reaction_ordinal):
        start = np.searchsorted(days, report.announced_ordinal)
        stop = np.searchsorted(days, report.reaction_ordinal)
        out[start:stop, report.symbol_index] = report.reaction_ordinal
    return out


def _actions(market: Market) -> Records:
    """Dividends and splits, restated so that a split and a dividend of one day are both in new shares."""
    actions = np.zeros(market.close.shape, ACTION)
    actions["dividend"] = market.dividend + market.special
    actions["special"] = market.special
    actions["split"] = market.split
    for session, symbol in np.argwhere(np.isnan(market.close) & _acts(actions))[
        ::-1
    ]:  # splits meet what came before
        _carry(actions[session:, symbol], ~np.isnan(market.close[session:, symbol]))
    return actions


def _acts(actions: Records) -> Bytes:
    """Where anything happens before an open."""
    return np.asarray((actions["dividend"] != 0.0) | (actions["split"] != 1.0))


def _carry(column: Records, traded: Bytes) -> None:
    """Move the action of a day without a bar to the symbol's next bar, if there is one."""
    later = np.flatnonzero(traded)
    if later.size:
        column[later[0]]["dividend"] += column[0]["dividend"] / column[later[0]]["split"]
        column[later[0]]["special"] += column[0]["special"] / column[later[0]]["split"]
        column[later[0]]["split"] *= column[0]["split"]
    column[0]["dividend"], column[0]["special"], column[0]["split"] = 0.0, 0.0, 1.0


def _opens(market: Market) -> Floats:
    """The opens; for an unknown one the last close before it in today's shares: nothing newer was known."""
    before = np.full(market.close.shape, np.nan)
    before[1:] = market.close[:-1] / market.split[1:]
    known = np.where(np.isnan(market.open), before, market.open)
    return np.where(np.isnan(known), market.close, known)


def _bars(market: Market, actions: Records, surface: Surface) -> Records:
    """Prices, volatility, expected dividend, next report and flags of every symbol and session.

    Where no volatility is known the last known one stands, so that what is held keeps a value; entries wait.
    """
    bars = np.zeros(market.close.shape, BAR)
    for name in ("open", "high", "low", "close"):
        bars[name] = getattr(market, name)
    bars["open"] = _opens(market)
    bars["high"] = np.fmax(market.high, bars["open"])
    bars["low"] = np.fmin(market.low, bars["open"])
    for name, known in (("level", surface.level), ("anchor", surface.anchor)):
        bars[name] = carried(np.array(known, order="C"), len(known))
    bars["split"] = market.split
    expected = expected_dividends(market)
    bars["pay_cash"], bars["pay_ordinal"], bars["pay_gap"] = expected
    bars["report"] = next_reports(market)
    flags = np.where(np.isnan(market.close), 0, HAS_BAR)
    flags |= np.where(actions["dividend"] != 0.0, PAYS, 0)
    flags |= np.where(actions["split"] != 1.0, SPLITS, 0)
    flags |= np.where(bars["report"] > 0, REPORTS, 0)
    flags |= np.where(np.isnan(surface.level), 0, FRESH)
    bars["signs"] = flags
    return bars


def _sessions(market: Market, regime: Regime) -> Records:
    """Date, rate, ticks and exercise threshold of every session."""
    sessions = np.zeros(market.ordinals.shape, SESSION)
    sessions["ordinal"] = market.ordinals
    sessions["rate"] = market.rate
    sessions["low_tick"], sessions["high_tick"] = tick_rules(market.ordinals, regime)
    sessions["exercise_threshold"] = exercise_threshold(market.ordinals, regime)
    return sessions


def make_tape(market: Market, surface: Surface, regime: Regime = "modern") -> Tape:
    """Prepare the walk's records. `regime` is that of `market.sessions`; StudyError is raised for another."""
    american = np.array([kind != "index" for kind in market.kinds], np.uint8)
    actions = _actions(market)
    sessions = _sessions(market, regime)
    return Tape(_bars(market, actions, surface), actions, sessions, american, sector_codes(market), surface)
