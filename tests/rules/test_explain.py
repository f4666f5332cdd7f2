"""A strategy in plain English: whole texts, and claims about the payoff checked with figures."""

from __future__ import annotations

from pathlib import Path
from typing import Any

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from hedgerow.errors import RulesError
from hedgerow.rules.explain import explain, paragraphs
from hedgerow.rules.load import load_strategy
from hedgerow.rules.schema import Strategy
from random_strategies import strategies
from rule_words import collar, leg, with_leg

WEEKLY_COLLAR = """\
Weekly collar

Position. For each lot: buy 100 shares; sell one call (`call`), expiring on the listed weekly date nearest
to 7 days away, struck at the stock's price, moved up to a listed strike; buy one put (`put`), expiring with
`call`, struck 4% below the stock's price, moved down to a listed strike.

Best case. Capped by `call`: above its strike a further rise adds nothing, since the shares go at that
strike. The most that can be won is the strike less the net debit.

Worst case. Floored by `put`: below its strike a further fall costs nothing more while the put lives, since
the shares can be sold at that strike. The most that can be lost is the net debit less the strike.

Obligations. The buyer of `call` may take shares at its strike whenever that pays, most likely the session
before an ex-dividend date: the shares held are delivered.

Entry. At a close without an open position in the stock, when the close is over its mean of 20 sessions and
the RSI of 14 sessions is between 30 and 70. When capital is short, the highest come first by the change of
price over 63 sessions. The entry is declined unless the options together bring money in and the chance of
ending at the best gain is between 45% and 55%.

Exit. Asked at each close, in this order; the first that holds ends the whole position: (1) trend turned:
the MACD line (12, 26) crossed down under its signal line (9) that day; (2) cut: the position has lost at
least 2% of its net debit or it has been held for 5 sessions or more. At expiry an option in the money is
exercised or assigned, any other ends worthless; those of an index are settled in cash, and never early.
Shares that no leg keeps any longer are sold at that close.

Fills. What is decided at a close is filled at the next open, after costs.
"""

MARRIED_PUT_WITH_INCOME = """\
Married put with income

A put half a year out; calls are sold only after a rise.

Position. For each lot: buy 100 shares; buy one put (`put`), expiring on the listed monthly date nearest to
180 days away, at the lowest listed strike that keeps the worst loss within 7% of the net debit.

Best case. Not capped: above every strike the position gains with the stock, without limit. A call sold
later caps it from then on.

Worst case. Floored by `put`: below its strike a further fall costs nothing more while the put lives, since
the shares can be sold at that strike. The most that can be lost is the net debit less the strike. A put
bought again has its own price and its own floor. That is so for the legs of the entry. Where `call` is sold
below that strike later, after a fall, the shares may be taken there, and more is lost. A resting order in the
stock 9% below its price at entry ends the whole position; a gap jumps it, and the fill is then the open.

Obligations. The buyer of `call` may take shares at its strike whenever that pays, most likely the session
before an ex-dividend date: the shares held are delivered.

Entry. At every close at which the stock has no open position.

Management. `put` is bought again by the same rules when 30 days or fewer are left to the expiry of `put`.
Later, when the stock is 5% or more above its price at entry: sell one call (`call`), expiring on the first
listed monthly date at least 30 days away, at the strike whose delta is 0.3, moved to the nearest listed
strike. `call` is sold again by the same rules when it ends at expiry and the position goes on or when
`call` has lost at least 80% of the price at which it was opened, but only if that brings money in.

Exit. No exit rule. At expiry an option in the money is exercised or assigned, any other ends worthless;
those of an index are settled in cash, and never early. The position goes on while shares are held and a leg
lives or is made again.

Fills. What is decided at a close is filled at that close, after costs, as if it were known in time.
"""


def weekly_collar() -> Strategy:
    """A collar with filters, ranking, conditions at entry and two exits."""
    words = collar(
        name="Weekly collar",
        enter={
            "when": {
                "all": [{"signal": "close_over_mean", "sessions": 20}, {"signal": "rsi", "between": [30, 70]}]
            },
            "rank": {"by": {"signal": "momentum", "sessions": 63}},
        },
        accept={"net_credit": True, "odds_of_best": {"between": ["45%", "55%"]}},
        exit=[
            {"name": "trend turned", "if": {"signal": "macd_crossed_down"}},
            {"name": "cut", "if": {"any": [{"loss": {"at_least": "2%"}}, {"held": {"at_least": 5}}]}},
        ],
    )
    return load_strategy(
        words,
        {
            "legs.call.expiry": {"days": 7, "listed": "weekly"},
            "legs.call.strike.from_spot": "0%",
            "legs.put.strike.from_spot": "-4%",
        },
    )


