"""Random rules: covered calls, collars, married puts and their kin, as mappings of the rule language."""

from __future__ import annotations

from typing import Any

from hypothesis import strategies as st

Rule = dict[str, Any]

LEAST_DAYS = {"daily": 2, "weekly": 5, "monthly": 16}


def percents(least: float, most: float) -> st.SearchStrategy[str]:
    """Percents in steps of half a percent, as they are written."""
    return st.integers(round(2 * least), round(2 * most)).map(lambda halves: f"{halves / 2:g}%")


@st.composite
def expiries(draw: st.DrawFn, least: int = 2, most: int = 45) -> Rule:
    """An expiry rule of its own."""
    cycle = draw(st.sampled_from(tuple(LEAST_DAYS)))
    rule: Rule = {"days": draw(st.integers(max(least, LEAST_DAYS[cycle]), most)), "listed": cycle}
    if draw(st.booleans()):
        rule["choose"] = "at_least"
    return rule


@st.composite
def strikes(draw: st.DrawFn, least: float, most: float) -> Rule:
    """A strike by distance from the money, listed steps, deviations, delta or odds."""
    words: list[st.SearchStrategy[Rule]] = [
        st.builds(lambda p: {"from_spot": p}, percents(least, most)),
        st.builds(lambda n: {"steps": n}, st.integers(round(least / 2), round(most / 2))),
        st.builds(lambda n: {"deviations": n / 4}, st.integers(round(least / 2), round(most / 2))),
        st.builds(lambda n: {"delta": n / 20}, st.integers(2, 13)),
        st.builds(lambda n: {"odds": f"{5 * n}%"}, st.integers(2, 13)),
    ]
    return draw(st.one_of(words)) | {"snap": draw(st.sampled_from(("nearest", "up", "down")))}


@st.composite
def sold_calls(draw: st.DrawFn) -> Rule:
    """A call written over the shares."""
    leg: Rule = {"sell": "call", "expiry": draw(expiries()), "strike": draw(strikes(-4, 6))}
    how = draw(st.integers(0, 6))
    if how < 2:
        leg["roll"] = {"at": "expiry"}
    elif how == 2:
        leg["roll"] = {"if": {"days_left": {"at_most": 2}}}
    elif how == 3:
        leg["add_when"] = {"stock_up": {"at_least": "1%"}}
    elif how == 4:
        ways = ("up", "down", "out", "up and out", "down and out")
        leg["roll"] = {
            "at": "expiry",
            "if": {"held": {"at_least": 3}},
            "direction": draw(st.sampled_from(ways)),
        }
        if draw(st.booleans()):
            leg["roll"]["only_for"] = "credit"
    if draw(st.integers(0, 3)) == 0:
        leg["ratio"] = 0.5
    return leg


@st.composite
def bought_puts(draw: st.DrawFn, with_call: bool) -> Rule:
    """A put under the shares, of the call's expiry or of its own."""
    expiry = {"with": "call"} if with_call else draw(expiries(10, 90))
    return {"buy": "put", "expiry": expiry, "strike": draw(strikes(-8, 2))}


def one_expiry(draw: st.DrawFn, shares: str, **legs: Rule) -> Rule:
    """A structure whose legs share the expiry of its first, each drawn a strike unless it has one."""
    first, named = next(iter(legs)), {}
    for name, words in legs.items():
        expiry = draw(expiries()) if name == first else {"with": first}
        strike = words.pop("strike", None) or draw(strikes(-6, 6))
        named[name] = words | {"expiry": expiry, "strike": strike}
    return {"shares": shares, "legs": named}


@st.composite
def rarer_structures(draw: st.DrawFn) -> Rule:
    """Spreads, shares sold short, three legs, strikes found from another leg's, shares that are kept."""
    kind = draw(st.sampled_from(("short", "reversal", "put spread", "call spread", "three", "pays", "worst")))
    if kind == "short":
        return one_expiry(draw, "short", call={"buy": "call"})
    if kind == "reversal":
        same: Rule = {"strike": {"same_as": "call"}}
        return one_expiry(draw, "short", call={"buy": "call"}, put={"sell": "put"} | same)
    if kind == "put spread":
        return one_expiry(
            draw,
            "none",
            put={"sell": "put", "strike": {"from_spot": draw(percents(-4, 3))}},
            low={"buy": "put", "strike": {"from_spot": draw(percents(-14, -6))}},
        )
    if kind == "call spread":
        return one_expiry(
            draw,
            "none",
            call={"buy": "call", "strike": {"from_spot": draw(percents(-6, 1))}},
            high={"sell": "call", "strike": {"from_spot": draw(percents(3, 9))}},
        )
    put = {"buy": "put", "strike": {"from_spot": draw(percents(-7, -1))}}
    if kind == "three":
        low = {"sell": "put", "strike": {"from_spot": draw(percents(-20, -9))}}
        return one_expiry(draw, "long", put=put, low=low, call={"sell": "call"})
    if kind == "worst":
        within = {"worst_loss_within": draw(percents(2, 9))}
        return one_expiry(draw, "long", call={"sell": "call"}, put={"buy": "put", "strike": within})
    if draw(st.booleans()):
        paid = {"zero_cost_with": "put"}
        return one_expiry(draw, "long", put=put, call={"sell": "call", "strike": paid})
    spent = {"spend": {"share": draw(st.sampled_from(("50%", "100%", "150%"))), "of": "call"}}
    return one_expiry(draw, "long", call={"sell": "call"}, put={"buy": "put", "strike": spent})


