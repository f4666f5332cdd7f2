"""Records whose fields say their unit and meaning, made plain for JSON."""

from __future__ import annotations

import dataclasses
from typing import TYPE_CHECKING, Any

from hedgerow.evidence.figures import Figure

if TYPE_CHECKING:
    from _typeshed import DataclassInstance

__all__ = ["described", "says"]


def says(unit: str, meaning: str) -> dict[str, str]:
    """Return the metadata of a field that holds one figure."""
    return {"unit": unit, "meaning": meaning}


def described(record: DataclassInstance) -> dict[str, Any]:
    """Return every field of a record made with `says` as {value, unit, meaning}, in order."""
    return {
        one.name: Figure(getattr(record, one.name), one.metadata["unit"], one.metadata["meaning"]).as_dict()
        for one in dataclasses.fields(record)
    }
