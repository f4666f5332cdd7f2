"""A study run: every variant on the same market and days, side by side."""

from __future__ import annotations

import importlib.metadata
import platform
from collections.abc import Callable, Collection
from concurrent.futures import ThreadPoolExecutor
from dataclasses import dataclass, replace
from pathlib import Path
from threading import Event
from typing import Any

from hedgerow.errors import Fault, RunError, StudyError
from hedgerow.evidence.findings import Evidence
from hedgerow.extend.costs import CostModel
from hedgerow.kernels.layout import Costs
from hedgerow.market import Market, load_market
from hedgerow.market.check import SILENCE_SESSIONS
from hedgerow.market.samples import PREFIX
from hedgerow.rules.schema import Strategy
from hedgerow.study.declare import Study
from hedgerow.study.evidence_of import evidence_of
from hedgerow.study.one import Bench, Result
from hedgerow.study.places import told_in_place
from hedgerow.study.stress import costs_of
from hedgerow.study.tries import keys_of
from hedgerow.walk.run import Window

__all__ = ["StudyResult", "bench_of", "costed", "run_study"]

Progress = Callable[[int], None]
VERSIONED = ("hedgerow", "numpy", "pandas", "numba", "pyarrow")


@dataclass(frozen=True, eq=False)
class StudyResult:
    """A study, the market it ran on, one result a variant, in the order of the file, and what they are worth.

    `evidence` is None where the study asks for none, and where the record is too short for any.
    """

    study: Study
    bench: Bench
    results: tuple[Result, ...]
    evidence: Evidence | None = None

    @property
    def market(self) -> Market:
        """The market of the study."""
        return self.bench.market

    @property
    def costs(self) -> Costs:
        """The costs of the study, in numbers."""
        return costs_of(costed(self.study, self.market))

    @property
    def assumptions(self) -> tuple[str, ...]:
        """What was assumed about premiums and costs, in words."""
        surface, costs = self.study.surface, self.costs
        terms = ", ".join(f"{term.estimator} {term.parameter:g}" for term in surface.terms)
        observed = surface.observed != "none"
        source = "observed volatility" if observed else f"volatility from {terms} sessions"
        spread = f"half-spread {costs.half_spread:.1%} of the premium at the money"
        return (
            source,
            f"implied over realized {surface.ratio:g} {surface.points:+.1%}",
            f"skew {surface.skew:+.2f} and curvature {surface.curvature:+.2f} a standard deviation",
            f"{spread}, {costs.contract_fee:g} a contract, slippage {costs.slippage:.2%} of the price",
            f"{self.study.listings} listings",
        )

    @property
    def ended(self) -> int:
        """How many traded symbols lack a price for the last SILENCE_SESSIONS of the market, or longer."""
        last = self.market.last_bar[self.bench.traded.astype(bool)]
        return int((last < len(self.market.dates) - SILENCE_SESSIONS).sum())

    def _study_plain(self) -> dict[str, Any]:
        """The words of the study, its paths in full."""
        plain = self.study.plain() | {"market": _whole_place(self.study.market)}
        for item in plain.get("extensions", []):
            item["file"] = str(Path(item["file"]).resolve()) if item["file"].endswith(".py") else item["file"]
        return plain

    def record(self) -> dict[str, Any]:
        """Everything needed to repeat the run, plain values."""
        market = self.market
        return {
            "study": self._study_plain(),
            "data": {
                "source": market.source,
                "fingerprint": market.fingerprint,
                "symbols": list(market.symbols),
                "first": str(market.dates[0]),
                "last": str(market.dates[-1]),
                "findings": [f"{f.severity}: {f.told}" for f in market.findings],
            },
            "costs": self.costs._asdict(),
            "extensions": {one.source: list(one.names) for one in self.study.extensions},
            "versions": versions(),
        }


def _whole_place(market: Path) -> str:
    """The place of the prices in full; a sample has its name."""
    return str(market) if str(market).startswith(PREFIX) else str(market.resolve())


def versions() -> dict[str, str]:
    """The versions a result depends on."""
    found = {name: importlib.metadata.version(name) for name in VERSIONED}
    return found | {"python": platform.python_version()}


def costed(study: Study, market: Market) -> Study:
    """The study with its costs in numbers: a model of costs has said what they are on the market."""
    given = study.costs
    return replace(study, costs=given.costs(market)) if isinstance(given, CostModel) else study


def bench_of(study: Study, market: Market | None = None) -> tuple[Bench, Window]:
    """The study's market made ready, and its window. Raises DataError or StudyError."""
    loaded = load_market(Path(study.market)) if market is None else market
    bench = Bench(loaded, study.surface, study.listings, study.symbols)
    with told_in_place(study.path):
        window = _window(study, bench)
        here = (
            bench.traded.astype(bool) & (loaded.first_bar < window.stop) & (loaded.last_bar >= window.start)
        )
        if not here.any():
            found = "leaves no symbol with a price in the window"
            span = f"the window is {loaded.dates[window.start]} to {loaded.dates[window.stop - 1]}"
            raise StudyError.one("symbols", "no-symbol", found, span, "name others, or widen the window")
    return bench, window


def _window(study: Study, bench: Bench) -> Window:
    """The study's window; raises StudyError with its faults and those of the symbols."""
    faults: list[Fault] = []
    try:
        _ = bench.traded
    except StudyError as error:
        faults += error.faults
    try:
        window = Window.of(bench.market, study.first, study.last)
    except StudyError as error:
        faults += error.faults
    if faults:
        raise StudyError(faults)
    return window


def run_study(
    study: Study,
    *,
    market: Market | None = None,
    workers: int = 2,
    progress: Progress | None = None,
    tried: Collection[str] = (),
) -> StudyResult:
    """Run every variant of a study and weigh them. Nothing depends on the number of `workers`, threads.

    `progress` is called with the number of sessions newly walked, or their equal in other work. `tried` are
    the keys (`study.tries`) of variants evaluated before on the same prices, which the evidence counts.
    Raises DataError, StudyError, RulesError or ReconcileError.
    """
    if study.is_large:
        found = "has a grid, walks forward or keeps a part aside, and is run in batches"
        raise StudyError.one(study.name, "large", found, remedy="use run_large, or `hedgerow run`")
    bench, window = bench_of(study, market)
    stopped = Event()

    def one(variant: tuple[str, Strategy]) -> Result:
        name, strategy = variant
        done = 0

        def tell(walked: int, _whole: int) -> None:
            nonlocal done
            if stopped.is_set():
                raise RunError("the run was stopped before every variant was done")
            if progress is not None:
                progress(walked - done)
            done = walked

        beside = study.yardstick != "none"
        return bench.run(strategy, study.account, study.costs, window, name, tell, beside)

    with told_in_place(study.path):
        first = one(study.variants[0])  # makes and compiles, once, what the threads share
        with ThreadPoolExecutor(max(workers, 1)) as pool:
            try:
                rest = list(pool.map(one, study.variants[1:]))
            finally:
                stopped.set()
        results = (first, *rest)
        count = len({*tried, *keys_of(study).values()})
        evidence = evidence_of(
            costed(study, bench.market),
            bench,
            window,
            results,
            workers=workers,
            progress=progress,
            tried=count,
        )
    return StudyResult(study, bench, results, evidence)
