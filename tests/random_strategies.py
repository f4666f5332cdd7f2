"""Random strategies that the rule language allows, as mappings: for round trips and other properties."""

from __future__ import annotations

from typing import Any

from hypothesis import strategies as st

from hedgerow.rules.vocabulary import SignalWords, signal_names, signal_words

Words = dict[str, Any]
NAMES = ("call", "put", "long call", "low put")


def percents(low: float, high: float) -> st.SearchStrategy[str]:
    """Percents of two decimals between two percents, as people write them."""
    return st.integers(round(low * 100), round(high * 100)).map(lambda hundredths: f"{hundredths / 100:g}%")


def numbers(low: float, high: float) -> st.SearchStrategy[float]:
    """Numbers of three decimals."""
    return st.integers(round(low * 1000), round(high * 1000)).map(lambda thousandths: thousandths / 1000)


@st.composite
def bounds(
    draw: st.DrawFn,
    values: st.SearchStrategy[Any],
    words: tuple[str, ...] = ("at_least", "at_most", "between"),
) -> Words:
    """One of the three bounds; a pair is drawn in order."""
    word = draw(st.sampled_from(words))
    if word != "between":
        return {word: draw(values)}
    pair = sorted((draw(values), draw(values)), key=lambda item: float(str(item).rstrip("%")))
    return {word: pair}


def _number_values(words: SignalWords) -> st.SearchStrategy[Any]:
    number = words.signal.number
    assert number is not None
    if number.unit == "fraction":
        return percents(max(number.least, -5) * 100, min(number.most, 5) * 100)
    return st.integers(int(number.least), int(number.most))


@st.composite
def signals(draw: st.DrawFn, ranking: bool = False) -> Words:
    """A signal with parameters, and with a bound unless it ranks."""
    names = [name for name in signal_names() if not ranking or _words(name).unit is not None]
    words = _words(draw(st.sampled_from(names)))
    drawn: Words = {"signal": words.name}
    for item in words.signal.parameters:
        if item.default is None or draw(st.booleans()):
            low, high = _ordered(item.name, item.least, item.most)
            drawn[item.name] = draw(st.integers(low, high)) if item.whole else draw(numbers(low, high))
    if draw(st.booleans()):
        drawn["of"] = draw(st.sampled_from(["NO", "ON", "IDX"]))
    if words.values:
        drawn["is"] = draw(st.lists(st.sampled_from(words.values), min_size=1, unique=True))
    elif words.unit is not None and not ranking:
        drawn |= draw(bounds(_number_values(words)))
    return drawn


def _ordered(name: str, least: float, most: float) -> tuple[int, int]:
    """Fast means stay below the default of the slow ones, and slow ones above that of the fast."""
    if name == "fast":
        return int(least), 25
    return (27, int(most)) if name == "slow" else (int(least) + 1, int(most))


def _words(name: str) -> SignalWords:
    words = signal_words(name)
    assert words is not None
    return words


def position_words(legs: list[str]) -> st.SearchStrategy[Words]:
    """Words about the position that any structure with these legs allows."""
    share = percents(0.01, 90)
    days = st.fixed_dictionaries({"at_most": st.integers(0, 60)}, optional={"leg": st.sampled_from(legs)})
    lost = st.fixed_dictionaries({"leg": st.sampled_from(legs), "at_least": percents(1, 100)})
    return st.one_of(
        share.map(lambda v: {"gain": {"at_least": v}}),
        share.map(lambda v: {"loss": {"at_least": v}}),
        days.map(lambda v: {"days_left": v}),
        st.integers(1, 100).map(lambda v: {"held": {"at_least": v}}),
        share.map(lambda v: {"stock_up": {"at_least": v}}),
        share.map(lambda v: {"stock_down": {"at_least": v}}),
        lost.map(lambda v: {"leg_lost": v}),
    )


def conditions(simple: st.SearchStrategy[Words]) -> st.SearchStrategy[Words]:
    """Simple conditions, alone or nested; only `any` joins several, so that none contradict each other."""
    return st.recursive(
        simple,
        lambda inner: st.one_of(
            inner.map(lambda part: {"not": part}),
            inner.map(lambda part: {"all": [part]}),
            st.lists(inner, min_size=1, max_size=3).map(lambda parts: {"any": parts}),
        ),
        max_leaves=4,
    )


def strikes(sold: bool, right: str) -> st.SearchStrategy[Words]:
    """Strike rules that need no other leg."""
    rules = [
        percents(-60, 60).map(lambda v: {"from_spot": v}),
        st.integers(-10, 10).map(lambda v: {"steps": v}),
        numbers(0.01, 0.99).map(lambda v: {"delta": v}),
        percents(1, 99).map(lambda v: {"odds": v}),
        numbers(-4, 4).map(lambda v: {"deviations": v}),
    ]
    if not sold and right == "put":
        rules.append(percents(1, 40).map(lambda v: {"worst_loss_within": v}))
    snaps = st.fixed_dictionaries({}, optional={"snap": st.sampled_from(["nearest", "up", "down"])})
    return st.tuples(st.one_of(rules), snaps).map(lambda pair: pair[0] | pair[1])


