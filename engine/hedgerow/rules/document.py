"""Files and mappings as trees whose every value knows its place, and faults told with that place."""

from __future__ import annotations

import copy
import re
from collections.abc import Iterable, Mapping
from dataclasses import dataclass, field
from pathlib import Path as FilePath
from typing import Any

from hedgerow.errors import Fault
from hedgerow.rules.words import UNKNOWN_WORD, Loose, Path
from hedgerow.yamltext import Node, scan, scan_file

__all__ = ["Place", "Tree", "dotted", "tree_of_file", "tree_of_mapping", "tree_of_text"]

AT_THE_KEY = {
    UNKNOWN_WORD,
    "bound",
    "idle",
    "legs",
    "never",
    "no-legs",
    "one-of",
    "position-word",
    "roll",
    "side",
    "stop",
    "unbounded",
    "uncovered-call",
}
"""Codes of faults that are about a word being there, not about its value."""


_THOUSANDS = re.compile("[0-9]{3}")


@dataclass(frozen=True, slots=True)
class Place:
    """Where a key or a value stands; line and column count from 1, 0 not known."""

    where: str
    line: int = 0
    column: int = 0


@dataclass
class Tree:
    """A document as dicts, lists and scalars, with the places of its values and keys.

    `node` is the root of a file's YAML. `faults` holds what was wrong with the document before any word of it
    was read; paths in `muted` have been told there already.
    """

    plain: Any
    where: str
    faults: list[Fault] = field(default_factory=list)
    node: Node | None = None
    values: dict[Path, Place] = field(default_factory=dict)
    keys: dict[Path, Place] = field(default_factory=dict)
    muted: set[Path] = field(default_factory=set)

    def copy(self) -> Tree:
        """A tree that can be changed without changing this one."""
        faults, values, keys = list(self.faults), dict(self.values), dict(self.keys)
        return Tree(copy.deepcopy(self.plain), self.where, faults, self.node, values, keys, set(self.muted))

    def below(self, path: Path) -> Tree:
        """The part of the tree under a path, as a tree of its own without the document's faults."""
        part: Any = self.plain
        for step in path:
            part = part[step]
        size = len(path)
        values = {key[size:]: place for key, place in self.values.items() if key[:size] == path}
        keys = {
            key[size:]: place for key, place in self.keys.items() if key[:size] == path and len(key) > size
        }
        muted = {key[size:] for key in self.muted if key[:size] == path}
        return Tree(part, self.where, [], None, values, keys, muted)

    def place(self, path: Path, key: bool = False) -> Place:
        """Where the value (or its key) stands; for what is not there, the nearest key around it."""
        if key and path in self.keys:
            return self.keys[path]
        if path in self.values:
            return self.values[path]
        for size in range(len(path) - 1, -1, -1):
            found = self.keys.get(path[:size]) or self.values.get(path[:size])
            if found is not None:
                return found
        return Place(self.where)

    def fault(self, loose: Loose, root: str = "the file") -> Fault:
        """The fault with its place and the dotted name of what it is about."""
        place = self.place(loose.path, key=loose.code in AT_THE_KEY)
        subject = f"`{dotted(loose.path, self.plain)}`" if loose.path else root
        told = (f"{subject} {loose.found}", loose.allowed, loose.remedy)
        return Fault(place.where, place.line, place.column, loose.code, *told)

    def all_faults(self, loose: Iterable[Loose], root: str = "the file") -> list[Fault]:
        """The document's own faults and the others, each place and code once, in the order of the file."""
        kept = (item for item in loose if not any(item.path[: len(mute)] == mute for mute in self.muted))
        faults = [*self.faults, *(self.fault(item, root) for item in kept)]
        return sorted(set(faults))


def dotted(path: Path, plain: Any = None) -> str:
    """A path as people write it: names with dots; an item of a list by its name, else its number from 1."""
    parts: list[str] = []
    for step in path:
        item: Any = None
        if isinstance(plain, Mapping):
            item = plain.get(step)
        elif isinstance(plain, list | tuple) and isinstance(step, int) and step < len(plain):
            item = plain[step]
        if isinstance(step, int):
            name = item.get("name") if isinstance(item, Mapping) else None
            parts.append(name if isinstance(name, str) and name else str(step + 1))
        else:
            parts.append(step)
        plain = item
    return ".".join(parts)


def tree_of_file(path: str | FilePath) -> Tree:
    """The tree of a YAML file; its faults of reading and of YAML are in `faults`."""
    where = str(path)
    node, faults = scan_file(FilePath(path))
    return _tree(node, where, faults)


def tree_of_text(text: str, where: str) -> Tree:
    """The tree of a YAML text; `where` names it in faults."""
    node, faults = scan(text, where)
    return _tree(node, where, faults)


def tree_of_mapping(mapping: Mapping[Any, Any], where: str = "strategy") -> Tree:
    """The tree of a Python mapping; its places are not known. Values may be text or Python values."""
    return Tree(_lists(mapping), where)


def _lists(value: Any) -> Any:
    if isinstance(value, Mapping):
        return {key: _lists(item) for key, item in value.items()}
    if isinstance(value, list | tuple):
        return [_lists(item) for item in value]
    return value


def _tree(node: Node | None, where: str, faults: list[Fault]) -> Tree:
    tree = Tree({}, where, list(faults), node)
    if node is not None:
        tree.plain = _grown(node, (), tree)
    return tree


def _grown(node: Node, path: Path, tree: Tree) -> Any:
    """The plain value of a node; places go to the tree. A key or an item with nothing written is a fault."""
    tree.values[path] = Place(tree.where, node.line, node.column)
    if isinstance(node.value, dict):
        grown = {}
        for key, item in node.value.items():
            tree.keys[(*path, key)] = Place(tree.where, *node.keys.get(key, (node.line, node.column)))
            grown[key] = _grown(item, (*path, key), tree)
        return grown
    if isinstance(node.value, list):
        return [_grown(item, (*path, at), tree) for at, item in enumerate(node.value)]
    if node.value is None and path:
        _empty(node, path, tree)
    return node.value


def _empty(node: Node, path: Path, tree: Tree) -> None:
    tree.muted.add(path)
    if any((fault.line, fault.column) == (node.line, node.column) for fault in tree.faults):
        return  # an alias, already told
    place = tree.keys.get(path, tree.values[path])
    found = f"`{dotted(path)}` has nothing written"
    remedy = "write its value, or take it out"
    if isinstance(path[-1], str) and _THOUSANDS.fullmatch(path[-1]):
        remedy = "a number is written without a separator of thousands, such as 250000"
    tree.faults.append(Fault(place.where, place.line, place.column, "empty", found, "", remedy))