def married_put_with_income() -> Strategy:
    """A put that is rolled, and a call that comes later and is rolled too."""
    call_roll = {"at": "expiry", "if": {"leg_lost": {"leg": "call", "at_least": "80%"}}, "only_for": "credit"}
    call = leg(
        "sell", "call", strike={"delta": 0.3}, roll=call_roll, add_when={"stock_up": {"at_least": "5%"}}
    )
    call["expiry"] = {"days": 30, "choose": "at_least"}
    put = leg("buy", "put", 180, strike={"worst_loss_within": "7%"})
    put["roll"] = {"if": {"days_left": {"leg": "put", "at_most": 30}}}
    return load_strategy(
        {
            "name": "Married put with income",
            "about": "A put half a year out; calls are sold only after a rise.",
            "legs": {"put": put, "call": call},
            "stop": {"below_entry": "9%"},
            "fill": "close",
        }
    )


@pytest.mark.parametrize(
    ("strategy", "text"),
    [(weekly_collar(), WEEKLY_COLLAR), (married_put_with_income(), MARRIED_PUT_WITH_INCOME)],
    ids=["weekly collar", "married put with income"],
)
def test_whole_texts(strategy: Strategy, text: str) -> None:
    """Compares with texts that were read, sentence by sentence, as descriptions; lines are broken freely."""
    assert explain(strategy).endswith(".\n")
    assert explain(strategy).rstrip("\n").split("\n\n") == [
        " ".join(part.split()) for part in text.split("\n\n")
    ]


def said(words: dict[str, Any], title: str) -> str:
    """One paragraph of a strategy's text."""
    return dict(paragraphs(load_strategy({"name": "test", **words}))).get(title, "")


@pytest.mark.parametrize(
    ("strike", "phrase"),
    [
        ({"from_spot": "0%"}, "struck at the stock's price, moved to the nearest listed strike"),
        (
            {"from_spot": "-4.5%", "snap": "down"},
            "struck 4.5% below the stock's price, moved down to a listed strike",
        ),
        ({"steps": 0, "snap": "up"}, "at the first listed strike at or above the stock's price"),
        ({"steps": 0, "snap": "down"}, "at the first listed strike at or below the stock's price"),
        ({"steps": 0}, "at the listed strike nearest to the stock's price"),
        ({"steps": -2}, "struck 2 listed steps below the stock's price"),
        ({"steps": -1}, "struck 1 listed step below the stock's price"),
        ({"deviations": -1}, "struck 1 standard deviation below the stock's price"),
        ({"delta": 0.25}, "at the strike whose delta is 0.25"),
        ({"odds": "20%"}, "at the strike that the stock ends below with a chance of 20%"),
        ({"deviations": -1.5}, "struck 1.5 standard deviations below the stock's price"),
        ({"same_as": "call"}, "at the strike of `call`"),
        (
            {"spend": {"share": "50%", "of": "call"}},
            "at the dearest listed strike that costs at most 50% of what `call` brings",
        ),
        ({"zero_cost_with": "call"}, "at the dearest listed strike that `call` pays for"),
        (
            {"worst_loss_within": "5%"},
            "at the lowest listed strike that keeps the worst loss within 5% of the net debit",
        ),
    ],
)
def test_strikes_in_words(strike: dict[str, Any], phrase: str) -> None:
    """Each rule has a phrase that says the same."""
    assert phrase in said(with_leg("put", strike=strike), "Position")


@pytest.mark.parametrize(
    ("words", "title", "phrase"),
    [
        ({}, "Best case", "Not capped: the position gains with the stock, without limit."),
        ({}, "Worst case", "Not floored: the shares fall unprotected, at worst to nothing."),
        ({"shares": "short"}, "Worst case", "No limit above"),
        ({"shares": "short"}, "Obligations", "Shares sold short cost their borrowing and every dividend."),
        (
            {"shares": "none", "legs": {"p": leg("sell", "put")}},
            "Best case",
            "the premium received is the most",
        ),
        ({"shares": "none", "legs": {"p": leg("sell", "put")}}, "Obligations", "cash for that is set aside"),
        ({"shares": "none", "legs": {"p": leg("sell", "put")}}, "Worst case", "loses as the stock falls"),
        ({"legs": {"c": leg("sell", "call")}}, "Worst case", "cushioned by the premium alone"),
        (
            {"legs": {"c": leg("sell", "call", roll={"at": "expiry"})}},
            "Best case",
            "its own premium and its own cap",
        ),
        ({"legs": {"c": leg("sell", "call", ratio=0.5)}}, "Best case", "at the pace of 50 shares a lot"),
        (
            {"legs": {"p": leg("buy", "put"), "low": leg("sell", "put")}},
            "Worst case",
            "Protected by `p` in part",
        ),
    ],
)
def test_payoffs_in_words(words: dict[str, Any], title: str, phrase: str) -> None:
    """What each structure can win, lose and owe, as common practice describes it."""
    assert phrase in said(words, title)


