"""Faults of a strategy that need more than one part of it to see, gathered from all checks."""

from __future__ import annotations

from collections.abc import Mapping
from typing import Any

from hedgerow.rules.asking import asking_faults
from hedgerow.rules.cover import cover_faults
from hedgerow.rules.keeping import keeping_faults
from hedgerow.rules.legs import Leg
from hedgerow.rules.parts import parts_of
from hedgerow.rules.references import reference_faults
from hedgerow.rules.words import Loose

__all__ = ["SHARE_WORDS", "faults_across"]

SHARE_WORDS = ("long", "short", "none")


def faults_across(raw: Mapping[Any, Any], legs: dict[str, Leg]) -> list[Loose]:
    """Every fault between the parts of a strategy's mapping; `legs` are those valid by themselves."""
    parts = parts_of(raw, legs, SHARE_WORDS)
    found = [*reference_faults(parts), *cover_faults(parts), *keeping_faults(parts)]
    return [*found, *asking_faults(parts)]
