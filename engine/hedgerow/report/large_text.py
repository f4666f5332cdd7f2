"""The findings of a large study in a terminal: the best variants, their worth, the record out of sample.

Never wider than 100 columns.
"""

from __future__ import annotations

import io
import math
from collections.abc import Iterator, Sequence
from dataclasses import dataclass

import numpy as np
from rich.console import Console, RenderableType
from rich.padding import Padding
from rich.table import Table
from rich.text import Text

from hedgerow.evidence.figures import Curve, Summary
from hedgerow.report.rows import ACCOUNT_ROWS
from hedgerow.report.text import HEADING, QUIET, WIDTH
from hedgerow.study.large import Aside, LargeResult, Stage
from hedgerow.study.walk_forward import Forward, Judged
from hedgerow.study.worth import Neighbourhood
from hedgerow.units import number_text, percent_text

__all__ = ["aside_text", "large_text", "print_large"]

SHOWN = 8
NAME_WIDTH = 45
MEASURES = {"sharpe": "Sharpe ratio", "sortino": "Sortino ratio", "growth": "growth"}


def print_large(result: LargeResult, cautions: Sequence[str], console: Console | None = None) -> None:
    """Print the findings to a console, the standard output when none is given; plain text when piped."""
    out = console or Console()
    if not out.is_terminal or out.no_color:  # without colour there is no weight either
        out.file.write(large_text(result, cautions, min(out.width, WIDTH) if out.is_terminal else WIDTH))
        return
    for part in _parts(result, cautions):
        out.print(part, width=min(out.width, WIDTH))


def large_text(result: LargeResult, cautions: Sequence[str] = (), width: int = WIDTH) -> str:
    """The findings as plain text of at most so many columns."""
    page = io.StringIO()
    console = Console(file=page, width=width, color_system=None, force_terminal=False)
    for part in _parts(result, cautions):
        console.print(part)
    return "\n".join(line.rstrip() for line in page.getvalue().splitlines()) + "\n"


def _parts(result: LargeResult, cautions: Sequence[str]) -> Iterator[RenderableType]:
    yield from _head(result)
    yield _best(result)
    yield Text()
    yield Text("What the best one is worth", style=HEADING)
    yield from (_item(line) for line in _worth(result))
    yield Text()
    if result.findings.forward is not None:
        yield from _forward(result, result.findings.forward)
    if result.stage.aside is not None:
        yield Text("Kept aside", style=HEADING)
        yield _item(_aside(result))
        yield Text()
    if cautions:
        yield Text("Before you rely on this", style=HEADING)
        yield from (_item(caution, QUIET) for caution in cautions)


def _head(result: LargeResult) -> Iterator[RenderableType]:
    study, job = result.stage.study, result.stage.job
    yield Text(study.name, style=HEADING)
    if study.question:
        yield Text(study.question)
    dates, window = job.market.dates, job.window
    money = f", money in {job.market.currency}" if job.market.currency else ""
    span = (
        f"{dates[window.start]} to {dates[window.stop - 1]}, {window.stop - window.start:,} sessions{money}"
    )
    yield Text(span, style=QUIET)
    yield Text(_tried(result), style=QUIET)
    yield Text()


def _tried(result: LargeResult) -> str:
    """How many variants were run, and of how many."""
    trials, grid = result.stage.trials, result.stage.study.grid
    if grid is None:
        return f"{len(trials):,} variants"
    size = " x ".join(str(len(axis.values)) for axis in grid.axes)
    if grid.design == "whole":
        return f"{len(trials):,} variants, the whole grid ({size})"
    how = "at random" if grid.design == "random" else "as a Latin hypercube"
    drawn = f", {grid.draws - len(trials):,} of them twice" if grid.draws > len(trials) else ""
    return f"{len(trials):,} variants of a grid of {grid.size:,} ({size}); {grid.draws:,} drawn {how}{drawn}"


@dataclass(frozen=True, slots=True)
class _Column:
    title: str
    name: str
    width: int
    percent: bool = True
    places: int = 2


COLUMNS = (
    _Column("Growth a year", "growth_a_year", 6),
    _Column("Sharpe", "sharpe", 6, percent=False),
    _Column("Deepest fall", "deepest_drawdown", 7),
    _Column("Win rate", "win_rate", 5),
    _Column("Positions", "positions", 9, percent=False, places=0),
    _Column("At work", "capital_at_work", 5),
)
FEW_POSITIONS = 30
LITTLE_AT_WORK = 0.05


