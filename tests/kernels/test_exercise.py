"""The table of early exercise: made as it says, close to QuantLib, and without a seam at the boundary."""

from __future__ import annotations

import math

import numpy as np
import pytest

from hedgerow.kernels import exercise
from hedgerow.kernels.american import american
from hedgerow.kernels.boundary import Problem, exercise_depths, is_exercised
from hedgerow.kernels.exercise_table import make_table
from hedgerow.kernels.layout import PUT
from hedgerow.kernels.lognormal import european
from option_oracles import Terms, american_value

# Largest error seen over 4,000 random puts each, on a strike of 100, was 0.00014 and 0.00052.
USUAL_ERROR, WIDE_ERROR = 1.8e-4, 7e-4


def puts(seed: int, count: int, wide: bool) -> list[Terms]:
    """Random puts on a stock without dividends, at prices up to two and a half deviations away."""
    rng = np.random.default_rng(seed)
    rates, volatilities, days = ((0.0005, 0.15), (0.05, 1.5), (2, 1100))
    if not wide:
        rates, volatilities, days = ((0.002, 0.06), (0.1, 0.8), (5, 400))
    drawn = []
    while len(drawn) < count:
        rate, volatility, span = (
            float(np.exp(rng.uniform(*np.log(ends)))) for ends in (rates, volatilities, days)
        )
        root = math.sqrt(round(span) / 365.0)
        if exercise.is_tabled(rate * root / volatility, volatility * root):
            spot = 100.0 * math.exp(rng.uniform(-2.5, 2.5) * volatility * root)
            drawn.append(Terms(PUT, spot, 100.0, round(span), rate, 0.0, volatility))
    return drawn


@pytest.mark.parametrize(("wide", "error"), [(False, USUAL_ERROR), (True, WIDE_ERROR)])
def test_values_equal_quantlib(wide: bool, error: float) -> None:
    """QuantLib's QdFp engine at its accurate setting, 150 random puts a row, strike 100."""
    for terms in puts(8, 150, wide):
        assert american(*terms.scalars) == pytest.approx(american_value(terms), abs=error), terms


def test_the_table_is_what_its_maker_makes() -> None:
    """Every number of the file, made afresh; the last digits depend on the machine's exp and log."""
    np.testing.assert_allclose(exercise.TABLE, make_table(), rtol=0.0, atol=1e-6)


def test_a_wrong_number_is_noticed() -> None:
    """Negative control: one place of the table a hundredth off moves a value by more than is allowed."""
    right = make_table()
    wrong = right.copy()
    wrong[20, 1, 8] += 0.01
    leaning, deviation = float(exercise.LEANINGS[20]), float(exercise.DEVIATIONS[1])
    moved = chance(wrong[20, 1, 8]) - chance(right[20, 1, 8])
    assert 100.0 * leaning * deviation * abs(moved) > USUAL_ERROR


def chance(z: float) -> float:
    """Probability that a standard normal variable is at most z."""
    return 0.5 * math.erfc(-z / math.sqrt(2.0))


def solved_edge(terms: Terms) -> float:
    """The price at and under which a put is exercised, by the depths of `boundary`."""
    _, _, strike, years, rate, _, volatility = terms.scalars
    problem = Problem(years, rate, 0.0, volatility, 0.0)
    return strike * math.exp(-exercise_depths(problem)[-1] * math.sqrt(years))


def test_value_meets_exercise_at_the_boundary() -> None:
    """Value matching: a hair over the boundary a put is worth what exercise pays, within a stated error."""
    for terms in puts(9, 200, wide=False):
        _, _, strike, years, rate, _, volatility = terms.scalars
        edge = solved_edge(terms)
        assert american(PUT, edge * 0.999999, strike, years, rate, 0.0, volatility) == pytest.approx(
            strike - edge * 0.999999, abs=1e-12 * strike
        )
        over = american(PUT, edge * 1.000001, strike, years, rate, 0.0, volatility)
        assert over == pytest.approx(strike - edge, abs=2e-4 + 1e-6 * edge), terms


def test_exercise_is_due_under_the_tabled_boundary_only() -> None:
    """The premium says EXERCISED exactly where the boundary's own test does."""
    for terms in puts(10, 200, wide=True):
        _, spot, strike, years, rate, _, volatility = terms.scalars
        problem, root = Problem(years, rate, 0.0, volatility, 0.0), math.sqrt(years)
        away = math.log(spot / strike)
        found = exercise.tabled_premium(away, rate * root / volatility, volatility * root)
        assert (found == exercise.EXERCISED) == is_exercised(away, exercise_depths(problem), problem)


@pytest.mark.parametrize(
    ("years", "rate", "edge"), [(3.0, 0.05, 1.8 / math.sqrt(3.0)), (1.0, 0.16, 0.16 / 3.0), (0.25, 2e-5, 1.0)]
)
def test_no_seam_where_the_table_ends(years: float, rate: float, edge: float) -> None:
    """A volatility just inside the table and one just outside, where the boundary is solved: within .01."""
    root = math.sqrt(years)
    premiums, tabled = [], []
    for volatility in (0.999 * edge, 1.001 * edge):
        tabled.append(exercise.is_tabled(rate * root / volatility, volatility * root))
        terms = (PUT, 95.0, 100.0, years, rate, 0.0, volatility)
        premiums.append(american(*terms) - european(*terms))
    assert sorted(tabled) == [False, True]
    assert premiums[0] == pytest.approx(premiums[1], abs=0.01)
