"""The sentences of a sheet, the same in a terminal and on a page."""

from __future__ import annotations

import datetime as dt
import math
from collections.abc import Iterator, Sequence

from hedgerow.desk.held import HOLD, HeldLeg, HeldLine, Trigger
from hedgerow.desk.record import Record
from hedgerow.desk.sheet import DECLINED, HOLDING, OPEN, QUIET, LegLine, Look, Plan, Sheet
from hedgerow.rules.phrases import counted, joined
from hedgerow.units import MISSING, money_text, number_text, percent_text

__all__ = [
    "QUOTES_DECIDE",
    "day_text",
    "facts",
    "grouped",
    "head_lines",
    "held_facts",
    "held_heading",
    "held_leg_cells",
    "held_title",
    "inside_text",
    "leg_cells",
    "limit_text",
    "long_day",
    "plan_title",
    "record_text",
    "sections",
    "why_lines",
]

QUOTES_DECIDE = (
    "Real quotes decide: the premiums below are synthesized. Work each position as one limit order and leave "
    "it when the market asks for more than its limit."
)


def day_text(iso: str) -> str:
    """A date as `21 Mar 2016`."""
    day = dt.date.fromisoformat(iso)
    return f"{day.day} {day:%b %Y}"


def long_day(iso: str) -> str:
    """A date as `Monday 21 March 2016`."""
    day = dt.date.fromisoformat(iso)
    return f"{day:%A} {day.day} {day:%B %Y}"


def head_lines(sheet: Sheet) -> Iterator[str]:
    """What the sheet is about: orders and fills, the account, what the rule earned before."""
    when = "at this close" if sheet.fill == "close" else f"at the next open, {long_day(sheet.next_session)}"
    yield f"What this close decides is filled {when}. {_account(sheet)}"
    yield from sheet.notes
    if sheet.record is None:
        yield "The rule so far: no position of it is over in this record."
    else:
        yield f"The rule so far, on these prices: {record_text(sheet.record)}."


def _account(sheet: Sheet) -> str:
    cash = f"{money_text(sheet.cash, places=0)} {sheet.currency}".strip()
    share = percent_text(sheet.per_position)
    limit = f"a position may take {money_text(sheet.per_position * sheet.equity, places=0)} ({share})"
    if not sheet.positions_known:
        return f"Account: {cash} in cash, nothing held; {limit}."
    held = counted(len(sheet.held), "position")
    worth = money_text(sheet.equity, places=0)
    return f"Account: worth {worth}, of it {cash} in cash, {held} held; {limit}."


def record_text(record: Record) -> str:
    """What positions earned before, with their interval."""
    text = f"{counted_long(record.positions)} over, {percent_text(record.mean, 2, True)} each"
    if math.isfinite(record.low):
        low, high = (percent_text(end, 2, True) for end in (record.low, record.high))
        text += f" ({percent_text(record.level, 0)} interval {low} to {high})"
    else:
        text += " (too few for an interval)"
    return f"{text}, {percent_text(record.won, 0)} won"


def counted_long(count: int) -> str:
    """A count of positions with thousands set apart."""
    return f"{count:,} position" if count == 1 else f"{count:,} positions"


def sections(sheet: Sheet) -> Iterator[tuple[str, tuple[Look, ...]]]:
    """The parts of the list of symbols in which nothing is opened."""
    titles = {
        DECLINED: "Signals say yes, not opened",
        QUIET: "No entry",
        HOLDING: "Held, no further entry",
    }
    for status, title in titles.items():
        looks = sheet.of(status)
        if looks:
            yield f"{title}: {len(looks)}", looks


def opening_title(sheet: Sheet) -> str:
    """How many positions are to be opened."""
    count = len(sheet.of(OPEN))
    return f"To open: {count}" if count else "To open: nothing"


def grouped(looks: Sequence[Look]) -> Iterator[tuple[str, str, list[str]]]:
    """Symbols, close and reasons, one row a symbol; those with one and the same plain reason share a row."""
    same: dict[str, list[Look]] = {}
    for look in looks:
        if not look.tests:
            same.setdefault(look.reason, []).append(look)
    for look in looks:
        alike = [] if look.tests else same[look.reason]
        if len(alike) < 3:
            yield look.symbol, number_text(look.close), why_lines(look)
        elif alike[0] is look:
            names = ", ".join(one.symbol for one in alike)
            yield f"{len(alike)} symbols", "", [f"{look.reason}: {names}"]


