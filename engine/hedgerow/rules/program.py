"""From a strategy to the arrays the walk runs: legs, expiries, conditions in postfix order, signals as bits.

Parts of a condition that look only at the market are worked out here, once for all sessions; what depends on
the position is left to the walk.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass, field, replace

import numpy as np

from hedgerow.errors import RulesError
from hedgerow.kernels import layout
from hedgerow.kernels.layout import Bytes, Floats, Ints, Records
from hedgerow.kernels.state import MOST_EXITS, OP, PLAN
from hedgerow.market.sessions import Regime, choose_expiries
from hedgerow.rules.base import Bounds
from hedgerow.rules.condition import walked
from hedgerow.rules.entering import Enter, FigureValue
from hedgerow.rules.occasions import occasions
from hedgerow.rules.schema import (
    AllOf,
    AnyOf,
    Condition,
    DaysLeftTest,
    GainTest,
    HeldTest,
    HoldsSharesTest,
    Leg,
    LegLostTest,
    LossTest,
    NotOf,
    SignalTest,
    SignalValue,
    StockDownTest,
    StockUpTest,
    Strategy,
)
from hedgerow.rules.truth import Asked, Truth, Values, truths_of

__all__ = ["Program", "Values", "compile_strategy"]

Chosen = dict[tuple[int, int, bool], Ints]
"""Expiries at every session of one market, by cycle, days wanted and whether it is at least as many."""

MOST_SIGNALS = 62
CYCLES = {
    "daily": layout.DAILY,
    "weekly": layout.WEEKLY,
    "monthly": layout.MONTHLY,
    "quarterly": layout.QUARTERLY,
}
SNAPS = {"nearest": layout.SNAP_NEAREST, "up": layout.SNAP_UP, "down": layout.SNAP_DOWN}
STRIKES = {
    "from_spot": layout.FROM_SPOT,
    "steps": layout.STEPS,
    "delta": layout.DELTA,
    "odds": layout.ODDS,
    "deviations": layout.DEVIATIONS,
    "same_as": layout.SAME_AS,
    "spend": layout.SPEND,
    "zero_cost_with": layout.ZERO_COST,
    "worst_loss_within": layout.WORST_WITHIN,
}
FIGURES = {
    "odds_of_best": layout.RANK_ODDS,
    "best_over_worst": layout.RANK_BEST_OVER_WORST,
    "net_credit": layout.RANK_CREDIT,
    "best_gain": layout.RANK_BEST,
    "worst_loss": layout.RANK_WORST,
}
WAYS = {
    "any": layout.ROLL_ANY,
    "up": layout.ROLL_UP,
    "down": layout.ROLL_DOWN,
    "out": layout.ROLL_OUT,
    "up and out": layout.ROLL_UP_AND_OUT,
    "down and out": layout.ROLL_DOWN_AND_OUT,
}


@dataclass(frozen=True, eq=False)
class Program:
    """A strategy as arrays; T sessions, N symbols, L legs. See `kernels.state.World` for their meaning."""

    strategy: Strategy
    plan: Records  # (1,), the strategy's part of it
    expiries: Ints  # (L, T) chosen at each close, ordinals
    ops: Records
    may_enter: Bytes  # (T, N)
    words: Ints  # (T, N), or (1, 1) without signals in exits and rolls
    rank: Floats  # (T, N), or (1, 1) without ranking

    def entering(self, traded: Bytes) -> Program:
        """The same program, entering only symbols marked in `traded`, shape (N,)."""
        return replace(self, may_enter=np.ascontiguousarray(self.may_enter & traded[np.newaxis, :]))


@dataclass
class _Bits:
    """The signals met so far, each with its bit, and the operations written so far."""

    asked: Asked
    truths: list[Truth] = field(default_factory=list)
    ops: list[tuple[float, int, int]] = field(default_factory=list)

    def bit_of(self, truth: Truth) -> int:
        """The bit of an array of truths, a new one unless it is known. Raises RulesError beyond 62."""
        for bit, known in enumerate(self.truths):
            if known is truth or np.array_equal(known, truth):
                return bit
        if len(self.truths) == MOST_SIGNALS:
            raise RulesError.one(
                "strategy",
                "signals",
                f"exits and rolls look at more than {MOST_SIGNALS} different signals",
                f"allowed: at most {MOST_SIGNALS}",
            )
        self.truths.append(truth)
        return len(self.truths) - 1

    def word(self, shape: tuple[int, int]) -> Ints:
        """All truths as the bits of one integer a session and symbol."""
        if not self.truths:
            return np.zeros((1, 1), np.int64)
        out = np.zeros(shape, np.int64)
        for bit, truth in enumerate(self.truths):
            out |= truth.astype(np.int64) << bit
        return out


def about_position(condition: Condition) -> bool:
    """Whether any part of a condition looks at the position held."""
    return any(not isinstance(part, AllOf | AnyOf | NotOf | SignalTest) for _, part in walked(condition))


def _position_op(condition: Condition, legs: dict[str, int]) -> tuple[float, int, int]:
    """The operation of one word about the position: (value, code, argument)."""
    if isinstance(condition, GainTest):
        gain = condition.gain
        return gain.at_least, layout.OP_GAIN_OF_BEST if gain.of == "best" else layout.OP_GAIN_OF_DEBIT, -1
    if isinstance(condition, LossTest):
        loss = condition.loss
        return loss.at_least, layout.OP_LOSS_OF_WORST if loss.of == "worst" else layout.OP_LOSS_OF_DEBIT, -1
    if isinstance(condition, DaysLeftTest):
        left = condition.days_left
        return float(left.at_most), layout.OP_DAYS_LEFT, -1 if left.leg is None else legs[left.leg]
    if isinstance(condition, HeldTest):
        return float(condition.held.at_least), layout.OP_HELD, -1
    if isinstance(condition, StockUpTest):
        return condition.stock_up.at_least, layout.OP_STOCK_UP, -1
    if isinstance(condition, StockDownTest):
        return condition.stock_down.at_least, layout.OP_STOCK_DOWN, -1
    if isinstance(condition, HoldsSharesTest):
        return 1.0, layout.OP_HOLDS_SHARES, -1
    assert isinstance(condition, LegLostTest)
    return condition.leg_lost.at_least, layout.OP_LEG_LOST, legs[condition.leg_lost.leg]


def _write_ops(condition: Condition, legs: dict[str, int], bits: _Bits, turned: bool = False) -> None:
    """Append a condition in postfix order, or its negation when `turned`.

    A negation goes down to the single words, so that a signal that is not known is no either way.
    """
    if not about_position(condition):
        truth = truths_of(condition, bits.asked)[int(turned)]
        bits.ops.append((0.0, layout.OP_SIGNAL, bits.bit_of(truth)))
    elif isinstance(condition, NotOf):
        _write_ops(condition.condition, legs, bits, not turned)
    elif isinstance(condition, AllOf | AnyOf):
        joint = layout.OP_AND if isinstance(condition, AllOf) is not turned else layout.OP_OR
        for number, part in enumerate(condition.conditions):
            _write_ops(part, legs, bits, turned)
            if number > 0:
                bits.ops.append((0.0, joint, -1))
    else:
        bits.ops.append(_position_op(condition, legs))
        if turned:
            bits.ops.append((0.0, layout.OP_NOT, -1))


def _ops_of(condition: Condition | None, legs: dict[str, int], bits: _Bits) -> tuple[int, int]:
    """Append a condition; return where it starts and how long it is, (0, 0) for none."""
    if condition is None:
        return 0, 0
    start = len(bits.ops)
    _write_ops(condition, legs, bits)
    return start, len(bits.ops) - start


def _strike_value(leg: Leg) -> float:
    """The number of a leg's strike rule; 0 where the rule has none."""
    value = getattr(leg.strike, leg.strike.rule)
    if leg.strike.spend is not None:
        return leg.strike.spend.share
    return 0.0 if isinstance(value, str) else float(value)


