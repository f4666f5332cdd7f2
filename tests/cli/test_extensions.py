"""Extensions on the command line and in a study: checked, used, recorded, and repeated only unchanged."""

from __future__ import annotations

import hashlib
import shutil
from pathlib import Path

import pytest
import yaml

import hedgerow as hr
from cli_runs import RULE, STUDY, Runner
from hedgerow.kernels.layout import Costs

pytestmark = pytest.mark.usefixtures("forgotten")
MINE = Path(__file__).parents[1] / "extend" / "my_signals.py"
QUIET_RULE = RULE + "enter: {when: {signal: quiet, sessions: 5, percent: 9}}\n"
OWN_STUDY = STUDY.replace("[{close: 21}]", "[{absolute: 21}]") + "extensions: [mine.py]\ncosts: thin_names\n"


@pytest.fixture
def own(hedgerow: Runner) -> Runner:
    """The folder with a user's file, a rule that asks its signal, and a study that uses all of it."""
    shutil.copy(MINE, "mine.py")
    hedgerow.write(rule__yaml=QUIET_RULE, study__yaml=OWN_STUDY)
    return hedgerow


def test_the_check_names_every_item_and_rule(own: Runner) -> None:
    """One line an item, exit code 0; a peeking one ends with 2 and one sentence at its line."""
    said = own("extensions", "check", "mine.py")
    assert said.code == 0
    lines = said.out.splitlines()
    assert len(lines) == 4
    assert all(line.startswith("ok  mine.py:") for line in lines)
    assert "looks only backward, is blind to splits, keeps symbols apart" in lines[0]
    own.write(
        peeks__py="import numpy as np\nfrom hedgerow.extend import signal\n\n\n"
        '@signal("tomorrow", phrase="the close of tomorrow is higher")\n'
        "def tomorrow(panel):\n    return np.roll(panel.close, -1, axis=0) > panel.close\n"
    )
    said = own("extensions", "check", "peeks.py")
    assert said.code == 2
    assert len(said.out.splitlines()) == 1
    assert said.out.startswith("peeks.py:5: signal `tomorrow` is refused: it looks ahead")


def test_a_study_uses_and_records_it(own: Runner) -> None:
    """Signal, estimator and costs are used; run.yaml holds the hash of the file and the costs in numbers."""
    said = own("run", "study.yaml", "--out", "one")
    assert (said.code, said.err) == (0, "")
    assert "volatility from absolute 21 sessions" in " ".join(said.out.split())
    assert "1 a contract" in " ".join(said.out.split())
    record = yaml.safe_load(Path("one/run.yaml").read_text(encoding="utf-8"))
    sha = hashlib.sha256(Path("mine.py").read_bytes()).hexdigest()
    assert record["study"]["extensions"] == [{"file": str(Path("mine.py").resolve()), "sha256": sha}]
    assert record["study"]["costs"] == "thin_names"
    assert record["costs"]["half_spread"] == 0.04
    assert "signal `quiet`" in record["extensions"]["mine.py"]
    one = hr.load_study("study.yaml")
    result = hr.run_study(one)
    assert isinstance(result.costs, Costs)
    assert result.results[0].events["fee"].max() > 0.0


def test_a_run_is_repeated_while_the_file_is_the_same(own: Runner) -> None:
    """The same ledgers, byte for byte; a changed file is refused with both hashes."""
    own("run", "study.yaml", "--out", "one")
    assert own("run", "one/run.yaml", "--out", "two").code == 0
    assert Path("two/events.parquet").read_bytes() == Path("one/events.parquet").read_bytes()
    own.write(mine__py=Path("mine.py").read_text(encoding="utf-8") + "\n# changed\n")
    said = own("run", "one/run.yaml", "--out", "three")
    assert said.code == 2
    assert "whose content has changed: its sha256 was" in said.err
    assert not Path("three").exists()


