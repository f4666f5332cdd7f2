"""Many rules at once: what is planted is found, noise is not, and the library is asked the right way."""

from __future__ import annotations

import numpy as np
import pytest
from arch.bootstrap import StepM
from hypothesis import given
from hypothesis import strategies as some
from scipy.stats import binom, false_discovery_control

from hedgerow.evidence.longrun import long_run_variance
from hedgerow.evidence.seeds import Resampling, generator_of
from hedgerow.evidence.selection import (
    adjusted_p_values,
    indistinguishable_from_best,
    superior_to_yardstick,
)
from simulated_rules import LEVEL, NAMES, rules, study

QUICK = Resampling(seed=1, replications=199)
PLANTED = 0.0012


def test_planted_rule_is_found() -> None:
    """Compares the rules shown to be better, and the set of the best, with the one made to be better."""
    yardstick, returns = rules(seed=1, planted=PLANTED)
    found = superior_to_yardstick(returns, yardstick, NAMES, QUICK)
    assert found.better == ("rule 3",)
    assert found.p_consistent <= 0.02
    assert indistinguishable_from_best(returns, NAMES, QUICK).members == ("rule 3",)


def test_planted_worse_rule_is_not_taken_for_better() -> None:
    """Compares a rule made to be worse with: not better than the yardstick, not among the best.

    The library counts losses; returns handed over with the wrong sign would be found here.
    """
    yardstick, returns = rules(seed=1, planted=-PLANTED)
    found = superior_to_yardstick(returns, yardstick, NAMES, QUICK)
    assert "rule 3" not in found.better
    best = indistinguishable_from_best(returns, NAMES, QUICK)
    assert "rule 3" not in best.members
    assert len(best.members) >= 6


@given(some.integers(0, 40))
def test_p_values_are_in_order(seed: int) -> None:
    """Compares the three p-values of Hansen 2005: lower <= consistent <= upper."""
    yardstick, returns = rules(seed, days=150)
    found = superior_to_yardstick(returns, yardstick, NAMES, Resampling(seed, 49))
    assert 0.0 <= found.p_lower <= found.p_consistent <= found.p_upper <= 1.0


def test_noise_is_rejected_no_more_often_than_the_level() -> None:
    """Compares 60 studies of noise with the level, .1: more than 14 would come once in a thousand.

    `tests/benchmarks/selection.py` measures 400.
    """
    outcomes = [study(seed, days=250, replications=99) for seed in range(60)]
    most = binom.ppf(0.999, 60, LEVEL)
    for name in ("superior", "stepwise", "best set"):
        assert sum(outcome[name] for outcome in outcomes) <= most, name


def test_steps_are_those_of_the_library() -> None:
    """Compares the rules shown to be better with the library's own steps on the same losses and seed."""
    yardstick, returns = rules(seed=5, planted=PLANTED)
    returns[:, 6] += 0.0004
    found = superior_to_yardstick(returns, yardstick, NAMES, QUICK)
    gaps = returns - yardstick[:, None]
    scaled = gaps / np.sqrt(long_run_variance(gaps, found.block_sessions))
    test = StepM(
        np.zeros(len(gaps)),
        -scaled,
        size=LEVEL,
        block_size=found.block_sessions,
        reps=199,
        seed=generator_of(1, "superior", *NAMES),
    )
    test.compute()
    assert found.better == tuple(NAMES[place] for place in test.superior_models)


def test_every_rule_can_be_better() -> None:
    """Compares rules that all beat the yardstick by far, found in one step or several, with: all."""
    yardstick, returns = rules(seed=6)
    gains = np.linspace(0.0015, 0.006, len(NAMES))
    found = superior_to_yardstick(returns + gains, yardstick, NAMES, QUICK)
    assert found.better == NAMES


def test_restless_rule_does_not_hide_a_steady_one() -> None:
    """Compares a steady small advantage beside a very wild rule of noise with: found all the same."""
    random = np.random.default_rng(3)
    yardstick = random.normal(0.0, 0.01, 1000)
    steady = yardstick + random.normal(0.0002, 0.001, 1000)
    wild = yardstick + random.normal(0.0, 0.03, 1000)
    found = superior_to_yardstick(np.column_stack([steady, wild]), yardstick, ("steady", "wild"), QUICK)
    assert found.better == ("steady",)


def test_rules_that_do_what_the_yardstick_does() -> None:
    """Compares copies of the yardstick with: nothing to be told, and no better one beside a true one."""
    yardstick, returns = rules(seed=2)
    copies = np.column_stack([yardstick, yardstick])
    found = superior_to_yardstick(copies, yardstick, ("one", "two"), QUICK)
    assert (found.p_consistent, found.better, found.rules) == (1.0, (), 2)
    better = np.column_stack([yardstick, yardstick + 0.002 + 0.1 * returns[:, 0]])
    assert superior_to_yardstick(better, yardstick, ("same", "better"), QUICK).better == ("better",)