def why_lines(look: Look) -> list[str]:
    """Why nothing is opened in a symbol, one line a condition."""
    return [*([look.reason] if look.reason else []), *(test.told() for test in look.tests)]


def plan_title(plan: Plan, currency: str) -> str:
    """Size and money of a position."""
    shares = f"{abs(plan.shares):,.0f} shares" if plan.shares else "no shares"
    verb = {True: "buy ", False: "sell short "}[plan.shares > 0] if plan.shares else ""
    net = "net debit" if plan.net_debit >= 0 else "net credit"
    lots = counted(int(plan.lots), "lot")
    return f"{lots}, {verb}{shares}, {net} {money_text(abs(plan.net_debit), currency, 0)}"


def leg_cells(leg: LegLine) -> tuple[str, str, str, str, str]:
    """A leg: its order, its expiry, the price assumed, the model's value over the stress, its odds."""
    beyond = "" if math.isnan(leg.chance) else f"{percent_text(leg.chance, 0)}"
    stress = f"{number_text(leg.mid)} ({number_text(leg.low)} to {number_text(leg.high)})"
    expiry = f"{day_text(leg.expiry)}, {counted(leg.days, 'day')}"
    return leg.told(), expiry, number_text(leg.price), stress, beyond


def facts(plan: Plan) -> Iterator[tuple[str, str]]:
    """The figures of a position, each with its name."""
    unit, owes = plan.unit, 1.0 if plan.net_debit >= 0 else -1.0
    ends = sorted((owes * plan.debit_low / unit, owes * plan.debit_high / unit))
    yield f"Net {'debit' if owes > 0 else 'credit'} a share", _ranged(owes * plan.net_debit / unit, *ends)
    if plan.legs:
        name = "Options bring a share" if plan.option_credit >= 0 else "Options cost a share"
        sign = 1.0 if plan.option_credit >= 0 else -1.0
        ends = sorted((sign * plan.credit_low / unit, sign * plan.credit_high / unit))
        yield name, _ranged(sign * plan.option_credit / unit, *ends)
    yield "Best gain", _result(plan.best_gain, plan.capital, plan.odds_of_best)
    yield "Worst loss", _result(-plan.worst_loss, plan.capital, math.nan)
    even = "no price" if math.isnan(plan.break_even) else number_text(plan.break_even)
    odds = "" if math.isnan(plan.odds_of_gain) else f", odds of any gain {percent_text(plan.odds_of_gain, 0)}"
    yield "Break-even at", f"{even}{odds}"


def _ranged(value: float, low: float, high: float) -> str:
    text = number_text(value)
    span = f"{number_text(low)} to {number_text(high)}"
    return text if number_text(low) == number_text(high) == text else f"{text} ({span})"


def _result(money: float, stake: float, odds: float) -> str:
    if math.isinf(money):
        return "not bounded"
    share = f" ({percent_text(money / stake, 1, True)})" if stake > 0 else ""
    chance = "" if math.isnan(odds) else f", odds {percent_text(odds, 0)}"
    return f"{number_text(money, 0, True)}{share}{chance}"


def limit_text(plan: Plan) -> str:
    """Up to which price the rule would take a position, and which of its bounds breaks beyond."""
    limit = plan.limit
    if not plan.legs:
        return "The rule sets no bound on price, and no premium was assumed."
    if not limit.rule:
        worst = plan.debit_high / plan.unit
        asks = "debit above" if worst >= 0 else "credit below"
        return (
            f"The rule sets no bound on price. A net {asks} {number_text(abs(worst))} a share is worse than "
            "under any premium assumed here."
        )
    verb = "Pay at most" if limit.net_debit >= 0 else "Take at least"
    whole = f"{verb} {number_text(abs(limit.net_debit))} a share net"
    if limit.options >= 0.0:
        part = f"the options must bring at least {number_text(limit.options)}"
    else:
        part = f"the options may cost at most {number_text(-limit.options)}"
    broken = f"A quote worse than that breaks the rule that {limit.rule}."
    if limit.whole:
        return f"{whole}, wherever the stock then stands; at its close {part}. {broken}"
    return (
        f"{part[0].upper()}{part[1:]} a share: at the stock's close {whole[0].lower()}{whole[1:]}. {broken}"
    )


def inside_text(plan: Plan) -> str:
    """Dividends and reports that fall inside the life, nothing where there are none."""
    return joined([*_dividends(plan.dividends), *_reports(plan.reports)])


