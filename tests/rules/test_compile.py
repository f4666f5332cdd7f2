"""Strategies as arrays: legs, expiries, bounds, postfix operations and signal bits, read back by hand."""

from __future__ import annotations

import datetime as dt
from typing import Any

import numpy as np
import pytest

from array_market import random_market
from hedgerow.errors import RulesError
from hedgerow.kernels import layout as at
from hedgerow.market.sessions import choose_expiries, sessions_between
from hedgerow.rules.load import load_strategy
from hedgerow.rules.program import Program, compile_strategy
from hedgerow.rules.schema import SignalValue
from hedgerow.signals.panel import Panel
from rule_words import collar, leg

MARKET = random_market(21, sessions=90, symbols=3)
PANEL = Panel(MARKET)
ORDINALS = sessions_between(dt.date(2015, 1, 5).toordinal(), dt.date(2015, 5, 29).toordinal())[:90]
RSI = {"signal": "rsi", "sessions": 5, "at_least": 55}
FALLING = {"signal": "mean_falling", "sessions": 10}
OVER = {"signal": "close_over_mean", "sessions": 10}


def values(wanted: SignalValue) -> Any:
    """A signal's array of the market."""
    return PANEL.evaluate(wanted.signal, wanted.arguments, wanted.of)


def made(**words: Any) -> Program:
    """A collar with other words, compiled."""
    return compile_strategy(load_strategy(collar(**words)), values, ORDINALS, 3, "modern")


def said(name: str, **params: float) -> np.ndarray:
    """What a signal says."""
    return PANEL.evaluate(name, params)


def exit_rule(condition: Any, name: str = "cut") -> dict[str, Any]:
    """An exit rule."""
    return {"name": name, "if": condition}


def ops_of(program: Program, rule: int) -> list[tuple[float, int, int]]:
    """The operations of an exit rule."""
    plan = program.plan[0]
    start = int(plan["exit_start"][rule])
    return [tuple(op) for op in program.ops[start : start + int(plan["exit_length"][rule])].tolist()]


def bit(program: Program, number: int) -> np.ndarray:
    """One bit of the words, as truths."""
    return (program.words >> number & 1).astype(bool)


def test_legs_are_read_off() -> None:
    """Side, right, ratio, cycle, rule, value and grid of each leg, in the order of the file."""
    strangle = {
        "low": leg("buy", "put", 10, "weekly", strike={"delta": 0.2}, ratio=0.5),
        "high": leg("sell", "call", 40, "monthly", strike={"steps": 2, "snap": "up"}),
        "far": leg("buy", "call", 90, "quarterly", strike={"deviations": 1.5, "snap": "down"}),
    }
    plan = made(legs=strangle).plan[0]
    low, high, far = plan["specs"][:3]
    assert plan["legs"] == 3
    assert (low["side"], low["right"], low["ratio"], low["cycle"]) == (1.0, at.PUT, 0.5, at.WEEKLY)
    assert (low["strike_rule"], low["strike_value"], low["snap"]) == (at.DELTA, 0.2, at.SNAP_NEAREST)
    assert (high["side"], high["right"], high["ratio"], high["cycle"]) == (-1.0, at.CALL, 1.0, at.MONTHLY)
    assert (high["strike_rule"], high["strike_value"], high["snap"]) == (at.STEPS, 2.0, at.SNAP_UP)
    assert (far["cycle"], far["strike_rule"], far["snap"]) == (at.QUARTERLY, at.DEVIATIONS, at.SNAP_DOWN)
    assert [spec["with_leg"] for spec in (low, high, far)] == [-1, -1, -1]


def test_each_leg_has_its_expiry_at_each_close() -> None:
    """Those of the calendar's own rule; a leg `with` another has that one's days and cycle."""
    legs = {
        "call": leg("sell", "call", 7, "weekly"),
        "put": {"buy": "put", "expiry": {"days": 60, "choose": "at_least"}, "strike": {"from_spot": "-5%"}},
        "low": {"buy": "put", "expiry": {"with": "call"}, "strike": {"from_spot": "-9%"}},
    }
    program = made(legs=legs)
    weekly = choose_expiries(at.WEEKLY, 7, False, ORDINALS)
    np.testing.assert_array_equal(program.expiries[0], weekly)
    np.testing.assert_array_equal(program.expiries[1], choose_expiries(at.MONTHLY, 60, True, ORDINALS))
    np.testing.assert_array_equal(program.expiries[2], weekly)
    assert program.plan[0]["specs"][2]["with_leg"] == 0
    assert program.plan[0]["specs"][2]["cycle"] == at.WEEKLY
    assert (program.expiries[0] > ORDINALS).all()


