"""Record layouts of what the walk reads and of what it keeps while it walks.

Everything here is a plain record of numbers, so that compiled steps pass pointers around instead of copies.
Prices are per share as traded, dates proleptic ordinals, quantities shares (signed), rates annual fractions.
"""

from __future__ import annotations

from typing import Any, NamedTuple

import numpy as np

from hedgerow.kernels.layout import MAX_LEGS, Bytes, Costs, Floats, Ints, Records, SmileModel

# what a symbol looks like at one close
BAR = np.dtype(
    [
        ("open", np.float64),
        ("high", np.float64),
        ("low", np.float64),
        ("close", np.float64),
        ("level", np.float64),  # volatility last known; NaN never yet
        ("anchor", np.float64),  # volatility in the long run
        ("split", np.float64),  # new shares for one old, before this session's open
        ("pay_cash", np.float64),  # the next dividend a trader would expect, per share
        ("pay_ordinal", np.int32),  # when; 0 none
        ("pay_gap", np.int32),  # calendar days between dividends; 0 only once
        ("report", np.int32),  # ordinal of the next announced report's reaction; 0 none known
        ("signs", np.int32),  # HAS_BAR and its like; `flags` would be a name of numpy's own records
    ],
    align=True,
)

# what happens to a symbol before a session's open
ACTION = np.dtype(
    [
        ("dividend", np.float64),  # ordinary and special together
        ("special", np.float64),
        ("split", np.float64),  # new shares for one old
    ],
    align=True,
)

SESSION = np.dtype(
    [
        ("ordinal", np.int64),
        ("rate", np.float64),
        ("low_tick", np.float64),  # of premiums below 3.00
        ("high_tick", np.float64),
        ("exercise_threshold", np.float64),
        ("expiry", np.int64, (MAX_LEGS,)),  # chosen for a leg made at this close, ordinal; 0 none listed
    ],
    align=True,
)

# one leg as the rule describes it
LEG_SPEC = np.dtype(
    [
        ("side", np.float64),  # +1 bought, -1 written
        ("ratio", np.float64),  # contracts per 100 shares
        ("strike_value", np.float64),
        ("right", np.int32),
        ("with_leg", np.int32),  # shares the expiry of that leg; -1 own
        ("cycle", np.int32),
        ("strike_rule", np.int32),
        ("strike_leg", np.int32),
        ("snap", np.int32),
        ("roll_at_expiry", np.int32),
        ("roll_credit", np.int32),  # rolled only when that brings money in
        ("roll_start", np.int32),
        ("roll_length", np.int32),
        ("add_start", np.int32),
        ("add_length", np.int32),
        ("roll_way", np.int32),  # the only way a live leg may be rolled, ROLL_ANY when free
    ],
    align=True,
)

MOST_EXITS = 24

OP = np.dtype([("value", np.float64), ("code", np.int32), ("arg", np.int32)], align=True)

# the rule as a whole, the account and the walk's own switches
COSTS = np.dtype([(name, np.float64) for name in Costs._fields])
TENORS = 128

# what the days to an expiry and the rate decide; the walk works it out once, since all symbols share it
TENOR = np.dtype(
    [
        ("days", np.float64),  # calendar days to expiry
        ("rate", np.float64),
        ("discount", np.float64),
        ("years", np.float64),
        ("root", np.float64),  # of the years
        ("weight", np.float64),  # of today's level against the anchor
        ("scale", np.float64),  # of skew and curvature; 0 nothing worked out yet
    ],
    align=True,
)
SMILE = np.dtype([(name, np.float64) for name in SmileModel._fields] + [("tenors", TENOR, (TENORS,))])

PLAN = np.dtype(
    [
        ("shares", np.float64),  # +1 long, -1 short, 0 none
        ("stop", np.float64),  # fraction from the entry price; 0 none
        ("opening_cash", np.float64),
        ("per_position", np.float64),  # share of equity
        ("net_credit", np.float64),  # 1: the options must bring money in
        ("net_debit_most", np.float64),  # bounds; -inf and inf when free
        ("worst_least", np.float64),
        ("worst_most", np.float64),
        ("best_least", np.float64),
        ("best_most", np.float64),
        ("odds_least", np.float64),
        ("odds_most", np.float64),
        ("ratio_least", np.float64),
        ("spread_most", np.float64),
        ("most_positions", np.int32),
        ("most_new", np.int32),
        ("interest", np.int32),
        ("fill_close", np.int32),
        ("legs", np.int32),
        ("exits", np.int32),
        ("marks", np.int32),  # 1: one mark a position and close is kept
        ("modern_from", np.int32),  # ordinal from which today's strike spacing is listed; 0 always
        ("ladder", np.int32),  # positions a symbol at once
        ("spacing", np.int32),  # sessions between entries of one symbol
        ("cooling", np.int32),  # sessions without entry after a losing position
        ("moves", np.int32),  # 1: some leg is rolled or added later
        ("judged", np.int32),  # 1: an entry has to know best, worst, odds or what could be owed
        ("order", np.int32, (MAX_LEGS,)),  # legs in the order in which their strikes are chosen
        ("exit_start", np.int32, (MOST_EXITS,)),  # of each exit rule, in the operations
        ("exit_length", np.int32, (MOST_EXITS,)),
        ("specs", LEG_SPEC, (MAX_LEGS,)),
        ("rank_figure", np.int32),  # figure of the structure by which candidates are ranked, RANK_NONE: score
        ("rank_low", np.int32),  # 1: the lowest figure comes first
        ("keep_shares", np.int32),  # 1: shares that an assignment brings are kept, where the rule holds none
        ("most_sector", np.int32),  # positions a sector at once
        ("margin", np.int32),  # what must stand behind what could be owed
    ],
    align=True,
)

