"""Checks of what is asked: at entry of the whole structure, and in conditions."""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from typing import Any

from hedgerow.rules.base import Between, Bounds
from hedgerow.rules.condition import POSITION_WORDS, DaysLeftTest, GainTest, LossTest
from hedgerow.rules.figures import Percent
from hedgerow.rules.parts import Asked, Parts
from hedgerow.rules.signalwords import SignalTest
from hedgerow.rules.words import Loose, Path, WordsError

__all__ = ["asking_faults"]

_NEED_BEST = ("best_gain", "odds_of_best", "best_over_worst")
_NEED_WORST = ("worst_loss", "best_over_worst")


def asking_faults(parts: Parts) -> Iterator[Loose]:
    """Every fault of conditions and of `accept` that the rest of the strategy shows."""
    yield from _position_words_at_entry(parts)
    yield from _repeated_exits(parts)
    yield from _contradictions(parts)
    if parts.whole:
        yield from _unbounded(parts)
        yield from _ranking(parts)
        yield from _accept(parts)


def _position_words_at_entry(parts: Parts) -> Iterator[Loose]:
    for asked in parts.asked:
        word = next(iter(asked.test.model_dump(by_alias=True)))
        if asked.path[:2] == ("enter", "when") and word in POSITION_WORDS:
            found = "asks about a position before there is one"
            yield Loose((*asked.path, word), "position-word", found, "allowed in `enter.when`: signals")


def _repeated_exits(parts: Parts) -> Iterator[Loose]:
    exits = parts.raw.get("exit")
    seen: dict[str, int] = {}
    for at, rule in enumerate(exits if isinstance(exits, list | tuple) else ()):
        name = rule.get("name") if isinstance(rule, Mapping) else None
        if not isinstance(name, str):
            continue
        if name in seen:
            found = f"is `{name}`, the name of exit {seen[name] + 1} too"
            yield Loose(("exit", at, "name"), "repeated", found, "allowed: a name of its own for each exit")
        seen.setdefault(name, at)


def _contradictions(parts: Parts) -> Iterator[Loose]:
    """Two bounds of one signal that must hold together and cannot."""
    groups: dict[tuple[Any, ...], Asked] = {}
    for asked in parts.asked:
        test, path = asked.test, asked.path
        if not isinstance(test, SignalTest) or test.bounds is None or path[-2] != "all":
            continue
        key = (path[:-1], test.signal, test.params, test.of)
        other = groups.setdefault(key, asked)
        if isinstance(other.test, SignalTest) and not _meet(other.test.bounds, test.bounds):
            found = f"can never hold together with item {int(other.path[-1]) + 1} of the same `all`"
            yield Loose(path, "contradiction", found, "", "let the ranges overlap")


def _meet(one: Bounds | None, other: Bounds | None) -> bool:
    if one is None or other is None:
        return True
    return max(one.low, other.low) <= min(one.high, other.high)


def _unbounded(parts: Parts) -> Iterator[Loose]:
    """Shares of a best gain or worst loss that has no end."""
    for asked in parts.asked:
        test = asked.test
        if isinstance(test, GainTest) and test.gain.of == "best" and parts.rise > 0:
            yield _no_end((*asked.path, "gain", "of"), "best gain", "debit")
        if isinstance(test, LossTest) and test.loss.of == "worst" and parts.rise < 0:
            yield _no_end((*asked.path, "loss", "of"), "worst loss", "debit")
        if isinstance(test, DaysLeftTest) and not parts.names:
            found = "asks for days to an expiry, and the strategy has no legs"
            yield Loose((*asked.path, "days_left"), "no-legs", found, "", "use `held` for a stop in time")
    for word in parts.section("accept"):
        if (word in _NEED_BEST and parts.rise > 0) or (word in _NEED_WORST and parts.rise < 0):
            end = "best gain" if parts.rise > 0 else "worst loss"
            found = f"asks about the {end}, which has no bound in this structure"
            yield Loose(
                ("accept", str(word)), "unbounded", found, "", "take it out, or add the leg that bounds it"
            )


def _ranking(parts: Parts) -> Iterator[Loose]:
    """A figure that ranks candidates and that no candidate of this structure has."""
    rank = parts.section("enter").get("rank")
    by = rank.get("by") if isinstance(rank, Mapping) else None
    figure = by.get("figure") if isinstance(by, Mapping) else None
    path = ("enter", "rank", "by", "figure")
    if (figure in _NEED_BEST and parts.rise > 0) or (figure in _NEED_WORST and parts.rise < 0):
        end = "best gain" if parts.rise > 0 else "worst loss"
        found = f"ranks by the {end}, which has no bound in this structure"
        yield Loose(path, "unbounded", found, "", "rank by another figure, or by a signal")
    elif figure == "net_credit" and not parts.at_entry:
        found = "ranks by premium, and no leg is opened at entry"
        yield Loose(path, "no-legs", found, "", "rank by a signal")


def _no_end(path: Path, what: str, instead: str) -> Loose:
    found = f"is a share of the {what}, which has no bound in this structure"
    return Loose(path, "unbounded", found, f"allowed here: `{instead}`")


def _accept(parts: Parts) -> Iterator[Loose]:
    """Conditions on premium that this structure can never meet."""
    accept, legs = parts.section("accept"), parts.at_entry
    if not legs:
        for word in ("net_credit", "net_debit", "spread_to_premium"):
            if word in accept:
                found = "asks about premium, and no leg is opened at entry"
                yield Loose(("accept", word), "no-legs", found, "", "take it out")
        return
    debit = _debit(accept)
    credit = accept.get("net_credit") in (True, "true")
    if credit and not any(leg.sold for leg in legs):
        yield Loose(("accept", "net_credit"), "never", "can never hold: no leg is sold")
    if debit is not None and debit.low >= 0 and all(leg.sold for leg in legs):
        yield Loose(("accept", "net_debit"), "never", "can never hold: every leg is sold")
    if debit is not None and debit.high < 0 and not any(leg.sold for leg in legs):
        yield Loose(("accept", "net_debit"), "never", "can never hold: no leg is sold")
    if credit and debit is not None and debit.low >= 0:
        yield Loose(("accept", "net_debit"), "contradiction", "can never hold together with `net_credit`")


def _debit(accept: Mapping[Any, Any]) -> Bounds | None:
    try:
        return Between(Percent(-1.0, 1.0)).read(accept["net_debit"]) if "net_debit" in accept else None
    except WordsError:
        return None  # told where it is read
