"""The word `extensions` of a study: files of one's own signals, estimators and costs, read first of all."""

from __future__ import annotations

import os
from collections.abc import Mapping
from dataclasses import replace
from pathlib import Path
from typing import Any

from hedgerow.errors import ExtensionError, Fault
from hedgerow.extend import Extension, load_extension
from hedgerow.rules.document import Tree
from hedgerow.rules.words import Loose, shown

__all__ = ["extension_faults", "extension_schema", "extensions_plain", "read_extensions"]

_ALLOWED = "allowed: a list of paths such as [my_signals.py], or {file: my_signals.py, sha256: ...}"


def extension_faults(given: Any) -> list[Loose]:
    """What is wrong with the shape of the word."""
    if given is None:
        return []
    if not isinstance(given, list | tuple) or not given:
        return [Loose(("extensions",), "shape", f"is {shown(given)}", _ALLOWED)]
    return [
        Loose(("extensions", at), "shape", f"is {shown(item)}", _ALLOWED)
        for at, item in enumerate(given)
        if not _is_item(item)
    ]


def _is_item(item: Any) -> bool:
    if isinstance(item, str):
        return bool(item.strip())
    return isinstance(item, Mapping) and set(item) == {"file", "sha256"} and all(map(_is_text, item.values()))


def _is_text(value: Any) -> bool:
    return isinstance(value, str) and bool(value.strip())


def extension_schema() -> dict[str, Any]:
    """The JSON Schema of the word."""
    text = {"type": "string", "minLength": 1}
    pinned = {
        "type": "object",
        "properties": {"file": text, "sha256": {"type": "string", "pattern": "^[0-9a-f]{64}$"}},
        "required": ["file", "sha256"],
        "additionalProperties": False,
    }
    return {"type": "array", "items": {"anyOf": [text, pinned]}, "minItems": 1}


def read_extensions(tree: Tree, folder: Path) -> tuple[tuple[Extension, ...], list[Fault]]:
    """The extensions a study names, in use from now on, and no faults; or none and every fault of them."""
    given = tree.plain.get("extensions") if isinstance(tree.plain, dict) else None
    if given is None or extension_faults(given):
        return (), []  # the shape is told with the other words
    found: list[Extension] = []
    faults: list[Fault] = []
    for at, item in enumerate(given):
        name, pinned = (item["file"], item["sha256"]) if isinstance(item, Mapping) else (item, None)
        source = _place(name, folder)
        try:
            extension = load_extension(source)
        except ExtensionError as error:
            faults += [_placed(fault, tree, at, name) for fault in error.faults]
            continue
        if pinned is not None and extension.sha256 != pinned:
            faults.append(tree.fault(_changed(at, name, pinned, extension.sha256)))
        found.append(replace(extension, source=source))
    return ((), faults) if faults else (tuple(found), [])


def _place(name: str, folder: Path) -> str:
    """A path from the study's own folder; the name of an installed extension as it is."""
    is_file = name.endswith(".py") or "/" in name or os.sep in name
    return os.path.normpath(folder / name) if is_file else name


def _placed(fault: Fault, tree: Tree, at: int, name: str) -> Fault:
    """A file that is not there, or a name that is not installed, is told where the study names it."""
    if fault.code not in ("file-missing", "unknown"):
        return fault
    found = "and no file is there" if fault.code == "file-missing" else "which is no installed extension"
    return tree.fault(Loose(("extensions", at), fault.code, f"is {shown(name)}, {found}", fault.allowed))


def _changed(at: int, name: str, then: str, now: str) -> Loose:
    found = f"is {shown(name)}, whose content has changed: its sha256 was {then[:12]}... and is {now[:12]}..."
    remedy = "put the file of that run back, or run the study itself anew"
    return Loose(("extensions", at), "extension-changed", found, "", remedy)


def extensions_plain(extensions: tuple[Extension, ...]) -> list[dict[str, str]]:
    """The word again, each file with the hash of its content."""
    return [{"file": one.source, "sha256": one.sha256} for one in extensions]
