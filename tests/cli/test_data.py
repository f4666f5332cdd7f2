"""`hedgerow data check`: what it prints, to people and to programs, and how it ends."""

from __future__ import annotations

import json
from pathlib import Path

import pytest
from typer.testing import CliRunner, Result

from hedgerow.cli.data import WIDTH, app
from hedgerow.market import load_market
from price_tables import HEADER, PRICES, walk_frame, write

ROOT = Path(__file__).parents[2]


def check(*arguments: str | Path) -> Result:
    """Run the command."""
    return CliRunner().invoke(app, ["check", *map(str, arguments)])


def test_the_demo_market_is_described() -> None:
    """What was read, line by line, and no control character when it is piped."""
    result = check(ROOT / "datasets" / "orchard-bay")
    assert result.exit_code == 0
    market = load_market(ROOT / "datasets" / "orchard-bay")
    assert f"{len(market.symbols)}: BKHO" in result.stdout
    assert f"{len(market.dates):,}, {market.dates[0]} to {market.dates[-1]}" in result.stdout
    assert market.fingerprint in result.stdout
    assert "\x1b" not in result.stdout
    assert max(len(line) for line in result.stdout.splitlines()) <= WIDTH


def test_findings_are_listed_and_the_command_ends_well(tmp_path: Path) -> None:
    """Warnings are no failure: the prices can be used."""
    write(tmp_path, {"prices.csv": PRICES + "ASH,2020-01-06,0,11,9,10,1\n"})
    result = check(tmp_path)
    assert result.exit_code == 0
    assert "warnings: 1, notes: 1" in result.stdout
    assert "| warning  | ASH    | 2020-01-06 | 1 row with a price of 0 or less, dropped" in result.stdout


def test_a_clean_market_says_so(tmp_path: Path) -> None:
    """No table where there is nothing in it."""
    write(tmp_path, {"prices.csv": PRICES, "dataset.yaml": "adjustment: none\n"})
    result = check(tmp_path)
    assert result.stdout.rstrip().endswith("No findings.")


def test_faults_end_with_two_and_go_to_the_error_stream(tmp_path: Path) -> None:
    """Every fault a line, nothing on the output, no traceback."""
    write(tmp_path, {"prices.csv": PRICES + "ASH,2020-01-06,x,11,9,y,1\n"})
    result = check(tmp_path)
    assert (result.exit_code, result.stdout) == (2, "")
    lines = result.stderr.splitlines()
    assert lines[0] == f"{tmp_path} cannot be used: 2 faults"
    assert lines[1].startswith(f"  {tmp_path}/prices.csv:4: `x` stands in the column `open`")
    assert "Traceback" not in result.stderr
    assert check(tmp_path / "no").stderr.splitlines()[0].endswith("cannot be used: 1 fault")


def test_json_for_programs(tmp_path: Path) -> None:
    """One object: what was read with its findings, or the faults with their places."""
    write(tmp_path, {"prices.csv": PRICES, "dividends.csv": "symbol,date,amount\nASH,2020-01-03,0.25\n"})
    result = check(tmp_path, "--json")
    found = json.loads(result.stdout)
    assert (result.exit_code, found["symbols"], found["sessions"]) == (0, ["ASH"], 2)
    assert (found["first_session"], found["last_session"]) == ("2020-01-02", "2020-01-03")
    assert (found["bars"], found["dividends"], found["splits"], found["reports"]) == (2, 1, 0, 0)
    assert found["fingerprint"] == load_market(tmp_path).fingerprint
    assert [each["code"] for each in found["findings"]] == ["adjustment-not-stated"]
    write(tmp_path, {"prices.csv": PRICES.replace("10.5,100", "ten,100")})
    result = check(tmp_path, "--json")
    assert result.exit_code == 2
    (fault,) = json.loads(result.stdout)["faults"]
    assert (fault["line"], fault["code"]) == (2, "not-a-number")


def test_symbols_that_ended_are_named(tmp_path: Path) -> None:
    """B's last row lies before the last session."""
    frame = walk_frame("AB", 30)
    frame = frame[(frame["symbol"] == "A") | (frame["date"] < frame["date"][20])]
    frame.to_parquet(tmp_path / "prices.parquet")
    assert json.loads(check(tmp_path, "--json").stdout)["ended_early"] == ["B"]
    assert "history ends early  1: B" in check(tmp_path).stdout


def test_many_findings_are_cut_short_for_people(tmp_path: Path) -> None:
    """A hundred symbols with a bad row each: sixty lines and a count; all of them for programs."""
    rows = "".join(f"S{n:03d},2020-01-02,10,11,9,10,1\nS{n:03d},2020-01-03,0,11,9,10,1\n" for n in range(100))
    write(tmp_path, {"prices.csv": HEADER + rows})
    result = check(tmp_path)
    assert result.stdout.count("price of 0 or less") == 60
    assert "41 more findings are in --json" in result.stdout
    assert len(json.loads(check(tmp_path, "--json").stdout)["findings"]) == 101


@pytest.mark.parametrize("arguments", [["--help"], ["check", "--help"]])
def test_help_says_what_it_is_for(arguments: list[str]) -> None:
    """The help of the group and of the command."""
    result = CliRunner().invoke(app, arguments)
    assert result.exit_code == 0
    assert "prices" in result.stdout
