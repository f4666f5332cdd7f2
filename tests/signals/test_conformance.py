"""What every signal must do, whichever it is: the house's rules for this extension point."""

from __future__ import annotations

from collections.abc import Iterator

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from array_market import cut, random_market
from hedgerow.errors import RulesError
from hedgerow.extend.check_signal import SIGNAL_CHECKS, answer, later_sessions_change, small_parameters
from hedgerow.extend.invented import changed_after, reporting_market
from hedgerow.kernels.layout import Floats
from hedgerow.signals import SIGNALS, Panel, named_signal, signal

NAMES = sorted(SIGNALS)
BY_BARS = [name for name in NAMES if SIGNALS[name].by_bars]
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
    return small_parameters(SIGNALS[name])


def test_the_promised_signals_are_there() -> None:
    """Every name of the rule language has its signal."""
    assert set(NAMES) >= PROMISED


@pytest.mark.parametrize("rule", SIGNAL_CHECKS)
@pytest.mark.parametrize("name", NAMES)
def test_every_rule_of_the_house_is_kept(name: str, rule: str) -> None:
    """What is asked of a user's signal is asked of each of the package's own."""
    assert SIGNAL_CHECKS[rule](SIGNALS[name]) == ""


@pytest.mark.parametrize("name", NAMES)
@settings(max_examples=12)
@given(seed=st.integers(0, 10**6), sessions=st.integers(1, 339))
def test_time_runs_one_way(name: str, seed: int, sessions: int) -> None:
    """Bit for bit the same up to a close when all after it is changed, or is not there."""
    assert not later_sessions_change(SIGNALS[name], reporting_market(seed), sessions, seed + 1)


@pytest.mark.parametrize("name", NAMES)
def test_of_a_symbol_stands_in_every_column(name: str) -> None:
    """With `of` the signal of that symbol alone is in every column."""
    market = reporting_market(2)
    for symbol in market.symbols:
        alone = Panel(market.select([symbol])).evaluate(name, params_of(name))
        spread = Panel(market).evaluate(name, params_of(name), symbol)
        np.testing.assert_array_equal(spread, np.repeat(alone, 2, axis=1))


@pytest.mark.parametrize("name", NAMES)
def test_nothing_is_said_without_a_bar(name: str) -> None:
    """Where the symbol has no bar a yes-or-no signal is no and a number is unknown."""
    market = reporting_market(4, holes=0.2)
    found = Panel(market).evaluate(name, params_of(name))
    in_holes = found[np.isnan(market.close)]
    assert in_holes.size > 0
    assert not in_holes.any() if found.dtype == np.bool_ else np.isnan(in_holes).all()


@pytest.mark.parametrize("name", [name for name in NAMES if SIGNALS[name].number is None])
def test_yes_or_no_is_sometimes_yes(name: str) -> None:
    """A yes-or-no signal is neither always no nor always yes on an invented market."""
    found = Panel(reporting_market(6)).evaluate(name, params_of(name))
    assert 0 < found.sum() < found.size


@pytest.mark.parametrize("name", [name for name in BY_BARS if SIGNALS[name].number is not None])
def test_a_number_is_known_from_its_lookback_on(name: str) -> None:
    """Once the lookback is there a number of the package's own stays known."""
    found = Panel(random_market(5, 60)).evaluate(name, params_of(name))
    assert not np.isnan(found[named_signal(name).lookback_sessions(params_of(name)) - 1 :]).any()


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
    """Negative control: a signal that looks at tomorrow is told from later prices and from their absence."""
    chosen, market = SIGNALS[peeking], reporting_market(8, holes=0.0)
    whole = answer(chosen, market)[:100].tobytes()
    assert whole != answer(chosen, cut(market, 100)).tobytes()
    assert whole != answer(chosen, changed_after(market, 100, 9))[:100].tobytes()
    assert later_sessions_change(chosen, market, 100, 9)


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
