"""Studies: what a file declares, how its paths and variants are resolved, and every fault with its place."""

from __future__ import annotations

import datetime as dt
from dataclasses import replace
from pathlib import Path
from typing import Any

import pytest
import yaml
from hypothesis import given, settings

from hedgerow.errors import StudyError
from hedgerow.kernels.layout import Costs
from hedgerow.rules.load import load_strategy
from hedgerow.study.declare import Study, load_study, study_of_strategy
from hedgerow.study.evidence_words import Asked
from hedgerow.study.trials import trials_of
from hedgerow.study.words import CostWords, Day
from hedgerow.volatility.model import PRESETS, SurfaceModel
from hedgerow.walk.account import DEFAULT_COSTS, NO_COSTS, Account
from random_strategies import strategies
from rule_words import collar, leg

ROOT = Path(__file__).parents[2]
PUT = {"name": "Put", "legs": {"put": leg("buy", "put")}}


def folder_with(tmp_path: Path, **strategies_by_name: Any) -> Path:
    """A folder with an (empty) market and strategy files."""
    (tmp_path / "market").mkdir()
    (tmp_path / "rules").mkdir()
    for name, words in {"put": PUT, **strategies_by_name}.items():
        (tmp_path / "rules" / f"{name}.yaml").write_text(
            yaml.safe_dump(words, sort_keys=False), encoding="utf-8"
        )
    return tmp_path


def study_file(tmp_path: Path, text: str) -> Path:
    """A study file in a folder below the market and the rules."""
    tmp_path.mkdir(exist_ok=True)
    path = folder_with(tmp_path) / "studies" / "study.yaml"
    path.parent.mkdir()
    path.write_text(text, encoding="utf-8")
    return path


def faults(source: Any, base: Path | None = None) -> list[tuple[str, int, int, str]]:
    """File name, line, column and code of every fault of a study."""
    with pytest.raises(StudyError) as caught:
        load_study(source, base)
    return [(Path(f.where).name, f.line, f.column, f.code) for f in caught.value.faults]


SHORT = "name: a\nmarket: ../market\nstrategy: ../rules/put.yaml\n"


def test_paths_are_relative_to_the_study(tmp_path: Path) -> None:
    """Not to the folder in which the command runs."""
    study = load_study(study_file(tmp_path, SHORT))
    assert study.market == tmp_path / "market"
    assert study.variants == (("Put", load_strategy(PUT)),)
    assert study.path == tmp_path / "studies" / "study.yaml"


def test_defaults(tmp_path: Path) -> None:
    """Compares everything left out with the defaults of the rooms that own them."""
    study = load_study(study_file(tmp_path, SHORT))
    assert (study.question, study.symbols, study.first, study.last) == ("", None, None, None)
    assert study.account == Account()
    assert study.costs == DEFAULT_COSTS
    assert study.surface == SurfaceModel()
    assert (study.listings, study.yardstick, study.seed) == ("modern", "buy and hold", 1)


def test_everything_said(tmp_path: Path) -> None:
    """Compares every attribute with the words of a file that says all of them."""
    text = SHORT + (
        "question: Which?\nsymbols: [NO, ON]\nwindow: {from: 2011-01-03, to: 2024-12-31}\n"
        "account: {cash: 50000, per_position: 1/12, most_positions: 12, most_new_a_day: 3, interest: false}\n"
        "pricing: {volatility: {preset: plain-21, ratio: 1.1}, listings: historical}\n"
        "costs: {half_spread: 4%, spread_rise: 1, floor_ticks: 1, whole_ticks: false, contract_fee: 1, "
        "share_fee: 0.01, trade_fee: 5, assignment_fee: 15, slippage: 0.1%, borrow: 2%}\n"
        "yardstick: none\nseed: 7\nvariants: {one: {}, two: {legs.put.expiry.days: 60}}\n"
    )
    study = load_study(study_file(tmp_path, text))
    assert (study.question, study.symbols) == ("Which?", ("NO", "ON"))
    assert (study.first, study.last) == ("2011-01-03", "2024-12-31")
    assert study.account == Account(50_000.0, 1 / 12, 12, 3, False)
    assert study.surface == replace(PRESETS["plain-21"], ratio=1.1)
    assert study.costs == Costs(0.04, 1.0, 1.0, 0.0, 1.0, 0.01, 5.0, 15.0, 0.001, 0.02)
    assert (study.listings, study.yardstick, study.seed) == ("historical", "none", 7)
    assert [(name, strategy.legs[0].expiry.days) for name, strategy in study.variants] == [
        ("one", 30),
        ("two", 60),
    ]


