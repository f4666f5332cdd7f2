"""What is refused at the door: every fault in one sentence each, all in one pass."""

from __future__ import annotations

from typing import Any

import numpy as np
import pytest

import hedgerow.options as options
from hedgerow.errors import InputError

GOOD: dict[str, Any] = {"right": "call", "spot": 100.0, "strike": 100.0, "years": 0.5, "volatility": 0.2}


@pytest.mark.parametrize(
    ("change", "says"),
    [
        ({"spot": -1.0}, "spot holds -1.0"),
        ({"spot": [100.0, np.nan]}, "spot holds nan (1 of 2 are wrong)"),
        ({"strike": np.inf}, "strike holds inf"),
        ({"years": -0.1}, "years holds -0.1"),
        ({"volatility": "high"}, "volatility is 'high'; it is a number or an array"),
        ({"rate": np.nan}, "rate holds nan"),
        ({"right": "cal"}, "right is 'cal'; it is `call` or `put`"),
        ({"right": ["call", 1]}, "right is '1'"),
        ({"spot": [1.0, 2.0], "strike": [1.0, 2.0, 3.0]}, "spot (2,), strike (3,)"),
        ({"dividends": [(0.1, -1.0)]}, "dividend 1 is (0.1, -1.0)"),
        ({"dividends": [(0.1, 1.0), (0.0, 1.0)]}, "dividend 2 is (0.0, 1.0)"),
        ({"dividends": [0.5]}, "dividend 1 is 0.5"),
        ({"dividends": [("soon", 1.0)]}, "dividend 1 is ('soon', 1.0)"),
    ],
)
@pytest.mark.parametrize("name", ["european_value", "american_value", "chance_beyond", "european_greeks"])
def test_wrong_input_says_what_was_found_and_what_is_allowed(
    name: str, change: dict[str, Any], says: str
) -> None:
    """The function's name, what was found; exit code 2."""
    with pytest.raises(InputError) as caught:
        getattr(options, name)(**(GOOD | change))
    assert says in str(caught.value)
    assert str(caught.value).startswith(f"{name}: ")
    assert caught.value.exit_code == 2


@pytest.mark.parametrize("name", ["implied_volatility", "american_implied_volatility"])
def test_a_wrong_price_is_refused_too(name: str) -> None:
    """A negative price has no volatility and is no price."""
    with pytest.raises(InputError, match=r"price holds -1\.0"):
        getattr(options, name)("put", -1.0, 100.0, 100.0, 0.5)


def test_all_faults_come_in_one_pass() -> None:
    """Three wrong arguments, three faults, each with a code of its own."""
    with pytest.raises(InputError) as caught:
        options.european_value("both", -1.0, 100.0, -2.0, 0.2)
    assert [fault.code for fault in caught.value.faults] == ["right", "bad spot", "bad years"]


def test_negative_rates_are_welcome() -> None:
    """Rates and yields may be negative; they have been."""
    assert float(options.european_value("put", 100.0, 100.0, 1.0, 0.2, rate=-0.005)) > 7.9