def test_a_strategy_alone_takes_it_too(own: Runner) -> None:
    """`--extension` for run, rules check and rules explain; without it the signal is unknown."""
    assert own("rules", "check", "rule.yaml").code == 2
    assert own("rules", "check", "rule.yaml", "--extension", "mine.py").code == 0
    explained = own("rules", "explain", "rule.yaml", "--extension", "mine.py").out
    assert "the average range of 5 sessions is under 9 percent of the close" in " ".join(explained.split())
    said = own("run", "rule.yaml", "--market", "prices.csv", "--extension", "mine.py", "--out", "one")
    assert (said.code, said.err) == (0, "")
    said = own("run", "study.yaml", "--extension", "mine.py")
    assert said.code == 2
    assert "a study file names its own extensions" in said.err


@pytest.mark.parametrize(
    ("words", "told"),
    [
        ("extensions: [theirs.py]\n", "`extensions.1` is `theirs.py`, and no file is there"),
        ("extensions: [theirs]\n", "`extensions.1` is `theirs`, which is no installed extension"),
        ("extensions: mine.py\n", "`extensions` is `mine.py`; allowed: a list of paths"),
        ("extensions: [broken.py]\n", "broken.py:2: while this file was read, this is not Python"),
        ("extensions: [mine.py]\ncosts: thin_name\n", "`costs` is `thin_name`, which is no model of costs"),
        ("costs: thin_names\n", "name the file that holds it under `extensions`"),
    ],
)
def test_what_is_wrong_is_told_at_its_place(own: Runner, words: str, told: str) -> None:
    """One sentence each, exit code 2, no traceback."""
    own.write(study__yaml=STUDY.replace("rule.yaml", "plain.yaml") + words, plain__yaml=RULE)
    own.write(broken__py="\nx = (\n")
    for said in (own("run", "study.yaml"), own("rules", "check", "study.yaml")):
        assert said.code == 2
        assert told in said.err + said.out
        assert "Traceback" not in said.err
        assert len((said.err + said.out).splitlines()) == 1


def test_a_signal_that_fails_in_a_run_is_told(own: Runner) -> None:
    """What only the market's own prices bring to light ends the run with one sentence and nothing written."""
    text = Path("mine.py").read_text(encoding="utf-8")
    fault = "    if panel.market.symbols[0] != 'S00':\n        raise KeyError('no such thing')\n"
    own.write(
        mine__py=text.replace(
            "    counts, mean, _ = trailing_moments((", fault + "    counts, mean, _ = trailing_moments((", 1
        )
    )
    said = own("run", "study.yaml", "--out", "one")
    assert said.code == 2
    assert "while signal `quiet` was worked out, KeyError was raised: 'no such thing'" in said.err
    assert said.err.startswith("mine.py:")
    assert len(said.err.splitlines()) == 1
    assert not Path("one").exists()


def test_python_takes_it_too(own: Runner) -> None:
    """`hr.run` with a file, a decorator used in place, and the name of a model of costs."""
    plain = hr.run("prices.csv", RULE_WORDS, extensions=["mine.py"], pricing={"blend": [{"absolute": 21}]})
    dear = hr.run("prices.csv", RULE_WORDS, pricing={"blend": [{"absolute": 21}]}, costs="thin_names")
    assert dear.summary.costs > plain.summary.costs

    @hr.extend.signal("in_place", phrase="the close is over its open")
    def in_place(panel: hr.extend.Panel) -> object:
        return panel.close > panel.open

    chosen = hr.run("prices.csv", RULE_WORDS | {"enter": {"when": {"signal": "in_place"}}})
    assert 0 < len(chosen.trades) < len(plain.trades)


RULE_WORDS = {
    "name": "Small collar",
    "legs": {
        "call": {"sell": "call", "expiry": {"days": 7, "listed": "weekly"}, "strike": {"steps": 0}},
        "put": {"buy": "put", "expiry": {"with": "call"}, "strike": {"from_spot": "-5%"}},
    },
}