def test_reverse_collar() -> None:
    """The put above the call wins when the stock falls: it is not called capped by the call."""
    words = with_leg("put", with_leg("call", strike={"from_spot": "-1%"}), strike={"from_spot": "3%"})
    assert said(words, "Best case").startswith("The put is struck above the call")
    assert "Floored" not in said(words, "Worst case")


def test_conversion_is_locked_in() -> None:
    """Shares, a call sold and a put bought at one strike and expiry."""
    assert "locked in at entry" in said(with_leg("put", strike={"same_as": "call"}), "Best case")
    assert "locked in at entry" not in said(collar(), "Best case")


def test_reversal() -> None:
    """Shares sold short take the shares that the put brings."""
    legs = {"call": leg("buy", "call"), "put": leg("sell", "put") | {"expiry": {"with": "call"}}}
    legs["put"]["strike"] = {"same_as": "call"}
    assert "they close the shares sold short" in said({"shares": "short", "legs": legs}, "Obligations")
    assert "locked in at entry" in said({"shares": "short", "legs": legs}, "Best case")


SHIPPED = Path(__file__).parents[2] / "strategies"


@pytest.mark.parametrize(
    ("name", "title", "phrase"),
    [
        (
            "put-credit-spread",
            "Best case",
            "what the options bring in, when the stock ends above both strikes",
        ),
        ("put-credit-spread", "Worst case", "the distance of the strikes less what the options bring in"),
        ("put-credit-spread", "Obligations", "the put bought limits what that can cost"),
        ("call-debit-spread", "Best case", "less what was paid, when the stock ends above both strikes"),
        ("call-debit-spread", "Worst case", "the most that can be lost is what was paid"),
        ("cash-secured-put", "Worst case", "worth nothing: the strike less the premium"),
        ("collar-reverse", "Best case", "The most that can be won is the put's strike less the net debit"),
        ("collar-reverse", "Worst case", "the shares go at the strike of `call`, and nothing more is lost"),
        ("put-spread-collar", "Best case", "Capped by `call`"),
        ("put-spread-collar", "Worst case", "between its strike and that of `low put` nothing more is lost"),
        ("collar-different-month", "Best case", "and what the put is still worth then"),
        ("rolling-protective-put", "Worst case", "A put bought again has its own price and its own floor"),
        ("conversion", "Best case", "It is the strike less the net debit"),
        ("conversion", "Worst case", "Bounded by the same result"),
        ("reversal", "Best case", "It is what came in less the strike"),
        ("reversal", "Worst case", "dividends that rise come off it"),
        (
            "covered-call-out-of-the-money",
            "Management",
            "only to a higher strike and a later expiry and only if",
        ),
        ("laddered-hedge", "Entry", "Each takes 1/3 of the money"),
        ("put-spread-collar", "Entry", "every session on which a quarterly expiry falls"),
    ],
)
def test_shipped_structures_in_words(name: str, title: str, phrase: str) -> None:
    """What each wins and loses, worked out from its payoff by hand."""
    assert phrase in dict(paragraphs(load_strategy(SHIPPED / f"{name}.yaml")))[title]


@pytest.mark.parametrize("right", ["call", "put"])
@pytest.mark.parametrize("sold_lower", [True, False])
def test_spreads_of_two_legs(right: str, sold_lower: bool) -> None:
    """Compares credit or debit, and the side that wins, with the payoff at 10 and at 1000."""
    sold, bought = (-0.05, 0.05) if sold_lower else (0.05, -0.05)
    legs = {
        "sold": leg("sell", right, strike={"from_spot": f"{sold:.0%}"}),
        "bought": leg("buy", right, strike={"from_spot": f"{bought:.0%}"}) | {"expiry": {"with": "sold"}},
    }
    words = {"name": "test", "shares": "none", "legs": legs}
    strikes = {"sold": 100 * (1 + sold), "bought": 100 * (1 + bought)}
    low, high = payoff(words, strikes, np.array([10.0, 1000.0]))
    told = dict(paragraphs(load_strategy(words)))
    side = "above" if high > low else "below"
    assert f"ends {side} both strikes" in told["Best case"]
    owed = min(low, high) < 0
    assert ("what the options bring in" in told["Best case"]) == owed
    assert ("is what was paid" in told["Worst case"]) == (not owed)


