"""A market as signals see it: prices in units of the first share, one bar after another."""

from __future__ import annotations

from collections.abc import Mapping
from functools import cached_property
from typing import Any

import numpy as np
from numpy.typing import NDArray

from hedgerow.errors import RulesError, nearest_word
from hedgerow.kernels.layout import Floats, Ints
from hedgerow.market.table import Market
from hedgerow.signals.registry import Values, evaluated, named_signal

__all__ = ["Panel", "evaluate"]


class Panel:
    """Prices of a market as traded times the splits so far, so that a split is no move.

    `open`, `high`, `low`, `close` (T, N) hold each symbol's bars one after another from the first row on: a
    session without a bar is passed over, and rows after the last bar are NaN. `spread` puts what was found
    back onto the sessions. What was asked once is kept.
    """

    def __init__(self, market: Market) -> None:
        self.market = market
        self.has_bar: NDArray[np.bool_] = ~np.isnan(market.close)
        self._found: dict[tuple[object, ...], Values] = {}

    @cached_property
    def _order(self) -> Ints | None:
        """Sessions of the bars of each symbol, then those without; None when every session has a bar."""
        if self.has_bar.all():
            return None
        return np.argsort(~self.has_bar, axis=0, kind="stable")

    def gather(self, values: Floats) -> Floats:
        """Bring (T, N) values of sessions into the order of bars, as a fresh array."""
        if self._order is None:
            return np.array(values, dtype=np.float64, order="C")
        return np.ascontiguousarray(np.take_along_axis(values, self._order, axis=0))

    @cached_property
    def open(self) -> Floats:
        """Opens, bar after bar."""
        return self.gather(self.market.adj_open)

    @cached_property
    def high(self) -> Floats:
        """Highs, bar after bar."""
        return self.gather(self.market.adj_high)

    @cached_property
    def low(self) -> Floats:
        """Lows, bar after bar."""
        return self.gather(self.market.adj_low)

    @cached_property
    def close(self) -> Floats:
        """Closes, bar after bar."""
        return self.gather(self.market.adj_close)

    def spread(self, values: Values) -> Values:
        """Put values in the order of bars back onto the sessions; unknown where there is no bar."""
        if self._order is None:
            return values
        out = np.empty_like(values)
        np.put_along_axis(out, self._order, values, axis=0)
        return self.where_traded(out)

    def where_traded(self, values: Values) -> Values:
        """Make values of sessions unknown where the symbol has no bar."""
        return np.where(self.has_bar, values, False if values.dtype == np.bool_ else np.nan)

    def of(self, symbol: str) -> Panel:
        """Return the panel of one symbol alone; raises RulesError when the market does not hold it."""
        symbols = self.market.symbols
        if symbol not in symbols:
            found, allowed = f"`{symbol}` is no symbol of the market", f"{len(symbols)} symbols are there"
            raise RulesError.one("signal of", "unknown", found, allowed, nearest_word(symbol, symbols))
        return Panel(self.market.select([symbol]))

    def evaluate(self, name: str, params: Mapping[str, float] | None = None, of: str | None = None) -> Values:
        """Return what a signal says at each close, (T, N), read-only: bool, or float with NaN for unknown.

        With `of` it is that symbol's signal, the same in every column. Raises RulesError for an unknown
        signal, parameter or symbol.
        """
        chosen = named_signal(name)
        key = (name, of, *sorted(chosen.checked(params).items()))
        if key not in self._found:
            found = evaluated(chosen, self if of is None else self.of(of), params)
            if of is not None:
                wide: NDArray[Any] = np.empty(self.has_bar.shape, dtype=found.dtype)
                wide[:] = found
                found = wide
            found.flags.writeable = False
            self._found[key] = found
        return self._found[key]

    def known(
        self, name: str, params: Mapping[str, float] | None = None, of: str | None = None
    ) -> NDArray[np.bool_]:
        """Return where a signal is known, (T, N): a number is no NaN, a yes or no has its lookback of bars.

        Raises RulesError for an unknown signal, parameter or symbol.
        """
        found = self.evaluate(name, params, of)
        if found.dtype != np.bool_:
            return ~np.isnan(found)
        chosen = named_signal(name)
        has_bar = self.has_bar if of is None else self.of(of).has_bar
        seen = np.cumsum(has_bar if chosen.by_bars else np.ones_like(has_bar), axis=0)
        known = has_bar & (seen >= chosen.lookback_sessions(params))
        return np.ascontiguousarray(np.broadcast_to(known, self.has_bar.shape))


def evaluate(
    name: str, market: Market, params: Mapping[str, float] | None = None, of: str | None = None
) -> Values:
    """Return what one signal says of a market; see Panel.evaluate. Raises RulesError likewise."""
    return Panel(market).evaluate(name, params, of)
