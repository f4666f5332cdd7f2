"""Files of extensions: what is used, what is refused, and how it is told."""

from __future__ import annotations

from pathlib import Path

import numpy as np
import pytest

import hedgerow as hr
from array_market import random_market
from hedgerow.extend import load_extension
from hedgerow.signals import SIGNALS, Panel
from hedgerow.volatility.registry import ESTIMATORS

pytestmark = pytest.mark.usefixtures("forgotten")
MINE = Path(__file__).with_name("my_signals.py")
HEAD = "import numpy as np\nfrom hedgerow.extend import *\n\n"

FAULTY = {
    "peeks": (
        '@signal("tomorrow", phrase="the close of tomorrow is higher")\n'
        "def tomorrow(panel):\n"
        "    out = np.zeros(panel.close.shape, bool)\n"
        "    out[:-1] = panel.close[1:] > panel.close[:-1]\n"
        "    return out\n",
        4,
        "signal `tomorrow` is refused: it looks ahead",
    ),
    "peeks at the whole": (
        '@signal("far", phrase="the close over all closes", number=Number("fraction", -9, 9))\n'
        "def far(panel):\n"
        "    mean, spread = np.nanmean(panel.close, axis=0), np.nanstd(panel.close, axis=0)\n"
        "    return (panel.close - mean) / spread\n",
        4,
        "it looks ahead",
    ),
    "peeks at a report": (
        '@signal("earned", phrase="the next earnings", number=Number("fraction", -99, 99))\n'
        "def earned(panel):\n"
        "    out = np.full(panel.close.shape, np.nan)\n"
        "    for row in panel.market.reports:\n"
        "        out[: np.searchsorted(panel.market.ordinals, row.ordinal), row.symbol_index] = row.eps\n"
        "    return out\n",
        4,
        "it looks ahead",
    ),
    "takes splits for moves": (
        '@signal("raw", phrase="the price", number=Number("money", 0, 1e9))\n'
        "def raw(panel):\n    return panel.gather(panel.market.close)\n",
        4,
        "it takes a split for a move",
    ),
    "mixes symbols": (
        '@signal("ranked", phrase="the rank", number=Number("fraction", 0, 9))\n'
        "def ranked(panel):\n"
        "    return panel.close / np.nan_to_num(panel.close).max(axis=1, keepdims=True).clip(1.0)\n",
        4,
        "it mixes symbols",
    ),
    "leaves its bounds": (
        '@signal("wide", phrase="the close", number=Number("fraction", 0, 1))\n'
        "def wide(panel):\n    return panel.close.copy()\n",
        4,
        "beyond its bounds of 0 to 1",
    ),
    "promises too little history": (
        '@signal("late", phrase="the close of old", number=Number("fraction", 0, 1e9))\n'
        "def late(panel):\n"
        "    out = np.full_like(panel.close, np.nan)\n    out[4:] = panel.close[:-4]\n    return out\n",
        4,
        "it says nothing before bar 5, and its lookback is 1: write 5",
    ),
    "changes what it looks at": (
        '@signal("greedy", phrase="the close", number=Number("fraction", 0, 1e9))\n'
        "def greedy(panel):\n    panel.close[:] = 1.0\n    return panel.close.copy()\n",
        4,
        "it changes the panel's close prices",
    ),
    "draws": (
        '@signal("dice", phrase="the dice say yes")\n'
        "def dice(panel):\n    return np.random.default_rng().random(panel.close.shape) < 0.5\n",
        4,
        "asked twice about the same prices it gives two answers",
    ),
    "gives the wrong kind": (
        '@signal("shape", phrase="the shape is right")\ndef shape(panel):\n    return True\n',
        4,
        "it gives bool, and one value a session and symbol is wanted",
    ),
    "fails": (
        '@signal("boom", phrase="the boom is there")\ndef boom(panel):\n    return panel.close / None\n',
        6,
        "while signal `boom` was worked out, TypeError was raised",
    ),
    "estimator peeks": (
        '@estimator("peek")\n'
        "def peek(bars, horizon):\n"
        "    squares = np.vstack([bars.returns[1:], bars.returns[-1:]]) ** 2\n"
        "    return Estimate(np.full_like(squares, horizon), squares)\n",
        4,
        "estimator of volatility `peek` is refused: it looks ahead",
    ),
    "costs out of range": (
        '@cost("paid")\ndef paid(market):\n    return DEFAULT_COSTS._replace(contract_fee=-1.0)\n',
        4,
        "its contract_fee is -1.0, and a number from 0 to 10000 is allowed",
    ),
    "not Python": ("x = (\n", 4, "this is not Python: '(' was never closed"),
    "raises": ("x = 1 / 0\n", 4, "ZeroDivisionError was raised: division by zero"),
    "leaves": ("import sys\nsys.exit(0)\n", 5, "SystemExit was raised: 0"),
    "takes a name": (
        '@signal("rsi", phrase="the other")\ndef other(panel):\n    return panel.close\n',
        4,
        "a signal is already registered under the name `rsi`",
    ),
    "registers nothing": ("x = 1\n", 0, "this file registers nothing"),
}