def test_legs_are_chosen_after_those_they_refer_to() -> None:
    """The first leg of the file spends what the second brings: it is chosen second."""
    legs = {
        "put": {
            "buy": "put",
            "expiry": {"with": "call"},
            "strike": {"spend": {"share": "50%", "of": "call"}},
        },
        "call": leg("sell", "call", 30),
    }
    plan = made(legs=legs).plan[0]
    assert plan["order"][:2].tolist() == [1, 0]
    assert (plan["specs"][0]["strike_rule"], plan["specs"][0]["strike_value"]) == (at.SPEND, 0.5)
    assert plan["specs"][0]["strike_leg"] == 1


def test_a_worst_loss_comes_last() -> None:
    """Its strike needs the premiums of all the others."""
    legs = {
        "put": {"buy": "put", "expiry": {"days": 30}, "strike": {"worst_loss_within": "5%"}},
        "call": leg("sell", "call", 30),
    }
    assert made(legs=legs).plan[0]["order"][:2].tolist() == [1, 0]


def test_a_market_condition_is_one_bit() -> None:
    """{all: [rsi, not falling]} is worked out beforehand: one operation, and the bit is what numpy says."""
    program = made(exit=[exit_rule({"all": [RSI, {"not": FALLING}]})])
    assert ops_of(program, 0) == [(0.0, at.OP_SIGNAL, 0)]
    expected = (said("rsi", sessions=5) >= 55) & ~said("mean_falling", sessions=10).astype(bool)
    np.testing.assert_array_equal(bit(program, 0), expected)
    assert expected.any()
    assert not expected.all()


def test_conditions_about_the_position_are_postfix() -> None:
    """Operands before their operation; parts about the market alone are a bit each, known bits are shared."""
    either = {"any": [{"gain": {"at_least": "2%"}}, RSI, {"not": {"held": {"at_least": 5}}}]}
    program = made(
        exit=[
            exit_rule(either),
            exit_rule({"all": [RSI, {"loss": {"at_least": "50%", "of": "worst"}}]}, "two"),
        ]
    )
    assert ops_of(program, 0) == [
        (0.02, at.OP_GAIN_OF_DEBIT, -1),
        (0.0, at.OP_SIGNAL, 0),
        (0.0, at.OP_OR, -1),
        (5.0, at.OP_HELD, -1),
        (0.0, at.OP_NOT, -1),
        (0.0, at.OP_OR, -1),
    ]
    assert ops_of(program, 1) == [
        (0.0, at.OP_SIGNAL, 0),
        (0.5, at.OP_LOSS_OF_WORST, -1),
        (0.0, at.OP_AND, -1),
    ]


@pytest.mark.parametrize(
    ("condition", "op"),
    [
        ({"gain": {"at_least": "2%"}}, (0.02, at.OP_GAIN_OF_DEBIT, -1)),
        ({"gain": {"at_least": "50%", "of": "best"}}, (0.5, at.OP_GAIN_OF_BEST, -1)),
        ({"loss": {"at_least": "3%"}}, (0.03, at.OP_LOSS_OF_DEBIT, -1)),
        ({"days_left": {"at_most": 3}}, (3.0, at.OP_DAYS_LEFT, -1)),
        ({"held": {"at_least": 4}}, (4.0, at.OP_HELD, -1)),
        ({"stock_up": {"at_least": "5%"}}, (0.05, at.OP_STOCK_UP, -1)),
        ({"stock_down": {"at_least": "6%"}}, (0.06, at.OP_STOCK_DOWN, -1)),
        ({"leg_lost": {"leg": "put", "at_least": "80%"}}, (0.8, at.OP_LEG_LOST, 1)),
    ],
)
def test_words_about_the_position(condition: dict[str, Any], op: tuple[float, int, int]) -> None:
    """Value, code and argument of each."""
    assert ops_of(made(exit=[exit_rule(condition)]), 0) == [op]


