"""A sheet as one page of HTML, without scripts and without anything to be fetched; made to be printed too."""

from __future__ import annotations

from collections.abc import Iterable, Iterator, Sequence
from html import escape

from hedgerow.desk import phrases as say
from hedgerow.desk.held import HOLD, HeldLine
from hedgerow.desk.sheet import OPEN, Look, Plan, Sheet
from hedgerow.units import number_text

__all__ = ["page_of"]

STYLE = """
:root{--ink:#23281f;--quiet:#6d7466;--rule:#dcdfd3;--ground:#fbfbf7;--card:#fff;--leaf:#3f6b3a;--clay:#a4552f}
@media (prefers-color-scheme:dark){:root{--ink:#e6e8df;--quiet:#9aa191;--rule:#3a3f35;--ground:#1b1e18;
--card:#22261f;--leaf:#9cc48f;--clay:#e0a07c}}
*{box-sizing:border-box}
body{margin:0;background:var(--ground);color:var(--ink);
font:16px/1.5 Georgia,'Times New Roman',serif;font-variant-numeric:tabular-nums}
main{max-width:62rem;margin:0 auto;padding:2.5rem 1.5rem 4rem}
h1{font-size:1.9rem;font-weight:normal;margin:0 0 .2rem}
h2{font-size:1.15rem;font-weight:bold;margin:2.4rem 0 .6rem;padding-top:.7rem;
border-top:2px solid var(--leaf)}
h3{font-size:1.1rem;margin:0 0 .6rem;font-weight:normal}
h3 b{font-size:1.25rem;margin-right:.5rem}
p{margin:.3rem 0;max-width:48rem}
.day{color:var(--leaf);margin:0 0 1rem}
.quiet,th,dt{color:var(--quiet)}
article{background:var(--card);border:1px solid var(--rule);border-radius:.4rem;padding:1.1rem 1.3rem;
margin:0 0 1rem;break-inside:avoid}
.wide{overflow-x:auto}
table{border-collapse:collapse;width:100%;font-size:.95rem}
th{font-weight:normal;text-align:left}
th,td{padding:.3rem .9rem .3rem 0;vertical-align:top;border-bottom:1px solid var(--rule)}
tr:last-child td{border-bottom:0}
.n{text-align:right;white-space:nowrap}
dl{display:grid;grid-template-columns:11.5rem 1fr;gap:.2rem 1rem;margin:.9rem 0 0;font-size:.95rem}
dd{margin:0}
.limit{color:var(--clay)}
.calm{color:var(--leaf)}
.legs td,.legs th{white-space:nowrap}
dd ul,td ul{margin:0;padding:0;list-style:none}
.cautions{font-size:.88rem;color:var(--quiet)}
@media (max-width:40rem){dl{grid-template-columns:1fr;gap:0}dd{margin-bottom:.5rem}}
@media print{body{background:#fff}main{padding:0}}
"""


def page_of(sheet: Sheet) -> str:
    """Return a sheet as a page; every text on it is escaped."""
    title = sheet.name + (f", {sheet.variant}" if sheet.variant else "")
    body = "\n".join(_body(sheet, title))
    head = f"<title>{escape(title)}: {escape(sheet.as_of)}</title>\n<style>{STYLE}</style>"
    meta = '<meta charset="utf-8">\n<meta name="viewport" content="width=device-width, initial-scale=1">'
    return f'<!doctype html>\n<html lang="en">\n{meta}\n{head}\n<main>\n{body}\n</main>\n</html>\n'