def test_no_costs(tmp_path: Path) -> None:
    """`none` takes nothing and fills at exact prices."""
    study = load_study(study_file(tmp_path, SHORT + "costs: none\n"))
    assert study.costs == NO_COSTS
    assert set(study.costs) == {0.0}


def test_defaults_of_costs_are_those_with_their_reasons() -> None:
    """One place holds the default costs, their words come from it, and words describe costs both ways."""
    assert CostWords().costs() == DEFAULT_COSTS
    for costs in (DEFAULT_COSTS, NO_COSTS):
        assert CostWords.of(costs).costs() == costs


def test_strategy_written_out(tmp_path: Path) -> None:
    """A strategy may stand in the study itself."""
    text = "name: a\nmarket: ../market\nstrategy:\n  name: Shares\nvariants:\n  short: {shares: short}\n"
    study = load_study(study_file(tmp_path, text))
    assert [(name, strategy.shares) for name, strategy in study.variants] == [("short", "short")]


def test_variants_with_files_of_their_own(tmp_path: Path) -> None:
    """Then the study itself needs no strategy; changes are made on the variant's own."""
    text = (
        "name: a\nmarket: ../market\nvariants:\n  near: {strategy: ../rules/put.yaml}\n"
        "  far: {strategy: ../rules/put.yaml, legs.put.expiry.days: 90}\n  none: {strategy: {name: Shares}}\n"
    )
    study = load_study(study_file(tmp_path, text))
    assert [len(strategy.legs) for _, strategy in study.variants] == [1, 1, 0]
    assert study.variants[1][1].legs[0].expiry.days == 90


@pytest.mark.parametrize("path", sorted((ROOT / "configs").glob("*.yaml")), ids=lambda path: path.name)
def test_shipped_studies(path: Path) -> None:
    """Each is right, has several variants that differ, a question, and comes back from its own words."""
    study = load_study(path)
    assert study.question
    trials = trials_of(study)
    assert len({trials.strategy(number) for number in range(len(trials))}) == len(trials) > 1
    assert str(study.market).startswith("sample:") or (study.market / "prices.csv").exists()
    assert replace(load_study(study.plain()), path=path) == study


def test_a_sample_of_real_prices_by_name(tmp_path: Path) -> None:
    """Wherever the study stands; an unknown one is told with its place and the nearest right name."""
    text = "name: a\nmarket: sample:{}\nstrategy: {{name: Shares}}\n"
    study = load_study(study_file(tmp_path, text.format("sp500")))
    assert str(study.market) == "sample:sp500"
    with pytest.raises(StudyError) as caught:
        load_study(study_file(tmp_path / "other", text.format("five-stock")))
    (fault,) = caught.value.faults
    assert (fault.line, fault.code) == (2, "unknown-sample")
    assert "did you mean `sample:five-stocks`?" in str(fault)


def test_the_words_of_evidence(tmp_path: Path) -> None:
    """Read as figures, kept increasing; `none` for all of it and for the stress; both come back."""
    text = "name: a\nmarket: .\nstrategy: {name: Shares}\nevidence: "
    words = "{level: 95%, draws: 500, stress: {ratio: [1.4, 0.8, 0.8]}, timing: false, target: -5%}\n"
    study = load_study(study_file(tmp_path, text + words))
    assert study.evidence is not None
    assert study.evidence == replace(
        Asked(), level=0.95, draws=500, ratios=(0.8, 1.4), timing=False, target=-0.05
    )
    assert load_study(study_file(tmp_path / "none", text + "none\n")).evidence is None
    bare = load_study(study_file(tmp_path / "bare", text + "{stress: none}\n"))
    assert bare.evidence is not None
    assert bare.evidence.ratios == bare.evidence.skews == bare.evidence.half_spreads == ()
    assert load_study(bare.plain()).evidence == bare.evidence


