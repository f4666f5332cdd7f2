"""American options against QuantLib and a lattice, the bound on early exercise, and when exercise is due."""

from __future__ import annotations

import math

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from hedgerow.kernels import american as amer
from hedgerow.kernels.layout import CALL, PUT
from hedgerow.kernels.lognormal import european, intrinsic
from option_oracles import Terms, american_value, draw, european_option, lattice_american

# Largest error seen over 5,000 random options each was 0.00124 and 0.0096 on a strike of 100.
SHORT_ERROR = 1.6e-3  # up to four months
LONG_ERROR = 1.2e-2  # up to three years


@pytest.mark.parametrize("with_yield", [False, True])
@pytest.mark.parametrize(("days", "error"), [((2, 120), SHORT_ERROR), ((120, 1100), LONG_ERROR)])
def test_values_equal_quantlib(days: tuple[int, int], error: float, with_yield: bool) -> None:
    """QuantLib's QdFp engine at its accurate setting, 150 random options a row, strike 100."""
    rng = np.random.default_rng(4)
    for _ in range(150):
        terms = draw(rng, days, with_yield)
        assert amer.american(*terms.scalars) == pytest.approx(american_value(terms), abs=error), terms


def test_values_equal_a_lattice() -> None:
    """A plain Cox-Ross-Rubinstein lattice of 1,500 steps (its own error about 0.002), strike 100."""
    rng = np.random.default_rng(5)
    for _ in range(12):
        terms = draw(rng, (20, 700), with_yield=True)
        assert amer.american(*terms.scalars) == pytest.approx(lattice_american(terms, 1500), abs=0.01), terms


def test_the_bound_holds_and_is_not_idle() -> None:
    """American less European value by QuantLib never passes the bound, over 300 random options.

    Negative rates and yields included for the bound's own cases. The slack is QuantLib's accuracy. The bound
    also has to be of use: under half a cent for a good part of the options.
    """
    rng = np.random.default_rng(6)
    small = 0
    for k in range(300):
        terms = draw(rng, (2, 400), with_yield=bool(k % 2))
        if k % 3 == 0:
            terms = terms._replace(rate=terms.rate / 50.0)
        premium = american_value(terms) - european_option(terms).NPV()
        bound = amer.early_exercise_bound(*terms.scalars)
        assert premium <= bound + 1e-6, terms
        small += bound < 0.005
    assert small > 60


@pytest.mark.parametrize(
    ("rate", "carry"),
    [(-0.01, 0.02), (-0.02, -0.01), (0.03, -0.02), (0.0, -0.03), (-0.01, -0.05), (0.0, 0.0)],
)
@pytest.mark.parametrize("right", [CALL, PUT])
def test_the_bound_holds_for_odd_rates(right: int, rate: float, carry: float) -> None:
    """Rates and yields of nought and below against a lattice of 400 steps."""
    for spot in (70.0, 95.0, 100.0, 130.0):
        terms = Terms(right, spot, 100.0, 300, rate, carry, 0.3)
        premium = lattice_american(terms, 400) - european_option(terms).NPV()
        assert premium <= amer.early_exercise_bound(*terms.scalars) + 0.02, terms


def test_the_bound_of_a_call_without_dividends_is_nought() -> None:
    """Merton 1973: such a call is never exercised early, so both values are one to the bit."""
    for strike in (60.0, 100.0, 140.0):
        terms = (CALL, 100.0, strike, 0.7, 0.05, 0.0, 0.3)
        assert amer.early_exercise_bound(*terms) == 0.0
        assert amer.american(*terms) == european(*terms)


def test_a_bound_cut_in_half_is_caught() -> None:
    """Negative control: somewhere a tenth of the bound lies under the true premium."""
    terms = Terms(PUT, 90.0, 100.0, 200, 0.08, 0.0, 0.2)
    premium = american_value(terms) - european_option(terms).NPV()
    assert premium > 0.1 * amer.early_exercise_bound(*terms.scalars)


