"""Where a run folder may stand: what is in the way, what is left by a run that was killed, and moving in."""

from __future__ import annotations

import errno
import os
import platform
import re
import shutil
from collections.abc import Collection, Iterable
from fnmatch import fnmatchcase
from itertools import chain
from pathlib import Path

from hedgerow.errors import PlaceError

__all__ = [
    "FINISHED",
    "OWN_FILES",
    "check_place",
    "missing_parents",
    "move_in",
    "part_of",
    "remove_empty",
    "strangers",
    "sweep",
    "take_first",
    "unwritable",
]

FINISHED = "run.yaml"
"""The file that a finished run folder has; it is written last."""

OWN_FILES = (
    "events.parquet",
    "trades.parquet",
    "trades.csv",
    "legs.parquet",
    "equity.parquet",
    "summary.json",
    FINISHED,
    "stress.parquet",
    "stress.csv",
    "variants.parquet",
    "variants.csv",
    "sessions.parquet",
    "walk_forward.parquet",
    "held-out.json",
    "report.html",
    "about.json",
    "background.parquet",
    "shards/manifest.json",
    "shards/batch-*.parquet",
    ".events.parquet.*.part",  # while it is written
)
"""Every file that a run folder may hold, below it; only these are deleted when a run is replaced."""

TAKEN = (errno.ENOTEMPTY, errno.EEXIST, errno.ENOTDIR)


def check_place(folder: str | Path, replace: bool = False, moves_on: bool = False) -> Path:
    """Return the folder as a path when a run may be written there: it is new, empty, or a run to be replaced.

    `moves_on`: that a finished run stands there is no matter, for another name will be taken. Raises
    PlaceError when it is a file, holds other files or a finished run without `replace` being given, lies in
    the folder of a finished run, or where nothing can be written.
    """
    place = Path(folder)
    try:
        if place.exists() and not place.is_dir() and not moves_on:
            raise _refused(place, "a file of this name stands there, and a folder is to be made")
        if place.is_dir() and any(place.iterdir()) and not moves_on:
            _check_taken(place, replace)
        _check_parents(place)
    except OSError as error:
        raise unwritable(place, error) from error
    return place


def _check_taken(place: Path, replace: bool) -> None:
    """Raise PlaceError unless a folder holds a finished run that may be replaced, and nothing else."""
    if not (place / FINISHED).is_file():
        raise _refused(place, "this folder holds other files, which are not those of a run")
    if not replace:
        raise _refused(place, "a finished run stands there and was not to be replaced")
    others = strangers(place, OWN_FILES)
    if others:
        more = f" and {len(others) - 1:,} more" if len(others) > 1 else ""
        raise PlaceError.one(
            str(place),
            "strangers",
            f"the run there is not replaced: `{others[0]}`{more} beside it belongs to no run",
            "a folder is replaced when it holds nothing but the files of a run",
            "move it elsewhere, or name another folder with --out",
        )


def strangers(folder: Path, own: Collection[str]) -> list[str]:
    """Return the files below a folder that are not among its `own` names, in order; empty folders too."""
    found = []
    for path in sorted(folder.rglob("*")):
        name = path.relative_to(folder).as_posix()
        plain_folder = path.is_dir() and not path.is_symlink()
        if plain_folder and (any(path.iterdir()) or any(one.startswith(f"{name}/") for one in own)):
            continue
        if not any(fnmatchcase(name, one) for one in own):
            found.append(name)
    return found


def part_of(place: Path) -> Path:
    """Return the folder in which a run is written before it moves in, named by machine and process."""
    return place.with_name(f".{place.name}.{_machine()}.{os.getpid()}.part")


def sweep(parent: Path, own: Collection[str]) -> None:
    """Take away what runs left in a folder whose processes, on this machine, no longer live."""
    for path in parent.glob(".*.part") if parent.is_dir() else ():
        named = re.fullmatch(rf"\..+\.{re.escape(_machine())}\.(\d+)\.part", path.name)
        if named and path.is_dir() and not _lives(int(named[1])) and not strangers(path, own):
            shutil.rmtree(path, ignore_errors=True)


def _machine() -> str:
    return re.sub(r"[^A-Za-z0-9-]", "-", platform.node()) or "here"


def _lives(process: int) -> bool:
    """Whether a process of this machine lives; in doubt it does."""
    try:
        os.kill(process, 0)
    except ProcessLookupError:
        return False
    except (OSError, OverflowError):
        return True
    return True


def move_in(part: Path, place: Path) -> Path:
    """Put the finished folder in its place; an old run is set aside first and comes back when that fails."""
    if not place.exists():
        os.replace(part, place)
        return place
    aside = place.with_name(f".{place.name}.{os.getpid()}.old")
    os.replace(place, aside)
    try:
        os.replace(part, place)
    finally:
        if not place.exists():
            os.replace(aside, place)
    shutil.rmtree(aside, ignore_errors=True)
    return place


def take_first(part: Path, place: Path, others: Iterable[Path]) -> Path:
    """Put the finished folder in the first place that nothing stands in; return it.

    A folder cannot be renamed onto one that holds something, so that two runs never take the same place.
    Raises OSError when it cannot be moved, PlaceError when all places are taken.
    """
    for one in chain((place,), others):
        try:
            os.rename(part, one)
        except OSError as error:
            if error.errno not in TAKEN:
                raise
        else:
            return one
    raise _refused(place, "a finished run stands there and was not to be replaced")


def _check_parents(place: Path) -> None:
    """Raise when a place lies in a finished run, below a file, or where nothing can be written."""
    parents = place.absolute().parents
    for parent in parents:
        if (parent / FINISHED).is_file() and (parent / OWN_FILES[0]).is_file():
            raise PlaceError.one(
                str(place),
                "within a run",
                f"the run is not written here: {parent} is the folder of a finished run",
                "a run stands beside others, not inside one",
                "name another folder with --out",
            )
    above = next(parent for parent in parents if os.path.lexists(parent))
    if not above.is_dir():
        raise NotADirectoryError(errno.ENOTDIR, os.strerror(errno.ENOTDIR), str(above))
    if not os.access(above, os.W_OK | os.X_OK):
        raise PermissionError(errno.EACCES, os.strerror(errno.EACCES), str(above))


def missing_parents(place: Path) -> list[Path]:
    """Return the folders above a place that are not there yet, the nearest first."""
    return [parent for parent in place.parents if not parent.exists()]


def remove_empty(folder: Path) -> None:
    """Take a folder away when it is empty."""
    if folder.is_dir() and not any(folder.iterdir()):
        folder.rmdir()


def _refused(place: Path, why: str) -> PlaceError:
    return PlaceError.one(
        str(place),
        "place taken",
        f"the run is not written here: {why}",
        "expected a new or an empty folder",
        "name another with --out, or replace a finished run with --replace",
    )


def unwritable(place: Path, error: OSError | PlaceError) -> PlaceError:
    """The error of a folder that cannot be written; why, without the names of files that are gone by now."""
    told = re.search(r"\[errno (\d+)\]", str(error), re.IGNORECASE)
    cause = error if isinstance(error, OSError) else error.__cause__
    number = getattr(cause, "errno", None) or (int(told[1]) if told else 0)
    return PlaceError.one(
        str(place),
        "cannot write",
        f"the run could not be written: {os.strerror(number) if number else 'its files could not be made'}",
        remedy="nothing was left behind",
    )
