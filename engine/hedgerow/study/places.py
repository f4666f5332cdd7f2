"""Faults that show only once the market is read, told with their place in the study's files."""

from __future__ import annotations

from collections.abc import Iterator
from contextlib import contextmanager
from pathlib import Path

from hedgerow.errors import Fault, InputError
from hedgerow.rules.document import Tree, tree_of_file
from hedgerow.rules.words import Loose

__all__ = ["told_in_place"]


@contextmanager
def told_in_place(source: Path | None) -> Iterator[None]:
    """Give faults raised within their line and column in the file they come from, where they have none.

    `source` is a study or strategy file, or None when there is none. Raises what was raised, as the same
    kind of error.
    """
    try:
        yield
    except InputError as error:
        if source is None or all(fault.line for fault in error.faults):
            raise
        trees = list(_trees(source))
        raise type(error)(_placed(fault, trees) for fault in error.faults) from None


def _trees(source: Path) -> Iterator[Tree]:
    """The tree of a file, and those of the strategy files it names."""
    tree = tree_of_file(source)
    yield tree
    named = (path for path in tree.values if path and path[-1] == "strategy")
    texts = {_value(tree, path) for path in named}
    for text in sorted(text for text in texts if isinstance(text, str)):
        yield tree_of_file(source.parent / text)


def _value(tree: Tree, path: tuple[str | int, ...]) -> object:
    """What stands at a path of a tree; a mapping or a list is nothing."""
    value = tree.plain
    for step in path:
        value = value[step]
    return value if isinstance(value, str) else None


def _placed(fault: Fault, trees: list[Tree]) -> Fault:
    """A fault at the place of the word it is about; as it was when no file holds that word."""
    if fault.line:
        return fault
    told = (fault.code, fault.found, fault.allowed, fault.remedy)
    steps = tuple(int(part) - 1 if part.isdigit() else part for part in fault.where.split("."))
    if steps in trees[0].values:
        return trees[0].fault(Loose(steps, *told))
    for tree in trees:
        for path in tree.values:
            value = _value(tree, path) if path and path[-1] == "of" else None
            if value is not None and fault.where == "signal of" and f"`{value}`" in fault.found:
                return tree.fault(Loose(path, *told))
    return fault