def _spec(spec: Records, leg: Leg, legs: dict[str, int], cycles: dict[str, str], bits: _Bits) -> None:
    """Fill one leg's record."""
    spec["side"], spec["ratio"] = leg.sign, leg.ratio
    spec["right"] = layout.CALL if leg.right == "call" else layout.PUT
    spec["with_leg"] = -1 if leg.expiry.with_leg is None else legs[leg.expiry.with_leg]
    spec["cycle"] = CYCLES[cycles[leg.name]]
    spec["strike_rule"], spec["strike_value"] = STRIKES[leg.strike.rule], _strike_value(leg)
    spec["strike_leg"] = -1 if leg.strike.partner is None else legs[leg.strike.partner]
    spec["snap"] = SNAPS[leg.strike.snap]
    if leg.roll is not None:
        spec["roll_at_expiry"] = int(leg.roll.at_expiry)
        spec["roll_way"] = WAYS[leg.roll.direction]
        spec["roll_credit"] = int(leg.roll.only_for == "credit")
        spec["roll_start"], spec["roll_length"] = _ops_of(leg.roll.condition, legs, bits)
    spec["add_start"], spec["add_length"] = _ops_of(leg.add_when, legs, bits)


def root_of(leg: Leg, strategy: Strategy) -> Leg:
    """The leg whose expiry rule a leg follows."""
    while leg.expiry.with_leg is not None:
        leg = strategy.leg(leg.expiry.with_leg)
    return leg


