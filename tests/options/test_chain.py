"""The chain people read: its rows against the functions it is made of, and against parity."""

from __future__ import annotations

import numpy as np
import pytest

import hedgerow.options as options
from hedgerow.errors import InputError
from hedgerow.kernels.layout import Floats


def smile(strikes: Floats) -> Floats:
    """Downside strikes dearer."""
    return 0.2 + 0.002 * np.maximum(100.0 - strikes, 0.0)


def test_rows_rise_in_strike_and_hold_the_options_own_values() -> None:
    """Every column equals the function it stands for, whatever the order of the strikes given."""
    table = options.chain_table(100.0, [105.0, 95.0, 100.0], 0.25, smile, rate=0.03)
    strikes = np.array([95.0, 100.0, 105.0])
    terms = (100.0, strikes, 0.25, smile(strikes), 0.03)
    assert list(table["strike"]) == [95.0, 100.0, 105.0]
    assert list(table["volatility"]) == list(smile(strikes))
    assert list(table["call"]) == list(options.american_value("call", *terms))
    assert list(table["put"]) == list(options.american_value("put", *terms))
    assert list(table["put_delta"]) == list(options.european_greeks("put", *terms).delta)
    assert list(table["odds_above"]) == list(options.chance_beyond("call", *terms))


def test_a_european_chain_keeps_parity_with_dividends() -> None:
    """Call less put is the price less the dividend's and the strike's present values, to rounding."""
    cash = [(0.1, 0.7)]
    table = options.chain_table(100.0, [90.0, 110.0], 0.25, smile, rate=0.03, dividends=cash, american=False)
    forward = 100.0 - 0.7 * np.exp(-0.03 * 0.1)
    gap = table["call"] - table["put"] - (forward - table["strike"] * np.exp(-0.03 * 0.25))
    assert np.abs(gap).max() < 1e-12
    assert np.abs(table["call_delta"] - table["put_delta"] - 1.0).max() < 1e-15
    assert np.abs(table["odds_above"] + table["odds_below"] - 1.0).max() < 1e-15


def test_dividends_may_come_once() -> None:
    """An iterator of dividends serves every column, not only the first."""
    once = options.chain_table(100.0, [100.0], 0.25, smile, dividends=iter([(0.1, 2.0)]))
    kept = options.chain_table(100.0, [100.0], 0.25, smile, dividends=[(0.1, 2.0)])
    assert once.equals(kept)


def test_a_wrong_strike_is_refused() -> None:
    """A strike that is not a number ends in a sentence, not in a table of blanks."""
    with pytest.raises(InputError, match="strike holds nan"):
        options.chain_table(100.0, [float("nan")], 0.25, smile)
