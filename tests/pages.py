"""Small run folders with a report, and a browser to look at it."""

from __future__ import annotations

from collections.abc import Mapping
from pathlib import Path
from typing import Any

from hedgerow.report.background import background_of
from hedgerow.report.build import write_report
from hedgerow.report.files import write_run
from hedgerow.study.compare import run_study
from hedgerow.study.declare import load_study
from price_tables import walk_frame

CHROMIUM = Path("/usr/bin/chromium")
"""Where Debian's package puts the browser."""

RULE = {
    "name": "Small collar",
    "legs": {
        "call": {
            "sell": "call",
            "expiry": {"days": 7, "listed": "weekly"},
            "strike": {"from_spot": "0%", "snap": "up"},
        },
        "put": {"buy": "put", "expiry": {"with": "call"}, "strike": {"from_spot": "-5%", "snap": "down"}},
    },
}
STUDY: dict[str, Any] = {
    "name": "Short or long",
    "question": "Which of the two?",
    "market": "prices.csv",
    "account": {"cash": 100000, "per_position": "1/2"},
    "pricing": {"volatility": {"blend": [{"close": 21}]}},
    "strategy": RULE,
    "variants": {
        "short": {},
        "long": {"legs.call.expiry.days": 21},
        "cut": {"exit": [{"name": "cut at 1%", "if": {"loss": {"at_least": "1%"}}}]},
    },
    "evidence": {
        "draws": 200,
        "stress": {"ratio": [0.8, 1.0, 1.3], "skew": [-0.11], "half_spread": ["0%", "3%"]},
    },
}


def run_folder(
    folder: Path,
    study: Mapping[str, Any] | None = None,
    symbols: str = "AB",
    sessions: int = 260,
    report: bool = True,
) -> Path:
    """Write the run of a study on invented prices, and its report unless told not to; return its folder.

    Each letter of `symbols` is a symbol.
    """
    prices = folder / "prices"
    prices.mkdir(parents=True)
    frame = walk_frame(symbols, sessions)
    frame.to_csv(prices / "prices.csv", index=False, date_format="%Y-%m-%d")
    result = run_study(load_study({**STUDY, **(study or {})}, prices))
    place = folder / "run"
    write_run(
        place,
        [one.ledger for one in result.results],
        [one.summary for one in result.results],
        result.record(),
        extra=background_of(result),
        evidence=result.evidence,
    )
    if report:
        write_report(place)
    return place
