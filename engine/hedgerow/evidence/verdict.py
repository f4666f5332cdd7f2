"""The evidence of a study in one paragraph: what a careful adviser would sign, and no more.

It is written from the plain evidence, the part of summary.json: every number in it is looked up there, and
the place is kept beside it.
"""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from dataclasses import dataclass
from typing import Any

from hedgerow.evidence.difference import BETTER, CANNOT_TELL, WORSE
from hedgerow.evidence.telling import Step, Teller, listed_names

__all__ = ["Verdict", "verdict_of"]

OTHER_MEASURES = (("sharpe", "Sharpe ratio"), ("tail_loss", "tail loss"), ("drawdown", "deepest drawdown"))
MOST_NAMED = 6
"""Names that a sentence lists at most."""


@dataclass(frozen=True, slots=True)
class Verdict:
    """The evidence in one paragraph. `numbers` say for each number in it where it stands in the evidence.

    `headline` is the first sentence, which answers the question; `sentences` are all of them in order. Each
    of `numbers` holds `text` as written, `value`, and `at`, the steps that lead to it in the evidence.
    """

    sentences: tuple[str, ...]
    numbers: tuple[Mapping[str, Any], ...]

    @property
    def headline(self) -> str:
        """The sentence that answers the question."""
        return self.sentences[0]

    @property
    def paragraph(self) -> str:
        """All sentences in a row."""
        return " ".join(self.sentences)

    def as_dict(self) -> dict[str, Any]:
        """Return the paragraph, its sentences and its numbers, ready for JSON."""
        told = {"headline": self.headline, "paragraph": self.paragraph, "sentences": list(self.sentences)}
        return told | {"numbers": [dict(number) for number in self.numbers]}


def verdict_of(plain: Mapping[str, Any]) -> Verdict:
    """Return the verdict on plain evidence, as `Evidence.as_dict` gives it."""
    tell = Teller(plain)
    pair, beside = _headline(plain), _beside(plain)
    told = list(_pair(tell, pair) if pair else _yardstick(tell, beside, first=True))
    told += [*_premium(tell, pair or beside), *_spread(tell, pair or beside), *_timing(tell, pair)]
    told += _yardstick(tell, beside, first=False) if pair else ()
    told += [*_tries(tell), *_bottom_line(tell, pair, beside)]
    return Verdict(tuple(line[0].upper() + line[1:] for line in told), tuple(tell.numbers))


def _headline(plain: Mapping[str, Any]) -> tuple[Step, ...]:
    """The path of the pair that the question is about; empty with one variant."""
    number = plain["headline_pair"]
    return () if number is None else ("pairs", number)


def _beside(plain: Mapping[str, Any]) -> tuple[Step, ...]:
    """The path of the leader against the yardstick; empty without a yardstick."""
    places = [n for n, one in enumerate(plain["against_yardstick"]) if one["first"] == plain["leader"]]
    return ("against_yardstick", places[0]) if places else ()


def _pair(tell: Teller, path: tuple[Step, ...]) -> Iterator[str]:
    if not path:
        return
    first, second = tell.at(*path, "first"), tell.at(*path, "second")
    growth = (*path, "growth")
    if tell.at(*path, "verdict") == BETTER:
        yield (
            f"{first} is better than {second}: it grew by {_more(tell, growth)} a year more "
            f"({_interval(tell, growth)}) over {_years(tell)}, {_each(tell, growth)}{_needed(tell, growth)}."
        )
    else:
        yield f"Cannot tell from {_years(tell)} whether {first} or {second} is better: {_unsure(tell, path)}."
    if not _same(tell, growth):
        yield _by_measure(tell, path)


def _unsure(tell: Teller, path: tuple[Step, ...]) -> str:
    growth = (*path, "growth")
    if not tell.known(*growth, "low"):
        return "the record is too short or too still"
    if _same(tell, growth):
        return "they did the same on every day"
    return (
        f"{tell.at(*path, 'first')} grew by {_more(tell, growth)} a year more, {_each(tell, growth)}, but "
        f"anything from {_signed(tell, growth, 'low')} to {_signed(tell, growth, 'high')} fits the record "
        f"({tell.percent('basis', 'level', places=0)} interval){_needed(tell, growth)}"
    )


