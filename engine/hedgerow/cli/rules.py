"""`hedgerow rules`: check, explain and list the rule language."""

from __future__ import annotations

import sys
from collections.abc import Iterable, Iterator
from enum import StrEnum
from pathlib import Path
from typing import TYPE_CHECKING, Annotated

import typer

if TYPE_CHECKING:
    from hedgerow.errors import Fault
    from hedgerow.rules.document import Tree
    from hedgerow.rules.glossary import Section
    from hedgerow.rules.schema import Strategy
    from hedgerow.study.declare import Study

__all__ = ["app"]

WIDTH = 100
STUDY_WORDS = ("market", "strategy", "variants", "grid", "account", "window", "pricing", "costs")

app = typer.Typer(name="rules", help="Check, explain and list the rule language.", no_args_is_help=True)


class Kind(StrEnum):
    """The two kinds of files that have a schema."""

    strategy = "strategy"
    study = "study"


Files = Annotated[list[Path], typer.Argument(help="Strategy or study files.", show_default=False)]
Extensions = Annotated[
    list[str] | None, typer.Option("--extension", help="A file of your own signals or costs, read first.")
]
File = Annotated[Path, typer.Argument(help="A strategy file, or a study file for all of its variants.")]


@app.command(help="Check strategy and study files; print every fault with its place.")
def check(files: Files, extension: Extensions = None) -> None:
    """Print a line for each file that is right, and every fault of the others; raises Exit 2 for those."""
    _extended(extension)
    faulty = 0
    for path in files:
        line, faults = _checked(path)
        faulty += bool(faults)
        _say([line] if not faults else [str(fault) for fault in faults])
    if faulty:
        raise typer.Exit(2)


@app.command(help="Tell in plain English what a strategy does.")
def explain(file: File, extension: Extensions = None) -> None:
    """Print a strategy, or every variant of a study, in plain English; raises Exit 2 for a faulty file."""
    from hedgerow.errors import InputError
    from hedgerow.rules.explain import explain as told

    _extended(extension)
    try:
        texts = [told(strategy) for strategy in _strategies(file)]
    except InputError as error:
        _say((str(fault) for fault in error.faults), to_errors=True)
        raise typer.Exit(2) from None
    for at, text in enumerate(texts):
        if at:
            typer.echo("-" * WIDTH + "\n")
        typer.echo("\n\n".join(_wrapped(part) for part in text.rstrip("\n").split("\n\n")) + "\n")


@app.command()
def schema(
    kind: Annotated[Kind, typer.Argument(help="The kind of file.")], extension: Extensions = None
) -> None:
    """Print the JSON Schema of a kind of file, for editors."""
    from hedgerow.rules.publish import as_text, strategy_schema

    _extended(extension)
    if kind is Kind.strategy:
        typer.echo(as_text(strategy_schema()), nl=False)
        return
    from hedgerow.study.publish import study_schema

    typer.echo(as_text(study_schema()), nl=False)


@app.command()
def words(extension: Extensions = None) -> None:
    """List the rule language at a glance: words, what may stand after them, signals."""
    from hedgerow.rules.glossary import sections

    _extended(extension)
    for section in sections():
        typer.echo("\n".join(_table(section)) + "\n")


def _extended(extensions: list[str] | None) -> None:
    """Use the files of extensions given. Raises ExtensionError with every fault of the first faulty one."""
    if extensions:
        from hedgerow.extend import load_extensions

        load_extensions(extensions)


def is_study(tree: Tree) -> bool:
    """Whether a file's words are those of a study and not of a strategy."""
    plain = tree.plain
    return isinstance(plain, dict) and "legs" not in plain and any(word in plain for word in STUDY_WORDS)


def _checked(path: Path) -> tuple[str, list[Fault]]:
    """A line that says all is well, and the faults of a file."""
    from hedgerow.rules.document import tree_of_file
    from hedgerow.rules.load import read_strategy
    from hedgerow.textfile import capped

    tree = tree_of_file(path)
    if is_study(tree):
        from hedgerow.study.declare import read_study

        study, faults = read_study(tree, path.parent, path)
        count, more = _tried(study, path)
        faults += more
        name = "" if study is None else study.name
        return f"ok  {path}: study `{name}`, {_counted(count, 'variant')}", capped(faults)
    strategy, faults = read_strategy(tree)
    count = 0 if strategy is None else len(strategy.legs)
    name = "" if strategy is None else strategy.name
    return f"ok  {path}: strategy `{name}`, {_counted(count, 'leg')}", capped(faults)


def _tried(study: Study | None, path: Path) -> tuple[int, list[Fault]]:
    """How many variants a study tries, and the faults of combinations of its grid."""
    from hedgerow.errors import StudyError
    from hedgerow.study.trials import trials_of

    if study is None:
        return 0, []
    trials = trials_of(study)
    try:
        trials.check(str(path))
    except StudyError as error:
        return len(trials), list(error.faults)
    return len(trials), []


def _strategies(path: Path) -> Iterator[Strategy]:
    """The strategy of a file, or every variant of a study under the variant's name."""
    from hedgerow.rules.document import tree_of_file
    from hedgerow.rules.load import load_strategy
    from hedgerow.study.declare import load_study

    if not is_study(tree_of_file(path)):
        yield load_strategy(path)
        return
    for name, strategy in load_study(path).variants:
        title = strategy.name if name == strategy.name else f"{name} ({strategy.name})"
        yield strategy.model_copy(update={"name": title})


def _counted(count: int, word: str) -> str:
    return f"{count} {word}" if count == 1 else f"{count} {word}s"


def _say(lines: Iterable[str], to_errors: bool = False) -> None:
    """Lines for people within the width of the screen, for pipes one line each."""
    stream = sys.stderr if to_errors else sys.stdout
    for line in lines:
        typer.echo(_wrapped(line, "    ") if stream.isatty() else line, err=to_errors)


def _wrapped(text: str, indent: str = "") -> str:
    import textwrap

    return textwrap.fill(
        text, WIDTH, subsequent_indent=indent, break_long_words=False, break_on_hyphens=False
    )


def _table(section: Section) -> Iterator[str]:
    """A section as lines of three columns within the width."""
    import textwrap

    yield section.title
    for word, allowed, meaning in section.rows:
        columns = [textwrap.wrap(word, 24), textwrap.wrap(allowed, 32), textwrap.wrap(meaning, WIDTH - 63)]
        for line in range(max(map(len, columns))):
            first, second, third = (column[line] if line < len(column) else "" for column in columns)
            yield f"  {first:<24}  {second:<32}  {third}".rstrip()
