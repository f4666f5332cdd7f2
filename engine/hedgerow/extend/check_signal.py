"""What every signal must do, whichever it is: the house's rules for this extension point.

Each rule is a function of a signal that gives "" or, in one sentence, what is wrong with it. They ask the
signal about invented markets, with parameters so small that a short history has much to say.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import replace
from typing import Any

import numpy as np

from hedgerow.errors import RulesError
from hedgerow.extend.invented import (
    array_market,
    changed_after,
    cut,
    random_market,
    reporting_market,
    with_split,
)
from hedgerow.market.table import Market
from hedgerow.signals.panel import Panel
from hedgerow.signals.registry import Parameter, Signal, Values, evaluated

__all__ = ["SIGNAL_CHECKS", "answer", "later_sessions_change", "small_parameters"]

_SMALL = {"sessions": 5.0, "over": 7.0, "fast": 3.0, "slow": 6.0, "smooth": 4.0, "width": 1.0}
_LEAST_SESSIONS, _MORE_THAN_LOOKBACK = 340, 150


def small_parameters(chosen: Signal) -> dict[str, float]:
    """Parameters for a short history: small ones where the signal takes them, else its defaults."""
    small = {item.name: _small(item) for item in chosen.parameters}
    try:
        return chosen.checked(small)
    except RulesError:
        defaults = {item.name: item.default for item in chosen.parameters}
        return chosen.checked({name: value for name, value in defaults.items() if value is not None} or small)


def _small(item: Parameter) -> float:
    wanted = _SMALL.get(item.name, 5.0 if item.whole else item.least)
    value = min(max(wanted, item.least), item.most)
    return float(int(value)) if item.whole else value


def answer(chosen: Signal, market: Market) -> Values:
    """What the signal says of a market, (T, N)."""
    return evaluated(chosen, Panel(market), small_parameters(chosen))


def _length(chosen: Signal) -> int:
    return max(_LEAST_SESSIONS, chosen.lookback_sessions(small_parameters(chosen)) + _MORE_THAN_LOOKBACK)


def _same(first: Any, second: Any) -> bool:
    return bool(first.dtype == second.dtype and first.tobytes() == second.tobytes())


def right_kind(chosen: Signal) -> str:
    """It gives one value a session and symbol, of its kind; its phrase reads."""
    words = chosen.words(small_parameters(chosen))
    if not words.startswith("the ") or "{" in words or "\n" in words:
        return f"its phrase `{words}` does not read: it begins with `the` and stands on one line"
    panel = Panel(reporting_market(6, _length(chosen)))
    found = chosen.function(panel, **small_parameters(chosen))
    wanted = np.dtype(bool if chosen.number is None else float)
    if not isinstance(found, np.ndarray) or found.shape != panel.close.shape:
        shape = f"an array of shape {found.shape}" if isinstance(found, np.ndarray) else type(found).__name__
        return f"it gives {shape}, and one value a session and symbol is wanted, of shape {panel.close.shape}"
    if found.dtype != wanted:
        kind = (
            "yes or no, since `number` is left out"
            if chosen.number is None
            else "a number, since `number` is given"
        )
        return f"it gives {found.dtype}, and {wanted} is wanted: it is {kind}"
    return ""


def steady(chosen: Signal) -> str:
    """Asked twice it says the same, and it changes nothing of what it looks at."""
    panel = Panel(reporting_market(7, _length(chosen)))
    names = ("open", "high", "low", "close")
    before = {name: getattr(panel, name).copy() for name in names}
    first = evaluated(chosen, panel, small_parameters(chosen)).copy()
    for name in names:
        if not np.array_equal(before[name], getattr(panel, name), equal_nan=True):
            return f"it changes the panel's {name} prices, which others look at too: work on a copy"
    if not _same(first, evaluated(chosen, panel, small_parameters(chosen))):
        return "asked twice about the same prices it gives two answers: nothing in it may be drawn or kept"
    return ""


def later_sessions_change(chosen: Signal, market: Market, sessions: int, seed: int) -> bool:
    """Whether what comes after the first `sessions` sessions, or its absence, changes an answer before."""
    whole = answer(chosen, market)[:sessions]
    other = answer(chosen, changed_after(market, sessions, seed))[:sessions]
    return not (_same(whole, answer(chosen, cut(market, sessions))) and _same(whole, other))


def looks_only_backward(chosen: Signal) -> str:
    """Its answers up to a close stay when all after it is changed, or is not there."""
    length = _length(chosen)
    for seed in (1, 8):
        market = reporting_market(seed, length, holes=0.03 if seed == 1 else 0.0)
        for sessions in np.linspace(length // 5, length - 1, 7).astype(int):
            if later_sessions_change(chosen, market, int(sessions), seed + 1):
                return (
                    f"it looks ahead: what it says up to the close of session {sessions} changes when later"
                    " prices do; use nothing but the rows up to the one that is answered"
                )
    return ""


def blind_to_splits(chosen: Signal) -> str:
    """A split of the same worth changes nothing."""
    market = reporting_market(1, _length(chosen))
    for ratio in (2.0, 0.25):
        halved = with_split(market, 200, ratio)
        after = int(market.ordinals[200])
        eps = tuple(r._replace(eps=r.eps / ratio) if r.ordinal >= after else r for r in market.reports)
        if not _same(answer(chosen, market), answer(chosen, replace(halved, reports=eps))):
            return (
                "it takes a split for a move: use the panel's prices, which are in units of the first share,"
                " and volume only in money, price times shares"
            )
    return ""


def keeps_symbols_apart(chosen: Signal) -> str:
    """A symbol alone and beside another has the same answers."""
    market = reporting_market(2, _length(chosen))
    found = answer(chosen, market)
    for index, symbol in enumerate(market.symbols):
        alone = answer(chosen, market.select([symbol]))
        if not _same(np.ascontiguousarray(found[:, index]), np.ascontiguousarray(alone[:, 0])):
            return "it mixes symbols: a column's answer changes when the other columns are taken away"
    return ""


def passes_over_holes(chosen: Signal) -> str:
    """A session without a bar is passed over, as if the bars stood one after another."""
    if not chosen.by_bars:
        return ""
    market = random_market(3, _length(chosen), 1, 0.2)
    has = ~np.isnan(market.close[:, 0])
    fields = {name: getattr(market, name)[has] for name in ("open", "high", "low", "close")}
    dense = array_market(fields.pop("close"), **fields)
    if not _same(answer(chosen, market)[has], answer(chosen, dense)):
        return (
            "it counts sessions without a bar: arrays of the market are brought into the order of bars by"
            " `panel.gather`"
        )
    return ""


def keeps_its_lookback(chosen: Signal) -> str:
    """Nothing is said before its lookback is there; a number is known once it is."""
    if not chosen.by_bars:
        return ""
    found = answer(chosen, random_market(5, _length(chosen)))
    lookback = chosen.lookback_sessions(small_parameters(chosen))
    if lookback < 1:
        return f"its lookback is {lookback}, and today's bar is counted: it is at least 1"
    known = ~np.isnan(found) if chosen.number is not None else found
    first = int(np.argmax(known.any(axis=1))) + 1 if known.any() else 0
    if known[: lookback - 1].any():
        return (
            f"it says something at bar {first}, before its lookback of {lookback} bars: a later one is wanted"
        )
    if chosen.number is not None and first > lookback:
        return f"it says nothing before bar {first}, and its lookback is {lookback}: write {first}"
    return ""


def keeps_its_bounds(chosen: Signal) -> str:
    """A number stays within its bounds, is finite or unknown, and is known somewhere."""
    if chosen.number is None:
        return ""
    found = answer(chosen, reporting_market(6, _length(chosen)))
    known = found[~np.isnan(found)]
    if known.size == 0:
        return "it is unknown at every close of an invented market: NaN is for closes with too little history"
    least, most = float(known.min()), float(known.max())
    if least < chosen.number.least or most > chosen.number.most:
        span = f"{chosen.number.least:g} to {chosen.number.most:g}"
        return f"it gave {least:.6g} to {most:.6g}, beyond its bounds of {span}: widen `Number`, or clip"
    return ""


SIGNAL_CHECKS: dict[str, Callable[[Signal], str]] = {
    "gives one value of its kind a session and symbol": right_kind,
    "says the same when asked twice": steady,
    "looks only backward": looks_only_backward,
    "is blind to splits": blind_to_splits,
    "keeps symbols apart": keeps_symbols_apart,
    "passes over sessions without a bar": passes_over_holes,
    "keeps its lookback": keeps_its_lookback,
    "keeps its bounds": keeps_its_bounds,
}
