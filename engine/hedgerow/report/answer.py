"""The answer of a run in words and a few figures: what stands first on its page."""

from __future__ import annotations

import math
from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from typing import Any

from hedgerow.evidence.figures import Curve, Summary
from hedgerow.units import number_text, percent_text

__all__ = ["Answer", "Key", "answer_of", "said", "scored_rows"]

WITHOUT = (
    "No evidence was worked out for this run: its figures stand below; nothing says whether they are luck."
)
Rows = tuple[tuple[str, str, tuple[str, ...]], ...]


@dataclass(frozen=True, slots=True)
class Key:
    """One figure beside the verdict: what it is, its value, and a remark."""

    label: str
    value: str
    remark: str


@dataclass(frozen=True, slots=True)
class Answer:
    """The verdict: its first sentence, the others (the last says what to make of it), and its figures.

    `pair` is the comparison that it speaks of, None without one.
    """

    verdict: str
    headline: str
    sentences: tuple[str, ...]
    keys: tuple[Key, ...]
    pair: Mapping[str, Any] | None


def said(told: Any) -> Any:
    """Return a part of summary.json with each {value, unit, meaning} in it as the value alone."""
    if isinstance(told, Mapping):
        if {"value", "unit", "meaning"} == set(told):
            return told["value"]
        return {name: said(one) for name, one in told.items()}
    if isinstance(told, list):
        return [said(one) for one in told]
    return told


def answer_of(evidence: Mapping[str, Any] | None, summaries: Sequence[Summary]) -> Answer:
    """Return the answer; without evidence one that says so."""
    if evidence is None:
        return Answer("cannot tell", WITHOUT, (), (), None)
    verdict = evidence["verdict"]
    pair = _told_pair(evidence)
    sentences = tuple(str(one) for one in verdict["sentences"])
    word = str(pair["verdict"]) if pair else "cannot tell"
    return Answer(word, str(verdict["headline"]), sentences[1:], tuple(_keys(evidence, pair)), pair)


def _told_pair(evidence: Mapping[str, Any]) -> dict[str, Any] | None:
    """The pair that the verdict speaks of first: the headline, or the only variant and the yardstick."""
    number = evidence["headline_pair"]
    if number is None and not evidence["against_yardstick"]:
        return None
    pair = evidence["against_yardstick"][0] if number is None else evidence["pairs"][number]
    names = ("first", "second", "verdict", "growth", "flip_premium", "flip_spread")
    return {name: said(pair[name]) for name in names}


def _keys(evidence: Mapping[str, Any], pair: Mapping[str, Any] | None) -> list[Key]:
    basis, count = said(evidence["basis"]), said(evidence["tries"]["count"])
    keys = []
    if pair is not None:
        growth, flip = pair["growth"], pair["flip_premium"]
        level = percent_text(basis["level"], 0)
        between = f"{_percent(growth['low'])} to {_percent(growth['high'])}"
        keys.append(
            Key("Difference in growth, a year", _percent(growth["difference"]), f"{level} interval {between}")
        )
        if flip is not None:
            keys.append(_flip_key(flip, level, same=growth["difference"] == 0.0))
    tried = f"{count['in_all']:,}" if count["in_all"] != 1 else "1"
    keys.append(Key("Variants tried on these prices", tried, f"{count['in_study']:,} of them in this study"))
    keys.append(
        Key(
            "Length of the record",
            f"{number_text(basis['years'], 1)} years",
            f"{basis['sessions']:,} sessions",
        )
    )
    return keys


def _flip_key(flip: Mapping[str, Any], level: str, same: bool) -> Key:
    label, assumed = "Flip premium, implied over realized", f"assumed {number_text(flip['assumed'])}"
    span = f"{number_text(flip['least'])} to {number_text(flip['most'])}"
    if same:
        return Key(label, "none", f"the two are the same at every ratio; {assumed}")
    if flip["value"] is None:
        return Key(label, "none", f"no ratio from {span} makes the two equal; {assumed}")
    low, high = (number_text(_known(flip[side])) for side in ("low", "high"))
    low = f"below {number_text(flip['least'])}" if low == "-" else low
    high = f"above {number_text(flip['most'])}" if high == "-" else high
    return Key(label, number_text(flip["value"]), f"{level} interval {low} to {high}; {assumed}")


def _known(value: float | None) -> float:
    return math.nan if value is None else float(value)


def _percent(value: float | None) -> str:
    return percent_text(_known(value), 2, signed=True)


def scored_rows(
    summaries: Sequence[Summary], evidence: Mapping[str, Any] | None
) -> tuple[tuple[str, ...], Rows]:
    """Return the columns and rows of the compact table: variants, the yardstick last."""
    names = (
        "Growth a year",
        "Against yardstick",
        "Interval",
        "Sharpe ratio",
        "Deepest drawdown",
        "Win rate",
        "Break-even",
        "Positions",
        "Value at the end",
    )
    beside = {} if evidence is None else {one["first"]: one for one in evidence["against_yardstick"]}
    rows = [_score(one, beside.get(one.variant)) for one in summaries]
    other = next((one for one in summaries if one.yardstick is not None), None)
    if other is not None and other.yardstick is not None:
        curve = _curve_cells(other.yardstick)
        rows.append(
            (other.yardstick_name, "yardstick", (curve[0], "", "", *curve[1:3], "", "", "", curve[3]))
        )
    return names, tuple(rows)


def _score(summary: Summary, pair: Mapping[str, Any] | None) -> tuple[str, str, tuple[str, ...]]:
    curve = _curve_cells(summary.account)
    against, interval = ("-", "-")
    if pair is not None:
        growth = said(pair["growth"])
        against = percent_text(_known(growth["difference"]), 1, signed=True)
        interval = " to ".join(percent_text(_known(growth[side]), 1, signed=True) for side in ("low", "high"))
    trades = (percent_text(summary.win_rate), percent_text(summary.break_even_win_rate))
    cells = (curve[0], against, interval, *curve[1:3], *trades, f"{summary.positions:,}", curve[3])
    return summary.variant or summary.strategy, "" if pair is None else str(pair["verdict"]), cells


def _curve_cells(curve: Curve) -> tuple[str, str, str, str]:
    return (
        percent_text(curve.growth_a_year, 1, signed=True),
        number_text(curve.sharpe),
        percent_text(curve.deepest_drawdown),
        number_text(curve.last_value, 0),
    )