def test_faults_of_evidence_come_together(tmp_path: Path) -> None:
    """A bare number for a percent, too few draws, a ratio that is none, and a word that is none."""
    text = (
        "name: a\nmarket: .\nstrategy: {name: Shares}\nevidence:\n  level: 0.9\n  draws: 5\n"
        "  stress: {ratio: [1, x], half_spread: 3%}\n  timings: true\n"
    )
    with pytest.raises(StudyError) as caught:
        load_study(study_file(tmp_path, text))
    told = {(fault.line, fault.code) for fault in caught.value.faults}
    assert told == {(5, "percent"), (6, "range"), (7, "number"), (7, "shape"), (8, "unknown-word")}


@settings(max_examples=25)
@given(strategies())
def test_resolved_words_come_back(words: dict[str, Any]) -> None:
    """Compares a study of a random strategy with what its resolved words, written as YAML and read, give."""
    study = load_study(
        {"name": "a", "market": ".", "strategy": words, "variants": {"x": {}, "12:30": {"fill": "close"}}}
    )
    again = load_study(yaml.safe_load(yaml.safe_dump(study.plain(), sort_keys=False)))
    assert again == study


def test_faults_of_the_study_and_of_its_strategies_in_one_pass(tmp_path: Path) -> None:
    """Compares with lines and columns counted by hand, over both files."""
    text = (
        "name: a\nmarkt: ../market\nmarket: ../nowhere\nwindow: {from: 2024-01-01, to: 2011-02-30}\n"
        "account: {per_position: 0.3}\ncosts: {half_spread: 3}\npricing: {volatility: {skwe: 1}}\n"
        "strategy: ../rules/bad.yaml\n"
        "variants:\n  one: {legs.put.expiry.days: 0}\n  two: {legs.pt.ratio: 2}\n"
    )
    folder_with(tmp_path, bad={**PUT, "fill": "opne"})
    path = tmp_path / "study.yaml"
    path.write_text(text.replace("../", ""), encoding="utf-8")
    found = faults(path)
    assert found == [
        ("bad.yaml", 10, 7, "choice"),
        ("study.yaml", 2, 1, "unknown-word"),
        ("study.yaml", 3, 9, "file-missing"),
        ("study.yaml", 4, 32, "date"),
        ("study.yaml", 5, 25, "share"),
        ("study.yaml", 6, 22, "percent"),
        ("study.yaml", 7, 24, "unknown"),
        ("study.yaml", 10, 31, "range"),
        ("study.yaml", 11, 9, "unknown-word"),
    ]


@pytest.mark.parametrize(
    ("line", "code"),
    [
        ("window: {from: 2024-01-01, to: 2011-01-01}", "reversed"),
        ("window: {from: 01/03/2011}", "date"),
        ("window: {from: 1850-01-01}", "date"),
        ("window: {from: 12:30}", "date"),
        ("symbols: ALL", "shape"),
        ("symbols: []", "shape"),
        ("symbols: [HAY, HAY]", "repeated"),
        ("symbols: [HAY, [OAT]]", "text"),
        ("account: {cash: 0}", "range"),
        ("account: {cash: 100%}", "number"),
        ("account: {per_position: 4/3}", "range"),
        ("account: {most_positions: 0}", "range"),
        ("account: {interest: NO}", "flag"),
        ("account: 5000", "shape"),
        ("costs: free", "unknown"),
        ("costs: {half_sprad: 3%}", "unknown-word"),
        ("costs: {contract_fee: -1}", "range"),
        ("pricing: {listings: modrn}", "choice"),
        ("pricing: {volatility: plain}", "unknown"),
        ("pricing: {volatility: {floor: 5}}", "percent"),
        ("pricing: {volatilty: default}", "unknown-word"),
        ("yardstick: gold", "choice"),
        ("seed: -1", "range"),
        ("variants: {}", "shape"),
        ("variants: [one]", "shape"),
        ("variants: {one: 5}", "shape"),
        ("variants: {one: }", "empty"),
        ("variants: {one: {strategy: }}", "empty"),
        ("variants: {one: {strategy: ../rules/none.yaml}}", "file-missing"),
        ("question:", "empty"),
    ],
)
def test_wrong_lines(tmp_path: Path, line: str, code: str) -> None:
    """Each is told on its own line."""
    found = faults(study_file(tmp_path, SHORT + line + "\n"))
    assert (4, code) in [(where[1], where[3]) for where in found]
    assert {where[0] for where in found} == {"study.yaml"}


