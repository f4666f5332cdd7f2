"""Studies from files: the market, the account, the assumptions and every variant's strategy, resolved."""

from __future__ import annotations

import os
from collections.abc import Mapping
from dataclasses import asdict, dataclass, field, replace
from pathlib import Path
from typing import Any

from pydantic import ValidationError

from hedgerow.errors import Fault, StudyError
from hedgerow.extend.costs import CostModel
from hedgerow.extend.load import Extension
from hedgerow.kernels.layout import Costs
from hedgerow.market.samples import PREFIX, sample_fault
from hedgerow.market.sessions import Regime
from hedgerow.rules.base import loosened
from hedgerow.rules.document import Tree, tree_of_file, tree_of_mapping
from hedgerow.rules.figures import percent_text
from hedgerow.rules.load import read_strategy
from hedgerow.rules.overrides import changed
from hedgerow.rules.schema import Strategy
from hedgerow.rules.words import Loose, shown
from hedgerow.study.evidence_words import Asked, EvidenceWords
from hedgerow.study.extending import extensions_plain, read_extensions
from hedgerow.study.grid import Grid
from hedgerow.study.gridwords import WalkForwardWords, grid_of
from hedgerow.study.trials import value_faults
from hedgerow.study.words import AccountWords, CostWords, StudyWords
from hedgerow.textfile import capped
from hedgerow.volatility.model import RANGES, SurfaceModel
from hedgerow.walk.account import Account
from hedgerow.yamltext import Node

__all__ = ["Study", "load_study", "read_study", "study_of_strategy"]


@dataclass(frozen=True)
class Study:
    """A declared experiment, every path and strategy of it resolved.

    `symbols` None means all stocks of the market; `first` and `last` are ISO dates, None for the data's own
    ends; `variants` are pairs of a name and its strategy, in the order of the file, with a `grid` the one it
    changes; `costs` are numbers, or a model that gives them once the market is known; `evidence` None works
    none out; `held_out` is the ISO date from which the rest is kept aside.
    """

    name: str
    market: Path
    variants: tuple[tuple[str, Strategy], ...]
    question: str = ""
    symbols: tuple[str, ...] | None = None
    first: str | None = None
    last: str | None = None
    account: Account = field(default_factory=Account)
    surface: SurfaceModel = field(default_factory=SurfaceModel)
    costs: Costs | CostModel = field(default_factory=lambda: CostWords().costs())
    listings: Regime = "modern"
    yardstick: str = "buy and hold"
    evidence: Asked | None = field(default_factory=Asked)
    seed: int = 1
    path: Path | None = None
    extensions: tuple[Extension, ...] = ()
    grid: Grid | None = None
    walk_forward: WalkForwardWords | None = None
    held_out: str | None = None

    @property
    def is_large(self) -> bool:
        """Whether it is run in batches of figures, and not variant by variant with every ledger."""
        return self.grid is not None or self.walk_forward is not None or self.held_out is not None

    def plain(self) -> dict[str, Any]:
        """Everything resolved, as a mapping that `load_study` reads back to an equal study.

        Strategies stand in it whole, defaults are filled in, and the market's path is as it was resolved.
        """
        account = AccountWords.model_construct(**asdict(self.account))
        window = {"from": self.first, "to": self.last}
        plain: dict[str, Any] = {
            "name": self.name,
            "question": self.question,
            "market": str(self.market),
            "symbols": "all" if self.symbols is None else list(self.symbols),
            "window": {word: day for word, day in window.items() if day is not None},
            "account": account.model_dump(),
            "pricing": {"volatility": _surface_plain(self.surface), "listings": self.listings},
            "extensions": extensions_plain(self.extensions),
            "costs": self._costs_plain(),
            **_tried_plain(self),
            "yardstick": self.yardstick,
            "evidence": "none" if self.evidence is None else EvidenceWords.of(self.evidence).model_dump(),
            "seed": self.seed,
        }
        return {word: value for word, value in plain.items() if value not in ("", [])}

    def _costs_plain(self) -> str | dict[str, Any]:
        """The words of the costs; the name of a model."""
        if isinstance(self.costs, CostModel):
            return self.costs.name
        return CostWords.of(self.costs).model_dump()