def _order(strategy: Strategy, legs: dict[str, int]) -> Ints:
    """Legs in an order in which each comes after those its expiry and strike refer to.

    A leg whose strike is found from the worst loss comes after all that are not.
    """
    left = sorted(strategy.legs, key=lambda leg: leg.strike.rule == "worst_loss_within")
    done: list[int] = []
    while left:
        for leg in left:
            needs = {legs[name] for name in (leg.expiry.with_leg, leg.strike.partner) if name is not None}
            if needs <= set(done):
                done.append(legs[leg.name])
                left.remove(leg)
                break
        else:
            names = ", ".join(leg.name for leg in left)
            found = f"the legs {names} wait for each other"
            raise RulesError.one(
                "strategy", "cycle", found, "a leg refers to legs that do not refer back to it"
            )
    return np.array(done, np.int64)


def _bounds(plan: Records, least: str, most: str, bounds: Bounds | None) -> None:
    """Write the two ends of a bound, free ends infinite; an end without a name is not written."""
    ends = bounds or Bounds()
    if least:
        plan[least] = ends.low
    if most:
        plan[most] = ends.high


def _legs(plan: Records, strategy: Strategy, bits: _Bits) -> None:
    """Write legs, the order of their choosing, and exits."""
    legs = {leg.name: number for number, leg in enumerate(strategy.legs)}
    cycles = {leg.name: root_of(leg, strategy).expiry.listed for leg in strategy.legs}
    for number, leg in enumerate(strategy.legs):
        _spec(plan["specs"][number], leg, legs, cycles, bits)
    plan["order"][: len(legs)] = _order(strategy, legs)
    if len(strategy.exit) > MOST_EXITS:
        allowed = f"allowed: at most {MOST_EXITS}"
        raise RulesError.one("strategy", "exits", f"there are {len(strategy.exit)} exit rules", allowed)
    for number, rule in enumerate(strategy.exit):
        plan["exit_start"][number], plan["exit_length"][number] = _ops_of(rule.condition, legs, bits)
    plan["moves"] = int(any(leg.roll is not None or leg.add_when is not None for leg in strategy.legs))


def _is_judged(strategy: Strategy) -> bool:
    """Whether an entry must know best, worst or odds, or may owe more than its shares bring.

    Shares held cover as many written calls, so that nothing can be owed; a written put may owe its strike.
    """
    accept = strategy.accept
    if accept is not None:
        bounds = (accept.worst_loss, accept.best_gain, accept.odds_of_best, accept.best_over_worst)
        if any(bound is not None for bound in bounds):
            return True
    written = [leg for leg in strategy.legs if leg.sign < 0]
    calls = sum(leg.ratio for leg in written)
    return strategy.shares != "long" or calls > 1.0 or any(leg.right == "put" for leg in written)