def test_the_european_value_stands_in_only_within_half_a_tick() -> None:
    """With a tick of a cent the value is the American one, or within half a cent of it by QuantLib."""
    rng = np.random.default_rng(7)
    stood_in = 0
    for _ in range(200):
        terms = draw(rng, (2, 120), with_yield=False)
        terms = terms._replace(rate=terms.rate / 10.0)
        value = amer.american_or_european(*terms.scalars, 0.01)
        assert abs(value - american_value(terms)) <= 0.005 + SHORT_ERROR, terms
        stood_in += value == european(*terms.scalars)
    assert 40 < stood_in < 200


@given(
    right=st.sampled_from([CALL, PUT]),
    s=st.floats(5.0, 500.0),
    t=st.floats(1e-3, 3.0),
    r=st.floats(-0.03, 0.15),
    v=st.floats(0.0, 2.0),
    tick=st.sampled_from([0.01, 0.05, math.inf]),
)
def test_knowing_more_beforehand_changes_nothing(
    right: int, s: float, t: float, r: float, v: float, tick: float
) -> None:
    """Knowing the strike against the forward gives the value of `american_or_european`, nearly to the bit.

    Also without volatility, or at a negative rate. Half a tick is a step: near it either value may stand.
    """
    span = amer.Span(t, math.sqrt(t), r, math.exp(-r * t))
    away = math.log(100.0 / s) - r * t
    value = amer.on_forward(right, s, 100.0, away, v, span, tick)
    expected = amer.american_or_european(right, s, 100.0, t, r, 0.0, v, tick)
    bound = amer.early_exercise_bound(right, s, 100.0, t, r, 0.0, v)
    if abs(bound - 0.5 * tick) > 1e-9:
        assert value == pytest.approx(expected, rel=1e-9, abs=1e-9)


scalars = {
    "s": st.floats(5.0, 500.0),
    "t": st.floats(1e-3, 3.0),
    "r": st.floats(-0.03, 0.15),
    "q": st.floats(-0.03, 0.15),
    "v": st.floats(0.03, 2.0),
    "right": st.sampled_from([CALL, PUT]),
}


@given(**scalars)
def test_never_under_european_or_intrinsic_value(
    right: int, s: float, t: float, r: float, q: float, v: float
) -> None:
    """A right more is never worth less, and never more than the bound on top; all rates and yields."""
    value = amer.american(right, s, 100.0, t, r, q, v)
    plain = european(right, s, 100.0, t, r, q, v)
    assert value >= max(plain, intrinsic(right, s, 100.0)) - 1e-12 * (s + 100.0)
    most = plain + amer.early_exercise_bound(right, s, 100.0, t, r, q, v)
    assert value <= max(most, intrinsic(right, s, 100.0)) + 1e-9 * (s + 100.0)


@given(more=st.floats(0.02, 2.0), **scalars)
def test_values_rise_with_time_and_volatility(
    right: int, more: float, s: float, t: float, r: float, q: float, v: float
) -> None:
    """An American option with more time or volatility is worth at least as much, to the stated accuracy."""
    r, q = abs(r), abs(q)
    value = amer.american(right, s, 100.0, t, r, q, v)
    slack = 2e-4 * (s + 100.0)
    assert amer.american(right, s, 100.0, t + more, r, q, v) >= value - slack
    assert amer.american(right, s, 100.0, t, r, q, v + more) >= value - slack


@given(**scalars)
def test_a_call_is_a_put_with_the_sides_exchanged(
    right: int, s: float, t: float, r: float, q: float, v: float
) -> None:
    """McDonald & Schroder 1998, to rounding."""
    other = amer.american(1 - right, 100.0, s, t, q, r, v)
    assert amer.american(right, s, 100.0, t, r, q, v) == pytest.approx(other, abs=1e-11 * (s + 100.0))


