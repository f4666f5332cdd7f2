"""Option kernels give the same bits compiled and as plain Python."""

from __future__ import annotations

import os
import subprocess
import sys

GRID = """
import numpy as np
from hedgerow.kernels import american as a, lognormal as l
from hedgerow.kernels.cash import american_cash
from hedgerow.kernels.boundary import Problem
from hedgerow.kernels.implied import implied_european
from hedgerow.kernels.lattice import american_with_dividends
from hedgerow.kernels.normal import bivariate_cdf, quantile
print(a.american)
out = []
for right in (0, 1):
    for spot in (0.0, 71.3, 96.1, 100.0, 133.7):
        for years in (0.0, 0.021, 0.7, 2.9):
            for rate, carry in ((0.043, 0.0), (0.013, 0.037), (-0.01, 0.02), (0.0, 0.0), (-0.01, -0.03)):
                for volatility in (0.0, 0.11, 0.57):
                    t = (right, spot, 100.0, years, rate, carry, volatility)
                    out += [l.european(*t), l.delta(*t), l.theta(*t), l.rho(*t), l.gamma(*t[1:])]
                    out += [l.vega(*t[1:]), l.chance_above(*t[1:]), *l.european_pair(*t[1:])]
                    out += [a.american(*t), a.early_exercise_bound(*t), a.american_or_european(*t, 0.05)]
                    out += [a.put_exercise_is_due(*t[1:]), *implied_european(t[0], 5.0, *t[1:6])]
                    due = a.call_exercise_is_due_before_dividend(spot, 100.0, years, rate, 0.7, volatility)
                    out += [due, american_cash(right, spot, 100.0, years, rate, volatility, 0.01, 0.7)]
out += [bivariate_cdf(0.3, -1.2, rho) for rho in (-1.0, -0.95, -0.3, 0.0, 0.7, 0.99, 1.0)]
out += [quantile(p) for p in (0.0, 1e-30, 1e-5, 0.2, 0.7, 1.0)]
cash = (np.array([0.1, 0.3]), np.array([0.5, 0.6]))
out.append(american_with_dividends(1, 98.0, 100.0, Problem(0.5, 0.03, 0.0, 0.3, 0.0), *cash))
print([float(x).hex() for x in out])
"""


def run(uncompiled: str) -> list[str]:
    """Print the grid in a process of its own."""
    env = {**os.environ, "HEDGEROW_UNCOMPILED": uncompiled}
    command = [sys.executable, "-W", "error", "-c", GRID]
    answer = subprocess.run(command, env=env, capture_output=True, text=True, check=True)
    return answer.stdout.splitlines()


def test_compiled_and_plain_python_agree_to_the_bit() -> None:
    """Every scalar over 600 options with limits and odd rates, hexadecimal digits compared."""
    compiled, plain = run("0"), run("1")
    assert "CPUDispatcher" in compiled[0]
    assert "CPUDispatcher" not in plain[0]
    assert compiled[1] == plain[1]
