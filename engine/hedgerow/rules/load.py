"""Strategies from files, texts and mappings, with changes by dotted path."""

from __future__ import annotations

from collections.abc import Mapping
from pathlib import Path
from typing import Any

from pydantic import ValidationError

from hedgerow.errors import Fault, RulesError
from hedgerow.rules.base import loosened
from hedgerow.rules.document import Tree, tree_of_file, tree_of_mapping
from hedgerow.rules.overrides import changed
from hedgerow.rules.schema import Strategy
from hedgerow.textfile import capped

__all__ = ["load_strategy", "read_strategy"]


def load_strategy(
    source: str | Path | Mapping[str, Any], changes: Mapping[str, Any] | None = None
) -> Strategy:
    """The strategy of a YAML file or a mapping, with changes by dotted path made first.

    `changes` maps paths such as "legs.call.expiry.days" to values; "none" takes away what stands there.
    Raises RulesError with every fault of the file, its place, and what is allowed.
    """
    if not isinstance(source, Mapping | str | Path):
        found = f"is {source!r}, which is no strategy"
        raise RulesError.one("strategy", "shape", found, "a mapping of words or the path of a file is needed")
    tree = tree_of_mapping(source) if isinstance(source, Mapping) else tree_of_file(source)
    if changes:
        tree = changed(tree, tree_of_mapping(changes, "changes"))
    strategy, faults = read_strategy(tree)
    if strategy is None:
        raise RulesError(capped(faults))
    return strategy


def read_strategy(tree: Tree) -> tuple[Strategy | None, list[Fault]]:
    """The strategy of a tree and no faults, or None and every fault in the order of the file."""
    if tree.faults and not tree.plain:
        return None, tree.faults
    try:
        strategy = Strategy.model_validate(tree.plain)
    except ValidationError as error:
        return None, tree.all_faults(loosened(error), "the strategy")
    return (None, tree.faults) if tree.faults else (strategy, [])
