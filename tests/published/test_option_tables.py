"""Option values that stand in print.

Hull, *Options, Futures and Other Derivatives*; Haug, *The Complete Guide to Option Pricing Formulas*;
Broadie & Detemple 1996, *Review of Financial Studies* 9; Longstaff & Schwartz 2001, *Review of Financial
Studies* 14. All quoted from memory and recomputed with an independent program. A tolerance is half of the
last digit quoted, and wider only where its reason is given.
"""

from __future__ import annotations

import pytest

import hedgerow.options as options
from hedgerow.kernels import lognormal as one
from hedgerow.kernels.american import american
from hedgerow.kernels.cash import american_cash
from hedgerow.kernels.layout import CALL, PUT
from option_oracles import Terms, lattice_american


def test_hull_black_scholes_example() -> None:
    """Hull: S 42, K 40, r .10, s .20, T .5: call 4.7594, put .8086, d1 .7693, d2 .6278."""
    terms = (42.0, 40.0, 0.5, 0.1, 0.0, 0.2)
    assert one.european(CALL, *terms) == pytest.approx(4.7594, abs=5e-5)
    assert one.european(PUT, *terms) == pytest.approx(0.8086, abs=5e-5)
    from hedgerow.kernels.normal import quantile

    assert quantile(one.delta(CALL, *terms)) == pytest.approx(0.7693, abs=5e-5)
    assert quantile(one.chance_above(*terms)) == pytest.approx(0.6278, abs=5e-5)


def test_hull_index_option() -> None:
    """Hull: S 930, K 900, r .08, q .03, s .20, T 2/12: call 51.83."""
    value = options.european_value("call", 930, 900, 2 / 12, 0.2, rate=0.08, dividend_yield=0.03)
    assert float(value) == pytest.approx(51.83, abs=5e-3)


def test_hull_known_dividends() -> None:
    """Hull: dividends .50 at months 2 and 5, S 40, K 40, r .09, s .30, T .5: European call 3.67."""
    cash = [(2 / 12, 0.5), (5 / 12, 0.5)]
    value = options.european_value("call", 40, 40, 0.5, 0.3, rate=0.09, dividends=cash)
    assert float(value) == pytest.approx(3.67, abs=5e-3)


def test_hull_implied_volatility() -> None:
    """Hull: call 1.875, S 21, K 20, r .10, T .25 gives 23.45 %."""
    assert float(options.implied_volatility("call", 1.875, 21, 20, 0.25, rate=0.1)) == pytest.approx(
        0.2345, abs=5e-5
    )


def test_hull_greeks() -> None:
    """Hull: S 49, K 50, r .05, s .20, T .3846.

    Price 2.40, delta .522, gamma .0655, vega 12.1, theta -4.31 a year, rho 8.91.
    """
    greeks = options.european_greeks("call", 49, 50, 0.3846, 0.2, rate=0.05)
    value = options.european_value("call", 49, 50, 0.3846, 0.2, rate=0.05)
    assert float(value) == pytest.approx(2.40, abs=5e-3)
    assert float(greeks.delta) == pytest.approx(0.522, abs=5e-4)
    assert float(greeks.gamma) == pytest.approx(0.0655, abs=1e-4)  # .06554: quoted to three digits
    assert float(greeks.vega) == pytest.approx(12.1, abs=0.05)
    assert float(greeks.theta) == pytest.approx(-4.31, abs=5e-3)
    assert float(greeks.rho) == pytest.approx(8.91, abs=5e-3)


def test_hull_american_put() -> None:
    """Hull: 50/50, r .10, s .40, T 5/12: American limit 4.284, European 4.076."""
    terms = (PUT, 50.0, 50.0, 5 / 12, 0.1, 0.0, 0.4)
    assert american(*terms) == pytest.approx(4.284, abs=5e-4)
    assert one.european(*terms) == pytest.approx(4.076, abs=5e-4)


def test_hull_american_put_with_a_dividend() -> None:
    """Hull: S 52, K 50, dividend 2.06 at 3.5 months, r .10, s .40, T 5/12: 4.21 with 100 steps.

    The tolerance is that lattice's own error of about a hundredth, and half of the last digit.
    """
    cash = [(3.5 / 12, 2.06)]
    whole = float(options.american_value("put", 52, 50, 5 / 12, 0.4, rate=0.1, dividends=cash))
    assert whole == pytest.approx(4.21, abs=0.015)
    assert american_cash(PUT, 52.0, 50.0, 5 / 12, 0.1, 0.4, 3.5 / 12, 2.06) == pytest.approx(whole, abs=2e-3)


