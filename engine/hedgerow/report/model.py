"""What the page of a run holds, made from its folder: words for the template, columns for the charts."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from typing import Any

from hedgerow.evidence.figures import Curve, Summary
from hedgerow.report.answer import Answer, answer_of, said, scored_rows
from hedgerow.report.curves import attribution_of, curves_of, volatility_of
from hedgerow.report.draws import FAN_LEVELS, differences_of, fans_of
from hedgerow.report.folder import RunFolder
from hedgerow.report.pack import column
from hedgerow.report.rows import ACCOUNT_ROWS, SECTIONS
from hedgerow.report.trade_columns import legs_of, pictures_of, trades_of

__all__ = ["Page", "Table", "page_of"]


@dataclass(frozen=True, slots=True)
class Table:
    """A table of text: its column names, and rows of a heading, a unit and cells, which a title has not."""

    names: tuple[str, ...]
    rows: tuple[tuple[str, str, tuple[str, ...]], ...]


@dataclass(frozen=True, slots=True)
class Page:
    """A page: words for the template, and `data`, plain values, for the charts."""

    title: str
    question: str
    span: str
    answer: Answer
    cautions: tuple[str, ...]
    scores: Table
    figures: Table
    about: Mapping[str, Any]
    run: Mapping[str, Any]
    data: Mapping[str, Any]


def page_of(folder: RunFolder) -> Page:
    """Return the page of a run."""
    first = folder.summaries[0]
    money = f", money in {first.currency}" if first.currency else ""
    return Page(
        title=str(folder.about["name"]),
        question=str(folder.about["question"]),
        span=f"{first.first_date} to {first.last_date}, {first.sessions:,} sessions{money}",
        answer=answer_of(folder.evidence, folder.summaries),
        cautions=tuple(folder.about["cautions"]),
        scores=Table(*scored_rows(folder.summaries, folder.evidence)),
        figures=_figures(folder.summaries),
        about=folder.about,
        run=folder.run,
        data=_data(folder),
    )


def _figures(summaries: Sequence[Summary]) -> Table:
    """Every figure as a row, variants as columns, the yardstick last."""
    other = next((one for one in summaries if one.yardstick is not None), None)
    curves: list[Curve] = [one.account for one in summaries]
    names = [one.variant or one.strategy for one in summaries]
    if other is not None and other.yardstick is not None:
        curves.append(other.yardstick)
        names.append(other.yardstick_name)
    rows: list[tuple[str, str, tuple[str, ...]]] = [("Account", "", ())]
    rows += [(row.label, row.unit, tuple(row.say(curve) for curve in curves)) for row in ACCOUNT_ROWS]
    empty = ("",) * (len(names) - len(summaries))
    for heading, lines in SECTIONS:
        rows.append((heading, "", ()))
        rows += [(row.label, row.unit, tuple(row.say(one) for one in summaries) + empty) for row in lines]
    return Table(tuple(names), tuple(rows))


def _data(folder: RunFolder) -> dict[str, Any]:
    """The columns of every chart."""
    evidence = folder.evidence
    return {
        "currency": folder.currency,
        "yardstick_name": folder.summaries[0].yardstick_name,
        "curves": curves_of(folder),
        "months": attribution_of(folder.ledgers),
        "volatility": volatility_of(folder),
        "trades": trades_of(folder.ledgers),
        "legs": legs_of(folder.ledgers),
        "pictures": pictures_of(folder.ledgers),
        "evidence": None if evidence is None else _plain_evidence(evidence),
        "stress": _stress(folder),
        "differences": differences_of(folder),
        "fans": {"levels": list(FAN_LEVELS), "variants": fans_of(folder)},
    }


def _plain_evidence(evidence: Mapping[str, Any]) -> dict[str, Any]:
    """What the charts need of the evidence, values only."""
    pairs = [*evidence["pairs"], *evidence["against_yardstick"]]
    kept = ("first", "second", "verdict", "growth", "flip_premium", "flip_spread")
    return {
        "basis": said(evidence["basis"]),
        "pairs": [said({name: pair[name] for name in kept}) for pair in pairs],
        "headline": evidence["headline_pair"],
        "timing": said(evidence["timing"]),
        "variants": said(
            [
                {"variant": one["variant"], "odds": one["odds"], "own": one["forward"]["own_share"]}
                for one in evidence["variants"]
            ]
        ),
    }


def _stress(folder: RunFolder) -> dict[str, Any] | None:
    """The cells of the stress as columns; names as numbers of a list."""
    frame = folder.stress
    if frame.empty:
        return None
    quanta = {"ratio": 1e-4, "skew": 1e-4, "half_spread": 1e-4}
    numbers = ("ratio", "skew", "half_spread", "first_growth", "second_growth", "difference", "low", "high")
    columns = {name: column(frame[name].to_numpy("float64"), quanta.get(name, 1e-6)) for name in numbers}
    names = list(dict.fromkeys([*frame["first"], *frame["second"]]))
    codes = {name: code for code, name in enumerate(names)}
    sides = {side: column([codes[one] for one in frame[side]]) for side in ("first", "second")}
    return {"names": names, **sides, **columns}
