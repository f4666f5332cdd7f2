"""The comparison in a terminal: figures as rows, variants as columns, the yardstick last, cautions below.

Never wider than 100 columns. Colour and weight come only where the console shows them; piped, it is plain.
"""

from __future__ import annotations

import io
from collections.abc import Iterator, Sequence
from dataclasses import dataclass

from rich.console import Console, RenderableType
from rich.padding import Padding
from rich.table import Table
from rich.text import Text

from hedgerow.events.kinds import OUTCOMES
from hedgerow.evidence.figures import Curve, Summary
from hedgerow.evidence.findings import Evidence
from hedgerow.report.evidence_text import evidence_parts, verdict_parts
from hedgerow.report.rows import ACCOUNT_ROWS, SECTIONS
from hedgerow.units import percent_text

__all__ = ["Comparison", "print_comparison", "text_of"]

WIDTH = 100
LABEL_WIDTH, UNIT_WIDTH, GAP = 25, 11, 2
LEAST_COLUMN, MOST_COLUMN = 13, 18
BAR_WIDTH = 6
HEADING = "bold"
QUIET = "dim"
GOOD, BAD = "green", "yellow"


@dataclass(frozen=True, slots=True)
class Comparison:
    """What is shown: summaries (one a variant), a title, a question, the cautions, and the evidence."""

    summaries: Sequence[Summary]
    title: str
    question: str = ""
    cautions: Sequence[str] = ()
    evidence: Evidence | None = None

    @property
    def yardstick(self) -> tuple[str, Curve] | None:
        """The yardstick's name and figures, from the first summary that has one."""
        for summary in self.summaries:
            if summary.yardstick is not None:
                return summary.yardstick_name, summary.yardstick
        return None


def print_comparison(comparison: Comparison, console: Console | None = None) -> None:
    """Print a comparison to a console, the standard output when none is given; plain text when piped."""
    out = console or Console()
    draws = out.encoding.lower().startswith("utf")
    if not out.is_terminal or out.no_color:  # without colour there is no weight either
        out.file.write(text_of(comparison, min(out.width, WIDTH) if out.is_terminal else WIDTH, draws))
        return
    width = min(out.width, WIDTH)
    for part in _parts(comparison, width, draws):
        out.print(part, width=width)


def text_of(comparison: Comparison, width: int = WIDTH, draws: bool = True) -> str:
    """Return a comparison as plain text of at most so many columns; bars in ASCII unless `draws`."""
    page = io.StringIO()
    console = Console(file=page, width=width, color_system=None, force_terminal=False)
    for part in _parts(comparison, width, draws):
        console.print(part)
    return "\n".join(line.rstrip() for line in page.getvalue().splitlines()) + "\n"


def _parts(comparison: Comparison, width: int, draws: bool) -> Iterator[RenderableType]:
    yield from _head(comparison)
    fits, column = _columns(comparison, width)
    for start in range(0, len(comparison.summaries), fits):
        block = comparison.summaries[start : start + fits]
        yield _figures(comparison, block, column)
        yield Text()
        yield _outcomes(block, column, draws)
        yield Text()
    yield from _declined(comparison.summaries)
    if comparison.evidence is not None:
        yield from evidence_parts(comparison.evidence)
    if comparison.cautions:
        yield Text("Before you rely on this", style=HEADING)
        for caution in comparison.cautions:
            yield _item(caution, QUIET)
    if comparison.evidence is not None:
        yield from verdict_parts(comparison.evidence)


def _head(comparison: Comparison) -> Iterator[RenderableType]:
    first = comparison.summaries[0]
    yield Text(comparison.title, style=HEADING)
    if comparison.question:
        yield Text(comparison.question)
    money = f", money in {first.currency}" if first.currency else ""
    yield Text(f"{first.first_date} to {first.last_date}, {first.sessions:,} sessions{money}", style=QUIET)
    yield Text()


def _columns(comparison: Comparison, width: int) -> tuple[int, int]:
    """Return how many variants fit side by side, the yardstick beside them, and the width of a column."""
    room = width - LABEL_WIDTH - UNIT_WIDTH - GAP
    beside = 1 if comparison.yardstick else 0
    fits = min(max(room // (LEAST_COLUMN + GAP) - beside, 1), len(comparison.summaries))
    return fits, min(room // (fits + beside) - GAP, MOST_COLUMN)


def _table(first: str, names: Sequence[str], column: int) -> Table:
    table = Table(box=None, pad_edge=False, padding=(0, GAP, 0, 0), header_style=HEADING)
    table.add_column(Text(first), width=LABEL_WIDTH, no_wrap=True)
    table.add_column("", width=UNIT_WIDTH, no_wrap=True, style=QUIET)
    for name in names:
        table.add_column(Text(name), justify="right", width=column, overflow="fold")
    return table


def _figures(comparison: Comparison, block: Sequence[Summary], column: int) -> Table:
    other = comparison.yardstick
    names = [summary.variant or summary.strategy for summary in block]
    table = _table("", names + ([other[0]] if other else []), column)
    table.add_row(Text("Account", style=HEADING))
    curves = [summary.account for summary in block] + ([other[1]] if other else [])
    for row in ACCOUNT_ROWS:
        table.add_row(f"  {row.label}", row.unit, *(row.say(curve) for curve in curves))
    for heading, rows in SECTIONS:
        table.add_row()
        table.add_row(Text(heading, style=HEADING))
        for line in rows:
            cells = [_coloured(line.label, line.say(summary), summary) for summary in block]
            table.add_row(f"  {line.label}", line.unit, *cells)
    return table


def _coloured(label: str, text: str, summary: Summary) -> Text:
    """Mark the win rate by whether it is above its break-even rate."""
    if label != "Win rate" or text == "-":
        return Text(text)
    return Text(text, style=GOOD if summary.win_rate > summary.break_even_win_rate else BAD)


def _outcomes(block: Sequence[Summary], column: int, draws: bool) -> Table:
    table = _table("How positions ended", [summary.variant or summary.strategy for summary in block], column)
    for outcome in OUTCOMES:
        if any(summary.outcomes.get(outcome) for summary in block):
            cells = [_bar(summary.outcomes.get(outcome, 0), summary.positions, draws) for summary in block]
            table.add_row(f"  {outcome}", "of all", *cells)
    return table


def _bar(count: int, total: int, draws: bool) -> Text:
    share = count / total if total else 0.0
    full = round(share * BAR_WIDTH)
    on, off = ("█", "░") if draws else ("#", ".")
    bar = on * full + off * (BAR_WIDTH - full)
    return Text.assemble((f"{bar} ", QUIET), f"{percent_text(share):>6}") if count else Text("-")


def _declined(summaries: Sequence[Summary]) -> Iterator[RenderableType]:
    some = [summary for summary in summaries if summary.declined]
    if not some:
        return
    yield Text("Entries not made, and why", style=HEADING)
    for summary in some:
        reasons = ", ".join(f"{reason} {count:,}" for reason, count in summary.declined.items())
        yield _item(f"{summary.variant or summary.strategy}: {reasons}", "")
    yield Text()


def _item(text: str, style: str) -> Padding:
    return Padding(Text(text, style=style), (0, 0, 0, 2))