def _tried_plain(study: Study) -> dict[str, Any]:
    """The words of what is tried, how it is chosen, and what is kept aside."""
    words: dict[str, Any] = {}
    if study.grid is None:
        words["variants"] = {name: {"strategy": strategy.plain()} for name, strategy in study.variants}
    else:
        words |= {"strategy": study.variants[0][1].plain(), **study.grid.plain()}
    if study.walk_forward is not None:
        words["walk_forward"] = study.walk_forward.plain()
    if study.held_out is not None:
        words["held_out"] = {"from": study.held_out}
    return words


def _surface_plain(surface: SurfaceModel) -> dict[str, Any]:
    """The words of a surface; a history of 0 means the default and has no word."""
    words: dict[str, Any] = {}
    for name, limits in RANGES.items():
        value = getattr(surface, name)
        words[name] = percent_text(value) if limits.percent else value
    if surface.history == 0:
        del words["history"]
    blend = [
        {term.estimator: _whole(term.parameter), "weight": _whole(term.weight)} for term in surface.terms
    ]
    return words | {"blend": blend, "observed": surface.observed}


def _whole(number: float) -> float:
    """A number that reads back as it was written: 10, not 10.0."""
    return int(number) if float(number).is_integer() else number


def load_study(source: str | Path | Mapping[str, Any], base: str | Path | None = None) -> Study:
    """The study of a YAML file or a mapping. Paths in it are relative to the file, or to `base`.

    Raises StudyError with every fault of the study and of the strategies it names.
    """
    if isinstance(source, Mapping):
        tree, folder, path = tree_of_mapping(source, "study"), Path(base or "."), None
    else:
        path = Path(source)
        tree, folder = tree_of_file(path), Path(base) if base is not None else path.parent
    study, faults = read_study(tree, folder, path)
    if study is None:
        raise StudyError(capped(faults))
    return study


def read_study(tree: Tree, folder: Path, path: Path | None = None) -> tuple[Study | None, list[Fault]]:
    """The study of a tree and no faults, or None and every fault in the order of the files."""
    if tree.faults and not tree.plain:
        return None, tree.faults
    extensions, extension_faults = read_extensions(tree, folder)
    if extension_faults:
        return None, extension_faults  # what they would have registered is not known: all else would be too
    loose: list[Loose] = []
    words: StudyWords | None = None
    try:
        words = StudyWords.model_validate(tree.plain)
    except ValidationError as error:
        loose = loosened(error)
    if not isinstance(tree.plain, dict):
        return None, tree.all_faults(loose, "the study")
    loose += _market_faults(tree.plain, folder)
    surface, surface_faults = _surface(tree)
    variants, variant_faults = _variants(tree, folder)
    faults = sorted({*tree.all_faults(loose, "the study"), *surface_faults, *variant_faults})
    if faults or words is None or surface is None:
        return None, faults
    study = replace(_study(words, folder, path, surface, variants), extensions=extensions)
    faults = [] if study.grid is None else value_faults(tree, study.grid, variants[0][1])
    return (None, faults) if faults else (study, [])


def _study(
    words: StudyWords,
    folder: Path,
    path: Path | None,
    surface: SurfaceModel,
    variants: list[tuple[str, Strategy]],
) -> Study:
    return Study(
        name=words.name,
        market=market_place(words.market, folder),
        variants=tuple(variants),
        question=words.question or "",
        symbols=words.chosen,
        first=words.window.first,
        last=words.window.last,
        account=words.account.account(),
        surface=surface,
        costs=words.chosen_costs,
        listings="historical" if words.pricing.listings == "historical" else "modern",
        yardstick=words.yardstick,
        evidence=None if words.evidence is None else words.evidence.asked(),
        seed=words.seed,
        path=path,
        grid=None if words.grid is None else grid_of(words.grid, words.sample),
        walk_forward=words.walk_forward,
        held_out=None if words.held_out is None else words.held_out.first,
    )