def _by_measure(tell: Teller, path: tuple[Step, ...], lead: str = "") -> str:
    """By which other measures the first is better, worse, or cannot be told."""
    others = [(name, tell.at(*path, key, "verdict")) for key, name in OTHER_MEASURES]
    if tell.at(*path, "trades"):
        others.append(("result a position", tell.at(*path, "trades", "verdict")))
    groups = [(word, [name for name, told in others if told == word]) for word in (BETTER, WORSE)]
    parts = [f"{word} by {listed_names(names)}" for word, names in groups if names]
    unsure = [name for name, told in others if told == CANNOT_TELL]
    told = f"{lead}{tell.at(*path, 'first')} is {' and '.join(parts)}" if parts else ""
    rest = f"{listed_names(unsure)} cannot tell them apart" if unsure else ""
    return f"{'; '.join(part for part in (told, rest) if part)}."


def _yardstick(tell: Teller, path: tuple[Step, ...], first: bool) -> Iterator[str]:
    """The leader against the yardstick; `first` when there is no pair before it."""
    if not path:
        if first:
            yield "One variant and no yardstick: there is nothing to tell apart."
        return
    name, other, growth = tell.at(*path, "first"), tell.at(*path, "second"), (*path, "growth")
    span = f" over {_years(tell)}" if first else ""
    gap = f"{_signed(tell, growth, 'difference')} a year ({_interval(tell, growth)}){span}"
    verdict = tell.at(*path, "verdict")
    if verdict != CANNOT_TELL:
        yield f"Against {other} {name} is {verdict}: {gap}{_needed(tell, growth) if first else ''}."
    elif not tell.known(*growth, "low") or _same(tell, growth):
        yield f"Against {other} it cannot be told: {name} did the same, or the record is too short."
    else:
        yield f"Against {other} it cannot be told whether {name} is better: {gap}{_needed(tell, growth)}."
    if tell.known(*growth, "low") and not _same(tell, growth):
        yield _by_measure(tell, path, lead="Against it ")


def _premium(tell: Teller, path: tuple[Step, ...]) -> Iterator[str]:
    if not path or not tell.at(*path, "flip_premium"):
        return
    flip = (*path, "flip_premium")
    first, second = tell.at(*path, "first"), tell.at(*path, "second")
    if _same(tell, (*path, "growth")):
        return
    if not tell.known(*flip, "value"):
        ends = f"{tell.flip(*flip, end='least')} to {tell.flip(*flip, end='most')}"
        yield f"No premium tried, implied over realized volatility from {ends}, makes {first} equal {second}."
        return
    lead = "As measured" if tell.at(*path, "verdict") == CANNOT_TELL else "That rests on the premium"
    yield (
        f"{lead}: at {tell.flip(*flip)} of implied over realized volatility "
        f"({_flip_interval(tell, flip)}{_at_other_skews(tell, path)}) {first} would equal {second}, above it "
        f"{tell.at(*flip, 'ahead_above')} is ahead; {tell.flip(*flip, end='assumed')} is assumed."
    )


def _at_other_skews(tell: Teller, path: tuple[Step, ...]) -> str:
    base = tell.at("basis", "skew")
    rows = tell.at(*path, "flip_premium_by_skew")
    told = [
        f"{tell.flip(*path, 'flip_premium_by_skew', n)} at a skew of "
        f"{tell.number(*path, 'flip_premium_by_skew', n, 'skew')}"
        for n, row in enumerate(rows)
        if row["skew"]["value"] != base and row["value"]["value"] is not None
    ]
    return f"; {' and '.join(told)}" if told else ""


