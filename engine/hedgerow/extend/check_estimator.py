"""What every estimator of volatility must do, whichever it is: the house's rules for this extension point.

Each rule is a function of an estimator that gives "" or, in one sentence, what is wrong with it.
"""

from __future__ import annotations

from collections.abc import Callable

import numpy as np

from hedgerow.extend.invented import array_market, changed_after, cut, random_market, with_split
from hedgerow.kernels.layout import Floats
from hedgerow.market.table import Market
from hedgerow.volatility.registry import Bars, Estimator

__all__ = ["ESTIMATOR_CHECKS", "estimate", "later_sessions_change", "small_parameter"]

_ROUNDING = 1e-9
_HIDDEN_MEAN = 0.05


def small_parameter(chosen: Estimator) -> float:
    """A parameter for a short history: ten sessions, or a decay of .9, within what the estimator takes."""
    wanted = 0.9 if chosen.parameter == "decay" else 10.0
    return min(max(wanted, chosen.least), chosen.most)


def estimate(chosen: Estimator, market: Market) -> Floats:
    """Annualised volatility of a market, (T, N)."""
    return chosen.volatility(Bars.of(market), small_parameter(chosen))


def _length(chosen: Estimator) -> int:
    return max(120, 2 * int(chosen.horizon_sessions(small_parameter(chosen))) + 60)


def right_kind(chosen: Estimator) -> str:
    """It gives counts and variances, each one value a session and symbol."""
    bars = Bars.of(random_market(6, _length(chosen)))
    found = chosen.function(bars, small_parameter(chosen))
    if not isinstance(found, tuple) or len(found) != 2:
        return "it gives something else than `Estimate(counts, variance)`"
    for name, array in zip(("counts", "variance"), found, strict=True):
        if not isinstance(array, np.ndarray) or array.shape != bars.returns.shape:
            return f"its {name} are no array of one value a session and symbol, of shape {bars.returns.shape}"
    return ""


def later_sessions_change(chosen: Estimator, market: Market, sessions: int, seed: int) -> bool:
    """Whether what comes after the first `sessions` sessions, or is not there, changes a value before it."""
    whole = estimate(chosen, market)[:sessions].tobytes()
    if whole != estimate(chosen, cut(market, sessions)).tobytes():
        return True
    return whole != estimate(chosen, changed_after(market, sessions, seed))[:sessions].tobytes()


def looks_only_backward(chosen: Estimator) -> str:
    """Its values up to a session stay when all after it is changed, or is not there."""
    length = _length(chosen)
    market = random_market(8, length, holes=0.05)
    for sessions in np.linspace(length // 3, length - 1, 8).astype(int):
        if later_sessions_change(chosen, market, int(sessions), 9):
            return (
                f"it looks ahead: its values up to session {sessions} change when later prices do; use"
                " nothing but the rows up to the one that is estimated"
            )
    return ""


def blind_to_scale(chosen: Estimator) -> str:
    """Prices in cents give the volatility of prices in dollars."""
    market = random_market(1, _length(chosen))
    fields = {name: getattr(market, name) * 100.0 for name in ("open", "high", "low", "close")}
    scaled = estimate(chosen, array_market(fields.pop("close"), **fields))
    if not np.allclose(estimate(chosen, market), scaled, rtol=_ROUNDING, atol=0.0, equal_nan=True):
        return (
            "it depends on the unit of price: prices in cents give another volatility than prices in dollars"
        )
    return ""


def blind_to_splits(chosen: Estimator) -> str:
    """A split of the same worth leaves every value as it was."""
    market = random_market(2, _length(chosen))
    whole = estimate(chosen, market)
    for ratio in (2.0, 1.5, 0.1):
        halved = estimate(chosen, with_split(market, 60, ratio))
        if not np.allclose(whole, halved, rtol=_ROUNDING, atol=0.0, equal_nan=True):
            return "it takes a split for a move: use the returns of the bars"
    return ""


def keeps_symbols_apart(chosen: Estimator) -> str:
    """A symbol alone and beside another has the same values."""
    market = random_market(4, _length(chosen), holes=0.1)
    found = estimate(chosen, market)
    for index, symbol in enumerate(market.symbols):
        alone = estimate(chosen, market.select([symbol]))
        if found[:, index].tobytes() != alone[:, 0].tobytes():
            return "it mixes symbols: a column's value changes when the other columns are taken away"
    return ""


def lives_through_holes(chosen: Estimator) -> str:
    """With a tenth of the bars missing it is still there, and near that of the whole history."""
    sessions = 400 + _length(chosen)
    values = estimate(chosen, random_market(5, sessions, holes=0.1))[sessions - 360 :]
    full = estimate(chosen, random_market(5, sessions))[sessions - 360 :]
    if np.isnan(full).all():
        return "it is unknown at every session of an invented market"
    known = float((~np.isnan(values)).mean())
    if known <= 0.8:
        return f"with a tenth of the bars missing it knows {known:.0%} of the sessions: skip what is NaN"
    ratio = float(np.nanmean(values) / np.nanmean(full))
    if abs(ratio - 1.0) > _HIDDEN_MEAN:
        return f"with a tenth of the bars missing it gives {ratio:.2f} times what it gives with all of them"
    return ""


def positive_or_unknown(chosen: Estimator) -> str:
    """Prices that stand still give nothing to go by; prices that move give a positive value."""
    still = array_market(np.full((60, 1), 20.0), high=np.full((60, 1), 20.0), low=np.full((60, 1), 20.0))
    if not np.isnan(estimate(chosen, still)).all():
        return "it knows a volatility of prices that stand still: their variance is zero"
    moving = estimate(chosen, random_market(6, _length(chosen), holes=0.1))
    known = moving[~np.isnan(moving)]
    return (
        "" if (known > 0.0).all() and np.isfinite(known).all() else "it gives a volatility that is no number"
    )


def unknown_until_history(chosen: Estimator) -> str:
    """The first value appears with the least count of known values, and no earlier."""
    values = estimate(chosen, random_market(7, _length(chosen)))
    least = chosen.least_known(small_parameter(chosen))
    first = int(np.argmax(~np.isnan(values[:, 0])))
    if first in (least - 1, least):
        return ""
    return (
        f"its first value stands at session {first + 1}, and {least} are to be known by then: mind its counts"
    )


ESTIMATOR_CHECKS: dict[str, Callable[[Estimator], str]] = {
    "gives counts and variances a session and symbol": right_kind,
    "looks only backward": looks_only_backward,
    "is blind to the unit of price": blind_to_scale,
    "is blind to splits": blind_to_splits,
    "keeps symbols apart": keeps_symbols_apart,
    "lives through sessions without a bar": lives_through_holes,
    "is positive or unknown": positive_or_unknown,
    "is unknown until there is history": unknown_until_history,
}