FLAT, ORDERED, OPEN = 0, 1, 2  # a slot's position
# a slot's leg: none, held, to open (with the position, or again after expiry), to add for once, to roll
NONE, LIVE, WANTED, ADDING, MOVING = 0, 1, 2, 3, 4

LEG_STATE = np.dtype(
    [
        ("quantity", np.float64),
        ("strike", np.float64),
        ("entry_price", np.float64),
        ("mid", np.float64),
        ("wanted_strike", np.float64),
        ("volatility", np.float64),
        ("moneyness", np.float64),  # standardized, absolute
        ("expiry", np.int32),
        ("wanted_expiry", np.int32),
        ("status", np.int32),
        ("right", np.int32),
    ],
    align=True,
)

POSITION = np.dtype(
    [
        ("shares", np.float64),
        ("lots", np.float64),
        ("stock_price", np.float64),  # at entry, per share in today's shares
        ("stop_price", np.float64),  # 0 none
        ("flows", np.float64),  # every cash flow so far
        ("outlay", np.float64),  # paid for shares and legs before fees, received counted off
        ("stake", np.float64),  # money the gain is measured on
        ("best_gain", np.float64),
        ("worst_loss", np.float64),
        ("reserve", np.float64),
        ("promised", np.float64),  # cash an order will need
        ("last_close", np.float64),
        ("gain", np.float64),
        ("score", np.float64),  # by which its symbol's entry is ranked, high first
        ("symbol", np.int32),
        ("status", np.int32),
        ("position", np.int32),
        ("entered", np.int32),  # session of the fill
        ("decided", np.int32),
        ("closing", np.int32),  # reason of an ordered close; 0 none
        ("silent", np.int32),  # sessions without a bar in a row
        ("left", np.int32),  # session of the last close; -1 never
        ("lost", np.int32),  # 1: the last position of this slot lost
        ("stop_from", np.int32),  # first session at which the stop rests
        ("soonest", np.int32),  # ordinal of the nearest expiry held; 0 none
        ("orders", np.int32),  # legs to be traded at the next fill
        ("written_put", np.int32),  # 1: a put is owed
        ("legs", LEG_STATE, (MAX_LEGS,)),
    ],
    align=True,
)

TOTALS = np.dtype(
    [
        ("cash", np.float64),
        ("reserved", np.float64),
        ("promised", np.float64),
        ("equity", np.float64),
        ("required", np.float64),  # initial margin of what is held, money; 0 in a cash account
        ("kept", np.float64),  # maintenance margin of what is held, money
        ("events", np.int64),
        ("terms", np.int64),
        ("marks", np.int64),
        ("days", np.int64),
        ("next_position", np.int32),
        ("open", np.int32),
        ("ordered", np.int32),
        ("new_today", np.int32),
        ("waiting", np.int32),  # entries ordered for the next open
    ],
    align=True,
)


class Clock(NamedTuple):
    """The moment at which an option is valued."""

    ordinal: float  # of the day
    extra_days: float  # of the day still to go, in days
    rate: float
    american: int  # 1: exercise is possible before expiry
    low_tick: float
    high_tick: float
    split: float = 1.0  # new shares for one old since the close whose bar is looked at


class Scene(NamedTuple):
    """One symbol at one session: today's records and yesterday's (in the first session today's again)."""

    session: int
    american: int
    before: Any  # BAR
    yesterday: Any  # SESSION
    bar: Any  # BAR
    today: Any  # SESSION


class Desk(NamedTuple):
    """What every step may need: the plan, the account's totals, and where events are written."""

    plan: Any  # PLAN
    costs: Any  # COSTS
    smile: Any  # SMILE
    totals: Any  # TOTALS
    events: Records
    terms: Records
    ops: Records
    scratch: Floats  # (64,)


class World(NamedTuple):
    """Everything the walk reads and keeps, by name."""

    bars: Records  # (T, N)
    actions: Records  # (T, N)
    sessions: Records  # (T,)
    american: Bytes  # (N,)
    sectors: Ints  # (N,) codes; NO_SECTOR unknown
    may_enter: Bytes  # (T, N)
    words: Ints  # (T, N) bits of the day's signals, or (1, 1)
    rank: Floats  # (T, N) score, or (1, 1)
    ops: Records
    plan: Records  # (1,)
    costs: Records  # (1,)
    smile: Records  # (1,)
    totals: Records  # (1,)
    positions: Records  # (slots,)
    events: Records
    terms: Records
    days: Records
    marks: Records
    scratch: Floats  # (64,)
