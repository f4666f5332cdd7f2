"""Changes of a strategy by dotted path, as variants of a study write them: `legs.call.expiry.days: 21`.

A value replaces what stands there, whole (`exit: [...]`); `none` takes it away (`legs.call: none`). An exit
is addressed by its name (`exit.cut.if.loss.at_least: 3%`), an item of another list by its number from 1.
"""

from __future__ import annotations

from collections.abc import Iterable
from typing import Any, NoReturn

from hedgerow.rules.document import Place, Tree
from hedgerow.rules.schema import Strategy
from hedgerow.rules.words import (
    UNKNOWN_WORD,
    Loose,
    Path,
    WordsError,
    refuse,
    refuse_all,
    unknown_name,
    unknown_word,
)

__all__ = ["changed", "override"]

_HAVE_NONE = {("shares",)}  # where `none` is a word of its own


def changed(tree: Tree, changes: Tree) -> Tree:
    """The tree with every change of a mapping of dotted paths made; faults go to the new tree's `faults`."""
    result = tree.copy()
    result.faults += changes.faults
    for key in changes.plain:
        address = str(key)
        try:
            override(result, address, changes.below((key,)), changes.place((key,), key=True))
        except WordsError as refusal:
            for fault in refusal.faults:
                shifted = Loose((key,), UNKNOWN_WORD, fault.found, fault.allowed, fault.remedy)
                result.faults.append(changes.fault(shifted))
    return result


def override(tree: Tree, address: str, value: Tree, key_place: Place) -> None:
    """Put a value into the tree at a dotted path. Raises WordsError when the path leads nowhere."""
    path = _resolved(tree.plain, address)
    _forget(tree, path)
    if value.plain == "none" and path not in _HAVE_NONE:
        _remove(tree, path, key_place)
        return
    _put(tree.plain, path, value.plain)
    tree.values[path] = value.place(())
    tree.keys[path] = key_place
    tree.values.update({(*path, *below): place for below, place in value.values.items() if below})
    tree.keys.update({(*path, *below): place for below, place in value.keys.items()})
    tree.muted |= {(*path, *below) for below in value.muted}
    _forget_above(tree, path, key_place)


def _forget(tree: Tree, path: Path) -> None:
    size = len(path)
    for places in (tree.values, tree.keys):
        for known in [known for known in places if known[:size] == path]:
            del places[known]
    tree.muted -= {mute for mute in tree.muted if mute[:size] == path}


def _forget_above(tree: Tree, path: Path, key_place: Place) -> None:
    """Mappings made on the way have the place of the change."""
    for size in range(1, len(path)):
        tree.keys.setdefault(path[:size], key_place)


def _remove(tree: Tree, path: Path, key_place: Place) -> None:
    parent: Any = tree.plain
    for step in path[:-1]:
        parent = parent.get(step, {}) if isinstance(parent, dict) else parent[step]
    if isinstance(parent, dict):
        if path[-1] not in parent:
            refuse_all([unknown_word((), path[-1], parent, "what stands there")])
        del parent[path[-1]]
        return
    at = int(path[-1])
    del parent[at]
    _renumber(tree, path[:-1], at)
    tree.keys.setdefault(path[:-1], key_place)


def _renumber(tree: Tree, prefix: Path, removed: int) -> None:
    """Items after a removed one move up by one."""
    size = len(prefix)
    for places in (tree.values, tree.keys):
        moved = {
            known: place
            for known, place in places.items()
            if known[:size] == prefix and len(known) > size and int(known[size]) > removed
        }
        for known in moved:
            del places[known]
        for known, place in moved.items():
            places[(*prefix, int(known[size]) - 1, *known[size + 1 :])] = place


def _put(plain: Any, path: Path, value: Any) -> None:
    for step in path[:-1]:
        plain = plain.setdefault(step, {}) if isinstance(plain, dict) else plain[step]
    plain[path[-1]] = value


def _resolved(plain: Any, address: str) -> Path:
    """The path that a dotted address leads to. Raises WordsError for a leg, exit, item or word not there."""
    path: list[str | int] = []
    rest = address
    while rest:
        if isinstance(plain, list):
            step, rest = _item(plain, rest)
            plain = plain[step]
            path.append(step)
            continue
        if plain is not None and not isinstance(plain, dict):
            _nowhere(f"leads through `{path[-1]}`, which is a plain value")
        word, _, rest = rest.partition(".")
        _check_word(tuple(path), word, plain, leaf=not rest)
        path.append(word)
        plain = plain.get(word) if isinstance(plain, dict) else None
    if not path or address.endswith("."):
        _nowhere("is no path")
    return tuple(path)


def _check_word(path: Path, word: str, plain: Any, leaf: bool) -> None:
    if not path and word not in Strategy.words():
        refuse_all([unknown_word((), word, Strategy.words(), "a strategy")])
    there = list(plain) if isinstance(plain, dict) else []
    if path == ("legs",) and not leaf and word not in there:
        refuse_all([unknown_name((), word, there, "leg of the strategy")])
    if path == ("exit",) and not there:
        _nowhere("names an exit, and the strategy has none")


def _item(items: list[Any], rest: str) -> tuple[int, str]:
    """The index of the item that an address begins with, by name or by number from 1, and what follows."""
    names = [item.get("name") if isinstance(item, dict) else None for item in items]
    for at, name in sorted(enumerate(names), key=lambda pair: -len(str(pair[1]))):
        if isinstance(name, str) and (rest == name or rest.startswith(name + ".")):
            return at, rest[len(name) + 1 :]
    number, _, after = rest.partition(".")
    if not (number.isdecimal() and 1 <= int(number) <= len(items)):
        known: Iterable[str] = [name for name in names if isinstance(name, str)]
        refuse_all([unknown_name((), number, known, f"item of the list, which has {len(items)}")])
    return int(number) - 1, after


def _nowhere(found: str) -> NoReturn:
    refuse("path", found, "allowed: words with dots between, such as `legs.call.expiry.days`")
