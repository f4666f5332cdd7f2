"""A sheet in a terminal, never wider than 100 columns; piped it is plain text."""

from __future__ import annotations

import io
from collections.abc import Iterable, Iterator, Sequence

from rich.console import Console, RenderableType
from rich.padding import Padding
from rich.table import Table
from rich.text import Text

from hedgerow.desk import phrases as say
from hedgerow.desk.held import HeldLine
from hedgerow.desk.sheet import OPEN, Look, Plan, Sheet
from hedgerow.units import number_text

__all__ = ["print_sheet", "text_of"]

WIDTH = 100
HEADING, QUIET = "bold", "dim"
MOST_LOOKS = 40
"""Symbols of one kind that are listed; the others are in the files."""


def print_sheet(sheet: Sheet, console: Console | None = None) -> None:
    """Print a sheet to a console, the standard output when none is given; plain text when piped."""
    out = console or Console()
    if not out.is_terminal or out.no_color:  # without colour there is no weight either
        out.file.write(text_of(sheet, min(out.width, WIDTH) if out.is_terminal else WIDTH))
        return
    width = min(out.width, WIDTH)
    for part in _parts(sheet, width >= WIDTH):
        out.print(part, width=width)


def text_of(sheet: Sheet, width: int = WIDTH) -> str:
    """Return a sheet as plain text of at most so many columns."""
    page = io.StringIO()
    console = Console(file=page, width=width, color_system=None, force_terminal=False)
    for part in _parts(sheet, width >= WIDTH):
        console.print(part)
    return "\n".join(line.rstrip() for line in page.getvalue().splitlines()) + "\n"


def _parts(sheet: Sheet, roomy: bool) -> Iterator[RenderableType]:
    name = sheet.name + (f", {sheet.variant}" if sheet.variant else "")
    yield Text(f"{name}: the close of {say.long_day(sheet.as_of)}", style=HEADING)
    for line in say.head_lines(sheet):
        yield Text(line, style=QUIET)
    yield Text()
    yield from _held(sheet, roomy)
    yield Text(say.opening_title(sheet), style=HEADING)
    if sheet.of(OPEN):
        yield _inner(Text(say.QUOTES_DECIDE, style=QUIET))
    yield Text()
    for look in sheet.of(OPEN):
        yield from _opening(look, sheet.currency, roomy)
    for title, looks in say.sections(sheet):
        yield Text(title, style=HEADING)
        yield _inner(_list(looks[:MOST_LOOKS], roomy))
        if len(looks) > MOST_LOOKS:
            yield _inner(Text(f"and {len(looks) - MOST_LOOKS:,} more; --out FOLDER writes all", style=QUIET))
        yield Text()
    yield Text("Before you rely on this", style=HEADING)
    for caution in sheet.cautions:
        yield _inner(Text(caution, style=QUIET))


def _held(sheet: Sheet, roomy: bool) -> Iterator[RenderableType]:
    if not sheet.positions_known:
        return
    yield Text(say.held_heading(sheet), style=HEADING)
    yield Text()
    for line in sheet.held:
        verdict, since = say.held_title(line, sheet.fill)
        title = Text.assemble((line.symbol, HEADING), (f" at {number_text(line.close)}   ", QUIET))
        yield title.append_text(Text.assemble((verdict, HEADING), (f"   {since}", QUIET)))
        if line.legs:
            yield _inner(_held_legs(line, roomy))
        yield _inner(_pairs(say.held_facts(line)))
        yield Text()


def _held_legs(line: HeldLine, roomy: bool) -> Table:
    columns = (("Leg", 24), ("Expiry", 22), ("Then", 7), ("Now", 7), ("Strike away", 11))
    table = _table(roomy, *columns, ("In the money", 12))
    for leg in line.legs:
        table.add_row(*say.held_leg_cells(leg))
    return table


def _pairs(pairs: Iterable[tuple[str, str]]) -> Table:
    table = Table(box=None, show_header=False, pad_edge=False, padding=(0, 2, 0, 0))
    table.add_column(width=22, style=QUIET)
    table.add_column(overflow="fold")
    for name, text in pairs:
        table.add_row(name, text)
    return table


def _opening(look: Look, currency: str, roomy: bool) -> Iterator[RenderableType]:
    assert look.plan is not None
    plan = look.plan
    title = Text.assemble((look.symbol, HEADING), (f" at {number_text(look.close)}", QUIET))
    title.append(f"   {say.plan_title(plan, currency)}")
    yield title
    if plan.legs:
        yield _inner(_legs(plan, roomy))
    yield _inner(_pairs(_facts(look, plan)))
    yield Text()


def _legs(plan: Plan, roomy: bool) -> Table:
    table = _table(
        roomy,
        ("Order", 20),
        ("Expiry", 24),
        ("Assumed", 9),
        ("Model over the stress", 24),
        ("In the money", 12),
    )
    for leg in plan.legs:
        table.add_row(*say.leg_cells(leg))
    return table


def _facts(look: Look, plan: Plan) -> Iterator[tuple[str, str]]:
    yield from say.facts(plan)
    yield "Limit", say.limit_text(plan)
    if look.tests:
        yield "Conditions", "\n".join(test.told() for test in look.tests)
    if look.record is not None:
        yield "Before, in this stock", say.record_text(look.record)
    inside = say.inside_text(plan)
    if inside:
        yield "Inside its life", inside


def _list(looks: Sequence[Look], roomy: bool) -> Table:
    table = _table(roomy, ("", 10), ("Close", 9), ("Why", 73), header=False)
    table.columns[1].justify = "right"
    for name, close, why in say.grouped(looks):
        table.add_row(name, close, "\n".join(why))
    return table


def _table(roomy: bool, *columns: tuple[str, int], header: bool = True) -> Table:
    """A table of columns so wide where a terminal is `roomy`; else the first two are folded as need be."""
    table = Table(box=None, pad_edge=False, padding=(0, 2, 0, 0), header_style=QUIET, show_header=header)
    for at, (name, width) in enumerate(columns):
        if at < 2 or not header:
            table.add_column(name, width=width if roomy else None, overflow="fold")
        else:
            table.add_column(name, width=width if roomy else None, no_wrap=True, justify="right")
    return table


def _inner(part: RenderableType) -> Padding:
    return Padding(part, (0, 0, 0, 2))
