"""Logarithms over whole arrays, one scalar at a time.

A vector library may round the last elements of an array differently from the rest; taken one at a time the
value at a session does not depend on where the array ends.
"""

from __future__ import annotations

import math

import numpy as np

from hedgerow.kernels.jit import compiled
from hedgerow.kernels.layout import Floats

__all__ = ["log_blend", "log_ratio"]


@compiled
def log_ratio(top: Floats, bottom: Floats) -> Floats:
    """ln(top / bottom) of two (T, N) arrays; NaN where either is unknown or not positive."""
    sessions, symbols = top.shape
    out = np.full((sessions, symbols), np.nan)
    for t in range(sessions):
        for s in range(symbols):
            if top[t, s] > 0.0 and bottom[t, s] > 0.0:
                out[t, s] = math.log(top[t, s] / bottom[t, s])
    return out


@compiled
def log_blend(terms: Floats, weights: Floats) -> Floats:
    """Weighted geometric mean over the first axis of (K, T, N), weights renormalised over what is known.

    A term that is NaN or not positive is unknown; NaN where no term is known.
    """
    count, sessions, symbols = terms.shape
    out = np.full((sessions, symbols), np.nan)
    for t in range(sessions):
        for s in range(symbols):
            total, weight = 0.0, 0.0
            for k in range(count):
                if terms[k, t, s] > 0.0:
                    total += weights[k] * math.log(terms[k, t, s])
                    weight += weights[k]
            if weight > 0.0:
                out[t, s] = math.exp(total / weight)
    return out
