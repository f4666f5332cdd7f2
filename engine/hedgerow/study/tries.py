"""How many variants were ever tried on the same prices: a small record beside the runs of a project.

One line of JSON a variant: `data`, the fingerprint of the prices, `variant`, a hash of everything about it
that can change its result, and its name and study for people. A variant that was tried before has its line
already, whatever it was called then, and is not counted again.
"""

from __future__ import annotations

import hashlib
import json
import os
from collections.abc import Mapping
from pathlib import Path
from typing import Any

from hedgerow.market import Market
from hedgerow.rules.schema import Strategy
from hedgerow.study.declare import Study
from hedgerow.study.trials import trials_of

__all__ = ["RECORD", "keys_of", "record_tries", "tried_before"]

RECORD = "tries.jsonl"
"""Name of the record; it lies in the folder of the runs."""

_CHANGES_RESULTS = ("symbols", "window", "account", "pricing", "extensions", "costs", "held_out")
"""What a study says, its rules aside, that can change a result; the market is known by its fingerprint."""
_FOR_PEOPLE = ("name", "about")
"""What a strategy says that changes nothing."""


def keys_of(study: Study) -> dict[str, str]:
    """Return the key of every variant of a study, or of its grid, by name: 32 digits of a SHA-256."""
    plain, trials = study.plain(), trials_of(study)
    shared = {word: plain[word] for word in _CHANGES_RESULTS if word in plain}
    return {trials.name(number): _key(shared, trials.strategy(number)) for number in range(len(trials))}


def _key(shared: Mapping[str, Any], strategy: Strategy) -> str:
    rule = {word: value for word, value in strategy.plain().items() if word not in _FOR_PEOPLE}
    words = _without_kinds([shared, rule])
    text = json.dumps(words, sort_keys=True, separators=(",", ":"), default=str)
    return hashlib.sha256(text.encode("utf-8")).hexdigest()[:32]


def _without_kinds(value: Any) -> Any:
    """Return words in which 10 and 10.0 are the same number, as they are to whoever wrote them."""
    if isinstance(value, Mapping):
        return {str(word): _without_kinds(under) for word, under in value.items()}
    if isinstance(value, list | tuple):
        return [_without_kinds(item) for item in value]
    return float(value) if isinstance(value, int) and not isinstance(value, bool) else value


def tried_before(folder: str | Path, market: Market) -> frozenset[str]:
    """Return the keys of all variants recorded in a folder as tried on a market's prices.

    A line that cannot be read, cut short by a crash for example, is passed over: the record is a count, and a
    count that is one too low is better than a run that cannot be made. Nothing there means none.
    """
    try:
        lines = (Path(folder) / RECORD).read_text(encoding="utf-8", errors="replace").splitlines()
    except OSError:
        return frozenset()
    rows = [_row(line) for line in lines]
    return frozenset(
        row["variant"] for row in rows if row.get("data") == market.fingerprint and "variant" in row
    )


def _row(line: str) -> dict[str, str]:
    try:
        row = json.loads(line)
    except ValueError:
        return {}
    return {str(k): str(v) for k, v in row.items()} if isinstance(row, dict) else {}


def record_tries(
    folder: str | Path, study: Study, market: Market, keys: Mapping[str, str] | None = None
) -> bool:
    """Add the variants of a study that are not in the folder's record; return whether it could be written.

    `keys` are those of `keys_of`, worked out when None. The new lines go to the end in one piece, so that
    runs side by side do not mix theirs.
    """
    known = tried_before(folder, market)
    lines = [
        json.dumps({"data": market.fingerprint, "variant": key, "name": name, "study": study.name})
        for name, key in (keys_of(study) if keys is None else keys).items()
        if key not in known
    ]
    if not lines:
        return True
    try:
        Path(folder).mkdir(parents=True, exist_ok=True)
        place = os.open(Path(folder) / RECORD, os.O_WRONLY | os.O_CREAT | os.O_APPEND, 0o666)
        try:
            os.write(place, "".join(f"{line}\n" for line in dict.fromkeys(lines)).encode("utf-8"))
        finally:
            os.close(place)
    except OSError:
        return False
    return True