def test_exits_stand_in_the_order_of_the_file() -> None:
    """Each with its own stretch of operations."""
    rules = [exit_rule({"held": {"at_least": days}}, f"day {days}") for days in (9, 3, 6)]
    program = made(exit=rules)
    assert program.plan[0]["exits"] == 3
    assert [ops_of(program, rule)[0][0] for rule in range(3)] == [9.0, 3.0, 6.0]


def test_bits_are_shared_between_exits_and_rolls() -> None:
    """The same signal asked twice is one bit; two signals are two."""
    legs = {"call": leg("sell", "call", 30, roll={"if": {"all": [OVER, {"held": {"at_least": 2}}]}})}
    program = made(legs=legs, exit=[exit_rule({"any": [OVER, FALLING, {"held": {"at_least": 9}}]})])
    spec = program.plan[0]["specs"][0]
    roll = program.ops[int(spec["roll_start"]) : int(spec["roll_start"]) + int(spec["roll_length"])]
    assert program.plan[0]["moves"] == 1
    shared = [op for op in roll.tolist() if op[1] == at.OP_SIGNAL]
    asked = [op for op in ops_of(program, 0) if op[1] == at.OP_SIGNAL]
    assert shared == asked[:1]
    assert {op[2] for op in asked} == {0, 1}
    np.testing.assert_array_equal(bit(program, 0), said("close_over_mean", sessions=10).astype(bool))


def test_without_signals_there_are_no_words() -> None:
    """A single zero stands for them, and no operation is ever asked."""
    program = made()
    assert program.words.shape == (1, 1)
    assert program.rank.shape == (1, 1)
    assert (program.plan[0]["exits"], program.plan[0]["moves"]) == (0, 0)


def test_entries_and_ranks() -> None:
    """Where the signal holds, in symbols that are traded; high scores first, low ones turned round."""
    enter = {"when": OVER, "rank": {"by": {"signal": "momentum", "sessions": 5}, "order": "low"}}
    program = made(enter=enter)
    expected = said("close_over_mean", sessions=10).astype(bool)
    np.testing.assert_array_equal(program.may_enter.astype(bool), expected)
    np.testing.assert_array_equal(program.rank, -said("momentum", sessions=5))
    some = program.entering(np.array([1, 0, 1], np.uint8))
    np.testing.assert_array_equal(some.may_enter.astype(bool), expected & np.array([True, False, True]))


def test_bounds_of_entry() -> None:
    """Ends that are given, free ends infinite."""
    plan = made(
        accept={
            "net_credit": True,
            "worst_loss": {"at_most": "5%"},
            "best_gain": {"at_least": "1%"},
            "odds_of_best": {"between": ["45%", "55%"]},
            "best_over_worst": {"at_least": 0.5},
            "spread_to_premium": {"at_most": "20%"},
        }
    ).plan[0]
    found = {name: float(plan[name]) for name in plan.dtype.names if name.split("_")[-1] in ("least", "most")}
    assert found["worst_most"] == 0.05
    assert found["best_least"] == 0.01
    assert (found["odds_least"], found["odds_most"]) == (0.45, 0.55)
    assert (found["ratio_least"], found["spread_most"], plan["net_credit"]) == (0.5, 0.2, 1.0)
    assert found["worst_least"] == -np.inf
    assert (found["best_most"], found["net_debit_most"]) == (np.inf, np.inf)


@pytest.mark.parametrize(("shares", "number"), [("long", 1.0), ("short", -1.0)])
def test_shares_and_stops(shares: str, number: float) -> None:
    """A sign for the shares, a distance for the stop, a flag for fills at the close."""
    words = {"stop": {"below_entry" if shares == "long" else "above_entry": "7%"}, "fill": "close"}
    legs = {"call": leg("buy", "call", 30)} if shares == "short" else collar()["legs"]
    plan = made(shares=shares, legs=legs, **words).plan[0]
    assert (plan["shares"], plan["stop"], plan["fill_close"]) == (number, 0.07, 1)


