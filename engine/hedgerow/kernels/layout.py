"""Integer codes and record layouts shared by compiled code and Python.

Money is in the account's currency, prices per share as traded, quantities in shares (signed: positive is
held, negative is owed), volatilities and rates are annual fractions, dates are proleptic ordinals.
"""

from __future__ import annotations

from typing import NamedTuple

import numpy as np
from numpy.typing import NDArray

Floats = NDArray[np.float64]
Ints = NDArray[np.int64]
Small = NDArray[np.int32]
Bytes = NDArray[np.uint8]
Records = NDArray[np.void]

MAX_LEGS = 4
LOT_SHARES = 100.0
DAYS_A_YEAR = 365.0
SESSIONS_A_YEAR = 252.0

# rights
CALL, PUT = 0, 1

# flags of a symbol-session
HAS_BAR, PAYS, SPLITS, MAY_ENTER, REPORTS, FRESH = 1, 2, 4, 8, 16, 32  # FRESH: volatility known that day

# expiry cycles
DAILY, WEEKLY, MONTHLY, QUARTERLY = 0, 1, 2, 3

# strike rules
FROM_SPOT, STEPS, DELTA, ODDS, DEVIATIONS, SAME_AS, SPEND, ZERO_COST, WORST_WITHIN = 0, 1, 2, 3, 4, 5, 6, 7, 8

# how a strike is moved to the listed grid
SNAP_NEAREST, SNAP_UP, SNAP_DOWN = 0, 1, 2

# operations of a condition, in postfix order
(
    OP_AND,
    OP_OR,
    OP_NOT,
    OP_SIGNAL,  # bit `arg` of the day's signal word
    OP_GAIN_OF_DEBIT,  # gain / net debit at entry >= value
    OP_GAIN_OF_BEST,  # gain / best gain >= value
    OP_LOSS_OF_DEBIT,  # loss / net debit at entry >= value
    OP_LOSS_OF_WORST,  # loss / worst loss >= value
    OP_DAYS_LEFT,  # calendar days to the nearest expiry of a live leg (or of leg `arg` >= 0) <= value
    OP_HELD,  # sessions since entry >= value
    OP_STOCK_UP,  # close / price at entry - 1 >= value
    OP_STOCK_DOWN,  # 1 - close / price at entry >= value
    OP_LEG_LOST,  # share of its entry price that leg `arg` has lost >= value
) = range(13)

# what an event is
(
    KIND_DEPOSIT,  # opening cash
    KIND_OPENED,  # a position exists from here on; its terms stand in the table of terms
    KIND_SHARES,  # shares bought or sold
    KIND_LEG,  # an option leg bought or sold
    KIND_EXPIRED,  # a leg ended worthless
    KIND_EXERCISED,  # a leg held was exercised: its shares change hands at the strike, or cash
    KIND_ASSIGNED,  # a leg written was assigned, at expiry or early
    KIND_DIVIDEND,
    KIND_SPLIT,  # quantity = new shares for one old
    KIND_INTEREST,  # on cash; position -1 unless on cash set aside for one
    KIND_BORROW,  # cost of shares sold short
    KIND_DECLINED,  # an entry not made, with its reason; quantity = how many
    KIND_SIGNALLED,  # an exit, roll or entry decided at this close, to fill later
    KIND_CLOSED,  # a position is over; price = its whole result
    KIND_GONE,  # the history of a symbol ended
    KIND_MARGIN_CALL,  # equity under the maintenance requirement; price = by how much, money
) = range(16)

# why
(
    WHY_NONE,
    WHY_ENTRY,
    WHY_EXPIRY,
    WHY_ASSIGNED_EARLY,
    WHY_STOP,  # resting stock stop, filled at the stop
    WHY_STOP_GAP,  # resting stock stop jumped by the open
    WHY_GONE,  # history ended under the position
    WHY_NO_VOLATILITY,
    WHY_NO_EXPIRY,  # no listed expiry near the wanted days
    WHY_NO_STRIKE,  # the wanted strike is not listed
    WHY_NO_LOT,  # capital too small for one lot
    WHY_NO_CASH,  # cash already used by earlier candidates
    WHY_FULL,  # most positions, or most new a day, reached
    WHY_NET_CREDIT,  # the structure's own conditions at entry, from here on
    WHY_NET_DEBIT,
    WHY_WORST_LOSS,
    WHY_BEST_GAIN,
    WHY_ODDS,
    WHY_BEST_OVER_WORST,
    WHY_SPREAD,
    WHY_ROLL,
    WHY_ADDED,
    WHY_LEFT_OVER,  # what was left when the rest of the position ended
    WHY_OPEN_AT_END,
    WHY_COOLING,
    WHY_MARGIN,
    WHY_LIMIT,
    WHY_GONE_ORDER,  # an order dropped because its market was gone
    WHY_NO_BID,  # nobody would pay a tick for a leg to be sold
) = range(29)
WHY_EXIT_RULE = 100  # + the number of the exit rule, in the order of the file

SHARES_ROW = -1  # `leg` of an event about shares
NO_ROW = -2  # `leg` of an event about neither