def _body(sheet: Sheet, title: str) -> Iterator[str]:
    yield tag("h1", title)
    yield f'<p class="day">The close of {escape(say.long_day(sheet.as_of))}</p>'
    yield from (tag("p", line) for line in say.head_lines(sheet))
    if sheet.positions_known:
        yield tag("h2", say.held_heading(sheet))
        yield from (_held(line, sheet.fill) for line in sheet.held)
    yield tag("h2", say.opening_title(sheet))
    if sheet.of(OPEN):
        yield f'<p class="quiet">{escape(say.QUOTES_DECIDE)}</p>'
    yield from (_opening(look, sheet.currency) for look in sheet.of(OPEN))
    for heading, looks in say.sections(sheet):
        yield tag("h2", heading)
        yield _list(looks)
    yield tag("h2", "Before you rely on this")
    yield '<div class="cautions">' + "".join(tag("p", caution) for caution in sheet.cautions) + "</div>"


def tag(name: str, text: str) -> str:
    """A text inside a tag, escaped."""
    return f"<{name}>{escape(text)}</{name}>"


def lines(texts: Iterable[str]) -> str:
    """Texts one under the other."""
    found = list(texts)
    return (
        escape(found[0]) if len(found) == 1 else "<ul>" + "".join(tag("li", text) for text in found) + "</ul>"
    )


def _opening(look: Look, currency: str) -> str:
    assert look.plan is not None
    plan = look.plan
    title = f"<h3><b>{escape(look.symbol)}</b> at {number_text(look.close)} &nbsp; "
    title += f"{escape(say.plan_title(plan, currency))}</h3>"
    return f"<article>{title}{_legs(plan)}<dl>{''.join(_facts(look, plan))}</dl></article>"


def _held(line: HeldLine, fill: str) -> str:
    verdict, since = say.held_title(line, fill)
    title = f"<h3><b>{escape(line.symbol)}</b> at {number_text(line.close)} &nbsp; "
    look = "calm" if line.verdict == HOLD else "limit"
    title += f'<span class="{look}">{escape(verdict)}</span> &nbsp; '
    title += f'<span class="quiet">{escape(since)}</span></h3>'
    names = ("Leg", "Expiry", "Then", "Now", "Strike away", "In the money")
    legs = _rows(names, map(say.held_leg_cells, line.legs)) if line.legs else ""
    pairs = (tag("dt", name) + f"<dd>{lines(text.splitlines())}</dd>" for name, text in say.held_facts(line))
    return f"<article>{title}{legs}<dl>{''.join(pairs)}</dl></article>"


def _legs(plan: Plan) -> str:
    names = ("Order", "Expiry", "Assumed", "Model over the stress", "In the money")
    return _rows(names, map(say.leg_cells, plan.legs)) if plan.legs else ""


def _rows(names: Sequence[str], rows: Iterable[Sequence[str]]) -> str:
    head = "".join(f"<th{_right(at)}>{escape(name)}</th>" for at, name in enumerate(names))
    body = "".join(
        "<tr>" + "".join(f"<td{_right(at)}>{escape(cell)}</td>" for at, cell in enumerate(cells)) + "</tr>"
        for cells in rows
    )
    return f'<div class="wide"><table class="legs"><tr>{head}</tr>{body}</table></div>'


def _right(column: int) -> str:
    return ' class="n"' if column >= 2 else ""


def _facts(look: Look, plan: Plan) -> Iterator[str]:
    for name, text in say.facts(plan):
        yield tag("dt", name) + tag("dd", text)
    yield tag("dt", "Limit") + f'<dd class="limit">{escape(say.limit_text(plan))}</dd>'
    if look.tests:
        yield tag("dt", "Conditions") + f"<dd>{lines(test.told() for test in look.tests)}</dd>"
    if look.record is not None:
        yield tag("dt", "Before, in this stock") + tag("dd", say.record_text(look.record))
    inside = say.inside_text(plan)
    if inside:
        yield tag("dt", "Inside its life") + tag("dd", inside)


def _list(looks: Sequence[Look]) -> str:
    rows = "".join(
        f'<tr><td>{escape(name)}</td><td class="n">{close}</td><td>{lines(why)}</td></tr>'
        for name, close, why in say.grouped(looks)
    )
    return (
        f'<div class="wide"><table><tr><th></th><th class="n">Close</th><th>Why</th></tr>{rows}</table></div>'
    )