def written(folder: Path, text: str, name: str = "mine.py") -> Path:
    """A file of extensions."""
    path = folder / name
    path.write_text(text, encoding="utf-8")
    return path


def test_what_a_file_registers_is_used() -> None:
    """Two signals, an estimator and costs are there, held to every rule, and say what they say by hand."""
    extension = load_extension(MINE)
    assert extension.names == (
        "signal `gap_at_open`",
        "signal `quiet`",
        "estimator of volatility `absolute`",
        "model of costs `thin_names`",
    )
    market = random_market(1, 60)
    found = Panel(market).evaluate("gap_at_open")
    np.testing.assert_array_equal(found[1:], market.open[1:] / market.close[:-1] - 1.0)


@pytest.mark.parametrize("case", FAULTY)
def test_a_faulty_file_is_refused_in_one_sentence(case: str, tmp_path: Path) -> None:
    """Negative controls: each fault is told with file and line, and nothing of the file stays in use."""
    text, line, told = FAULTY[case]
    path = written(tmp_path, HEAD + text)
    before = set(SIGNALS), set(ESTIMATORS)
    with pytest.raises(hr.ExtensionError) as caught:
        load_extension(path)
    fault = next(fault for fault in caught.value.faults if told in str(fault))
    assert (fault.where, fault.line) == (str(path), line)
    assert "\n" not in str(fault)
    assert (set(SIGNALS), set(ESTIMATORS)) == before


def test_a_changed_file_takes_the_place_of_what_it_was(tmp_path: Path) -> None:
    """The same content is read once, wherever it lies; a changed one is read anew."""
    path = written(tmp_path, MINE.read_text(encoding="utf-8"))
    first = load_extension(path)
    again = load_extension(written(tmp_path, path.read_text(encoding="utf-8"), "copy.py"))
    assert (again.sha256, again.items) == (first.sha256, first.items)
    written(tmp_path, path.read_text(encoding="utf-8").replace('"quiet"', '"calm"'))
    assert load_extension(path).sha256 != first.sha256
    assert "calm" in SIGNALS
    assert "quiet" not in SIGNALS


def test_an_installed_package_offers_one(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    """An entry point of the group is found by its name; a wrong name is told with the nearest right one."""
    written(tmp_path, MINE.read_text(encoding="utf-8"), "house_signals_module.py")
    meta = tmp_path / "house_signals-1.0.dist-info"
    meta.mkdir()
    written(meta, "Metadata-Version: 2.1\nName: house-signals\nVersion: 1.0\n", "METADATA")
    written(meta, "[hedgerow.extensions]\nhouse-signals = house_signals_module\n", "entry_points.txt")
    monkeypatch.syspath_prepend(tmp_path)
    with pytest.raises(hr.ExtensionError, match="did you mean `house-signals`"):
        load_extension("house-signal")
    assert "signal `quiet`" in load_extension("house-signals").names
    assert SIGNALS["quiet"].words() == "the average range of 10 sessions is under 2 percent of the close"


def test_a_folder_is_no_extension(tmp_path: Path) -> None:
    """A path that cannot be read is told."""
    with pytest.raises(hr.ExtensionError, match="this is a folder"):
        load_extension(tmp_path)


def test_the_example_of_the_handbook_keeps_every_rule(tmp_path: Path) -> None:
    """The file shown in DEVELOPERS.md is read as it stands."""
    handbook = (Path(__file__).parents[2] / "DEVELOPERS.md").read_text(encoding="utf-8")
    example = handbook.partition("## A signal, estimator or cost of one's own")[2]
    text = example.partition("```python\n")[2].partition("```")[0]
    assert len(load_extension(written(tmp_path, text)).items) == 3