def market_place(text: str, folder: Path) -> Path:
    """The place of a market's prices as a study names it: a sample, or a path relative to the study."""
    return Path(text) if text.startswith(PREFIX) else Path(os.path.normpath(folder / text))


def _market_faults(plain: Mapping[str, Any], folder: Path) -> list[Loose]:
    market = plain.get("market")
    if isinstance(market, str) and market.startswith(PREFIX):
        fault = sample_fault(market)
        if fault is None:
            return []
        return [Loose(("market",), fault.code, fault.found, fault.allowed, fault.remedy)]
    if not isinstance(market, str) or not market or (folder / market).exists():
        return []
    remedy = f"looked for {folder / market}"
    return [Loose(("market",), "file-missing", f"is {shown(market)}, and nothing is there", "", remedy)]


def _surface(tree: Tree) -> tuple[SurfaceModel | None, list[Fault]]:
    """The model of volatility; its own words are read by its own room."""
    from hedgerow.volatility.words import surface_words

    pricing = tree.plain.get("pricing")
    words = pricing.get("volatility") if isinstance(pricing, dict) else None
    node: Any = tree.node
    for step in ("pricing", "volatility"):
        node = node.value.get(step) if isinstance(node, Node) and isinstance(node.value, dict) else None
    try:
        return surface_words(words if node is None else node, tree.where), []
    except StudyError as error:
        return None, list(error.faults)


def _variants(tree: Tree, folder: Path) -> tuple[list[tuple[str, Strategy]], list[Fault]]:
    """Every variant's strategy, and the faults of all of them."""
    given = tree.plain.get("variants")
    names = list(given) if isinstance(given, dict) else []
    found: list[tuple[str, Strategy]] = []
    faults: list[Fault] = []
    if not names:
        strategy, faults = _strategy(tree, ("strategy",), folder, None)
        return ([] if strategy is None else [(strategy.name, strategy)]), faults
    for name in names:
        if not isinstance(given[name], dict):
            continue  # told with the words of the study
        own = "strategy" in given[name]
        path = ("variants", name, "strategy") if own else ("strategy",)
        strategy, more = _strategy(tree, path, folder, tree.below(("variants", name)))
        faults += more
        if strategy is not None:
            found.append((name, strategy))
    return found, faults


def _strategy(
    tree: Tree, path: tuple[str, ...], folder: Path, changes: Tree | None
) -> tuple[Strategy | None, list[Fault]]:
    """The strategy that stands at a path of the study, as a file's name or written out, with its changes."""
    given: Any = tree.plain
    for step in path:
        given = given.get(step)
    if isinstance(given, dict):
        base = tree.below(path)
    elif isinstance(given, str) and given:
        base = tree_of_file(folder / given)
        if any(fault.code == "file-missing" for fault in base.faults):
            found = Loose(path, "file-missing", f"is {shown(given)}, and no file is there")
            return None, [tree.fault(found)]
    else:
        allowed = "allowed: the path of a strategy file, or the strategy itself"
        code, found_text = ("missing", "is missing") if given is None else ("shape", f"is {shown(given)}")
        return None, [tree.fault(Loose(path, code, found_text, allowed))]
    if base.faults and not base.plain:
        return None, base.faults
    if changes is not None:
        changes.plain = {key: value for key, value in changes.plain.items() if key != "strategy"}
        base = changed(base, changes)
    return read_strategy(base)


def study_of_strategy(strategy: str | Path | Mapping[str, Any], market: str | Path, **words: Any) -> Study:
    """The study that a strategy alone stands for, on a market, with the defaults or other `words` of a study.

    Raises StudyError with every fault of the strategy and the words.
    """
    given = str(strategy) if isinstance(strategy, str | Path) else dict(strategy)
    tree = tree_of_mapping(
        {"name": "One strategy", "market": str(market), "strategy": given, **words}, "study"
    )
    study, faults = read_study(tree, Path("."))
    if study is None:
        raise StudyError(capped(faults))
    named = study if "name" in words else replace(study, name=study.variants[0][0])
    return replace(named, path=Path(given)) if isinstance(given, str) else named