def _plan(strategy: Strategy, bits: _Bits) -> Records:
    """The strategy's part of the plan."""
    plans = np.zeros(1, PLAN)
    plan = plans[0]
    _legs(plan, strategy, bits)
    accept = strategy.accept
    plan["shares"] = {"long": 1.0, "short": -1.0, "none": 0.0}[strategy.shares]
    plan["stop"] = 0.0 if strategy.stop is None else strategy.stop.distance
    plan["net_credit"] = float(accept is not None and accept.net_credit is True)
    _bounds(plan, "", "net_debit_most", None if accept is None else accept.net_debit)
    _bounds(plan, "worst_least", "worst_most", None if accept is None else accept.worst_loss)
    _bounds(plan, "best_least", "best_most", None if accept is None else accept.best_gain)
    _bounds(plan, "odds_least", "odds_most", None if accept is None else accept.odds_of_best)
    _bounds(plan, "ratio_least", "", None if accept is None else accept.best_over_worst)
    _bounds(plan, "", "spread_most", None if accept is None else accept.spread_to_premium)
    plan["judged"] = int(_is_judged(strategy))
    plan["fill_close"] = int(strategy.fill == "close")
    plan["legs"], plan["exits"] = len(strategy.legs), len(strategy.exit)
    plan["keep_shares"] = int(strategy.after_assignment == "keep")
    _pace(plan, strategy.enter or Enter())
    return plans


def _pace(plan: Records, enter: Enter) -> None:
    """Write how often a symbol is entered, and the figure by which candidates are ranked."""
    plan["ladder"] = 1 if enter.ladder is None else enter.ladder.positions
    plan["spacing"] = 0 if enter.ladder is None else enter.ladder.spacing
    plan["cooling"] = 0 if enter.cool_down is None else enter.cool_down.sessions
    if enter.rank is not None and isinstance(enter.rank.by, FigureValue):
        plan["rank_figure"] = FIGURES[enter.rank.by.figure]
        plan["rank_low"] = int(enter.rank.order == "low")


def _entries(strategy: Strategy, asked: Asked, ordinals: Ints, symbols: int) -> Bytes:
    """Where a position may be opened: its condition holds, the session is named, and there is one to open."""
    enter = strategy.enter or Enter()
    may: Truth = np.full((ordinals.size, symbols), not strategy.holds_nothing)
    if enter.when is not None:
        may &= truths_of(enter.when, asked)[0]
    if enter.on is not None:
        may &= occasions(enter.on, ordinals)[:, np.newaxis]
    return may.astype(np.uint8)


def _ranks(strategy: Strategy, values: Values) -> Floats:
    """The score by which candidates are ranked, high first."""
    rank = None if strategy.enter is None else strategy.enter.rank
    if rank is None or isinstance(rank.by, FigureValue):
        return np.zeros((1, 1))
    score = np.ascontiguousarray(values(rank.by), dtype=np.float64)
    return score if rank.order == "high" else -score


def compile_strategy(
    strategy: Strategy,
    values: Values,
    ordinals: Ints,
    symbols: int,
    regime: Regime,
    chosen: Chosen | None = None,
    known: Callable[[SignalValue], Truth] | None = None,
) -> Program:
    """Turn a strategy into the arrays of the walk.

    `values` gives a signal's array of shape (T, `symbols`), `ordinals` (T,) are the sessions, `regime` that
    of listings; `chosen` keeps the expiries of each rule met so far; `known` says where a yes-or-no signal is
    known, everywhere when left out. Raises RulesError when legs wait for each other or too many signals are
    used.
    """
    asked = Asked(values, known)
    bits = _Bits(asked)
    plan = _plan(strategy, bits)
    expiries = np.zeros((len(strategy.legs), ordinals.size), np.int64)
    for number, leg in enumerate(strategy.legs):
        rule = root_of(leg, strategy).expiry
        kept = {} if chosen is None else chosen
        wanted = CYCLES[rule.listed], rule.days or 1, rule.choose == "at_least"
        if wanted not in kept:
            kept[wanted] = choose_expiries(*wanted, ordinals, regime)
        expiries[number] = kept[wanted]
    shape = (ordinals.size, symbols)
    return Program(
        strategy=strategy,
        plan=plan,
        expiries=expiries,
        ops=np.array(bits.ops or [(0.0, layout.OP_SIGNAL, 0)], OP),
        may_enter=_entries(strategy, asked, ordinals, symbols),
        words=bits.word(shape),
        rank=_ranks(strategy, values),
    )