def test_more_signals_than_bits() -> None:
    """Sixty-two different ones fit into a word, one more does not; the message says how many do."""
    many = [{"signal": "rsi", "sessions": n, "at_least": v} for n in range(2, 23) for v in (45, 50, 55)]
    held = {"held": {"at_least": 9}}
    assert len(ops_of(made(exit=[exit_rule({"any": [*many[:62], held]})]), 0)) == 2 * 63 - 1
    with pytest.raises(RulesError, match="more than 62 different signals"):
        made(exit=[exit_rule({"any": [*many, held]})])


CALL = {"call": leg("sell", "call", 10, "weekly", strike={"from_spot": "0%"})}
PUT = {"put": leg("sell", "put", 10, "weekly", strike={"from_spot": "0%"})}


@pytest.mark.parametrize(
    ("judged", "words"),
    [
        (0, {}),
        (0, {"accept": {"net_credit": True, "spread_to_premium": {"at_most": "90%"}}}),
        (1, {"accept": {"worst_loss": {"at_most": "5%"}}}),
        (1, {"accept": {"odds_of_best": {"at_least": "50%"}}}),
        (0, {"legs": CALL}),
        (1, {"legs": CALL | PUT}),
        (1, {"shares": "none", "legs": PUT}),
    ],
)
def test_an_entry_is_judged_only_where_something_asks_for_it(judged: int, words: dict[str, Any]) -> None:
    """A bound on worst, best or odds, or something that may be owed, needs the figures at the decision."""
    assert made(**words).plan[0]["judged"] == judged


def test_what_is_unknown_holds_neither_way() -> None:
    """Before ten closes are there neither `over the mean` nor its `not` holds; after, one of them."""
    both = [{"when": OVER}, {"when": {"not": OVER}}]
    over, under = (
        compile_strategy(load_strategy(collar(enter=enter)), values, ORDINALS, 3, "modern", known=known)
        for enter in both
    )
    counts = over.may_enter.astype(int) + under.may_enter
    assert (counts[:9] == 0).all()
    assert (counts[9:] == 1).all()
    rsi = load_strategy(collar(enter={"when": {"not": {"signal": "rsi", "sessions": 5, "at_most": 100}}}))
    assert not compile_strategy(rsi, values, ORDINALS, 3, "modern").may_enter.any()


def test_a_negation_goes_down_to_the_words() -> None:
    """Not (gain or over the mean) is no gain and under it, and under it only where the mean is known."""
    rule = exit_rule({"not": {"any": [{"gain": {"at_least": "2%"}}, OVER]}})
    program = compile_strategy(load_strategy(collar(exit=[rule])), values, ORDINALS, 3, "modern", known=known)
    assert ops_of(program, 0) == [
        (0.02, at.OP_GAIN_OF_DEBIT, -1),
        (0.0, at.OP_NOT, -1),
        (0.0, at.OP_SIGNAL, 0),
        (0.0, at.OP_AND, -1),
    ]
    expected = ~said("close_over_mean", sessions=10)
    expected[:9] = False
    np.testing.assert_array_equal(bit(program, 0), expected)


REPORT = {"signal": "sessions_to_report", "at_most": 0}  # no at every close: none is known


@pytest.mark.parametrize(
    ("when", "holds"),
    [
        ({"not": {"all": [REPORT, OVER]}}, 1),
        ({"any": [{"not": REPORT}, OVER]}, 1),
        ({"all": [{"not": REPORT}, OVER]}, 0),
        ({"not": {"any": [REPORT, OVER]}}, 0),
    ],
)
def test_one_unknown_part(when: Any, holds: int) -> None:
    """All of a no and an unknown is no, any of a yes and an unknown is yes (Kleene 1938)."""
    words = load_strategy(collar(enter={"when": when}))
    program = compile_strategy(words, values, ORDINALS, 3, "modern", known=known)
    assert (program.may_enter[:9] == holds).all()


def known(wanted: SignalValue) -> np.ndarray:
    """Where a signal is known."""
    return PANEL.known(wanted.signal, wanted.arguments, wanted.of)
