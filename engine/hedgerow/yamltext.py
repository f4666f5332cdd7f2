"""YAML as a person writes it: a tree of text with the place of every key and value.

Nothing is converted: `NO` stays "NO", `12:30` stays "12:30", `007` stays "007"; who asks decides the type.
What makes YAML dangerous or ambiguous is refused where it stands: anchors, aliases, tags, repeated keys,
keys that are not text, tabs as indentation, several documents, deep nesting, large files.
"""

from __future__ import annotations

import re
from collections.abc import Iterator
from dataclasses import dataclass, field
from pathlib import Path
from typing import Any

import yaml

from hedgerow.errors import Fault, InputError
from hedgerow.textfile import capped, decode, read_bytes, too_large

MOST_BYTES = 1_000_000
DEEPEST = 32
_TAB_INDENT = re.compile(r"^[ ]*\t[ \t]*", re.MULTILINE)
_UNPRINTABLE = re.compile("[^\t\n\r\x20-\x7e\x85\xa0-\ud7ff\ue000-\ufffd\U00010000-\U0010ffff]")


@dataclass(frozen=True)
class Node:
    """One value of a YAML text with its place; `line` and `column` count from 1.

    `value` is a mapping of text to nodes, a list of nodes, a scalar's text exactly as written, or None for
    nothing written at all. `quoted` is true for a scalar in quotes or a block. `keys` holds the place of
    each key of a mapping.
    """

    value: dict[str, Node] | list[Node] | str | None
    line: int
    column: int
    quoted: bool = False
    keys: dict[str, tuple[int, int]] = field(default_factory=dict)

    @property
    def kind(self) -> str:
        """What the value is, in words: "a mapping", "a list", "text" or "nothing"."""
        names: dict[type, str] = {dict: "a mapping", list: "a list", str: "text"}
        return names.get(type(self.value), "nothing")

    def plain(self) -> Any:
        """Return the value as dicts, lists, text and None, without places."""
        if isinstance(self.value, dict):
            return {key: node.plain() for key, node in self.value.items()}
        if isinstance(self.value, list):
            return [node.plain() for node in self.value]
        return self.value


def load(text: str, where: str, error: type[InputError] = InputError) -> Node:
    """Return the tree of a YAML text; raises `error` with every fault of it."""
    node, faults = scan(text, where)
    if faults or node is None:
        raise error(capped(faults))
    return node


def load_file(path: Path, error: type[InputError] = InputError) -> Node:
    """Return the tree of a YAML file; raises `error` with every fault of it, a missing or binary file too."""
    node, faults = scan_file(path)
    if faults or node is None:
        raise error(capped(faults))
    return node


def scan_file(path: Path) -> tuple[Node | None, list[Fault]]:
    """Return the tree of a YAML file as far as it can be read, and every fault of it."""
    data, faults = read_bytes(path, MOST_BYTES)
    if data is None:
        return None, faults
    text, faults = decode(data, str(path))
    if text is None:
        return None, faults
    return scan(text, str(path))


def scan(text: str, where: str) -> tuple[Node | None, list[Fault]]:
    """Return the tree of a YAML text as far as it can be read, and every fault of it.

    After a fault of syntax the tree is None. After the other faults it stands without what was refused:
    the first of repeated keys is kept, an alias is nothing.
    """
    size = len(text.encode("utf-8", "surrogatepass"))
    if size > MOST_BYTES:
        return None, [too_large(where, size, MOST_BYTES)]
    faults = _unprintable(text, where)
    if faults:
        return None, faults
    faults = _tabs(text, where)
    builder = _Builder(_TAB_INDENT.sub(lambda found: " " * len(found[0]), text), where)
    try:
        node = builder.document()
    except yaml.YAMLError as error:
        told = faults or any(fault.code == "yaml-deep" for fault in builder.faults)
        syntax = [] if told else [_syntax(error, where)]
        return None, sorted(faults + builder.faults + syntax)
    return node, sorted(faults + builder.faults)


def _unprintable(text: str, where: str) -> list[Fault]:
    faults = []
    for found in _UNPRINTABLE.finditer(text):
        line = text.count("\n", 0, found.start()) + 1
        column = found.start() - text.rfind("\n", 0, found.start())
        what = f"the character U+{ord(found[0]):04X} cannot be printed"
        faults.append(Fault(where, line, column, "yaml-character", what, remedy="take it out"))
        if len(faults) > 60:
            break
    return faults


def _tabs(text: str, where: str) -> list[Fault]:
    faults = []
    for found in _TAB_INDENT.finditer(text):
        line = text.count("\n", 0, found.start()) + 1
        column = found[0].index("\t") + 1
        told = ("a tab stands in the indentation", "YAML is indented with spaces", "replace it with spaces")
        faults.append(Fault(where, line, column, "yaml-tab", *told))
        if len(faults) > 60:
            break
    return faults