@pytest.mark.parametrize(
    ("condition", "phrase"),
    [
        ({"not": {"signal": "macd_positive"}}, "it is not so that the MACD line (12, 26) is above zero"),
        ({"signal": "weekday", "is": ["monday", "friday"]}, "the day of the week is Monday or Friday"),
        (
            {"signal": "momentum", "sessions": 63, "at_least": "-2%"},
            "the change of price over 63 sessions is at least -2%",
        ),
        ({"signal": "rsi", "at_most": 70, "of": "IDX"}, "on IDX, the RSI of 14 sessions is at most 70"),
        ({"stock_down": {"at_least": "5%"}}, "the stock is 5% or more below its price at entry"),
        ({"gain": {"at_least": "50%", "of": "best"}}, "gained at least 50% of the best gain it could make"),
        ({"loss": {"at_least": "50%", "of": "worst"}}, "lost at least 50% of the worst loss it could make"),
        ({"days_left": {"at_most": 3}}, "3 days or fewer are left to the nearest expiry"),
        ({"days_left": {"at_most": 1, "leg": "put"}}, "one day or none is left to the expiry of `put`"),
        ({"not": {"holds_shares": True}}, "it is not so that the position holds shares"),
        (
            {"signal": "sessions_to_ex_dividend", "at_most": 1},
            "the number of sessions to the next expected ex-dividend date is at most 1",
        ),
        (
            {
                "any": [
                    {"held": {"at_least": 2}},
                    {"all": [{"stock_up": {"at_least": "1%"}}, {"signal": "macd_positive"}]},
                ]
            },
            "held for 2 sessions or more or (the stock is 1% or more above its price at entry and the MACD",
        ),
    ],
)
def test_conditions_in_words(condition: dict[str, Any], phrase: str) -> None:
    """Each condition reads as a clause, joined ones inside others in parentheses."""
    assert phrase in said(collar(exit=[{"name": "x", "if": condition}]), "Exit")


@settings(max_examples=80)
@given(strategies())
def test_every_strategy_has_a_text(words: dict[str, Any]) -> None:
    """Whatever the language allows can be told, every leg and exit by its name, on lines without braces."""
    strategy = load_strategy(words)
    text = explain(strategy)
    assert all(f"`{leg.name}`" in text for leg in strategy.legs)
    assert all(f") {rule.name}: " in text for rule in strategy.exit)
    assert "{" not in text
    assert "None" not in text


def payoff(
    words: dict[str, Any], strikes: dict[str, float], spots: np.ndarray[Any, np.dtype[np.float64]]
) -> Any:
    """Value at expiry of shares and legs of one expiry, per share of a lot, by hand from the words."""
    value = {"long": 1.0, "short": -1.0, "none": 0.0}[words["shares"]] * spots
    for name, option in words["legs"].items():
        right = option.get("sell") or option.get("buy")
        inside = spots - strikes[name] if right == "call" else strikes[name] - spots
        sign = -1.0 if "sell" in option else 1.0
        value = value + sign * float(option.get("ratio", 1)) * np.maximum(inside, 0.0)
    return value


@settings(max_examples=150)
@given(
    st.sampled_from(["long", "short", "none"]),
    st.lists(
        st.tuples(
            st.sampled_from(["buy", "sell"]), st.sampled_from(["call", "put"]), st.sampled_from([0.5, 1, 2])
        ),
        min_size=1,
        max_size=4,
    ),
    st.lists(st.floats(60, 140), min_size=4, max_size=4),
)
def test_claims_about_the_payoff(shares: str, drawn: list[tuple[str, str, float]], at: list[float]) -> None:
    """Compares "capped", "not floored" and the like with the slopes of the payoff at expiry."""
    legs: dict[str, Any] = {}
    for number, (side, right, ratio) in enumerate(drawn):
        words = leg(side, right, ratio=ratio)
        legs[f"l{number}"] = words if number == 0 else words | {"expiry": {"with": "l0"}}
    words = {"name": "test", "shares": shares, "legs": legs}
    try:
        told = dict(paragraphs(load_strategy(words)))
    except RulesError:  # a call that nothing covers
        return
    strikes = {f"l{number}": at[number] for number in range(len(drawn))}
    high = payoff(words, strikes, np.array([1000.0, 1001.0]))
    low = payoff(words, strikes, np.array([1.0, 2.0]))
    rise, fall = high[1] - high[0], low[1] - low[0]
    best, worst = told.get("Best case", ""), told.get("Worst case", "")
    assert best.startswith("Not capped") == (rise > 1e-9)
    assert ("Capped" in best) == (abs(rise) < 1e-9)
    assert ("gains as the stock falls" in best) == (fall < -1e-9)
    assert ("No limit above" in worst) == (rise < -1e-9)
    unprotected = any(phrase in worst for phrase in ("Not floored", "in part", "loses as the stock falls"))
    assert unprotected == (fall > 1e-9)
    assert any(phrase in worst for phrase in ("Floored", "Bounded")) == (fall < 1e-9 and rise > -1e-9)
