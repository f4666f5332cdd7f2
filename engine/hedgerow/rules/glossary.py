"""The rule language at a glance: every word, what may stand after it, and what it means."""

from __future__ import annotations

from collections.abc import Iterator
from typing import Any, NamedTuple, get_args

from pydantic import BaseModel

from hedgerow.rules.base import Between, Words
from hedgerow.rules.condition import DaysLeft, Fallen, GainOf, LegLost, LossOf, Moved, Sessions
from hedgerow.rules.entering import CoolDown, Enter, FigureValue, Ladder, On, Rank
from hedgerow.rules.legs import Expiry, Leg, Roll, Spend, Strike
from hedgerow.rules.schema import Accept, ExitRule, Stop, Strategy
from hedgerow.rules.vocabulary import SignalWords, signal_names, signal_words
from hedgerow.rules.words import Choice, Choices, Flag, Name, Scalar, Text, listed

__all__ = ["Row", "Section", "sections"]


class Row(NamedTuple):
    """One word: what may stand after it, and what it means."""

    word: str
    allowed: str
    meaning: str


class Section(NamedTuple):
    """The words of one mapping."""

    title: str
    rows: list[Row]


_MODELS: tuple[tuple[str, type[Words]], ...] = (
    ("A strategy", Strategy),
    ("A leg, under legs.NAME", Leg),
    ("expiry of a leg", Expiry),
    ("strike of a leg", Strike),
    ("spend of a strike", Spend),
    ("roll of a leg", Roll),
    ("accept, of the whole structure at entry", Accept),
    ("enter", Enter),
    ("on, under enter", On),
    ("rank, under enter", Rank),
    ("by, under rank, in place of a signal", FigureValue),
    ("cool_down, under enter", CoolDown),
    ("ladder, under enter", Ladder),
    ("exit, a list", ExitRule),
    ("stop", Stop),
)

_POSITION: tuple[tuple[str, type[Words], str], ...] = (
    ("gain", GainOf, "the position has gained so much, of its net debit or of its best gain"),
    ("loss", LossOf, "the position has lost so much, of its net debit or of its worst loss"),
    ("days_left", DaysLeft, "so many calendar days or fewer to the nearest expiry, or to that of one leg"),
    ("held", Sessions, "so many sessions or more since the entry was filled"),
    ("stock_up", Moved, "the stock has risen so much from its price at entry"),
    ("stock_down", Fallen, "the stock has fallen so much from its price at entry"),
    ("leg_lost", LegLost, "the option of one leg has lost such a share of its price at entry"),
)

_MEANINGS: dict[str, str] = {
    "Strategy.name": "what it is called in tables",
    "Strategy.about": "a paragraph for readers",
    "Strategy.shares": "100 shares a lot held, sold short, or no shares",
    "Strategy.legs": "up to four legs, each under a name of its own",
    "Strategy.after_assignment": "what becomes of shares that an assigned put brings where shares are none",
    "Strategy.accept": "what the structure must be at entry, else the entry is declined",
    "Strategy.enter": "when a position may be opened; left out: at every close without one",
    "Strategy.exit": "rules to leave, asked in order at each close; the first that holds wins",
    "Strategy.stop": "a resting order in the shares; it ends the whole position",
    "Strategy.fill": "where decisions of a close are filled: the next open, or that close",
    "Leg.sell": "what is sold; exactly one of sell and buy",
    "Leg.buy": "what is bought; exactly one of sell and buy",
    "Leg.expiry": "when it expires",
    "Leg.strike": "where its strike lies: exactly one rule",
    "Leg.ratio": "contracts for each 100 shares",
    "Leg.roll": "when it is made again by its own rules",
    "Leg.add_when": "opened not with the position but later, when this holds",
    "Expiry.days": "calendar days away; exactly one of days and with",
    "Expiry.with": "the same expiry as another leg",
    "Expiry.listed": "the cycle of expiries; further out only longer cycles are listed",
    "Expiry.choose": "the nearest expiry, or the first that is at least so far",
    "Strike.from_spot": "distance from the stock's price",
    "Strike.steps": "listed strikes from the money; 0 is the one that snap finds at the price",
    "Strike.delta": "the strike of that delta, its sign left out",
    "Strike.odds": "the strike beyond which the stock ends with that chance",
    "Strike.deviations": "standard deviations of the log price to expiry, from the price",
    "Strike.same_as": "the strike of another leg",
    "Strike.spend": "the strike whose premium is a share of another leg's",
    "Strike.zero_cost_with": "the strike at which two legs cost nothing together",
    "Strike.worst_loss_within": "the strike that keeps the worst loss within a percent of the net debit",
    "Strike.snap": "how the wanted strike moves to a listed one",
    "Spend.share": "at most this share is spent",
    "Spend.of": "the leg whose premium is spent",
    "Roll.at": "made again when it ends at expiry",
    "Roll.if": "closed and made again when this holds",
    "Roll.direction": "rolled only to a higher or lower strike, a later expiry, or both",
    "Roll.only_for": "rolled only if that brings money in",
    "Accept.net_credit": "the options together bring money in",
    "Accept.net_debit": "what the options cost together, of the stock's price",
    "Accept.worst_loss": "the worst loss, of the net debit",
    "Accept.best_gain": "the best gain, of the net debit",
    "Accept.odds_of_best": "the chance of ending at the best gain",
    "Accept.best_over_worst": "the best gain over the worst loss",
    "Accept.spread_to_premium": "the bid-ask spread of all legs, of their premium",
    "Enter.when": "what the market must show; signals only",
    "Enter.on": "the sessions at whose close a position may be opened; exactly one of three",
    "Enter.rank": "who comes first when capital is short",
    "Enter.cool_down": "a pause in a symbol after a position in it has lost",
    "Enter.ladder": "several positions of one symbol at once, opened apart",
    "On.weekday": "that weekday; none in a week in which it is no session",
    "On.first_session_of": "the first session of each such period",
    "On.expiry_of": "sessions on which listed expiries of that cycle fall",
    "FigureValue.figure": "a figure of the candidate's own structure, as accept knows it",
    "CoolDown.sessions": "so many sessions without an entry",
    "Ladder.positions": "so many at once, each with its part of per_position",
    "Ladder.spacing": "sessions between two entries at least",
    "Rank.by": "the number that ranks",
    "Rank.order": "whether high or low numbers come first",
    "ExitRule.name": "what the ledger calls this reason",
    "ExitRule.if": "when to leave",
    "Stop.below_entry": "for shares held: below the price at entry",
    "Stop.above_entry": "for shares sold short: above the price at entry",
}

