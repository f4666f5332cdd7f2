"""The evidence in a terminal: who is better, what the start owes to luck, the year ahead, and the verdict."""

from __future__ import annotations

from collections.abc import Iterator, Sequence

from rich.console import RenderableType
from rich.padding import Padding
from rich.table import Table
from rich.text import Text

from hedgerow.evidence.difference import BETTER, CANNOT_TELL
from hedgerow.evidence.findings import Evidence, Pairing, Prospect
from hedgerow.evidence.flip import Flip
from hedgerow.units import number_text, percent_text

__all__ = ["evidence_parts", "verdict_parts"]

NAME_WIDTH, GAP = 35, 2
HEADING, QUIET = "bold", "dim"
STYLES = {BETTER: "green", CANNOT_TELL: "dim"}
LEAST_LISTED = 3
"""Variants from which on the lists of findings are shown."""
MOST_PAIRS = 15
"""Comparisons shown; the rest stand in summary.json."""


def evidence_parts(evidence: Evidence) -> Iterator[RenderableType]:
    """Yield the tables of the evidence."""
    yield from _pairs(evidence)
    yield from _timing(evidence)
    yield from _ahead(evidence)
    yield from _win_rates(evidence)
    yield from _odds(evidence)
    yield from _lists(evidence)
    for note in evidence.notes:
        yield _item(f"{note}.")
    if evidence.notes:
        yield Text()


def verdict_parts(evidence: Evidence) -> Iterator[RenderableType]:
    """Yield the verdict, one sentence a line."""
    yield Text()
    yield Text("Verdict", style=HEADING)
    for sentence in evidence.verdict.sentences:
        yield _item(sentence)


def _table(first: str, columns: Sequence[tuple[str, int]]) -> Table:
    table = Table(box=None, pad_edge=False, padding=(0, GAP, 0, 0), header_style=HEADING)
    table.add_column(Text(first), width=NAME_WIDTH, overflow="fold")
    for name, width in columns:
        table.add_column(Text(name, style=QUIET), justify="right", width=width, overflow="fold")
    return table


def _pairs(evidence: Evidence) -> Iterator[RenderableType]:
    every = [*evidence.pairs, *evidence.against_yardstick]
    if not every:
        return
    level = percent_text(evidence.basis.level, 0)
    columns = [("growth", 8), (f"{level} interval", 18), ("verdict", 11), ("flip ratio", 11)]
    table = _table("Who grew faster, a year", columns)
    for pair in every[:MOST_PAIRS]:
        growth = pair.comparison.growth
        interval = f"{percent_text(growth.low, 1, True)} to {percent_text(growth.high, 1, True)}"
        known = growth.low == growth.low  # not NaN
        table.add_row(
            f"  {pair.first} over {pair.second}",
            percent_text(growth.difference, 1, signed=True),
            interval if known else "-",
            Text(pair.verdict, style=STYLES.get(pair.verdict, "yellow")),
            _flip(pair),
        )
    yield table
    rest = len(every) - MOST_PAIRS
    if rest > 0:
        yield _item(f"and {rest} more comparisons in summary.json")
    yield _note("flip ratio: implied over realized volatility at which the two would have grown alike")
    yield Text()


def _flip(pair: Pairing) -> str:
    if pair.stress is None or pair.stress.premium is None:
        return "-"
    flip: Flip = pair.stress.premium
    return flip.text(flip.value) if flip.found else "none"


def _timing(evidence: Evidence) -> Iterator[RenderableType]:
    rows = [one for one in evidence.timing if one.starts > 1]
    if not rows:
        return
    columns = [("sessions", 8), ("as begun", 9), ("worst", 8), ("best", 8), ("all starts", 10)]
    table = _table("Timing luck: growth a year by start", columns)
    for one in rows:
        growths = (one.as_run, one.lowest, one.highest, one.laddered)
        cells = [percent_text(growth, 1, signed=True) for growth in growths]
        table.add_row(f"  {one.variant}", str(one.cycle_sessions), *cells)
    yield table
    yield _note("over the days that all starts share, so not quite the growth above")
    yield Text()


def _ahead(evidence: Evidence) -> Iterator[RenderableType]:
    rows = [(one, one.own) for one in evidence.prospects if one.own is not None]
    if not rows:
        return
    own = rows[0][1]
    columns = [
        ("1 in 20", 8),
        ("middle", 8),
        ("loss", 6),
        (f"fall of {percent_text(own.drawdown_limit, 0)}", 11),
        (f"{percent_text(own.target, 0)} or more", 11),
    ]
    table = _table("A year of such days, drawn again", columns)
    for one, row in rows:
        table.add_row(
            f"  {one.variant}",
            percent_text(row.low, 1, signed=True),
            percent_text(row.median, 1, signed=True),
            *(
                percent_text(chance, 0)
                for chance in (row.chance_of_loss, row.chance_of_drawdown, row.chance_of_target)
            ),
        )
    yield table
    share = percent_text(own.share, 1)
    yield _note(f"blocks of the record's days, {share} of equity a position, no interest on idle cash")
    yield Text()


def _win_rates(evidence: Evidence) -> Iterator[RenderableType]:
    rows = [(one, one.win_rate) for one in evidence.prospects if one.win_rate is not None]
    if not rows:
        return
    level, target = percent_text(rows[0][1].confidence, 0), percent_text(rows[0][1].target, 0)
    columns = [("achieved", 9), (f"{level} interval", 18), ("break-even", 10), (f"for {target}", 9)]
    table = _table("Win rate: achieved and needed", columns)
    for one, rate in rows:
        table.add_row(
            f"  {one.variant}",
            percent_text(rate.achieved),
            f"{percent_text(rate.low)} to {percent_text(rate.high)}",
            percent_text(rate.break_even),
            "none would do" if rate.needed != rate.needed else percent_text(rate.needed),
        )
    yield table
    yield _note(f"for {target}: needed to gain so much a year, with wins and losses of the size they had")
    yield Text()


def _odds(evidence: Evidence) -> Iterator[RenderableType]:
    rows = [one for one in evidence.prospects if one.odds is not None]
    if not rows:
        return
    yield Text("Odds of the best gain as forecasts", style=HEADING)
    for one in rows:
        yield _item(_odds_line(one))
    yield Text()


def _lists(evidence: Evidence) -> Iterator[RenderableType]:
    """Who is better and who worse than the yardstick, the share of false findings held down."""
    tries, other = evidence.tries, evidence.basis.yardstick
    if len(tries.found) < LEAST_LISTED:
        return
    yield Text(f"Against {other}, at most {percent_text(tries.rate, 0)} of findings false", style=HEADING)
    for word, names in (("better", tries.better), ("worse", tries.worse)):
        yield _item(f"{word}: {'; '.join(names) or 'none'}")
    yield Text()


def _odds_line(one: Prospect) -> str:
    odds = one.odds
    assert odds is not None
    told = f"{one.variant}: {percent_text(odds.forecast)} forecast, {percent_text(odds.observed)} seen"
    interval = f"{percent_text(odds.low)} to {percent_text(odds.high)}"
    score = f"Brier score {number_text(odds.brier, 3)}, skill {percent_text(odds.skill, 1, signed=True)}"
    return f"{told} ({interval}) of {odds.forecasts:,}; {score}"


def _note(text: str) -> Padding:
    return Padding(Text(text, style="dim italic"), (0, 0, 0, 2))


def _item(text: str) -> Padding:
    return Padding(Text(text), (0, 0, 0, 2))
