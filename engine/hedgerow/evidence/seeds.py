"""Random numbers by key: the same names and the same study seed always give the same draws."""

from __future__ import annotations

import hashlib
from dataclasses import dataclass

import numpy as np

__all__ = ["Resampling", "generator_of", "seed_of"]


@dataclass(frozen=True, slots=True)
class Resampling:
    """How days are drawn again: seed of the study, number of replications, confidence of intervals."""

    seed: int = 1
    replications: int = 999
    confidence: float = 0.9


def seed_of(study_seed: int, *names: str) -> int:
    """Return a seed of 128 bits from a study's seed and names: it depends on nothing else, on no machine.

    The first half of the SHA-256 of the seed and the names, each with its length, so that ("ab", "c") and
    ("a", "bc") differ.
    """
    words = [str(study_seed), *names]
    text = "".join(f"{len(word)}:{word}" for word in words)
    return int.from_bytes(hashlib.sha256(text.encode("utf-8")).digest()[:16], "big")


def generator_of(study_seed: int, *names: str) -> np.random.Generator:
    """Return the generator (PCG64) of a study's seed and names."""
    return np.random.Generator(np.random.PCG64(seed_of(study_seed, *names)))
