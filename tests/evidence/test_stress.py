"""Two rules over a grid: the flip against Fieller's interval, and what stays the same under a swap."""

from __future__ import annotations

import math
from statistics import NormalDist

import numpy as np
import pandas as pd
import pytest

from hedgerow.evidence.seeds import Resampling
from hedgerow.evidence.stress import STRESS_COLUMNS, Cell, Stressed, stress_frame, stress_of

BASE = Cell(1.0, -0.1, 0.03)
RATIOS = (0.6, 0.8, 1.0, 1.2, 1.4, 1.6)
DAYS, YEARS = 1500, 6.0


def cells() -> list[Cell]:
    """Every ratio at two skews, and three half-spreads at the base."""
    premiums = [Cell(ratio, skew, 0.03) for skew in (-0.1, -0.2) for ratio in RATIOS]
    return list(dict.fromkeys([BASE, *premiums, *(BASE._replace(half_spread=s) for s in (0.0, 0.03, 0.06))]))


def written(parts: np.ndarray, name: str = "writer") -> Stressed:
    """A rule that earns ratio x (a mean of .0005) a day, less an independent loss, parts (T, 2)."""
    rows = []
    for cell in cells():
        logs = (
            parts[:, 0] * cell.ratio
            - parts[:, 1]
            - (cell.half_spread - 0.03) * 0.004
            + (cell.skew + 0.1) * 1e-4
        )
        rows.append(1e5 * np.exp(np.concatenate([[0.0], np.cumsum(logs)])))
    return Stressed(name, np.array(rows))


def drawn_parts(seed: int) -> np.ndarray:
    """Daily premiums and losses (T, 2): both of mean .0005, so that the true flip is at a ratio of 1."""
    rng = np.random.default_rng(seed)
    return np.column_stack([rng.normal(0.0005, 0.001, DAYS), rng.normal(0.0005, 0.0015, DAYS)])


def cash(name: str = "cash") -> Stressed:
    """An account that stands still."""
    return Stressed(name, np.full((len(cells()), DAYS + 1), 1e5))


def fieller(parts: np.ndarray, confidence: float) -> tuple[float, float]:
    """Interval of the ratio of two means: Fieller 1954, "Some Problems in Interval Estimation", JRSS B 16."""
    z2 = NormalDist().inv_cdf(0.5 + confidence / 2.0) ** 2
    (premium, loss), covariance = parts.mean(axis=0), np.cov(parts.T) / len(parts)
    a, b, c = (
        premium**2 - z2 * covariance[0, 0],
        premium * loss - z2 * covariance[0, 1],
        loss**2 - z2 * covariance[1, 1],
    )
    root = math.sqrt(b * b - a * c)
    return (b - root) / a, (b + root) / a


def test_the_flip_is_the_ratio_of_the_means_and_its_interval_fiellers() -> None:
    """Linear in the ratio, independent days: value exactly, ends within .02 of Fieller's (1,000 draws)."""
    parts = drawn_parts(1)
    known = Resampling(1, 1000, 0.9)
    found = stress_of(written(parts), cash(), cells(), BASE, YEARS, 1, known).premium
    assert found is not None
    assert found.value == pytest.approx(parts[:, 1].mean() / parts[:, 0].mean(), rel=1e-6)
    low, high = fieller(parts, 0.9)
    assert found.low == pytest.approx(low, abs=0.02)
    assert found.high == pytest.approx(high, abs=0.02)


def test_how_often_the_interval_holds_the_true_flip() -> None:
    """Of 60 markets whose true flip is 1, between 48 and 59 hold it: nine in ten, three deviations about it.

    Exact binomial: fewer than 48 or 60 of 60 have a chance of .7 % together.
    """
    known = Resampling(1, 200, 0.9)
    held = 0
    for seed in range(60):
        found = stress_of(written(drawn_parts(100 + seed)), cash(), cells(), BASE, YEARS, 5, known).premium
        assert found is not None
        held += bool(found.low <= 1.0 <= found.high)
    assert 48 <= held <= 59


def test_swapping_the_two_mirrors_everything() -> None:
    """Differences change their sign, intervals their ends, flips stay."""
    one, other = written(drawn_parts(2)), written(drawn_parts(3), "other writer")
    known = Resampling(4, 200, 0.9)
    there = stress_of(one, other, cells(), BASE, YEARS, 5, known)
    back = stress_of(other, one, cells(), BASE, YEARS, 5, known)
    np.testing.assert_allclose(there.frame["difference"], -back.frame["difference"], atol=1e-15)
    np.testing.assert_allclose(there.frame["low"], -back.frame["high"], atol=1e-12)
    for mine, theirs in ((there.premium, back.premium), (there.spread, back.spread)):
        assert mine is not None
        assert theirs is not None
        np.testing.assert_allclose([mine.value, mine.low, mine.high], [theirs.value, theirs.low, theirs.high])


def test_the_frame_has_a_row_a_cell() -> None:
    """Growth of a cell worked out from its own curve, the base among them, columns as they are declared."""
    parts = drawn_parts(5)
    stress = stress_of(written(parts), cash(), cells(), BASE, YEARS, 1, Resampling(1, 100, 0.9))
    frame = stress_frame([stress, stress])
    assert tuple(frame.columns) == STRESS_COLUMNS
    assert len(frame) == 2 * len(cells())
    curves = written(parts).equity
    grown = (curves[:, -1] / curves[:, 0]) ** (1.0 / YEARS) - 1.0
    np.testing.assert_allclose(stress.frame["first_growth"], grown, atol=1e-12)
    assert (stress.frame["second_growth"] == 0.0).all()
    assert (stress.frame["low"] <= stress.frame["difference"]).all()
    assert (stress.frame["difference"] <= stress.frame["high"]).all()
    assert isinstance(stress_frame([]), pd.DataFrame)


def test_a_flip_at_every_skew_and_one_of_the_spread() -> None:
    """By skew, the flattest first; the spread at which .004 a unit of spread eats the mean gap."""
    parts = drawn_parts(6)
    stress = stress_of(written(parts), cash(), cells(), BASE, YEARS, 1, Resampling(1, 100, 0.9))
    assert [skew for skew, _ in stress.by_skew] == [-0.1, -0.2]
    assert stress.by_skew[0][1] is stress.premium
    assert stress.by_skew[1][1].value > stress.by_skew[0][1].value
    gap = (parts[:, 0] - parts[:, 1]).mean()
    assert stress.spread is not None
    assert stress.spread.value == pytest.approx(0.03 + gap / 0.004)


def test_one_value_of_an_assumption_has_no_flip() -> None:
    """A grid of the base alone: a row, and neither flip."""
    stress = stress_of(
        Stressed("writer", written(drawn_parts(7)).equity[:1]),
        Stressed("cash", cash().equity[:1]),
        [BASE],
        BASE,
        YEARS,
        1,
        Resampling(1, 100, 0.9),
    )
    assert (stress.premium, stress.spread, stress.by_skew) == (None, None, ())
    assert len(stress.frame) == 1
    assert stress.as_dict()["flip_premium"] is None
