"""A sheet written to a folder: all of its files, or none."""

from __future__ import annotations

import json
import shutil
from collections.abc import Callable
from pathlib import Path

from hedgerow.desk.page import page_of
from hedgerow.desk.sheet import Sheet
from hedgerow.errors import PlaceError
from hedgerow.report.files import harmless
from hedgerow.report.place import missing_parents, move_in, part_of, remove_empty, unwritable

__all__ = ["SHEET_FILES", "json_of", "lay_down", "write_sheet"]

SHEET_FILES = ("today.html", "today.csv", "today.json")


def json_of(sheet: Sheet) -> str:
    """Return a sheet as JSON text."""
    return json.dumps(sheet.as_dict(), indent=2, ensure_ascii=False, allow_nan=False) + "\n"


def write_sheet(sheet: Sheet, folder: str | Path) -> Path:
    """Write SHEET_FILES into a folder and return it; an earlier sheet there is replaced.

    Raises PlaceError when the folder holds anything else, or cannot be written; then it is as it was.
    """
    place = Path(folder)

    def fill(part: Path) -> None:
        (part / "today.html").write_text(page_of(sheet), encoding="utf-8")
        (part / "today.json").write_text(json_of(sheet), encoding="utf-8")
        harmless(sheet.to_frame()).to_csv(part / "today.csv", index=False, lineterminator="\n")

    lay_down(place, _check, fill)
    return place


def lay_down(place: Path, check: Callable[[Path], None], fill: Callable[[Path], None]) -> None:
    """Fill a folder beside its place and move it in, once `check` has let it pass; nothing is left half-done.

    Raises PlaceError when that cannot be.
    """
    whole = place.absolute()  # `.` has no name of its own
    part, made, done = part_of(whole), missing_parents(whole), False
    try:
        check(place)
        part.mkdir(parents=True)
        fill(part)
        move_in(part, whole)
        done = True
    except OSError as error:
        raise unwritable(place, error) from error
    finally:
        shutil.rmtree(part, ignore_errors=True)
        for parent in () if done else made:
            remove_empty(parent)


def _check(place: Path) -> None:
    """Raise PlaceError when a folder is no place for a sheet."""
    if place.exists() and not place.is_dir():
        found = "the sheet is not written here: a file of this name stands there, and a folder is to be made"
        raise PlaceError.one(str(place), "place taken", found, remedy="name another with --out")
    held = {path.name for path in place.iterdir()} if place.is_dir() else set()
    if held - set(SHEET_FILES):
        found = "the sheet is not written here: this folder holds other files"
        raise PlaceError.one(str(place), "place taken", found, "expected a new or an empty folder")
