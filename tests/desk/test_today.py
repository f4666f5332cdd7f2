"""The sheet against the engine: it names what the walk orders at that close, and nothing later matters."""

from __future__ import annotations

import shutil
from pathlib import Path

import numpy as np
import pandas as pd
import pytest
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st

import hedgerow as hr
from desk_sheets import MARKETS, ROOT, STRATEGIES, bench_of, named, orchard, ordered, study_of, walk_from
from hedgerow.desk.files import json_of
from hedgerow.desk.page import page_of
from hedgerow.desk.sheet import Look, Sheet
from hedgerow.desk.text import text_of
from hedgerow.events.log import EventLog
from hedgerow.market import Market
from hedgerow.study.one import Bench
from hedgerow.walk.account import DEFAULT_COSTS
from hedgerow.walk.run import Window
from oracle.words import Setting
from properties.accounts import SHORT_BLEND, accounts
from properties.markets import wild_markets
from properties.rules import Rule, rules

LONGEST = 3  # sessions in which an order fills, or is dropped


def filled(log: EventLog, session: int) -> dict[str, set[tuple[str, float, str, float]]]:
    """Legs of each position decided at a session, as they were filled: name, strike, expiry, shares a lot."""
    found: dict[str, set[tuple[str, float, str, float]]] = {}
    frame = log.to_frame()
    for terms in log.terms[log.terms["decided"] == session]:
        rows = frame[(frame["position"] == terms["position"]) & (frame["reason"] == "entry")]
        legs = rows[rows["kind"] == "leg"]
        found[log.meta.symbols[terms["symbol"]]] = {
            (row.leg, row.strike, str(row.expiry.date()), row.quantity / terms["lots"])
            for row in legs.itertuples()
        }
    return found


def legs_of(look: Look) -> set[tuple[str, float, str, float]]:
    """The legs of an opening, as `filled` has them."""
    assert look.plan is not None
    return {
        (
            leg.name,
            leg.strike,
            leg.expiry,
            (1.0 if leg.side == "buy" else -1.0) * 100.0 * leg.contracts / look.plan.lots,
        )
        for leg in look.plan.legs
    }


def as_written(sheet: Sheet) -> tuple[str, ...]:
    """Everything a sheet is written as."""
    return text_of(sheet), page_of(sheet), json_of(sheet), sheet.to_frame().to_csv()


@settings(max_examples=30, suppress_health_check=[HealthCheck.too_slow])
@given(
    strategy=st.sampled_from(STRATEGIES),
    name=st.sampled_from(sorted(MARKETS)),
    share=st.floats(0.1, 0.999),
)
def test_the_sheet_names_what_the_walk_orders(strategy: Path, name: str, share: float) -> None:
    """Shipped rules, invented and real prices: order, lots, strikes and expiries are those of the log."""
    bench = bench_of(name)
    session = int(share * (len(bench.market.dates) - 1))
    split = (bench.market.split[session + 1 : session + 1 + LONGEST] != 1.0).any(axis=0)
    special = (bench.market.special[session + 1 : session + 1 + LONGEST] != 0.0).any(axis=0)
    day = str(bench.market.dates[session])
    sheet = hr.today(study_of(strategy, first=day), bench.market, as_of=day)
    log = walk_from(bench, strategy, session, session + 1 + LONGEST)
    assert named(sheet) == ordered(log, session)
    fills = filled(log, session)
    restated = {bench.market.symbols[at_] for at_ in np.flatnonzero(split | special)}
    for look in sheet.of("open"):
        if look.symbol in fills and look.symbol not in restated:
            assert legs_of(look) == fills[look.symbol]


@settings(max_examples=40, suppress_health_check=[HealthCheck.too_slow])
@given(market=wild_markets(), rule=rules(), setting=accounts(), share=st.floats(0.3, 0.99))
def test_random_rules_on_random_markets(market: Market, rule: Rule, setting: Setting, share: float) -> None:
    """Any rule of the language, markets with holes, splits and reports: the same symbols, lots and order."""
    session = int(share * (len(market.dates) - 1))
    account = {"cash": setting.cash, "per_position": f"{100 * setting.per_position!r}%"}
    study = study_of(rule, SHORT_BLEND, **account, most_positions=setting.most_positions)
    sheet = hr.today(study, market, as_of=str(market.dates[session]))
    bench = Bench(market, study.surface)
    log = bench.run(
        study.variants[0][1], study.account, DEFAULT_COSTS, Window(session, session + 1), beside=False
    ).log
    assert named(sheet) == ordered(log, session)


@pytest.mark.parametrize("strategy", ["collar", "collar-weekly", "married-put-with-income", "laddered-hedge"])
@pytest.mark.parametrize("date", ["2012-06-15", "2018-02-05", "2020-03-16"])
def test_nothing_later_matters(strategy: str, date: str, tmp_path: Path) -> None:
    """Price files cut after a date give the same sheet, byte for byte, as the whole ones."""
    place = cut_folder(tmp_path / "cut", date)
    study = study_of(ROOT / "strategies" / f"{strategy}.yaml")
    whole = hr.today(study, orchard(), as_of=date)
    assert as_written(whole) == as_written(hr.today(study, place, as_of=date))
    assert as_written(whole) == as_written(hr.today(study, place))


def cut_folder(folder: Path, date: str) -> Path:
    """The demo market's files without any row of a later day; reports whose day was known by then stay."""
    shutil.copytree(ROOT / "datasets/orchard-bay", folder)
    for name in ("prices", "dividends", "splits", "rates"):
        frame = pd.read_csv(folder / f"{name}.csv", dtype=str)
        frame[frame["date"] <= date].to_csv(folder / f"{name}.csv", index=False)
    reports = pd.read_csv(folder / "reports.csv", dtype=str)
    known = reports["announced"] <= date
    reports.loc[reports["date"] >= date, "eps"] = ""
    reports[known].to_csv(folder / "reports.csv", index=False)
    return folder


def test_the_comparison_can_fail() -> None:
    """A negative control: what the walk orders a day earlier is not what the sheet names."""
    bench, strategy = bench_of("orchard"), ROOT / "strategies/collar.yaml"
    unlike = 0
    for session in range(1500, 1506):
        sheet = hr.today(study_of(strategy), bench.market, as_of=str(bench.market.dates[session]))
        before = walk_from(bench, strategy, session - 1, session)
        assert named(sheet)
        unlike += named(sheet) != ordered(before, session - 1)
    assert unlike >= 3


def test_a_changed_past_does_matter() -> None:
    """A negative control: the sheet of the session before is another one."""
    study = study_of(ROOT / "strategies/collar.yaml")
    one, other = (hr.today(study, orchard(), as_of=day) for day in ("2018-02-05", "2018-02-02"))
    assert as_written(one) != as_written(other)
    assert [look.close for look in one.looks] != [look.close for look in other.looks]


def test_a_page_takes_text_as_text_and_fetches_nothing() -> None:
    """A rule's name with a tag in it is shown, not obeyed; no script, no address, no image."""
    rule = hr.load_strategy(ROOT / "strategies/collar.yaml").plain() | {
        "name": "<img src=x> & <script>1</script>"
    }
    page = page_of(hr.today(study_of(rule, first="2018-02-05"), orchard(), as_of="2018-02-05"))
    assert "&lt;img src=x&gt; &amp; &lt;script&gt;" in page
    assert not any(word in page for word in ("<img", "<script", "http", "url(", "@import"))
