"""Positions held: the sheet decides what the walk decides of them; wrong files are told with their place."""

from __future__ import annotations

import datetime as dt
from pathlib import Path

import numpy as np
import pytest
from hypothesis import HealthCheck, assume, given, settings
from hypothesis import strategies as st

import hedgerow as hr
from desk_sheets import ACCOUNT, MARKETS, ROOT, STRATEGIES, bench_of, named, orchard, ordered, study_of
from hedgerow.desk.page import page_of
from hedgerow.desk.sheet import Sheet
from hedgerow.desk.text import text_of
from hedgerow.events.log import EventLog
from hedgerow.kernels import layout as at
from hedgerow.rules.load import load_strategy
from hedgerow.walk.account import DEFAULT_COSTS, Account
from hedgerow.walk.run import Window
from held_from_log import Name, positions_before

SPAN = 160  # sessions walked before the close looked at


def decided(log: EventLog, session: int, held: dict[int, Name], fill: str) -> dict[Name, set[str]]:
    """What the walk's own log decides of each position at a close, in the words of the sheet's verdicts."""
    exits, found = log.meta.exits, {name: set() for name in held.values()}
    ordered_by = at.KIND_LEG if fill == "close" else at.KIND_SIGNALLED
    for event in log.events[log.events["session"] == session]:
        symbol = held.get(int(event["position"]))
        if symbol is None:
            continue
        if event["reason"] >= at.WHY_EXIT_RULE:
            found[symbol].add(f"leave: {exits[int(event['reason']) - at.WHY_EXIT_RULE]}")
        elif event["kind"] == at.KIND_CLOSED and event["reason"] == at.WHY_EXPIRY:
            found[symbol].add("over at expiry")
        elif event["reason"] == at.WHY_ROLL and event["kind"] == ordered_by:
            found[symbol].add("roll")
        elif event["reason"] == at.WHY_ADDED and event["kind"] == ordered_by:
            found[symbol].add("add")
    return found


def moved(log: EventLog, session: int, held: dict[int, Name], fill: str) -> dict[Name, set[str]]:
    """The legs that the walk's log rolls or adds at a close, with strike and expiry, as the sheet says it."""
    found: dict[Name, set[str]] = {name: set() for name in held.values()}
    here = (log.events["session"] == session) & np.isin(log.events["reason"], (at.WHY_ROLL, at.WHY_ADDED))
    kind = at.KIND_LEG if fill == "close" else at.KIND_SIGNALLED
    for event in log.events[here & (log.events["kind"] == kind)]:
        leg = log.meta.legs[int(event["leg"])]
        opens = fill == "open" or (event["quantity"] > 0.0) == (leg.side == "buy")
        if opens and int(event["position"]) in held:
            word = "roll" if event["reason"] == at.WHY_ROLL else "add"
            strike = f"{event['strike']:,.2f}".removesuffix(".00")
            expiry = dt.date.fromordinal(int(event["expiry"]))
            found[held[int(event["position"])]].add(f"{word} `{leg.name}`: {strike} to {expiry}")
    return found


@settings(max_examples=60, suppress_health_check=[HealthCheck.too_slow, HealthCheck.filter_too_much])
@given(
    strategy=st.sampled_from(STRATEGIES), name=st.sampled_from(sorted(MARKETS)), share=st.floats(0.15, 0.999)
)
def test_the_sheet_decides_what_the_walk_decides(strategy: Path, name: str, share: float) -> None:
    """From the walk's own account, written down as a file: entries, exits, rolls and lots are the log's."""
    bench, rule = bench_of(name), load_strategy(strategy)
    session = int(share * (len(bench.market.dates) - 1))
    first = max(session - SPAN, 0)
    log = bench.run(rule, Account(**ACCOUNT), DEFAULT_COSTS, Window(first, session + 1), beside=False).log
    words, held = positions_before(log, session, rule.fill == "close")
    assume(not (bench.market.special[first : session + 1] != 0.0).any())
    day = str(bench.market.dates[session])
    sheet = hr.today(study_of(strategy, first=day), bench.market, as_of=day, positions=words)
    assert named(sheet) == ordered(log, session)
    wanted, moves = decided(log, session, held, rule.fill), moved(log, session, held, rule.fill)
    for line in sheet.held:
        assert line.verdict in (wanted[line.symbol, line.opened] or {"hold", "close what is left of it"}), (
            line
        )
        assert {order for order in line.orders if order.startswith(("roll", "add"))} == moves[
            line.symbol, line.opened
        ]


GOOD = """\
cash: 41200
positions:
  - symbol: CWWK
    opened: 2024-12-10
    shares: 400
    stock_price: 69.80
    legs:
      call: {strike: 72, expiry: 2025-01-17, price: 1.10}
      put: {strike: 66, expiry: 2025-01-17, price: 0.85}
"""


def sheet_with(text: str, folder: Path, rule: str = "collar") -> Sheet:
    """The sheet of a shipped rule on the last session of the demo market, beside a file of positions."""
    place = folder / "positions.yaml"
    place.write_text(text, encoding="utf-8")
    study = study_of(ROOT / f"strategies/{rule}.yaml", first="2024-12-31")
    return hr.today(study, orchard(), positions=place)