def _best(result: LargeResult) -> Table:
    """The best variants by Sharpe ratio, the middle one, the last one, and the yardstick."""
    figures, trials = result.findings.figures, result.stage.trials
    sharpe = figures["sharpe"]
    order = np.argsort(-np.where(np.isnan(sharpe), -np.inf, sharpe), kind="stable")
    known = order[~np.isnan(sharpe[order])]
    table = Table(box=None, pad_edge=False, padding=(0, 2, 0, 0), header_style=HEADING)
    table.add_column("By Sharpe ratio", width=NAME_WIDTH, overflow="fold")
    for column in COLUMNS:
        table.add_column(column.title, justify="right", width=column.width)
    for number in known[:SHOWN]:
        table.add_row(trials.name(int(number)), *_cells(result, int(number)))
    if len(known) > SHOWN:
        middle, last = int(known[len(known) // 2]), int(known[-1])
        table.add_row()
        table.add_row(f"the middle one: {trials.name(middle)}", *_cells(result, middle))
        table.add_row(f"the last one: {trials.name(last)}", *_cells(result, last))
    if len(known) < len(order):
        table.add_row(f"never moved: {len(order) - len(known):,} variants")
    summary = result.best.summary
    if summary.yardstick is not None:
        table.add_row(summary.yardstick_name, *_curve_cells(summary.yardstick))
    return table


def _cells(result: LargeResult, number: int) -> list[str]:
    figures = result.findings.figures
    return [
        percent_text(float(figures[column.name][number]))
        if column.percent
        else number_text(float(figures[column.name][number]), column.places)
        for column in COLUMNS
    ]


def _curve_cells(curve: Curve) -> list[str]:
    values = [(column, getattr(curve, column.name, math.nan)) for column in COLUMNS]
    return [percent_text(value) if column.percent else number_text(value) for column, value in values]


def _worth(result: LargeResult) -> Iterator[str]:
    found = result.findings
    worth = found.worth
    yield from _hardly_trades(result)
    if found.neighbourhood is not None:
        yield from _neighbours(found.neighbourhood)
    yield (
        f"Of {worth.trials:,} tries{_before(result)} without any merit the best would show a Sharpe ratio of "
        f"about {number_text(worth.sharpe_of_luck)}; this one shows {number_text(worth.sharpe)}. The chance "
        f"that its true ratio is above that of luck: {percent_text(worth.chance_above_luck)}; counting "
        f"variants that move alike as {number_text(worth.trials_independent, 1)} tries: "
        f"{percent_text(worth.chance_above_luck_independent)}."
    )
    if found.superiority is not None:
        count = len(result.stage.trials)
        which = f"all {count:,}" if found.tested == count else f"{found.tested:,} of them, spread evenly"
        better = len(found.superiority.better)
        yield (
            f"Against buy and hold ({which} tested): luck alone brings so good a best one with a chance of "
            f"{percent_text(found.superiority.p_consistent)}; {better or 'none'} shown to grow faster."
        )


def _hardly_trades(result: LargeResult) -> Iterator[str]:
    """A warning where the best variant is mostly cash, whose figures then say little of the rule."""
    best = {name: float(values[result.findings.best]) for name, values in result.findings.figures.items()}
    if best["positions"] >= FEW_POSITIONS and best["capital_at_work"] >= LITTLE_AT_WORK:
        return
    gain = best["last_value"] - result.stage.job.account.cash
    interest = (
        f", and {percent_text(best['interest'] / gain, 0)} of its gain is interest" if gain > 0.0 else ""
    )
    count, work = f"{best['positions']:,.0f} positions", percent_text(best["capital_at_work"])
    yield (
        f"IT HARDLY TRADES: {count}, {work} of the equity at work{interest}. "
        "Its figures say little of the rule."
    )


def _before(result: LargeResult) -> str:
    """How many of the tries were made before, on the same prices."""
    before = result.findings.worth.trials - len(result.stage.trials)
    return f" ({before:,} of them before, on these prices)" if before > 0 else ""


def _neighbours(around: Neighbourhood) -> Iterator[str]:
    if not around.count:
        yield "It has no neighbours: no parameter of the grid has an order, or none near it was tried."
        return
    near = "one step away" if around.steps == 1.0 else f"{number_text(around.steps, 1)} steps away on average"
    told = (
        f"Its {around.count} neighbours, {near}, have Sharpe ratios of {number_text(around.lowest)} to "
        f"{number_text(around.highest)}, the middle of all variants {number_text(around.typical)}"
    )
    if math.isnan(around.kept):
        yield f"{told}."
    elif around.alone:
        yield (
            f"A PEAK ALONE IN A TROUGH. {told}: they keep {percent_text(max(around.kept, 0.0), 0)} of its "
            "lead. A small change of the rule loses most of it, which is what luck looks like."
        )
    else:
        yield f"{told}: they keep {percent_text(around.kept, 0)} of its lead."
    if around.edges:
        ends = ", ".join(around.edges)
        yield f"At the end of what was tried: {ends}. Values beyond it may do better still."


def _forward(result: LargeResult, forward: Forward) -> Iterator[RenderableType]:
    words = result.stage.study.walk_forward
    how = "all that went before" if words is not None and words.anchored else "the last window"
    yield Text("Out of sample: chosen on one window, judged on the next", style=HEADING)
    yield _item(
        f"By {MEASURES[forward.by]} on {how}, {forward.gap_sessions} sessions between the two. Only the "
        "judged windows count."
    )
    yield _folds(result, forward)
    yield Text()
    lines = [("What was chosen", forward.account)]
    if forward.yardstick is not None:
        lines.append(("buy and hold", forward.yardstick))
    for name, curve in lines:
        yield _item(
            f"{name}: growth {percent_text(curve.growth_a_year, 1, True)} a year, volatility "
            f"{percent_text(curve.volatility_a_year)}, Sharpe ratio {number_text(curve.sharpe)}, deepest "
            f"fall {percent_text(curve.deepest_drawdown)}."
        )
    if not math.isnan(forward.mean_place):
        yield _item(
            f"Where judged it did as well as or better than {percent_text(forward.mean_place, 0)} of the "
            "other variants on average; choosing that knows nothing comes to about 50%."
        )
    yield Text()


def _folds(result: LargeResult, forward: Forward) -> Padding:
    table = Table(box=None, pad_edge=False, padding=(0, 2, 0, 0), header_style=HEADING)
    table.add_column("Judged from", width=11, no_wrap=True)
    table.add_column("to", width=11, no_wrap=True)
    table.add_column("Chosen", width=32, overflow="fold")
    for title, width in (("promised", 8), ("brought", 8), ("growth", 7), ("place", 5)):
        table.add_column(title, justify="right", width=width)
    for one in forward.judged:
        table.add_row(*_fold(result, forward.by, one))
    return Padding(table, (0, 0, 0, 2))


def _fold(result: LargeResult, by: str, one: Judged) -> list[str]:
    dates, trials = result.stage.job.market.dates, result.stage.trials
    window = one.fold.judge
    say = percent_text if by == "growth" else number_text
    name = trials.name(one.variant) if one.variant >= 0 else "cash: none could be judged"
    first, last = str(dates[window.start]), str(dates[window.stop - 1])
    figures = [
        say(one.promised),
        say(one.brought),
        percent_text(one.growth, 1, True),
        percent_text(one.place, 0),
    ]
    return [first, last, name, *figures]


def _aside(result: LargeResult) -> str:
    dates, window = result.stage.job.market.dates, result.stage.aside
    assert window is not None
    span = f"{dates[window.start]} to {dates[window.stop - 1]}, {window.stop - window.start:,} sessions"
    return f"{span}: not looked at in this run, nor in any figure above. `hedgerow look` looks, once."


def aside_text(ready: Stage, before: Summary, aside: Aside, width: int = WIDTH) -> str:
    """What the best rule did before and on the part kept aside, beside the yardstick there, as plain text."""
    page = io.StringIO()
    console = Console(file=page, width=width, color_system=None, force_terminal=False)
    after = aside.result.summary
    columns = {"before": before.account, "kept aside": after.account}
    if after.yardstick is not None:
        columns[f"{after.yardstick_name} there"] = after.yardstick
    table = Table(box=None, pad_edge=False, padding=(0, 2, 0, 0), header_style=HEADING)
    for title in ("", ""):
        table.add_column(title, no_wrap=True)
    for name in columns:
        table.add_column(name, justify="right", width=18)
    for row in ACCOUNT_ROWS:
        table.add_row(row.label, row.unit, *(row.say(curve) for curve in columns.values()))
    console.print(Text(f"{ready.study.name}: {after.variant}"))
    console.print(Text(f"Kept aside: {after.first_date} to {after.last_date}, {after.sessions:,} sessions"))
    console.print(Text())
    console.print(table)
    console.print(Text())
    console.print(Text(_traded(after)))
    console.print(Text(_looked(aside)))
    return "\n".join(line.rstrip() for line in page.getvalue().splitlines()) + "\n"


def _traded(after: Summary) -> str:
    """What the figures of the part kept aside rest on; both parts begin with the account's own cash."""
    told = f"{after.positions:,} {'position' if after.positions == 1 else 'positions'} there"
    told += (
        f", {percent_text(after.capital_at_work)} of the equity at work; both parts begin with the same cash."
    )
    if after.positions < FEW_POSITIONS:
        told += " So few cannot tell whether the rule held up."
    return told


def _looked(aside: Aside) -> str:
    """How often the part was looked at, and what that means."""
    times = f"{aside.looks:,} {'look' if aside.looks == 1 else 'looks'} by this study"
    told = f"{times}, {aside.looks_of_all:,} by all studies recorded here, at this part of these prices."
    if aside.looks_of_all == 1:
        return f"{told} It was not looked at before. A rule that is changed now has no part kept aside."
    return f"{told} Only the first look is out of sample; what came after it was chosen knowing it."


def _item(text: str, style: str = "") -> Padding:
    return Padding(Text(text, style=style), (0, 0, 0, 2))