@st.composite
def kept_shares(draw: st.DrawFn) -> Rule:
    """A put sold whose shares are kept, calls sold on them."""
    call: Rule = {"sell": "call", "expiry": draw(expiries()), "strike": draw(strikes(-4, 6))}
    call |= {"add_when": {"holds_shares": True}, "roll": {"at": "expiry"}}
    put: Rule = {"sell": "put", "expiry": draw(expiries()), "strike": draw(strikes(-3, 8))}
    return {"shares": "none", "after_assignment": "keep", "legs": {"put": put, "call": call}}


@st.composite
def structures(draw: st.DrawFn) -> Rule:
    """Shares and legs of one of the structures."""
    kinds = ("covered", "collar", "married", "months", "cash", "shares", "kept", *["rarer"] * 4)
    kind = draw(st.sampled_from(kinds))
    if kind == "rarer":
        return draw(rarer_structures())
    if kind == "kept":
        return draw(kept_shares())
    if kind == "covered":
        return {"legs": {"call": draw(sold_calls())}}
    if kind == "married":
        return {"legs": {"put": draw(bought_puts(False))}}
    if kind == "cash":
        put = draw(bought_puts(False))
        put = {"sell": put.pop("buy")} | put
        return {"shares": "none", "legs": {"put": put}}
    if kind == "shares":
        return {}
    call = draw(sold_calls())
    if kind == "collar":
        call = {word: call[word] for word in call if word not in ("roll", "add_when")}
    return {"legs": {"call": call, "put": draw(bought_puts(kind == "collar"))}}


@st.composite
def exits(draw: st.DrawFn, legs: list[str]) -> list[Rule]:
    """Up to two exit rules."""
    share = percents(1, 6)
    words: list[st.SearchStrategy[Rule]] = [
        st.builds(lambda p: {"gain": {"at_least": p}}, share),
        st.builds(lambda p: {"loss": {"at_least": p}}, share),
        st.builds(lambda n: {"held": {"at_least": n}}, st.integers(3, 30)),
        st.builds(lambda p: {"stock_up": {"at_least": p}}, share),
        st.builds(lambda p: {"stock_down": {"at_least": p}}, share),
        st.builds(lambda n: {"signal": "close_under_mean", "sessions": n}, st.integers(5, 20)),
        st.builds(lambda n: {"not": {"signal": "close_over_mean", "sessions": n}}, st.integers(5, 40)),
    ]
    if legs:
        words.append(st.builds(lambda n: {"days_left": {"at_most": n}}, st.integers(1, 5)))
        leg = st.sampled_from(legs)
        words.append(st.builds(lambda n: {"leg_lost": {"leg": n, "at_least": "80%"}}, leg))
    found = draw(st.lists(st.one_of(words), max_size=2))
    return [{"name": f"exit {n}", "if": word} for n, word in enumerate(found)]


ENTRIES: tuple[Rule, ...] = (
    {},
    {"when": {"signal": "close_over_mean", "sessions": 10}},
    {"when": {"not": {"signal": "momentum", "sessions": 5, "at_least": "3%"}}},
    {"when": {"not": {"signal": "close_over_mean", "sessions": 20}}},
    {"rank": {"by": {"signal": "momentum", "sessions": 10}, "order": "high"}},
    {"rank": {"by": {"signal": "momentum", "sessions": 3}, "order": "low"}},
)


SIGNALS: tuple[Rule, ...] = (
    {"signal": "macd_over_signal", "fast": 4, "slow": 9, "smooth": 3},
    {"signal": "macd_crossed_up", "fast": 3, "slow": 8, "smooth": 3},
    {"signal": "mean_rising", "sessions": 8, "over": 3},
    {"signal": "band_break_down", "sessions": 10, "width": 1.0},
    {"signal": "rsi", "sessions": 7, "at_most": 60},
    {"signal": "distance_from_high", "sessions": 20, "at_least": "1%"},
    {"signal": "volatility_rank", "sessions": 5, "over": 30, "at_most": "70%"},
    {"signal": "eps_growth", "at_least": "-50%"},
    {"signal": "sessions_to_report", "at_least": 5},
    {"signal": "sessions_since_report", "at_least": 2},
    {"signal": "weekday", "is": ["monday", "wednesday", "thursday"]},
)


