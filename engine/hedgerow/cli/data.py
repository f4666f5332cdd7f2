"""`hedgerow data`: look at prices before they are used."""

from __future__ import annotations

import json
from pathlib import Path
from typing import TYPE_CHECKING, Annotated, Any, NoReturn

import typer

if TYPE_CHECKING:
    from rich.console import RenderableType

    from hedgerow.market import Market

app = typer.Typer(help="Look at prices before they are used.", no_args_is_help=True)
WIDTH = 100
MOST_ROWS = 60


@app.callback()
def _data() -> None:
    """Look at prices before they are used."""


@app.command()
def check(
    place: Annotated[
        Path, typer.Argument(help="A folder, a CSV file or a Parquet file.", show_default=False)
    ],
    as_json: Annotated[bool, typer.Option("--json", help="Print one JSON object for programs.")] = False,
) -> None:
    """Read prices and say what was found in them: ends with 0 when they can be used, with 2 when not."""
    from hedgerow.errors import DataError
    from hedgerow.market import load_market

    try:
        market = load_market(place)
    except DataError as error:
        _print_faults(error, place, as_json)
        _end(error.exit_code)
    if as_json:
        typer.echo(json.dumps(summary(market), ensure_ascii=False, indent=2))
        return
    _print(_described(market), _findings(market))


def _end(code: int) -> NoReturn:
    raise typer.Exit(code)


def summary(market: Market) -> dict[str, Any]:
    """Return what was read and found, in plain values for JSON; counts, ISO dates, text."""
    bars = market.last_bar - market.first_bar
    return {
        "source": market.source,
        "symbols": list(market.symbols),
        "first_session": str(market.dates[0]),
        "last_session": str(market.dates[-1]),
        "sessions": len(market.dates),
        "bars": int((market.close == market.close).sum()),
        "ended_early": [
            name
            for name, last, span in zip(market.symbols, market.last_bar, bars, strict=True)
            if last < len(market.dates) - 1 and span >= 0
        ],
        "dividends": int((market.dividend > 0).sum()),
        "special_dividends": int((market.special > 0).sum()),
        "splits": int((market.split != 1.0).sum()),
        "reports": len(market.reports),
        "currency": market.currency,
        "adjustment": market.adjustment,
        "fingerprint": market.fingerprint,
        "findings": [
            {"severity": f.severity, "code": f.code, "symbol": f.symbol, "date": f.date, "text": f.text}
            for f in market.findings
        ],
    }


def _print_faults(error: Any, place: Path, as_json: bool) -> None:
    if as_json:
        faults = [
            {"where": f.where, "line": f.line, "column": f.column, "code": f.code, "text": str(f)}
            for f in error.faults
        ]
        typer.echo(json.dumps({"source": str(place), "faults": faults}, ensure_ascii=False, indent=2))
        return
    count = len(error.faults)
    typer.echo(f"{place} cannot be used: {count} fault{'' if count == 1 else 's'}", err=True)
    for fault in error.faults:
        typer.echo(f"  {fault}", err=True)


def _described(market: Market) -> RenderableType:
    """Return the table of what was read."""
    from rich.table import Table

    read = summary(market)
    ended = read["ended_early"]
    shown = ", ".join(market.symbols[:12]) + (" and others" if len(market.symbols) > 12 else "")
    rows = (
        ("source", read["source"]),
        ("symbols", f"{len(market.symbols):,}: {shown}"),
        ("sessions", f"{read['sessions']:,}, {read['first_session']} to {read['last_session']}"),
        ("bars", f"{read['bars']:,}"),
        ("history ends early", f"{len(ended):,}" + (f": {', '.join(ended[:12])}" if ended else "")),
        ("dividends", f"{read['dividends']:,}, and {read['special_dividends']:,} special"),
        ("splits", f"{read['splits']:,}"),
        ("reports", f"{read['reports']:,}"),
        ("prices", f"in {market.currency}, adjustment as stated: {market.adjustment}"),
        ("fingerprint", market.fingerprint),
    )
    table = Table(box=None, show_header=False, pad_edge=False)
    table.add_column(no_wrap=True)
    table.add_column(overflow="fold")
    for row in rows:
        table.add_row(*row)
    return table


def _findings(market: Market) -> RenderableType:
    """Return the table of findings, warnings first, the first of them where there are many."""
    from rich.table import Table

    if not market.findings:
        return "No findings."
    counts = [sum(f.severity == word for f in market.findings) for word in ("warning", "note")]
    table = Table(title=f"warnings: {counts[0]:,}, notes: {counts[1]:,}", title_justify="left")
    for name in ("severity", "symbol", "date"):
        table.add_column(name, no_wrap=True)
    table.add_column("finding", overflow="fold")
    for finding in market.findings[:MOST_ROWS]:
        table.add_row(finding.severity, finding.symbol, finding.date, finding.text)
    more = len(market.findings) - MOST_ROWS
    if more > 0:
        table.caption = f"{more:,} more findings are in --json"
    return table


def _print(*parts: RenderableType) -> None:
    from rich.box import ASCII2
    from rich.console import Console
    from rich.table import Table

    console = Console(width=WIDTH, highlight=False, markup=False)
    for part in parts:
        if isinstance(part, Table) and part.box is not None and not console.is_terminal:
            part.box = ASCII2
        console.print(part)
