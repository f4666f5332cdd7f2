"""Pools: any number of workers, killed at any moment, the same bytes."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import replace
from pathlib import Path
from typing import Any

import numpy as np
import pytest

from hedgerow.errors import RulesError, RunError
from hedgerow.study.batches import Job, batch_size, run_batch
from hedgerow.study.large import Stage, stage
from hedgerow.study.one import Bench
from hedgerow.study.pool import Threads, fill
from hedgerow.study.shards import Shards
from hedgerow.walk.inputs import Tape, make_tape
from large_runs import large_study, shard_files, small_market

MARKET = small_market()


@pytest.fixture
def ready(tmp_path: Path) -> Stage:
    """Twelve variants, one a batch."""
    return stage(large_study(tmp_path), MARKET)


def test_workers_change_no_byte(ready: Stage, tmp_path: Path) -> None:
    """One, two and five threads."""
    for workers in (1, 2, 5):
        fill(ready.job, Shards.begin(tmp_path / str(workers), ready.contents), Threads(workers))
    first = shard_files(tmp_path / "1")
    assert len(first) == 13
    assert first == shard_files(tmp_path / "2") == shard_files(tmp_path / "5")


def test_each_variant_is_the_run_of_its_strategy(ready: Stage, tmp_path: Path) -> None:
    """Equity at every close, and the Sharpe ratio, beside an ordinary run of that strategy alone."""
    shards = Shards.begin(tmp_path / "here", ready.contents)
    fill(ready.job, shards, Threads(2))
    study, number = ready.study, 7
    bench = Bench(MARKET, study.surface)
    alone = bench.run(ready.trials.strategy(number), study.account, study.costs, ready.job.window)
    shard = shards.read(number // ready.contents.batch)
    row = number - shard.numbers.start
    np.testing.assert_array_equal(shard.equity[row], alone.log.days["equity"])
    assert shard.figures["sharpe"][row] == alone.summary.account.sharpe


def test_a_stopped_study_goes_on_and_ends_the_same(ready: Stage, tmp_path: Path) -> None:
    """Stopped after the third shard; begun again it walks the other nine only."""
    whole = Shards.begin(tmp_path / "whole", ready.contents)
    fill(ready.job, whole, Threads(2))
    broken = Shards.begin(tmp_path / "broken", ready.contents)

    class Stops(Threads):
        def run(self, *given: object) -> Iterator[tuple[int, bytes]]:  # type: ignore[override]
            for at, done in enumerate(super().run(*given)):  # type: ignore[arg-type]
                if at == 3:
                    raise KeyboardInterrupt
                yield done

    with pytest.raises(KeyboardInterrupt):
        fill(ready.job, broken, Stops(2))
    again = Shards.begin(tmp_path / "broken", ready.contents)
    assert len(again.missing) == 9
    told: list[int] = []
    fill(ready.job, again, Threads(1), told.append)
    assert told == [3] + [1] * 9
    assert shard_files(tmp_path / "broken") == shard_files(tmp_path / "whole")


def test_a_fault_stops_the_others_and_names_its_variant(
    ready: Stage, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    """A strategy that the market cannot serve: told with its number and parameters; nothing half-written."""

    def failing(bench: Bench, strategy: object) -> object:
        if strategy == ready.trials.strategy(4):
            raise RulesError.one("legs", "test", "are not to be had")
        return program(bench, strategy)  # type: ignore[arg-type]

    program = Bench.program
    monkeypatch.setattr(Bench, "program", failing)
    with pytest.raises(RulesError, match=r"variant 5 \(days 14, from_spot -8%\): are not to be had"):
        fill(ready.job, Shards.begin(tmp_path / "here", ready.contents), Threads(2))
    assert not list((tmp_path / "here").glob(".*"))


def test_once_stopped_a_worker_walks_no_further_variant(ready: Stage) -> None:
    """What is told after each variant is where a batch can be stopped."""

    def stopped(_variants: int) -> None:
        raise RunError("stopped")

    with pytest.raises(RunError, match="stopped"):
        run_batch(ready.job, range(3), stopped)


@pytest.mark.parametrize(
    ("variants", "cells", "size"),
    [(1, 10, 1), (16, 10, 1), (1000, 45_360, 44), (1000, 10, 63), (10_000, 10, 64), (50, 5_000_000, 1)],
)
def test_batches_are_cut_by_the_study_alone(variants: int, cells: int, size: int) -> None:
    """Two million symbol-sessions, sixteen batches at least, sixty-four variants at most: worked by hand."""
    assert batch_size(variants, cells) == size


def test_arrays_that_arrive_are_copied(ready: Stage) -> None:
    """A job whose arrays lie at odd addresses, as from a wire, has aligned ones of its own after copying."""
    raw = np.zeros(MARKET.close.nbytes + 1, np.uint8)
    odd = raw[1:].view(np.float64).reshape(MARKET.close.shape)
    odd[:] = MARKET.close
    job: Job = replace(ready.job, market=replace(MARKET, close=odd))
    assert not job.market.close.flags.aligned
    copied = job.copied()
    assert copied.market.close.flags.aligned
    assert copied.market.fingerprint == MARKET.fingerprint
    assert run_batch(copied, range(2)) == run_batch(ready.job, range(2))


def test_what_threads_share_is_made_once(
    ready: Stage, monkeypatch: pytest.MonkeyPatch, tmp_path: Path
) -> None:
    """One tape for all variants of a job, however many threads."""
    made: list[int] = []

    def counted(*given: Any) -> Tape:
        made.append(1)
        return make_tape(*given)

    monkeypatch.setattr("hedgerow.study.one.make_tape", counted)
    fill(ready.job, Shards.begin(tmp_path / "here", ready.contents), Threads(4))
    assert made == [1]