@st.composite
def expiries(draw: st.DrawFn) -> Words:
    """An expiry of its own, on a cycle that can serve it."""
    cycle, least = draw(st.sampled_from([("daily", 1), ("weekly", 4), ("monthly", 15), ("quarterly", 46)]))
    words: Words = {"days": draw(st.integers(least, 400)), "listed": cycle}
    if draw(st.booleans()):
        words["choose"] = draw(st.sampled_from(["nearest", "at_least"]))
    return words


@st.composite
def structures(draw: st.DrawFn) -> Words:
    """Shares and legs; every call sold is covered by shares, or by a call that ends with it."""
    shares = draw(st.sampled_from(["long", "long", "none", "short"]))
    legs: Words = {"put": {draw(st.sampled_from(["buy", "sell"])): "put", "expiry": draw(expiries())}}
    if draw(st.booleans()):
        legs["low put"] = {draw(st.sampled_from(["buy", "sell"])): "put", "expiry": {"with": "put"}}
    if draw(st.booleans()):
        legs["call"] = {"sell" if shares == "long" else "buy": "call", "expiry": draw(expiries())}
        if shares != "long" and draw(st.booleans()):
            legs["short call"] = {"sell": "call", "expiry": {"with": "call"}}
    solved = False
    for words in legs.values():
        sold, right = "sell" in words, words.get("sell", words.get("buy"))
        words["strike"] = draw(strikes(sold or solved, right))
        solved = solved or "worst_loss_within" in words["strike"]
        if draw(st.integers(0, 4)) == 0:
            words["ratio"] = 1
        if words.get("buy") == "put" and draw(st.integers(0, 3)) == 0:
            ways = ["any", "up", "down"]
            words["roll"] = {"if": {"held": {"at_least": 3}}, "direction": draw(st.sampled_from(ways))}
    return {"shares": shares, "legs": legs}


def entries(bounded: bool) -> st.SearchStrategy[Words]:
    """Words of `enter`; figures of the best gain only where it is bounded."""
    figures = ["net_credit", *(["odds_of_best", "best_gain"] if bounded else [])]
    days = st.lists(st.sampled_from(["monday", "tuesday", "friday"]), min_size=1, unique=True)
    on = st.one_of(
        days.map(lambda v: {"weekday": v if len(v) > 1 else v[0]}),
        st.sampled_from(["week", "month", "quarter"]).map(lambda v: {"first_session_of": v}),
        st.sampled_from(["weekly", "monthly", "quarterly"]).map(lambda v: {"expiry_of": v}),
    )
    by = st.one_of(signals(True), st.sampled_from(figures).map(lambda v: {"figure": v}))
    counts = {"positions": st.integers(2, 12), "spacing": st.integers(1, 250)}
    return st.fixed_dictionaries(
        {},
        optional={
            "when": conditions(signals()),
            "on": on,
            "rank": st.fixed_dictionaries({"by": by}, optional={"order": st.just("low")}),
            "cool_down": st.fixed_dictionaries({"sessions": st.integers(1, 1000)}),
            "ladder": st.fixed_dictionaries(counts),
        },
    )


@st.composite
def strategies(draw: st.DrawFn) -> Words:
    """A whole strategy that the language allows."""
    words: Words = {"name": draw(st.sampled_from(["NO", "12:30", "Weekly collar", "a b"]))} | draw(
        structures()
    )
    legs = list(words["legs"])
    asked = conditions(st.one_of(signals(), position_words(legs)))
    if draw(st.booleans()):
        words["about"] = "What it is for."
    if draw(st.booleans()):
        words["accept"] = draw(
            st.fixed_dictionaries(
                {"spread_to_premium": bounds(percents(0, 100), ("at_most",))},
                optional={"net_debit": bounds(percents(1, 50), ("at_most",))},
            )
        )
    if draw(st.booleans()):
        words["enter"] = draw(entries(words["shares"] != "long" and "call" not in words["legs"]))
    names = draw(
        st.lists(st.sampled_from(["cut", "trend turned", "time", "2.5% up"]), unique=True, max_size=3)
    )
    if names:
        words["exit"] = [{"name": name, "if": draw(asked)} for name in names]
    if words["shares"] != "none" and draw(st.booleans()):
        words["stop"] = {"below_entry" if words["shares"] == "long" else "above_entry": draw(percents(1, 50))}
    if draw(st.booleans()):
        words["fill"] = draw(st.sampled_from(["open", "close"]))
    return words
