"""Files of extensions read: run once, held to the rules of the house, known by the hash of their content."""

from __future__ import annotations

import hashlib
import importlib
import importlib.metadata
import importlib.util
import sys
from collections.abc import Callable, Iterable
from dataclasses import dataclass, replace
from pathlib import Path
from types import ModuleType
from typing import Any

from hedgerow.errors import ExtensionError, Fault, nearest_word
from hedgerow.extend.check import Item, faults_of, line_of
from hedgerow.extend.costs import COST_MODELS
from hedgerow.extend.told import ToldInFile
from hedgerow.signals.registry import SIGNALS
from hedgerow.textfile import decode, read_bytes
from hedgerow.volatility.registry import ESTIMATORS

__all__ = ["GROUP", "Extension", "load_extension", "load_extensions"]

GROUP = "hedgerow.extensions"
"""The group of entry points under which an installed package offers a module of extensions."""

MOST_BYTES = 1_000_000
_REGISTRIES: dict[str, dict[str, Any]] = {"signal": SIGNALS, "estimator": ESTIMATORS, "cost": COST_MODELS}


@dataclass(frozen=True)
class Extension:
    """A file of extensions that is in use: where it lies, the hash of its content, and what it registers."""

    source: str  # the path of the file, or the name of an entry point
    sha256: str
    items: tuple[Item, ...]

    @property
    def names(self) -> tuple[str, ...]:
        """What it registers, in words."""
        return tuple(item.title for item in self.items)


_LOADED: dict[str, Extension] = {}  # by the whole path of the file


def load_extensions(sources: Iterable[str | Path]) -> tuple[Extension, ...]:
    """Read extensions in their order; raises ExtensionError with the faults of the first faulty one."""
    return tuple(load_extension(source) for source in sources)


def load_extension(source: str | Path, *, check: bool = True) -> Extension:
    """Read a file of extensions, or an installed one by its entry point, and use what it registers.

    What ends in `.py` or holds a folder is a path. The same content is read once; a file whose content has
    changed takes the place of what it was. With `check` every item is held to the rules of the house. Raises
    ExtensionError with every fault, each at its line; then nothing of it is in use.
    """
    text = str(source)
    path = Path(text)
    is_file = isinstance(source, Path) or path.suffix == ".py" or len(path.parts) > 1
    where, code, run = _file(path) if is_file else _installed(text)
    digest = hashlib.sha256(code).hexdigest()
    known = next((one for one in _LOADED.values() if one.sha256 == digest), None)
    if known is not None and all(_REGISTRIES[item.kind].get(item.name) is item.made for item in known.items):
        return replace(known, source=text)
    key = str(path.resolve()) if is_file else where
    _forget(_LOADED.pop(key, None))
    items = _registered(where, run)
    faults = [fault for item in items for fault in faults_of(item)] if check else []
    if not items:
        found = "this file registers nothing"
        remedy = "decorate a function with @signal, @estimator or @cost of hedgerow.extend"
        faults = [Fault(where, 0, 0, "extension-empty", found, "", remedy)]
    made = Extension(text, digest, items)
    if faults:
        _forget(made)
        raise ExtensionError(faults)
    _LOADED[key] = made
    return made


def _file(path: Path) -> tuple[str, bytes, Callable[[], None]]:
    """Where a file stands, its bytes, and how it is run. Raises ExtensionError when it cannot be read."""
    where = str(path)
    data, faults = read_bytes(path, MOST_BYTES)
    text, more = (None, []) if data is None else decode(data, where)
    if data is None or text is None:
        raise ExtensionError([*faults, *more])

    def run() -> None:
        module = ModuleType(f"hedgerow_extension_{hashlib.sha256(where.encode()).hexdigest()[:12]}")
        module.__file__ = where
        sys.modules[module.__name__] = module
        exec(compile(text, where, "exec"), module.__dict__)

    return where, data, run


def _installed(name: str) -> tuple[str, bytes, Callable[[], None]]:
    """The same of an installed package's entry point. Raises ExtensionError when there is none so named."""
    offered = {entry.name: entry for entry in importlib.metadata.entry_points(group=GROUP)}
    if name not in offered:
        listed = ", ".join(f"`{word}`" for word in sorted(offered)) or "none is installed"
        found = f"`{name}` is neither a path that ends in .py nor an installed extension"
        raise ExtensionError.one(
            "extensions", "unknown", found, f"installed: {listed}", nearest_word(name, offered)
        )
    with ToldInFile(name, f"while the entry point {offered[name].value} was looked for"):
        spec = importlib.util.find_spec(offered[name].module)
    origin = None if spec is None else spec.origin
    if origin is None:
        raise ExtensionError.one(name, "unknown", f"its module {offered[name].module} is not there")
    files = (
        sorted(Path(origin).parent.rglob("*.py")) if Path(origin).name == "__init__.py" else [Path(origin)]
    )
    module = offered[name].module

    def run() -> None:
        if module in sys.modules:
            importlib.reload(sys.modules[module])
        else:
            importlib.import_module(module)

    return origin, b"".join(file.read_bytes() for file in files), run


def _registered(where: str, run: Callable[[], None]) -> tuple[Item, ...]:
    """Run a file; return what it registered, each watched. What it raises leaves nothing registered."""
    before = {kind: dict(registry) for kind, registry in _REGISTRIES.items()}
    done = False
    try:
        with ToldInFile(where, "while this file was read"):
            run()
        done = True
    finally:
        for kind, registry in _REGISTRIES.items():
            if not done:
                for name in registry.keys() - before[kind].keys():
                    del registry[name]
    items = []
    for kind, registry in _REGISTRIES.items():
        for name in [name for name in registry if name not in before[kind]]:
            made = registry[name]
            line = line_of(made.function)
            registry[name] = replace(made, function=_watched(made.function, where, f"{kind} `{name}`", line))
            items.append(Item(kind, registry[name], where, line))
    return tuple(items)


def _watched(function: Callable[..., Any], where: str, title: str, line: int) -> Callable[..., Any]:
    """The function, so that what it raises is told with its file and line."""

    def watched(*args: Any, **named: Any) -> Any:
        with ToldInFile(where, f"while {title} was worked out", line):
            return function(*args, **named)

    watched.__wrapped__ = function  # type: ignore[attr-defined]  # inspect.unwrap finds the user's own function
    return watched


def _forget(extension: Extension | None) -> None:
    """Take what an extension registered out of use."""
    for item in () if extension is None else extension.items:
        if _REGISTRIES[item.kind].get(item.name) is item.made:
            del _REGISTRIES[item.kind][item.name]