_KINDS = {
    "legs": "a mapping of a name to each leg",
    "expiry": "a mapping, see below",
    "strike": "a mapping, see below",
    "roll": "a mapping, see below",
    "spend": "a mapping, see below",
    "accept": "a mapping, see below",
    "enter": "a mapping, see below",
    "rank": "a mapping, see below",
    "exit": "a list of mappings, see below",
    "stop": "a mapping, see below",
    "by": "a signal that is a number, or a figure",
    "on": "a mapping, see below",
    "cool_down": "a mapping, see below",
    "ladder": "a mapping, see below",
    "if": "a condition",
    "when": "a condition",
    "add_when": "a condition",
}


def sections() -> list[Section]:
    """Every section of the language, in the order in which a file is written."""
    found = [Section(title, list(_rows(model))) for title, model in _MODELS]
    found.append(Section("Conditions", list(_conditions())))
    found.append(Section("Signals", [_signal(words) for words in map(signal_words, signal_names()) if words]))
    return found


def _rows(model: type[Words]) -> Iterator[Row]:
    for name, field in model.model_fields.items():
        word = field.alias or name
        if not word.startswith("<"):
            allowed = _KINDS.get(word) or _allowed(_scalar((field.annotation, *field.metadata)))
            yield Row(word, allowed, _MEANINGS[f"{model.__name__}.{word}"])


def _scalar(parts: tuple[Any, ...]) -> Scalar | None:
    """The scalar among an annotation's parts."""
    for part in parts:
        if isinstance(part, Scalar):
            return part
        inner = _scalar(get_args(part))
        if inner is not None:
            return inner
    return None


def _allowed(scalar: Scalar | None) -> str:
    if isinstance(scalar, Choice):
        return " | ".join(scalar.words)
    if isinstance(scalar, Choices):
        return " | ".join(scalar.words) + ", or a list"
    if isinstance(scalar, Flag):
        return "true" if scalar.only_true else "true | false"
    if isinstance(scalar, Text):
        return "text"
    if isinstance(scalar, Name):
        return "the name of a leg"
    if isinstance(scalar, Between):
        return f"{{{' | '.join(scalar.words)}: {_short(scalar.unit)}}}"
    return _short(scalar)


def _short(scalar: Scalar | None) -> str:
    text = str(getattr(scalar, "allowed", ""))
    return text.removeprefix("allowed: ").removesuffix(", written with its % sign").removeprefix("a ")


def _conditions() -> Iterator[Row]:
    yield Row("all", "a list of conditions", "every one of them holds")
    yield Row("any", "a list of conditions", "at least one of them holds")
    yield Row("not", "a condition", "it does not hold")
    yield Row("signal", "a name, its parameters, a bound", "what the market shows; see the signals")
    for word, model, meaning in _POSITION:
        inner = (f"{name}: {_allowed(_field_scalar(model, name))}" for name in model.model_fields)
        yield Row(word, "{" + ", ".join(inner) + "}", meaning)
    yield Row("holds_shares", "true", "the position holds shares now")


def _field_scalar(model: type[BaseModel], name: str) -> Scalar | None:
    field = model.model_fields[name]
    return _scalar((field.annotation, *field.metadata))


def _signal(words: SignalWords) -> Row:
    given = [
        f"{item.name}" if item.default is None else f"{item.name}: {item.default:g}"
        for item in words.parameters
    ]
    if words.values:
        bound = f"is: {listed(words.values).replace('`', '')}"
    elif words.unit is None:
        bound = "yes or no"
    else:
        bound = _short(words.unit)
    phrase = words.signal.phrase.format(**{item.name: item.name.upper() for item in words.parameters})
    return Row(words.name, "; ".join([", ".join(given), bound] if given else [bound]), phrase)
