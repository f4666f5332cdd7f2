"""The limits of the house, held by the package and its tests."""

from __future__ import annotations

import ast
import textwrap
from collections.abc import Iterator
from pathlib import Path

import pytest

ROOT = Path(__file__).parents[2]
ENGINE = ROOT / "engine"
MODULES = sorted(ENGINE.rglob("*.py"))
TESTS = sorted((ROOT / "tests").rglob("*.py"))
MODULE_LINES, FUNCTION_LINES, PARAMETERS = 400, 60, 8

Function = ast.FunctionDef | ast.AsyncFunctionDef


def own_length(node: Function) -> int:
    """Lines of a function, its decorators and docstring left out."""
    first = node.body[0]
    quoted = first.end_lineno - first.lineno + 1 if ast.get_docstring(node) is not None else 0
    return node.end_lineno - node.lineno + 1 - quoted


def parameters(node: Function) -> list[ast.arg]:
    """Parameters of a function, self and cls left out."""
    spec = node.args
    found = [*spec.posonlyargs, *spec.args, *spec.kwonlyargs, *filter(None, (spec.vararg, spec.kwarg))]
    return [a for a in found if a.arg not in ("self", "cls")]


def public(tree: ast.AST) -> Iterator[ast.ClassDef | Function]:
    """Classes, functions and methods whose names, and whose class's name, have no leading underscore."""
    for node in ast.iter_child_nodes(tree):
        if isinstance(node, ast.ClassDef | Function) and not node.name.startswith("_"):
            yield node
            if isinstance(node, ast.ClassDef):
                yield from public(node)


def size_faults(tree: ast.Module) -> Iterator[str]:
    """Functions that are too long, or take too many parameters."""
    for node in ast.walk(tree):
        if isinstance(node, Function) and own_length(node) > FUNCTION_LINES:
            yield f"{node.name} has {own_length(node)} lines"
        if isinstance(node, Function) and len(parameters(node)) > PARAMETERS:
            yield f"{node.name} takes {len(parameters(node))} parameters"


def silent_faults(tree: ast.Module) -> Iterator[str]:
    """The module itself, and what is public in it, without a docstring."""
    if ast.get_docstring(tree) is None:
        yield "the module has no docstring"
    yield from (f"{node.name} has no docstring" for node in public(tree) if not ast.get_docstring(node))


def signature_faults(tree: ast.Module) -> Iterator[str]:
    """Public functions that are not annotated, or raise without their docstring saying so."""
    for node in public(tree):
        if isinstance(node, ast.ClassDef):
            continue
        if node.returns is None or not all(a.annotation for a in parameters(node)):
            yield f"{node.name} is not annotated"
        raises = any(isinstance(part, ast.Raise) and part.exc for part in ast.walk(node))
        if raises and "raise" not in (ast.get_docstring(node) or "").lower():
            yield f"{node.name} raises without saying so"


def care_faults(tree: ast.Module) -> Iterator[str]:
    """Except clauses that catch everything, and star imports."""
    for node in ast.walk(tree):
        if isinstance(node, ast.ExceptHandler):
            caught = {part.id for part in ast.walk(node.type or node) if isinstance(part, ast.Name)}
            if node.type is None or caught & {"Exception", "BaseException"}:
                yield f"line {node.lineno} catches everything"
        if isinstance(node, ast.ImportFrom) and any(name.name == "*" for name in node.names):
            yield f"line {node.lineno} imports everything"


def faults(source: str) -> list[str]:
    """Every fault of the source of one of the package's modules."""
    tree = ast.parse(source)
    lines = source.count("\n")
    long = [f"the module has {lines} lines"] if lines > MODULE_LINES else []
    return [*long, *size_faults(tree), *silent_faults(tree), *signature_faults(tree), *care_faults(tree)]


@pytest.mark.parametrize("path", MODULES, ids=lambda path: str(path.relative_to(ROOT)))
def test_every_module_keeps_the_limits(path: Path) -> None:
    """At most 400 lines a module, 60 a function, 8 parameters; documented, annotated, nothing swallowed."""
    assert faults(path.read_text(encoding="utf-8")) == []


@pytest.mark.parametrize("path", TESTS, ids=lambda path: str(path.relative_to(ROOT)))
def test_every_test_says_what_it_compares_with(path: Path) -> None:
    """Tests are documented one by one, and neither swallow what goes wrong nor import everything."""
    tree = ast.parse(path.read_text(encoding="utf-8"))
    assert [*silent_faults(tree), *care_faults(tree)] == []


def test_the_check_finds_each_fault() -> None:
    """Negative control: a module with one fault of each kind is told every one of them."""
    many = ", ".join(f"a{i}: int" for i in range(9))
    source = f"""
        from os import *
        def wide({many}) -> None: "Words."
        def silent() -> None: pass
        def bare(a) -> None: "Words."
        def loud() -> None:
            "Words."
            raise ValueError("no")
        def deaf() -> None:
            "Words."
            try:
                pass
            except (OSError, Exception):
                pass
        class Thing:
            "Words."
            def method(self) -> None: pass
        def _private(a): pass
        """
    body = "\n".join("    x = 1" for _ in range(FUNCTION_LINES))
    text = textwrap.dedent(source) + f"def long() -> None:\n    'Words.'\n{body}\n" + "\n" * MODULE_LINES
    assert [fault.split(" has 4")[0] for fault in faults(text)] == [
        "the module",
        "wide takes 9 parameters",
        "long has 61 lines",
        "the module has no docstring",
        "silent has no docstring",
        "method has no docstring",
        "bare is not annotated",
        "loud raises without saying so",
        "line 2 imports everything",
        "line 13 catches everything",
    ]
