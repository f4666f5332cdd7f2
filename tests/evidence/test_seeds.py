"""Random numbers by key."""

from __future__ import annotations

import hashlib

import numpy as np

from hedgerow.evidence.seeds import generator_of, seed_of


def test_seed_is_the_digest_of_its_key() -> None:
    """Compares with the first half of the SHA-256 of seed and names, each after its length."""
    digest = hashlib.sha256(b"1:75:basil4:mint").digest()
    assert seed_of(7, "basil", "mint") == int.from_bytes(digest[:16], "big")


def test_every_part_of_a_key_counts() -> None:
    """Compares keys that differ in seed, order, spelling or where a name ends: all are different."""
    keys = [
        seed_of(1, "ab", "c"),
        seed_of(1, "a", "bc"),
        seed_of(1, "c", "ab"),
        seed_of(2, "ab", "c"),
        seed_of(1, "abc"),
    ]
    assert len(set(keys)) == len(keys)


def test_draws_repeat_and_do_not_depend_on_other_draws() -> None:
    """Compares draws of a key with those of the same key after others were drawn."""
    first = generator_of(3, "one week").random(5)
    generator_of(3, "three weeks").random(1000)
    assert np.array_equal(first, generator_of(3, "one week").random(5))
    assert not np.array_equal(first, generator_of(3, "three weeks").random(5))