def _spread(tell: Teller, path: tuple[Step, ...]) -> Iterator[str]:
    if not path or not tell.at(*path, "flip_spread") or _same(tell, (*path, "growth")):
        return
    flip = (*path, "flip_spread")
    if tell.known(*flip, "value"):
        yield (
            f"By costs the two would be equal at a half-spread of {tell.flip(*flip)} of the premium "
            f"({_flip_interval(tell, flip)}); {tell.flip(*flip, end='assumed')} is assumed."
        )
    else:
        ends = f"{tell.flip(*flip, end='least')} to {tell.flip(*flip, end='most')}"
        yield f"No half-spread from {ends} of the premium makes the two equal."


def _timing(tell: Teller, path: tuple[Step, ...]) -> Iterator[str]:
    rows = {row["variant"]["value"]: n for n, row in enumerate(tell.at("timing"))}
    names = [tell.at(*path, side) for side in ("first", "second")] if path else [tell.at("leader")]
    told = [
        f"{name} grew {_range(tell, ('timing', rows[name]))}"
        for name in names
        if name in rows and tell.at("timing", rows[name], "starts") > 1
    ]
    if not told:
        return
    line = f"Timing luck: by the session on which it begins, {' and '.join(told)}"
    if path and tell.at(*path, "timing") and not _same(tell, (*path, "growth")):
        laddered = tell.percent(*path, "timing", "laddered", places=2, signed=True)
        line += f"; with the account spread over all starts the difference is {laddered} a year"
        if tell.at(*path, "timing", "lowest") < 0.0 < tell.at(*path, "timing", "highest"):
            line += ", though some starts turn the order"
    yield f"{line}."


def _range(tell: Teller, row: tuple[Step, ...]) -> str:
    """The growth of the worst and the best start of a variant."""
    low, high = (tell.percent(*row, end, places=2, signed=True) for end in ("lowest", "highest"))
    starts = tell.number(*row, "starts", places=0)
    if low == high:
        return f"{low} a year from each of {starts} starts"
    told = f"between {low} and {high} a year from {starts} starts"
    if tell.at(*row, "as_run") == tell.at(*row, "highest"):
        told += " (the one used here was the best of them)"
    return told


def _tries(tell: Teller) -> Iterator[str]:
    count = ("tries", "count")
    here, everywhere = tell.at(*count, "in_study"), tell.at(*count, "in_all")
    told = f"Tries: {tell.number(*count, 'in_study', places=0)} {_variants(here)} in this study"
    if everywhere > here:
        told += f", {tell.number(*count, 'in_all', places=0)} on these prices in all"
    best = ("tries", "best_of_many")
    if tell.at(*best) and here == 1:
        told += (
            f"; its Sharpe ratio is {tell.number(*best, 'sharpe')}, and the chance that the true one is "
            f"above nothing is {tell.percent(*best, 'chance_above_nothing', places=0)}, tries not counted"
        )
    elif tell.at(*best):
        chance = tell.percent(*best, "chance_above_luck", places=1)
        told += (
            f"; the best Sharpe ratio is {tell.number(*best, 'sharpe')} ({tell.at(*best, 'best')}), luck "
            f"alone would show about {tell.number(*best, 'sharpe_of_luck')}, and the chance that the true "
            f"one is above that of luck is {chance}"
        )
    yield f"{told}."
    yield from _many(tell)


def _many(tell: Teller) -> Iterator[str]:
    """Who beats the yardstick with all tries of the study counted, and who may be the best."""
    test = tell.at("tries", "superior_to_yardstick")
    if test:
        names, other = test["better"], tell.at("basis", "yardstick")
        gaps = [row["growth_difference"]["value"] for row in tell.at("tries", "false_discovery", "variants")]
        if max(gaps) > 0.0:
            p_value = tell.number("tries", "superior_to_yardstick", "p_value")
            who = _listed(names) if names else "nothing here"
            yield f"Shown to beat {other} with all of these counted: {who} (p-value {p_value})."
        else:
            yield f"Nothing here grew faster than {other}."
    members = tell.at("tries", "cannot_be_told_from_best", "members")
    if tell.at("tries", "count", "in_study") > 2:
        alone = f"With every pair counted {members[0]} alone stands out as the best."
        yield alone if len(members) == 1 else f"Cannot be told from the best: {_listed(members)}."