def test_twins_share_their_answer() -> None:
    """Compares rules that did the same every day: one p-value, and alone with themselves all are best."""
    _, returns = rules(seed=3, planted=PLANTED)
    doubled = np.column_stack([returns, returns[:, 3], returns[:, 0]])
    best = indistinguishable_from_best(doubled, (*NAMES, "twin 3", "twin 0"), QUICK)
    assert best.p_values[3] == best.p_values[len(NAMES)]
    assert best.p_values[0] == best.p_values[len(NAMES) + 1]
    assert best.members == ("rule 3", "twin 3")
    alike = np.column_stack([returns[:, 0], returns[:, 0]])
    assert indistinguishable_from_best(alike, ("a", "b"), QUICK).members == ("a", "b")


def test_very_many_rules() -> None:
    """Compares more rules than are compared in pairs with the planted one: it is better, and the best."""
    yardstick, returns = rules(seed=4, planted=PLANTED, count=110)
    names = tuple(f"rule {number}" for number in range(110))
    best = indistinguishable_from_best(returns, names, QUICK)
    assert "rule 3" in best.members
    assert best.p_values[3] == 1.0
    assert "rule 3" in superior_to_yardstick(returns, yardstick, names, QUICK).better


def test_long_records_are_grouped() -> None:
    """Compares a record of 1,203 sessions with its sums over five, the oldest three dropped: the same answer.

    The planted rule is found in both, and blocks are stated in sessions.
    """
    yardstick, returns = rules(seed=8, planted=PLANTED, days=1203)
    found = superior_to_yardstick(returns, yardstick, NAMES, QUICK)
    sums = [one[3:].reshape(240, 5, -1).sum(axis=1) for one in (returns, yardstick[:, None])]
    again = superior_to_yardstick(sums[0], sums[1][:, 0], NAMES, QUICK)
    assert found.better == again.better
    assert "rule 3" in found.better
    assert found.p_consistent == again.p_consistent
    assert found.block_sessions == 5 * again.block_sessions
    best = indistinguishable_from_best(returns, NAMES, QUICK)
    assert best.p_values == pytest.approx(indistinguishable_from_best(sums[0], NAMES, QUICK).p_values)


def test_same_answer_every_time() -> None:
    """Compares a second run with the first, and another seed with another answer."""
    yardstick, returns = rules(seed=7)
    first = superior_to_yardstick(returns, yardstick, NAMES, QUICK)
    assert superior_to_yardstick(returns, yardstick, NAMES, QUICK) == first
    assert superior_to_yardstick(returns, yardstick, NAMES, Resampling(2, 199)) != first
    assert indistinguishable_from_best(returns, NAMES, QUICK) == indistinguishable_from_best(
        returns, NAMES, QUICK
    )


@pytest.mark.parametrize("names", [(), ("one",), tuple("abcdefghijk")])
def test_names_that_do_not_match(names: tuple[str, ...]) -> None:
    """Compares too few and too many names with a refusal."""
    yardstick, returns = rules(seed=7)
    with pytest.raises(ValueError, match="do not hold one column"):
        superior_to_yardstick(returns, yardstick, names)
    with pytest.raises(ValueError, match="do not hold one column"):
        indistinguishable_from_best(returns, names)


@given(some.lists(some.floats(0.0, 1.0), min_size=1, max_size=40))
def test_adjusted_p_values_are_scipys(values: list[float]) -> None:
    """Compares both rules with scipy's false discovery control."""
    given_values = np.array(values)
    for method, any_dependence in (("bh", False), ("by", True)):
        wanted = false_discovery_control(given_values, method=method)
        assert adjusted_p_values(given_values, any_dependence) == pytest.approx(wanted, abs=1e-12)


def test_adjusted_p_values_of_the_first_paper() -> None:
    """Compares with the 15 p-values of Benjamini & Hochberg 1995: four are found at .05 (from memory)."""
    paper = [
        0.0001,
        0.0004,
        0.0019,
        0.0095,
        0.0201,
        0.0278,
        0.0298,
        0.0344,
        0.0459,
        0.3240,
        0.4262,
        0.5719,
        0.6528,
        0.7590,
        1.0,
    ]
    assert int(np.sum(adjusted_p_values(np.array(paper)) <= 0.05)) == 4


def test_unknown_p_values_count_as_tests() -> None:
    """Compares a list with unknown ones with the same list with ones in their place."""
    found = adjusted_p_values(np.array([0.01, np.nan, 0.04]))
    assert np.isnan(found[1])
    assert found[[0, 2]] == pytest.approx(adjusted_p_values(np.array([0.01, 1.0, 0.04]))[[0, 2]])


def test_false_discoveries_stay_below_the_rate() -> None:
    """Compares the mean share of false ones among those found, 1,000 lists of 50 tests, with the rate .1.

    Forty tests are of nothing and ten of something; the promise is .1 x 40 / 50 = .08, and the mean of 1,000
    shares has an error near .004.
    """
    random = np.random.default_rng(9)
    shares = []
    for _ in range(1000):
        p = np.concatenate([random.random(40), random.random(10) ** 6 * 0.05])
        found = adjusted_p_values(p) <= 0.1
        shares.append(found[:40].sum() / max(found.sum(), 1))
    assert np.mean(shares) == pytest.approx(0.08, abs=0.015)
