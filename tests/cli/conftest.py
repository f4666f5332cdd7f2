"""A runner of the command in a folder with a small market, a rule and a study."""

from __future__ import annotations

from pathlib import Path

import pytest

from cli_runs import RULE, STUDY, Runner, prices


@pytest.fixture
def hedgerow(tmp_path: Path, monkeypatch: pytest.MonkeyPatch, capsys: pytest.CaptureFixture[str]) -> Runner:
    """The command, run in a folder that holds prices.csv, rule.yaml and study.yaml."""
    prices(tmp_path)
    runner = Runner(tmp_path, monkeypatch, capsys)
    runner.write(rule__yaml=RULE, study__yaml=STUDY)
    return runner