def test_haug_european() -> None:
    """Haug: call 60/65, T .25, r .08, s .30: 2.1334; put 100/95, T .5, r .10, q .05, s .20: 2.4648."""
    assert one.european(CALL, 60.0, 65.0, 0.25, 0.08, 0.0, 0.3) == pytest.approx(2.1334, abs=5e-5)
    assert one.european(PUT, 100.0, 95.0, 0.5, 0.1, 0.05, 0.2) == pytest.approx(2.4648, abs=5e-5)


def test_haug_american_put() -> None:
    """Haug: put 100/95, T .5, r .08, s .30: limit 4.6916; within the stated accuracy of 1.6e-3."""
    assert american(PUT, 100.0, 95.0, 0.5, 0.08, 0.0, 0.3) == pytest.approx(4.6916, abs=1.6e-3)


@pytest.mark.parametrize(
    ("terms", "flat", "two_flats", "limit"),
    [
        (Terms(CALL, 42.0, 40.0, 274, 0.04, 0.08, 0.35), 5.2704, 5.2869, 5.3090),
        (Terms(PUT, 36.0, 40.0, 365, 0.06, 0.0, 0.2), 4.4531, 4.4628, 4.4867),
    ],
)
def test_above_the_flat_boundaries_and_at_the_limit(
    terms: Terms, flat: float, two_flats: float, limit: float
) -> None:
    """Haug after Bjerksund & Stensland: exercising at a flat boundary (1993) or at two (2002) is worth less.

    Each is the value of a strategy open to the holder, so the true value lies above both; it is the limit of
    a lattice, recomputed independently. The call has T .75, which 274 days are to within .0007.
    """
    years = 0.75 if terms.right == CALL else 1.0
    scalars = list(terms.scalars)
    scalars[3] = years
    value = american(*scalars)
    assert flat < two_flats < value
    assert value == pytest.approx(limit, abs=5e-4)
    assert lattice_american(terms, 1000) == pytest.approx(limit, abs=3e-3)


BROADIE_DETEMPLE = [
    (0.03, 0.2, 0.07, [0.219, 1.386, 4.783, 11.098, 20.000]),
    (0.07, 0.3, 0.03, [1.664, 4.495, 9.250, 15.798, 23.706]),
]


@pytest.mark.parametrize(("rate", "volatility", "carry", "values"), BROADIE_DETEMPLE)
def test_broadie_detemple(rate: float, volatility: float, carry: float, values: list[float]) -> None:
    """Broadie & Detemple 1996, American calls, K 100, T .5, S 80 to 120; half a digit and our 5e-4."""
    for spot, value in zip((80.0, 90.0, 100.0, 110.0, 120.0), values, strict=True):
        assert american(CALL, spot, 100.0, 0.5, rate, carry, volatility) == pytest.approx(value, abs=1e-3)


LONGSTAFF_SCHWARTZ = {
    36.0: [4.478, 4.840, 7.101, 8.508],
    40.0: [2.314, 2.885, 5.312, 6.920],
    44.0: [1.110, 1.690, 3.948, 5.647],
}


@pytest.mark.parametrize("spot", LONGSTAFF_SCHWARTZ)
def test_longstaff_schwartz(spot: float) -> None:
    """Longstaff & Schwartz 2001, Table 1, finite differences, put K 40, r .06, 50 exercise dates a year.

    Exercise at any time is worth .003 to .009 more (recomputed independently), and a thousandth of rounding
    and of our own error. The last value of the last row is itself a little high: exercise at any time is
    worth 5.6467 by QuantLib.
    """
    cases = [(0.2, 1.0), (0.2, 2.0), (0.4, 1.0), (0.4, 2.0)]
    for (volatility, years), value in zip(cases, LONGSTAFF_SCHWARTZ[spot], strict=True):
        extra = american(PUT, spot, 40.0, years, 0.06, 0.0, volatility) - value
        least = -0.002 if (spot, volatility, years) == (44.0, 0.4, 2.0) else 0.002
        assert least <= extra <= 0.010
