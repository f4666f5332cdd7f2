"""The page of a large run: its size, and how long it takes to build, to paint, to sort and to filter.

    python tests/benchmarks/page.py [--json]

Seven weekly collars on the invented market, about 50,000 trades, in Debian's chromium without a network.
"""

from __future__ import annotations

import argparse
import json
import statistics
import tempfile
import time
from pathlib import Path
from typing import Any

from playwright.sync_api import Page, sync_playwright

from hedgerow.report.background import background_of
from hedgerow.report.build import write_report
from hedgerow.report.files import write_run
from hedgerow.study.compare import run_study
from hedgerow.study.declare import load_study

ROOT = Path(__file__).parents[2]
CHROMIUM = "/usr/bin/chromium"
OFFSETS = ("-3%", "-2%", "-1%", "0%", "1%", "2%", "3%")
TIMES = 7


def large_run(folder: Path) -> Path:
    """Write a run of about 50,000 trades."""
    study: dict[str, Any] = {
        "name": "Seven weekly collars",
        "market": str(ROOT / "datasets/orchard-bay"),
        "account": {"cash": 300000, "per_position": "1/12", "most_positions": 12},
        "strategy": str(ROOT / "strategies/collar-weekly.yaml"),
        "variants": {f"call at {one}": {"legs.call.strike.from_spot": one} for one in OFFSETS},
        "evidence": "none",
    }
    result = run_study(load_study(study))
    ledgers, summaries = [one.ledger for one in result.results], [one.summary for one in result.results]
    return write_run(folder, ledgers, summaries, result.record(), extra=background_of(result))


def middle(page: Page, act: str) -> float:
    """The median time of an act in the page, milliseconds, layout included."""
    script = (
        "() => { const start = performance.now(); "
        + act
        + "; document.querySelector('.sheet').getBoundingClientRect(); return performance.now() - start; }"
    )
    return statistics.median(page.evaluate(script) for _ in range(TIMES))


def measured(folder: Path) -> dict[str, float]:
    """The figures of the page of a run."""
    start = time.perf_counter()
    file = write_report(folder)
    figures = {"build_seconds": time.perf_counter() - start, "megabytes": file.stat().st_size / 1e6}
    with sync_playwright() as driver:
        browser = driver.chromium.launch(executable_path=CHROMIUM)
        page = browser.new_context(offline=True).new_page()
        page.goto(file.as_uri())
        page.wait_for_selector("html[data-drawn=yes]", timeout=60_000)
        paints = page.evaluate("performance.getEntriesByType('paint').map(one => one.startTime)")
        figures["first_paint_ms"] = max(paints)
        figures["all_drawn_ms"] = page.evaluate("performance.getEntriesByName('drawn')[0].startTime")
        figures["trades"] = int(page.locator("[role=grid]").get_attribute("aria-rowcount") or 1) - 1
        click = "document.querySelector('[data-name={}] button').click()"
        figures["sort_figures_ms"] = middle(page, click.format("pnl"))
        figures["sort_words_ms"] = middle(page, click.format("symbol"))
        figures["search_ms"] = middle(
            page,
            "const s = document.querySelector('input[type=search]'); s.value = s.value ? '' : 'expiry';"
            "s.dispatchEvent(new Event('input'))",
        )
        figures["filter_ms"] = middle(
            page,
            "const l = document.querySelectorAll('#filters select')[1];"
            "l.value = l.value === '0' ? '1' : '0';"
            "l.dispatchEvent(new Event('change'))",
        )
        figures["scroll_ms"] = middle(
            page,
            "const b = document.querySelector('.sheet'); b.scrollTop += 90000;"
            "b.dispatchEvent(new Event('scroll'))",
        )
        browser.close()
    return figures


def main() -> None:
    """Print the figures."""
    parser = argparse.ArgumentParser(description=__doc__)
    parser.add_argument("--json", action="store_true")
    parser.add_argument("--folder", type=Path, help="measure the run of this folder instead")
    asked = parser.parse_args()
    with tempfile.TemporaryDirectory() as place:
        figures = measured(asked.folder or large_run(Path(place) / "run"))
    if asked.json:
        print(json.dumps(figures, indent=2))
    else:
        for name, value in figures.items():
            print(f"{name:18} {value:12,.2f}")


if __name__ == "__main__":
    main()