def _bottom_line(tell: Teller, pair: tuple[Step, ...], beside: tuple[Step, ...]) -> Iterator[str]:
    other = tell.at(*beside, "second") if beside else ""
    against = tell.at(*beside, "verdict") if beside else ""
    if not pair:
        name, told = tell.at("leader"), {BETTER: "for", WORSE: "against"}.get(against)
        if told:
            yield f"So this record speaks {told} {name} in place of {other}."
        elif beside:
            yield f"So this record does not say whether to trade {name} or to hold {other}."
        return
    first, second = tell.at(*pair, "first"), tell.at(*pair, "second")
    if tell.at(*pair, "verdict") == CANNOT_TELL:
        line = f"So this record does not say whether to trade {first} or {second}"
    else:
        line = f"So, if one of the two is traded, this record speaks for {first}"
        if second in tell.at("tries", "cannot_be_told_from_best", "members"):
            line += ", though no longer once every pair is counted"
    ends = {
        BETTER: f", and for {first} over {other}",
        WORSE: f"; it speaks for {other} over either" if _either(tell, pair) else f"; {other} did better",
        CANNOT_TELL: f", nor whether {other} is better",
    }
    if against == CANNOT_TELL and tell.at(*pair, "verdict") != CANNOT_TELL:
        ends[CANNOT_TELL] = f"; whether {other} is better it does not say"
    yield f"{line}{ends.get(against, '')}."


def _either(tell: Teller, pair: tuple[Step, ...]) -> bool:
    """Whether both of a pair are worse than the yardstick."""
    names = [tell.at(*pair, side) for side in ("first", "second")]
    rows = [one for one in tell.at("against_yardstick") if one["first"] in names]
    return len(rows) == 2 and all(row["verdict"] == WORSE for row in rows)


def _same(tell: Teller, growth: tuple[Step, ...]) -> bool:
    return bool(tell.at(*growth, "low") == tell.at(*growth, "high") == 0.0)


def _more(tell: Teller, growth: tuple[Step, ...]) -> str:
    return tell.percent(*growth, "difference", places=2)


def _signed(tell: Teller, growth: tuple[Step, ...], figure: str) -> str:
    return tell.percent(*growth, figure, places=2, signed=True)


def _each(tell: Teller, growth: tuple[Step, ...]) -> str:
    first, second = (tell.percent(*growth, side, places=2, signed=True) for side in ("first", "second"))
    return f"{first} against {second}"


def _interval(tell: Teller, growth: tuple[Step, ...]) -> str:
    low, high = (_signed(tell, growth, end) for end in ("low", "high"))
    return f"{tell.percent('basis', 'level', places=0)} interval {low} to {high}"


def _flip_interval(tell: Teller, flip: tuple[Step, ...]) -> str:
    low, high = (tell.flip(*flip, end=end) for end in ("low", "high"))
    return f"{tell.percent('basis', 'level', places=0)} interval {low} to {high}"


def _needed(tell: Teller, growth: tuple[Step, ...]) -> str:
    if not tell.known(*growth, "years_needed"):
        return ""
    places = 1 if tell.at(*growth, "years_needed") < 10.0 else 0
    years = tell.number(*growth, "years_needed", places=places)
    return f"; to tell a difference of this size about {years} years are needed"


def _years(tell: Teller) -> str:
    return f"{tell.number('basis', 'years', places=1)} years"


def _variants(count: int) -> str:
    return "variant" if count == 1 else "variants"


def _listed(names: list[str]) -> str:
    """Names set apart by semicolons, for they may hold commas and ands of their own."""
    rest = len(names) - MOST_NAMED
    return "; ".join([*names[:MOST_NAMED], *([f"and {rest} others"] if rest > 0 else [])])
