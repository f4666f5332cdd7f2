"""What every signal must do, whichever it is: the house's rules for this extension point."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import replace

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from array_market import array_market, cut, random_market, report, with_split
from hedgerow.errors import RulesError
from hedgerow.kernels.layout import Floats
from hedgerow.market.table import Market, Report
from hedgerow.signals import SIGNALS, Panel, named_signal, signal

NAMES = sorted(SIGNALS)
BY_BARS = [name for name in NAMES if SIGNALS[name].by_bars]
SMALL = {"sessions": 5, "over": 7, "fast": 3, "slow": 6, "smooth": 4, "width": 1.0}
PROMISED = {
    "close_over_mean",
    "close_under_mean",
    "mean_rising",
    "mean_falling",
    "macd_positive",
    "macd_over_signal",
    "macd_crossed_up",
    "macd_crossed_down",
    "band_break_up",
    "band_break_down",
    "rsi",
    "momentum",
    "distance_from_high",
    "volatility_rank",
    "eps_growth",
    "sessions_to_report",
    "sessions_since_report",
    "sessions_to_ex_dividend",
    "weekday",
}


def params_of(name: str) -> dict[str, float]:
    """Small parameters, so that a short history has much to say."""
    return {item.name: SMALL[item.name] for item in SIGNALS[name].parameters}


def bits(name: str, market: Market, sessions: int | None = None) -> bytes:
    """The signal's answer over the first sessions, as bytes."""
    return Panel(market).evaluate(name, params_of(name))[:sessions].tobytes()


def reporting_market(seed: int, sessions: int = 340, holes: float = 0.03) -> Market:
    """Draw a market whose symbols report every 63 sessions, announced 15 days ahead, and pay as often."""
    market = random_market(seed, sessions, 2, holes)
    dividend = np.zeros_like(market.close)
    dividend[20::63, 0], dividend[41::60, 1] = 0.5, 0.25
    rng = np.random.default_rng(seed)
    reports = [
        report(market, session, float(rng.normal(1.0, 0.5)), symbol, 15)
        for symbol in (0, 1)
        for session in range(5 + 3 * symbol, sessions, 63)
    ]
    return replace(market, reports=tuple(sorted(reports)), dividend=dividend)


def changed_after(market: Market, sessions: int, seed: int) -> Market:
    """Change every price, and whatever of a report was not known, after the first `sessions` sessions."""
    other = random_market(seed, len(market.ordinals), 2, 0.1)
    mixed = {
        field: np.vstack([getattr(market, field)[:sessions], getattr(other, field)[sessions:] * 9.0])
        for field in ("open", "high", "low", "close")
    }
    mixed["dividend"] = np.vstack([market.dividend[:sessions], np.full_like(market.close[sessions:], 0.1)])
    today = int(market.ordinals[sessions - 1])
    reports: list[Report] = []
    for item in market.reports:
        if item.reaction_ordinal <= today:
            reports.append(item)
        elif item.announced_ordinal <= today:
            reports.append(item._replace(eps=-7.0))
    late = Report(0, today + 40, today + 30, today + 41, 99.0)
    return array_market(mixed.pop("close"), **mixed, reports=tuple(sorted([*reports, late])))


def test_the_promised_signals_are_there() -> None:
    """Every name of the rule language has its signal."""
    assert set(NAMES) >= PROMISED


@pytest.mark.parametrize("name", NAMES)
@settings(max_examples=12)
@given(seed=st.integers(0, 10**6), sessions=st.integers(1, 339))
def test_time_runs_one_way(name: str, seed: int, sessions: int) -> None:
    """Bit for bit the same up to a close when all after it is changed, or is not there."""
    market = reporting_market(seed)
    whole = bits(name, market, sessions)
    assert whole == bits(name, changed_after(market, sessions, seed + 1), sessions)
    assert whole == bits(name, cut(market, sessions))


@pytest.mark.parametrize("name", NAMES)
@pytest.mark.parametrize("ratio", [2.0, 0.25])
def test_splits_and_the_unit_of_price_do_not_matter(name: str, ratio: float) -> None:
    """Bit for bit the same through a split of the same worth (a power of two keeps ratios exact)."""
    market = reporting_market(1)
    halved = with_split(market, 200, ratio)
    after = int(market.ordinals[200])
    eps = tuple(r._replace(eps=r.eps / ratio) if r.ordinal >= after else r for r in market.reports)
    assert bits(name, market) == bits(name, replace(halved, reports=eps))


@pytest.mark.parametrize("name", NAMES)
def test_each_symbol_stands_alone(name: str) -> None:
    """Bit for bit the same for a symbol alone and beside another; with `of` in every column."""
    market = reporting_market(2)
    panel = Panel(market)
    found = panel.evaluate(name, params_of(name))
    for index, symbol in enumerate(market.symbols):
        alone = Panel(market.select([symbol])).evaluate(name, params_of(name))
        assert found[:, index].tobytes() == alone[:, 0].tobytes()
        spread = panel.evaluate(name, params_of(name), symbol)
        assert spread.shape == found.shape
        np.testing.assert_array_equal(spread, np.repeat(alone, 2, axis=1))