def test_a_collar_by_hand(tmp_path: Path) -> None:
    """400 at 69.80, calls sold at 1.10, puts bought at .85: paid 27,820, at best 28,800, at worst 26,400."""
    sheet = sheet_with(GOOD, tmp_path)
    (line,) = sheet.held
    assert (line.best_gain, line.worst_loss) == (pytest.approx(980.0), pytest.approx(1420.0))
    mids = {leg.name: leg.mid for leg in line.legs}
    value = 400.0 * (line.close - mids["call"] + mids["put"])
    assert line.gain == pytest.approx(value - 27_820.0)
    assert sheet.equity == pytest.approx(41_200.0 + value)
    assert line.verdict == "hold"
    assert "Held: 1" in text_of(sheet)
    assert "CWWK" in page_of(sheet)
    assert sheet.to_frame()["status"].tolist()[0] == "position"


def test_a_call_is_exercised_before_a_large_dividend(tmp_path: Path) -> None:
    """A call at 30 on a stock at 48 with .36 expected next month is worth more exercised before it."""
    text = GOOD.replace("CWWK", "DNMW").replace("strike: 72", "strike: 30")
    (line,) = sheet_with(text, tmp_path).held
    call = next(leg for leg in line.legs if leg.right == "call")
    assert call.exercised
    assert call.due == line.dividends[0][0]
    assert call.reach > 0.99
    far = sheet_with(text.replace("strike: 30", "strike: 60"), tmp_path).held[0]
    assert not any(leg.exercised for leg in far.legs)


def test_a_stop_and_a_trigger_know_their_distance(tmp_path: Path) -> None:
    """A stop seven percent under 80 rests at 74.40: from 70.32 nothing is left; one under 70 is 5.22 away."""
    text = GOOD.replace("      put: {strike: 66, expiry: 2025-01-17, price: 0.85}\n", "")
    below = sheet_with(text.replace("69.80", "80"), tmp_path, "covered-call-out-of-the-money").held[0]
    above = sheet_with(text.replace("69.80", "70"), tmp_path, "covered-call-out-of-the-money").held[0]
    stops = [next(one for one in line.triggers if one.name.startswith("stop")) for line in (below, above)]
    assert [stop.tests[0].holds for stop in stops] == [True, False]
    assert stops[1].tests[0].distance == pytest.approx(70.32 - 70.0 * 0.93)
    roll = next(one for one in above.triggers if one.name == "roll `call`")
    assert (roll.tests[0].value, roll.tests[0].bound, roll.tests[0].holds) == (17.0, 4.0, False)


@pytest.mark.parametrize(
    ("found", "put", "place", "told"),
    [
        ("CWWK", "CWWX", "3:13", "did you mean `CWWK`?"),
        ("call:", "cal:", "8:7", "did you mean `call`?"),
        ("shares: 400", "shares: 4.5", "5:13", "no whole number"),
        ("shares: 400", "share: 400", "5:5", "did you mean `shares`?"),
        ("2024-12-10", "2024-12-08", "4:13", "no session of the data"),
        ("2025-01-17, price: 1.10", "2024-12-20, price: 1.10", "8:34", "before the close"),
        ("    stock_price: 69.80\n", "", "3:5", "`stock_price`"),
        ("cash: 41200", "cash: a lot", "1:7", "no plain number"),
        ("cash: 41200\n", "", "1:1", "`cash` is missing"),
        ("strike: 72", "strike: -72", "8:22", "above 0"),
        ("price: 0.85", "price: 0.85, price: 1", "9:58", "a second time"),
        ("    shares: 400\n    stock_price: 69.80\n", "", "3:5", "no `shares`"),
    ],
)
def test_wrong_files_are_told_with_line_and_column(
    tmp_path: Path, found: str, put: str, place: str, told: str
) -> None:
    """One thing changed in a good file: the fault names the file, its line and column, and what is right."""
    assert found in GOOD
    with pytest.raises(hr.DeskError) as refused:
        sheet_with(GOOD.replace(found, put, 1), tmp_path)
    text = str(refused.value)
    assert f"positions.yaml:{place}: " in text, text
    assert told in text
    assert refused.value.exit_code == 2


def test_one_position_a_symbol_unless_the_rule_ladders(tmp_path: Path) -> None:
    """A second position of a symbol is refused by a rule of one, and taken by one of three."""
    share = "  - {symbol: CWWK, opened: DAY, shares: 100, stock_price: 70, legs: {put: {PUT}}}\n"
    share = share.replace("PUT", "strike: 66, expiry: 2025-03-21, price: 1")
    two = "cash: 1000\npositions:\n" + "".join(share.replace("DAY", f"2024-12-{day}") for day in (10, 11))
    with pytest.raises(hr.DeskError, match="another position stands above"):
        sheet_with(two, tmp_path)
    assert [line.opened for line in sheet_with(two, tmp_path, "laddered-hedge").held] == [
        "2024-12-10",
        "2024-12-11",
    ]


def test_a_rule_that_pauses_after_a_loss_waits() -> None:
    """A loss three sessions ago keeps a rule with a pause of five from that symbol, and from no other."""
    rule = {
        "name": "Pausing",
        "legs": {"put": {"buy": "put", "expiry": {"days": 30}, "strike": {"from_spot": "-5%"}}},
        "enter": {"cool_down": {"sessions": 5}},
    }
    lost = [{"symbol": "CWWK", "closed": "2024-12-26"}]
    study = study_of(rule, first="2024-12-31", cash=1_000_000, per_position="1/20")
    sheet = hr.today(study, orchard(), positions={"cash": 1_000_000, "lost": lost})
    looks = {look.symbol: look for look in sheet.looks}
    assert looks["CWWK"].reason == "cooling down: a loss 3 sessions ago"
    assert looks["DNMW"].status == "open"
    assert {look.status for look in hr.today(study, orchard()).looks if look.symbol == "CWWK"} == {"open"}