def _dividends(dividends: Sequence[tuple[str, float]]) -> Iterator[str]:
    return (f"dividend {number_text(cash)} expected {day_text(day)}" for day, cash in dividends)


def _reports(reports: Sequence[str]) -> Iterator[str]:
    return (f"earnings report {day_text(day)}" for day in reports)


def held_title(line: HeldLine, fill: str) -> tuple[str, str]:
    """What the close decides of a position held, and what it is."""
    since = f"opened {day_text(line.opened)}, {counted(line.sessions, 'session')} ago"
    decided = line.verdict != HOLD and not line.verdict.startswith("over")
    when = (" at this close" if fill == "close" else " at the next open") if decided else ""
    return f"{line.verdict}{when}", since


def held_facts(line: HeldLine) -> Iterator[tuple[str, str]]:
    """Figures of a position held, its triggers and what falls inside its life, each with a name."""
    if line.shares:
        verb = "held" if line.shares > 0 else "sold short"
        yield "Shares", f"{abs(line.shares):,.0f} {verb} at {number_text(line.stock_price)}"
    share = f" ({percent_text(line.gain_share, 1, True)})" if math.isfinite(line.gain_share) else ""
    verb = "brings" if line.leaving >= 0 else "costs"
    leaving = (
        "" if math.isnan(line.leaving) else f", closing all of it {verb} {number_text(abs(line.leaving), 0)}"
    )
    yield "Gain so far", f"{number_text(line.gain, 0, True)}{share}{leaving}"
    best, worst = (
        "not bounded" if math.isinf(end) else number_text(end, 0, True)
        for end in (line.best_gain, -line.worst_loss)
    )
    if line.legs:
        yield "At the next expiry", f"best {best}, worst {worst}, counted from the entry"
    if line.orders:
        yield "To do", "\n".join(line.orders)
    for trigger in line.triggers:
        name = trigger.name.replace("`", "")
        yield name[0].upper() + name[1:], "\n".join(_tests(trigger))
    for leg in line.legs:
        risk = early_text(leg, dict(line.dividends).get(leg.due))
        if risk:
            yield f"Early exercise, {leg.name}", risk
    inside = joined([*_dividends(line.dividends), *_reports(line.reports)])
    if inside:
        yield "Inside its life", inside


def _tests(trigger: Trigger) -> Iterator[str]:
    """The parts of a trigger, each with its distance; one that holds without effect says so."""
    if trigger.joined:
        yield trigger.joined
    for test in trigger.tests:
        if test.unit == "price":
            yield "the close has reached it" if test.holds else test.text
        elif test.unit == "":
            yield f"{test.text}: {test.now()}"
        elif math.isnan(test.value):
            yield f"{test.text}: cannot be reached"
        else:
            gap = test.gap()
            far = "reached" if test.holds else f"{gap} away" if gap else "not reached"
            yield f"{test.text}: now {test.now()}, {far}"
    if trigger.idle:
        yield "asked for, but what the rule would move to is not listed, not allowed or brings no money"


def early_text(leg: HeldLeg, dividend: float | None) -> str:
    """The risk that a written leg is exercised early; nothing where there is none to speak of."""
    value = f"time value {number_text(leg.time_value)}"
    if leg.right == "put":
        return f"its holder would exercise it now ({value})" if leg.exercised else ""
    if not leg.due:
        return ""
    paid = "" if dividend is None else f", dividend {number_text(dividend)}"
    odds = f"in the money by then: odds {percent_text(leg.reach, 0)}"
    verb = "exercised" if leg.exercised else "not exercised"
    ex_date = f"before the ex-date expected {day_text(leg.due)}"
    return f"at this price {verb} {ex_date} ({value}{paid}); {odds}"


def held_leg_cells(leg: HeldLeg) -> tuple[str, str, str, str, str, str]:
    """A leg held: what it is, its expiry, its price then and now, the strike's distance, its odds."""
    chance = MISSING if math.isnan(leg.chance) else percent_text(leg.chance, 0)
    return (
        f"{leg.contracts:g} {leg.right} {leg.strike:g} {leg.side}",
        f"{day_text(leg.expiry)}, {counted(leg.days, 'day')}",
        number_text(leg.paid),
        number_text(leg.mid),
        percent_text(leg.away, 1, True),
        chance,
    )


def held_heading(sheet: Sheet) -> str:
    """How many positions are held."""
    return f"Held: {len(sheet.held)}" if sheet.held else "Held: nothing"