@st.composite
def rules(draw: st.DrawFn, any_signal: bool = True) -> Rule:
    """A whole rule set; one without legs always has an exit. Without `any_signal` only means, momentum."""
    rule: Rule = {"name": "Random rule"} | draw(structures())
    legs = list(rule.get("legs", {}))
    rule["exit"] = draw(exits(legs)) or ([] if legs else [{"name": "time", "if": {"held": {"at_least": 9}}}])
    enter = draw(st.sampled_from(ENTRIES))
    if any_signal and draw(st.booleans()):
        enter = {"when": draw(st.sampled_from(SIGNALS))}
    if any_signal and draw(st.integers(0, 3)) == 0:
        rule["exit"].append({"name": "signal", "if": {"not": draw(st.sampled_from(SIGNALS))}})
    if enter:
        rule["enter"] = enter
    rule |= draw(paces(rule, set(legs)))
    if rule.get("shares") != "none" and draw(st.integers(0, 2)) == 0:
        side = "above_entry" if rule.get("shares") == "short" else "below_entry"
        rule["stop"] = {side: draw(percents(2, 12))}
    if draw(st.integers(0, 2)) == 0:
        rule["fill"] = "close"
    opened = [name for name in legs if "add_when" not in rule["legs"][name]]
    if opened and draw(st.integers(0, 3)) == 0:
        rule["accept"] = draw(accepted(has_bound(rule)))
    return rule


def has_bound(rule: Rule) -> bool:
    """Whether all legs open together, end together, and bound the best gain."""
    legs = list(rule.get("legs", {}).values())
    together = all("with" in leg["expiry"] for leg in legs[1:]) and not any("add_when" in leg for leg in legs)
    long = {"long": 1.0, "short": -1.0, "none": 0.0}[rule.get("shares", "long")]
    for leg in legs:
        if "call" in leg.values():
            long += leg.get("ratio", 1.0) * (1.0 if "buy" in leg else -1.0)
    return bool(legs) and together and long <= 0.0


@st.composite
def accepted(draw: st.DrawFn, bounded: bool) -> Rule:
    """What the structure must be at entry; figures of the best gain only where it has a bound."""
    words: dict[str, st.SearchStrategy[Any]] = {
        "net_debit": st.builds(lambda p: {"at_most": p}, percents(0, 3)),
        "worst_loss": st.builds(lambda p: {"at_most": p}, percents(3, 20)),
        "spread_to_premium": st.builds(lambda p: {"at_most": p}, percents(4, 40)),
    }
    if bounded:
        words["best_gain"] = st.builds(lambda p: {"at_least": p}, percents(0.5, 4))
        words["odds_of_best"] = st.builds(lambda p: {"at_least": p}, percents(20, 60))
        words["best_over_worst"] = st.builds(lambda n: {"at_least": n / 10}, st.integers(1, 12))
    name = draw(st.sampled_from(sorted(words)))
    return {name: draw(words[name])}


@st.composite
def paces(draw: st.DrawFn, rule: Rule, legs: set[str]) -> Rule:
    """Further words of entry: the sessions, a figure to rank by, a pause after losses, a ladder."""
    enter: Rule = dict(rule.get("enter", {}))
    if draw(st.integers(0, 3)) == 0:
        enter["on"] = draw(st.sampled_from(OCCASIONS))
    if draw(st.integers(0, 3)) == 0:
        enter["cool_down"] = {"sessions": draw(st.integers(1, 15))}
    if draw(st.integers(0, 3)) == 0:
        enter["ladder"] = {"positions": draw(st.integers(2, 4)), "spacing": draw(st.integers(1, 8))}
    if has_bound(rule) and draw(st.integers(0, 3)) == 0:
        order = draw(st.sampled_from(("high", "low")))
        enter["rank"] = {"by": {"figure": draw(st.sampled_from(FIGURES))}, "order": order}
    return {"enter": enter} if enter else {}


FIGURES = ("odds_of_best", "best_over_worst", "net_credit", "best_gain", "worst_loss")
OCCASIONS: tuple[Rule, ...] = (
    {"weekday": ["monday", "thursday"]},
    {"weekday": "friday"},
    {"first_session_of": "week"},
    {"first_session_of": "month"},
    {"first_session_of": "quarter"},
    {"expiry_of": "weekly"},
    {"expiry_of": "monthly"},
    {"expiry_of": "quarterly"},
)