@pytest.mark.parametrize(
    ("text", "code"),
    [
        ("market: ../market\nstrategy: ../rules/put.yaml\n", "missing"),
        ("name: a\nstrategy: ../rules/put.yaml\n", "missing"),
        ("name: a\nmarket: ../market\n", "missing"),
        ("name: a\nmarket: ../market\nstrategy: ../rules/putt.yaml\n", "file-missing"),
        ("name: a\nmarket: ../market\nstrategy: [put]\n", "shape"),
        ("name: a\nmarket: ../market\nstrategy: ../rules\n", "file-is-folder"),
        ("name: a\nmarket: ../market\nstrategy: {name: 5%, legs: 3}\n", "shape"),
        ("- a\n", "shape"),
        ("", "yaml-empty"),
        ("name: *a\nmarket: ../market\nstrategy: {name: a}\n", "yaml-alias"),
        ("name: a\nname: b\nmarket: ../market\nstrategy: {name: a}\n", "yaml-repeated-key"),
    ],
)
def test_what_is_no_study(tmp_path: Path, text: str, code: str) -> None:
    """Missing words and files, wrong shapes, what YAML itself refuses."""
    assert code in [found[3] for found in faults(study_file(tmp_path, text))]


def test_missing_file(tmp_path: Path) -> None:
    """One readable fault."""
    assert faults(tmp_path / "none.yaml") == [("none.yaml", 0, 0, "file-missing")]


def test_fault_of_a_base_is_told_once_for_all_variants(tmp_path: Path) -> None:
    """Three variants of one faulty file are one fault."""
    folder_with(tmp_path, bad={**PUT, "fill": "opne"})
    words = {
        "name": "a",
        "market": "market",
        "strategy": "rules/bad.yaml",
        "variants": {"x": {}, "y": {}, "z": {}},
    }
    assert faults(words, tmp_path) == [("bad.yaml", 10, 7, "choice")]


def test_fault_of_a_strategy_written_out_stands_in_the_study(tmp_path: Path) -> None:
    """With the study's line."""
    text = "name: a\nmarket: ../market\nstrategy:\n  name: x\n  fill: opne\n"
    assert faults(study_file(tmp_path, text)) == [("study.yaml", 5, 9, "choice")]


def test_mapping_relative_to_a_base(tmp_path: Path) -> None:
    """From Python, paths are relative to the base that is given."""
    folder_with(tmp_path)
    words = {"name": "a", "market": "market", "strategy": "rules/put.yaml", "symbols": ("HAY",)}
    words["window"] = {"from": dt.date(2011, 1, 3)}
    study = load_study(words, tmp_path)
    assert (study.market, study.symbols, study.first, study.path) == (
        tmp_path / "market",
        ("HAY",),
        "2011-01-03",
        None,
    )


def test_strategy_alone(tmp_path: Path) -> None:
    """A strategy and a market make a study with the defaults, named after the strategy."""
    folder = folder_with(tmp_path)
    study = study_of_strategy(folder / "rules" / "put.yaml", folder / "market")
    assert (study.name, study.market, len(study.variants)) == ("Put", folder / "market", 1)
    assert study.costs == DEFAULT_COSTS
    other = study_of_strategy(PUT, folder / "market", account={"cash": 5000}, costs="none", name="Mine")
    assert (other.name, other.account.cash, other.costs) == ("Mine", 5000.0, NO_COSTS)


def test_faults_of_a_strategy_alone(tmp_path: Path) -> None:
    """Those of the strategy have its file and lines, those of the words their names."""
    folder = folder_with(tmp_path, bad={**PUT, "fill": "opne"})
    with pytest.raises(StudyError) as caught:
        study_of_strategy(folder / "rules" / "bad.yaml", folder / "none", account={"cash": "much"})
    assert [fault.code for fault in caught.value.faults] == ["choice", "file-missing", "number"]


def test_study_is_frozen(tmp_path: Path) -> None:
    """A study that exists stays as it was declared."""
    study = study_of_strategy(collar(), folder_with(tmp_path) / "market")
    assert isinstance(study, Study)
    with pytest.raises(AttributeError):
        study.seed = 2  # type: ignore[misc]  # the point of the test


@pytest.mark.parametrize(
    "value", ["2011-1-3", "2011-02-29", "20110103", 20110103, None, dt.datetime(2011, 1, 3), ""]
)
def test_no_day(value: Any) -> None:
    """Only a date of the calendar, as it is written in the language."""
    with pytest.raises(ValueError, match="no such date"):
        Day().read(value)
