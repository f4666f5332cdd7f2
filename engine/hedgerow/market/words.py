"""The words of dataset.yaml taken from a tree of text, each with its fault where it is wrong."""

from __future__ import annotations

import re
from collections.abc import Iterable, Mapping, Sequence
from typing import Any

from hedgerow.errors import Fault, nearest_word
from hedgerow.yamltext import Node

_YES, _NO = ("true", "yes"), ("false", "no")
_PERCENT = re.compile(r"([+-]?\d+(?:\.\d+)?)\s*%")


class WordReader:
    """Takes values out of a mapping; what is wrong goes to `faults`."""

    def __init__(self, where: str) -> None:
        self.where = where
        self.faults: list[Fault] = []

    def refuse(self, node: Node, code: str, found: str, allowed: str = "", remedy: str = "") -> None:
        """Add one fault at the place of a node."""
        self.faults.append(Fault(self.where, node.line, node.column, code, found, allowed, remedy))

    def mapping(self, node: Node | None, allowed: Iterable[str] | None, what: str) -> dict[str, Node]:
        """Return a mapping whose keys are known words; `allowed` of None lets every key pass."""
        if node is None or node.value is None:
            return {}
        if not isinstance(node.value, dict):
            self.refuse(node, "not-a-mapping", f"{what} holds {node.kind}", "words and values are wanted")
            return {}
        words = None if allowed is None else tuple(allowed)
        for key, (line, column) in node.keys.items():
            if words is not None and key not in words:
                told = (f"one of {', '.join(words)} is allowed", nearest_word(key, words))
                found = f"unknown word `{key}` in {what}"
                self.faults.append(Fault(self.where, line, column, "unknown-word", found, *told))
        return {key: child for key, child in node.value.items() if words is None or key in words}

    def text(self, node: Node | None, what: str) -> str:
        """Return a text, "" where nothing is written."""
        if node is None or node.value is None:
            return ""
        if not isinstance(node.value, str):
            self.refuse(node, "not-text", f"{what} holds {node.kind}", "text is wanted")
            return ""
        return node.value.strip()

    def choice(self, node: Node | None, what: str, allowed: Sequence[str], default: str) -> str:
        """Return one of some words, `default` where nothing is written."""
        word = self.text(node, what)
        if node is None or not word:
            return default
        if word in allowed:
            return word
        told = (f"one of {', '.join(allowed)} is allowed", nearest_word(word, allowed))
        self.refuse(node, "unknown-word", f"`{word}` stands for {what}", *told)
        return default

    def flag(self, node: Node | None, what: str, default: bool) -> bool:
        """Return a yes or a no, `default` where nothing is written."""
        word = self.text(node, what).lower()
        if node is None or not word:
            return default
        if word in _YES + _NO:
            return word in _YES
        self.refuse(node, "not-a-flag", f"`{word}` stands for {what}", "true or false is allowed")
        return default

    def percent(self, node: Node | None, what: str) -> float | None:
        """Return a percentage as a fraction, None where nothing is written; the sign % is wanted."""
        word = self.text(node, what)
        if node is None or not word:
            return None
        found = _PERCENT.fullmatch(word)
        if found is None:
            told = (
                "a percentage is wanted, with its sign",
                f"write {word}%" if _is_number(word) else "write 2%",
            )
            self.refuse(node, "not-a-percent", f"`{word}` stands for {what}", *told)
            return None
        return float(found[1]) / 100.0


def _is_number(word: str) -> bool:
    return re.fullmatch(r"[+-]?\d+(\.\d+)?", word) is not None


def node_of(value: Any) -> Node:
    """Return Python data (mappings, lists, text, numbers, flags) as a tree of text without places."""
    if isinstance(value, Mapping):
        children = {str(key): node_of(child) for key, child in value.items()}
        return Node(children, 0, 0, keys=dict.fromkeys(children, (0, 0)))
    if isinstance(value, (list, tuple)):
        return Node([node_of(child) for child in value], 0, 0)
    if isinstance(value, bool):
        return Node(str(value).lower(), 0, 0)
    return Node(None if value is None else str(value), 0, 0)