def _syntax(error: yaml.YAMLError, where: str) -> Fault:
    """One fault of what the parser could not read."""
    mark = getattr(error, "problem_mark", None)
    line, column = (mark.line + 1, mark.column + 1) if mark is not None else (0, 0)
    problem = str(getattr(error, "problem", None) or "the text is not YAML")
    if "'\\t'" in problem:
        told = ("a tab stands where a value begins", "spaces separate a key from its value")
        return Fault(where, line, column, "yaml-tab", *told, "replace the tab with a space")
    context = str(getattr(error, "context", None) or "")
    found = " ".join(part for part in (context, problem) if part)
    remedy = "put text with : # { [ & * ! % @ in quotes, and line the keys of one mapping up"
    return Fault(where, line, column, "yaml-syntax", found, remedy=remedy)


def _place(event: yaml.Event) -> tuple[int, int]:
    mark = event.start_mark
    return (0, 0) if mark is None else (mark.line + 1, mark.column + 1)


class _Builder:
    """Builds nodes from parser events; what is refused goes to `faults`."""

    def __init__(self, text: str, where: str) -> None:
        self.where = where
        self.faults: list[Fault] = []
        self._events: Iterator[yaml.Event] = yaml.parse(text, Loader=yaml.SafeLoader)

    def document(self) -> Node | None:
        """Return the one document of the text, or None when there is none."""
        root: Node | None = None
        for event in self._events:
            if isinstance(event, yaml.DocumentStartEvent):
                if root is not None:
                    self._refuse(event, "yaml-documents", "a second document begins", "one is read")
                node = self._node(next(self._events), 1)
                root = root or node
        if root is None or (root.value is None and not self.faults):
            told = ("nothing is written here", "keys and values are wanted")
            self.faults.append(Fault(self.where, 0, 0, "yaml-empty", *told))
        return root

    def _refuse(self, event: yaml.Event, code: str, found: str, allowed: str, remedy: str = "") -> None:
        self.faults.append(Fault(self.where, *_place(event), code, found, allowed, remedy))

    def _node(self, event: yaml.Event, depth: int) -> Node:
        place = _place(event)
        if isinstance(event, yaml.AliasEvent):
            self._refuse(event, "yaml-alias", f"the alias *{event.anchor}", "none is read", "write it out")
            return Node(None, *place)
        self._decorations(event)
        if isinstance(event, yaml.ScalarEvent):
            quoted = event.style is not None
            return Node(event.value if event.value or quoted else None, *place, quoted)
        if depth > DEEPEST:
            self._refuse(event, "yaml-deep", f"nesting deeper than {DEEPEST} levels", "flatter text is read")
            self._skip()
            return Node(None, *place)
        if isinstance(event, yaml.MappingStartEvent):
            return self._mapping(place, depth)
        return self._list(place, depth)

    def _decorations(self, event: yaml.Event) -> None:
        anchor, tag = getattr(event, "anchor", None), getattr(event, "tag", None)
        if anchor is not None:
            self._refuse(event, "yaml-anchor", f"the anchor &{anchor}", "none is read", "write it out")
        if tag is not None:
            self._refuse(event, "yaml-tag", f"the tag {tag}", "none is read", "write the value alone")

    def _skip(self) -> None:
        open_count = 1
        while open_count:
            event = next(self._events)
            open_count += isinstance(event, yaml.CollectionStartEvent)
            if open_count > DEEPEST:
                raise yaml.YAMLError("nested far too deeply to be read on")
            open_count -= isinstance(event, yaml.CollectionEndEvent)

    def _list(self, place: tuple[int, int], depth: int) -> Node:
        items: list[Node] = []
        while not isinstance(event := next(self._events), yaml.SequenceEndEvent):
            items.append(self._node(event, depth + 1))
        return Node(items, *place)

    def _mapping(self, place: tuple[int, int], depth: int) -> Node:
        values: dict[str, Node] = {}
        keys: dict[str, tuple[int, int]] = {}
        while not isinstance(event := next(self._events), yaml.MappingEndEvent):
            key = self._node(event, depth + 1)
            value = self._node(next(self._events), depth + 1)
            if not isinstance(key.value, str):
                if not isinstance(event, yaml.AliasEvent):
                    self._refuse(event, "yaml-key", f"{key.kind} stands as a key", "a key is text")
            elif key.value in values:
                first = keys[key.value][0]
                found = f"the key `{key.value}` stands a second time; the first is on line {first}"
                self._refuse(event, "yaml-repeated-key", found, "a key stands once", "take one away")
            else:
                values[key.value] = value
                keys[key.value] = (key.line, key.column)
        return Node(values, *place, keys=keys)
