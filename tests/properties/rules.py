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
    how = draw(st.integers(0, 5))
    if how < 2:
        leg["roll"] = {"at": "expiry"}
    elif how == 2:
        leg["roll"] = {"if": {"days_left": {"at_most": 2}}}
    elif how == 3:
        leg["add_when"] = {"stock_up": {"at_least": "1%"}}
    if draw(st.integers(0, 3)) == 0:
        leg["ratio"] = 0.5
    return leg


@st.composite
def bought_puts(draw: st.DrawFn, with_call: bool) -> Rule:
    """A put under the shares, of the call's expiry or of its own."""
    expiry = {"with": "call"} if with_call else draw(expiries(10, 90))
    return {"buy": "put", "expiry": expiry, "strike": draw(strikes(-8, 2))}


@st.composite
def structures(draw: st.DrawFn) -> Rule:
    """Shares and legs of one of the usual structures."""
    kind = draw(st.sampled_from(("covered", "collar", "married", "months", "cash", "shares")))
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
    if rule.get("shares") != "none" and draw(st.integers(0, 2)) == 0:
        rule["stop"] = {"below_entry": draw(percents(2, 12))}
    if draw(st.integers(0, 2)) == 0:
        rule["fill"] = "close"
    opened = [name for name in legs if "add_when" not in rule["legs"][name]]
    if opened and draw(st.integers(0, 3)) == 0:
        rule["accept"] = {"net_debit": {"at_most": draw(percents(0, 3))}}
    return rule
