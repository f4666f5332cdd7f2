"""Runs the command in this process, on a small market written to a folder."""

from __future__ import annotations

import sys
from dataclasses import dataclass
from pathlib import Path

import pytest

from hedgerow.cli.main import main
from price_tables import walk_frame

RULE = """\
name: Small collar
legs:
  call: {sell: call, expiry: {days: 7, listed: weekly}, strike: {from_spot: 0%, snap: up}}
  put: {buy: put, expiry: {with: call}, strike: {from_spot: -5%, snap: down}}
"""
STUDY = """\
name: Short or long
question: Which of the two?
market: prices.csv
account: {cash: 100000, per_position: 1/2}
pricing: {volatility: {blend: [{close: 21}]}}
strategy: rule.yaml
variants:
  short: {}
  long: {legs.call.expiry.days: 21}
evidence: none
"""
WEIGHED = STUDY.replace("evidence: none", "evidence: {draws: 100}")
"""The same study with its evidence, from few draws: most tests are about other things and do without."""

SESSIONS = 120


@dataclass(frozen=True)
class Said:
    """What a command said, and its exit code."""

    code: int
    out: str
    err: str

    @property
    def told(self) -> list[str]:
        """The lines of its messages."""
        return self.err.splitlines()


class Runner:
    """Runs the command from inside one folder."""

    def __init__(
        self, folder: Path, monkeypatch: pytest.MonkeyPatch, capsys: pytest.CaptureFixture[str]
    ) -> None:
        self.folder, self._patch, self._capsys = folder, monkeypatch, capsys
        monkeypatch.chdir(folder)

    def __call__(self, *words: str | Path) -> Said:
        """Run `hedgerow` with these words."""
        self._patch.setattr(sys, "argv", ["hedgerow", *map(str, words)])
        self._capsys.readouterr()
        with pytest.raises(SystemExit) as ended:
            main()
        out, err = self._capsys.readouterr()
        assert isinstance(ended.value.code, int)
        return Said(ended.value.code, out, err)

    def write(self, **files: str) -> None:
        """Write files; two underscores in a name stand for its dot."""
        for name, text in files.items():
            (self.folder / name.replace("__", ".")).write_text(text, encoding="utf-8")

    def files(self) -> set[str]:
        """Everything below the folder, relative to it."""
        return {str(path.relative_to(self.folder)) for path in self.folder.rglob("*")}


def prices(folder: Path) -> None:
    """Write two symbols' prices, 120 weekdays from January 2015."""
    walk_frame("AB", SESSIONS).to_csv(folder / "prices.csv", index=False, date_format="%Y-%m-%d")
