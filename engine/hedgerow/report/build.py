"""report.html: one file that asks nothing of any network, written whole or not at all."""

from __future__ import annotations

import base64
import hashlib
import json
from collections.abc import Mapping, Sequence
from functools import cache
from importlib.resources import files
from pathlib import Path
from typing import Any

import yaml

from hedgerow.events.store import write_atomically
from hedgerow.report.folder import read_folder
from hedgerow.report.model import Page, page_of

__all__ = ["PAGE", "page_text", "write_comparison", "write_report"]

PAGE = "report.html"

STYLES = ("colours.css", "page.css", "charts.css", "ledger.css", "print.css")
SCRIPTS = (
    "base.js",
    "state.js",
    "plot.js",
    "curves.js",
    "calendar.js",
    "results.js",
    "evidence.js",
    "ledger.js",
    "story.js",
    "picture.js",
    "main.js",
)


def write_report(folder: str | Path) -> Path:
    """Write report.html into the folder of a run, from its files alone, and return it.

    Raises PlaceError when the folder is no run, or cannot be written.
    """
    return _written(page_of(read_folder(folder)), Path(folder) / PAGE)


def write_comparison(folders: Sequence[str | Path], place: Path) -> Path:
    """Write one page that compares the runs of several folders to a file, and return it.

    Raises PlaceError when a folder is no run, when the runs share no two sessions, or when the file cannot be
    written.
    """
    from hedgerow.report.joined import join_runs

    return _written(page_of(join_runs([read_folder(one) for one in folders])), place)


def _written(page: Page, place: Path) -> Path:
    text = page_text(page)
    write_atomically(place, lambda part: _write(part, text))
    return place


def _write(part: Path, text: str) -> None:
    part.write_text(text, encoding="utf-8", newline="\n")


def page_text(page: Page) -> str:
    """Return a page as HTML."""
    import jinja2
    from markupsafe import Markup

    loader = jinja2.FunctionLoader(_part)
    world = jinja2.Environment(
        loader=loader, autoescape=True, undefined=jinja2.StrictUndefined, trim_blocks=True, lstrip_blocks=True
    )
    world.filters["yaml"] = _yaml
    style, script = _joined(STYLES), f'"use strict";\n(() => {{\n{_joined(SCRIPTS)}}})();\n'
    shown = {name: Markup(text) for name, text in (("style", style), ("script", script))}
    return world.get_template("page.html").render(
        page=page,
        data=Markup(_json(page.data)),
        style_hash=_hash(style),
        script_hash=_hash(script),
        **shown,
    )


@cache
def _part(name: str) -> str:
    """The text of a file of the page."""
    return files("hedgerow.report").joinpath("pages", name).read_text(encoding="utf-8")


def _joined(names: tuple[str, ...]) -> str:
    return "".join(_part(name) for name in names)


def _json(data: Mapping[str, Any]) -> str:
    """Plain values as JSON that no reader of HTML takes for markup."""
    text = json.dumps(data, ensure_ascii=False, allow_nan=False, separators=(",", ":"))
    for sign in "<>&\u2028\u2029":
        text = text.replace(sign, f"\\u{ord(sign):04x}")
    return text


def _hash(text: str) -> str:
    """The hash by which a content security policy lets a style or script of the page in."""
    digest = hashlib.sha256(text.encode("utf-8")).digest()
    return f"sha256-{base64.b64encode(digest).decode('ascii')}"


def _yaml(value: Any) -> str:
    return yaml.safe_dump(value, sort_keys=False, allow_unicode=True, width=100)