def test_put_exercise_is_due_where_the_value_is_no_more_than_exercise() -> None:
    """Just under the boundary QuantLib's value is exercise itself; a little over it, it is more."""
    for days, rate, volatility in ((30, 0.05, 0.2), (180, 0.05, 0.3), (400, 0.03, 0.25)):
        years = days / 365.0
        due = [
            s
            for s in np.arange(40.0, 100.0, 0.25)
            if amer.put_exercise_is_due(float(s), 100.0, years, rate, 0.0, volatility)
        ]
        edge = float(max(due))
        assert due == list(np.arange(40.0, edge + 0.1, 0.25))
        under = Terms(PUT, edge - 1.0, 100.0, days, rate, 0.0, volatility)
        over = under._replace(spot=edge + 1.0)
        assert american_value(under) - (100.0 - under.spot) == pytest.approx(0.0, abs=1e-4)
        assert american_value(over) - (100.0 - over.spot) > 1e-4


def test_put_exercise_is_never_due_without_interest_or_out_of_the_money() -> None:
    """No interest to gain, nothing to exercise; at expiry: whether it is in the money."""
    assert not amer.put_exercise_is_due(20.0, 100.0, 0.5, 0.0, 0.0, 0.3)
    assert not amer.put_exercise_is_due(20.0, 100.0, 0.5, -0.01, 0.0, 0.3)
    assert not amer.put_exercise_is_due(101.0, 100.0, 0.5, 0.05, 0.0, 0.3)
    assert amer.put_exercise_is_due(99.0, 100.0, 0.0, 0.05, 0.0, 0.3)
    assert amer.put_exercise_is_due(99.0, 100.0, 0.5, 0.05, 0.0, 0.0)
    assert not amer.put_exercise_is_due(99.0, 100.0, 0.5, 0.0, 0.05, 0.0)


@given(
    st.floats(50.0, 150.0),
    st.floats(0.0, 5.0),
    st.floats(0.004, 0.5),
    st.floats(0.0, 0.08),
    st.floats(0.1, 1.0),
)
def test_call_exercise_before_a_dividend(s: float, d: float, t: float, r: float, v: float) -> None:
    """Due exactly where D > K (1 - e^(-r t)) + put of the same strike on the price without the dividend.

    Hull, the early exercise of calls on dividend-paying stocks; never when D <= K (1 - e^(-r t)).
    """
    due = amer.call_exercise_is_due_before_dividend(s, 100.0, t, r, d, v)
    interest = 100.0 * -math.expm1(-r * t)
    margin = d - interest - european(PUT, s - d, 100.0, t, r, 0.0, v)
    if abs(margin) > 1e-9:
        assert due == (margin > 0.0 and s > 100.0)
    if d <= interest:
        assert not due


def test_a_certain_price_is_exercised_at_the_best_moment() -> None:
    """Without volatility: the largest discounted payoff over a fine grid of moments."""
    for spot, rate, carry in ((90.0, 0.05, 0.0), (110.0, 0.02, 0.3), (90.0, -0.02, 0.0), (100.0, 0.05, 0.2)):
        moments = np.linspace(0.0, 1.0, 20001)
        paths = 100.0 * np.exp(-rate * moments) - spot * np.exp(-carry * moments)
        value = amer.american(PUT, spot, 100.0, 1.0, rate, carry, 0.0)
        assert value == pytest.approx(max(float(paths.max()), 0.0), abs=1e-7)


@pytest.mark.parametrize("right", [CALL, PUT])
def test_limits_and_what_is_not_a_number(right: int) -> None:
    """Expiry, no price, no strike; NaN stays NaN."""
    assert amer.american(right, 90.0, 100.0, 0.0, 0.05, 0.02, 0.3) == intrinsic(right, 90.0, 100.0)
    assert amer.american(right, 0.0, 100.0, 1.0, 0.05, 0.02, 0.3) == intrinsic(right, 0.0, 100.0)
    assert amer.american(right, 90.0, 0.0, 1.0, 0.05, 0.02, 0.3) == intrinsic(right, 90.0, 0.0)
    assert math.isnan(amer.american(right, 100.0, 95.0, 0.5, 0.03, 0.01, math.nan))
    assert math.isnan(amer.american(right, math.nan, 95.0, 0.5, 0.03, 0.01, 0.2))