@pytest.mark.parametrize("name", BY_BARS)
def test_a_session_without_a_bar_is_passed_over(name: str) -> None:
    """Bit for bit the answers of the bars alone, one after another, and nothing in the holes."""
    market = random_market(3, 200, 1, 0.2)
    has = ~np.isnan(market.close[:, 0])
    fields = {field: getattr(market, field)[has] for field in ("open", "high", "low", "close")}
    dense = array_market(fields.pop("close"), **fields)
    found = Panel(market).evaluate(name, params_of(name))
    assert found[has].tobytes() == Panel(dense).evaluate(name, params_of(name)).tobytes()


@pytest.mark.parametrize("name", NAMES)
def test_nothing_is_said_without_a_bar(name: str) -> None:
    """Where the symbol has no bar a yes-or-no signal is no and a number is unknown."""
    market = reporting_market(4, holes=0.2)
    found = Panel(market).evaluate(name, params_of(name))
    in_holes = found[np.isnan(market.close)]
    assert in_holes.size > 0
    assert not in_holes.any() if found.dtype == np.bool_ else np.isnan(in_holes).all()


@pytest.mark.parametrize("name", BY_BARS)
def test_lookback_is_what_it_needs(name: str) -> None:
    """Nothing is said before the lookback is there; a number is known from then on."""
    market = random_market(5, 60)
    found = Panel(market).evaluate(name, params_of(name))
    lookback = named_signal(name).lookback_sessions(params_of(name))
    early = found[: lookback - 1]
    assert not early.any() if found.dtype == np.bool_ else np.isnan(early).all()
    if named_signal(name).kind == "number":
        assert not np.isnan(found[lookback - 1 :]).any()


@pytest.mark.parametrize("name", NAMES)
def test_kind_bounds_and_phrase(name: str) -> None:
    """A yes-or-no signal gives bools, sometimes yes; a number stays within its bounds; the phrase reads."""
    chosen = named_signal(name)
    found = Panel(reporting_market(6)).evaluate(name, params_of(name))
    if chosen.number is None:
        assert found.dtype == np.bool_
        assert 0 < found.sum() < found.size
    else:
        assert found.dtype == np.float64
        assert np.nanmin(found) >= chosen.number.least
        assert np.nanmax(found) <= chosen.number.most
    words = chosen.words(params_of(name))
    assert words.startswith("the ")
    assert "{" not in words
    assert "\n" not in words


@pytest.mark.parametrize("name", NAMES)
def test_answers_are_kept_and_cannot_be_changed(name: str) -> None:
    """Asked twice a panel gives the very same array, and it is read-only."""
    panel = Panel(random_market(7, 50))
    found = panel.evaluate(name, params_of(name))
    assert panel.evaluate(name, dict(reversed(params_of(name).items()))) is found
    with pytest.raises(ValueError, match="read-only"):
        found[0, 0] = 1


@pytest.fixture
def peeking() -> Iterator[str]:
    """Register a signal that looks at tomorrow, for as long as a test runs."""

    @signal("peeking", phrase="the close of tomorrow is higher")
    def tomorrow(panel: Panel) -> Floats:
        return np.vstack([panel.close[1:], panel.close[-1:]])

    yield "peeking"
    del SIGNALS["peeking"]


def test_a_signal_that_peeks_is_caught(peeking: str) -> None:
    """Negative control: both comparisons above tell a signal that looks at tomorrow."""
    market = reporting_market(8, holes=0.0)
    whole = bits(peeking, market, 100)
    assert whole != bits(peeking, cut(market, 100))
    assert whole != bits(peeking, changed_after(market, 100, 9), 100)


def test_a_name_is_taken_once() -> None:
    """A second signal of the same name is refused."""
    with pytest.raises(ValueError, match="already registered under the name `rsi`"):
        signal("rsi", phrase="again")(lambda panel: panel.close)


@pytest.mark.parametrize(
    ("name", "params", "told"),
    [
        ("rsy", {}, ["`rsy` is no signal", "did you mean `rsi`?"]),
        ("rsi", {"session": 14}, ["`session` is no parameter", "did you mean `sessions`?"]),
        ("rsi", {"sessions": 1}, ["`sessions` is 1", "a whole number from 2 to 250 (sessions)"]),
        ("rsi", {"sessions": 14.5}, ["`sessions` is 14.5"]),
        ("momentum", {}, ["`sessions` is missing"]),
        ("macd_positive", {"fast": 26, "slow": 12}, ["`fast` is 26, and slow is 12"]),
        ("mean_rising", {"sessions": 0, "over": True}, ["`sessions` is 0", "`over` is True"]),
    ],
)
def test_wrong_words_are_told(name: str, params: dict[str, float], told: list[str]) -> None:
    """Every fault at once, with what was found, what is allowed and the nearest right word."""
    with pytest.raises(RulesError) as caught:
        Panel(random_market(10, 20)).evaluate(name, params)
    for text in told:
        assert text in str(caught.value)


def test_an_unknown_symbol_is_told() -> None:
    """`of` a symbol that is not there names the nearest that is."""
    with pytest.raises(RulesError, match="did you mean `S00`"):
        Panel(random_market(11, 20)).evaluate("rsi", {}, "S00x")