EVENT = np.dtype(
    [
        ("session", np.int32),
        ("symbol", np.int32),
        ("position", np.int32),
        ("kind", np.int16),
        ("leg", np.int16),
        ("reason", np.int32),
        ("expiry", np.int32),  # ordinal of the leg's expiry, 0 none
        ("quantity", np.float64),  # shares, signed: what was bought (+) or sold (-)
        ("price", np.float64),  # per share, at which it was filled; a dividend's amount; a premium
        ("mid", np.float64),  # per share, before spread and slippage
        ("fee", np.float64),  # commissions and assignment fees, money >= 0
        ("cash", np.float64),  # what the account received (+) or paid (-), whole cents
        ("strike", np.float64),
        ("spot", np.float64),  # the stock's price at that moment
        ("volatility", np.float64),  # assumed for the leg
    ],
    align=True,
)

# the terms of a position, one record when it is opened; money of the whole position unless said
TERMS = np.dtype(
    [
        ("session", np.int32),
        ("symbol", np.int32),
        ("position", np.int32),
        ("decided", np.int32),  # session of the close at which it was decided
        ("first_expiry", np.int32),  # ordinal of the nearest expiry, 0 none
        ("pad", np.int32),
        ("lots", np.float64),
        ("shares", np.float64),  # signed
        ("stock_price", np.float64),  # per share at the fill
        ("net_debit", np.float64),  # paid for shares and legs before fees, money; negative = received
        ("option_credit", np.float64),  # net premium received (+) or paid (-), money
        ("best_gain", np.float64),  # at the first expiry, before costs and dividends; inf = unbounded
        ("worst_loss", np.float64),  # positive = a loss
        ("break_even", np.float64),  # stock price per share; NaN = none
        ("odds_of_best", np.float64),  # fraction; NaN = unbounded best
        ("odds_of_gain", np.float64),  # chance of ending above zero at the first expiry
        ("reserve", np.float64),  # cash set aside for what could be owed
        ("volatility", np.float64),  # at the money to the first expiry
    ],
    align=True,
)

# the account at each close
DAY = np.dtype(
    [
        ("session", np.int32),
        ("positions", np.int32),
        ("cash", np.float64),
        ("stock", np.float64),  # value of shares held
        ("options", np.float64),  # value of legs at the model's mid
        ("reserved", np.float64),  # part of cash set aside
        ("equity", np.float64),  # cash + stock + options
    ],
    align=True,
)

# one position at one close
MARK = np.dtype(
    [
        ("session", np.int32),
        ("position", np.int32),
        ("shares", np.float64),
        ("spot", np.float64),
        ("gain", np.float64),  # of the position so far, at the model's mid, before the costs of leaving
        ("leg0", np.float64),  # value of each leg, money (quantity x mid)
        ("leg1", np.float64),
        ("leg2", np.float64),
        ("leg3", np.float64),
    ],
    align=True,
)


class SmileModel(NamedTuple):
    """What turns a level and an anchor of volatility into the volatility of one option."""

    kappa: float  # pull to the anchor, per year; 0 none
    ratio: float  # implied over realized
    points: float  # added to the volatility, fraction
    skew: float  # slope in standardized moneyness
    curvature: float
    skew_decay: float  # further fall of skew and curvature with tenor; 0 none
    wing: float  # standardized moneyness beyond which the smile is flat
    report_moves: float  # a report's move in ordinary daily moves; 1 none
    floor: float
    cap: float


class Costs(NamedTuple):
    """What trading takes away."""

    half_spread: float  # share of the premium at the money
    spread_rise: float  # further share of that half-spread per unit of |standardized moneyness|
    floor_ticks: float  # least half-spread, in ticks
    use_ticks: float  # 1: fills are whole ticks, against the trader; 0: exact
    contract_fee: float  # money a contract
    share_fee: float  # money a share
    trade_fee: float  # money a stock trade
    assignment_fee: float  # money an assignment or exercise of one leg
    slippage: float  # share of the stock's price
    borrow: float  # annual fraction of the value of shares sold short


# further operations of a condition; codes go on from those above
OP_HOLDS_SHARES = 13  # the position holds shares now

# what candidates are ranked by, when by a figure of their own structure, per lot at the close that decides
(
    RANK_NONE,  # by the day's score, or by symbol
    RANK_ODDS,  # odds of the best gain, fraction
    RANK_BEST_OVER_WORST,  # best gain over worst loss
    RANK_CREDIT,  # net premium received, over the stock's price
    RANK_BEST,  # best gain, over what the position ties up
    RANK_WORST,  # worst loss, over what the position ties up
) = range(6)

# which way a live leg may be rolled
(
    ROLL_ANY,
    ROLL_UP,  # to a higher strike only
    ROLL_DOWN,  # to a lower strike only
    ROLL_OUT,  # to a later expiry only
    ROLL_UP_AND_OUT,
    ROLL_DOWN_AND_OUT,
) = range(6)

# what an account must have for what could be owed
(
    MARGIN_CASH,  # all of it, in cash
    MARGIN_REGULATION,  # what the regulation's table of strategies asks for
) = range(2)

NO_SECTOR = -1  # a symbol whose sector is not known
