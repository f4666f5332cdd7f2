"""A Dask cluster: the bytes of threads here, also when workers are killed; what does not fit is refused."""

from __future__ import annotations

import os
import signal
import warnings
from collections.abc import Iterator
from pathlib import Path
from typing import Any

import pytest

from hedgerow.errors import RulesError, RunError, StudyError
from hedgerow.study.batches import Job
from hedgerow.study.cluster import Cluster, on_worker, versions
from hedgerow.study.large import Stage, stage
from hedgerow.study.one import Bench
from hedgerow.study.pool import Threads, fill
from hedgerow.study.shards import Shards
from large_runs import large_study, shard_files, small_market

GRID = {"legs.put.strike.from_spot": {"from": "-16%", "to": "-0.5%", "step": "0.5%"}}


@pytest.fixture(scope="module")
def address() -> Iterator[str]:
    """The scheduler of two workers, each a process of its own."""
    from distributed import LocalCluster

    with warnings.catch_warnings():
        warnings.simplefilter("ignore")
        cluster = LocalCluster(
            n_workers=2, threads_per_worker=1, processes=True, dashboard_address=None, silence_logs=50
        )
        yield cluster.scheduler_address
        cluster.close()


@pytest.fixture
def ready(tmp_path: Path) -> Stage:
    """Thirty-two variants, two a batch."""
    return stage(large_study(tmp_path, grid=GRID), small_market())


@pytest.fixture
def expected(ready: Stage, tmp_path: Path) -> dict[str, bytes]:
    """What threads here leave."""
    fill(ready.job, Shards.begin(tmp_path / "threads", ready.contents), Threads(2))
    return shard_files(tmp_path / "threads")


def test_a_cluster_changes_no_byte(
    address: str, ready: Stage, expected: dict[str, bytes], tmp_path: Path
) -> None:
    """Every shard and the manifest; every variant counted once."""
    cluster = Cluster(address)
    told: list[int] = []
    try:
        fill(ready.job, Shards.begin(tmp_path / "cluster", ready.contents), cluster, told.append)
    finally:
        cluster.close()
    assert shard_files(tmp_path / "cluster") == expected
    assert sum(told) == 32


def test_a_worker_killed_in_the_middle_changes_no_byte(
    address: str, ready: Stage, expected: dict[str, bytes], tmp_path: Path
) -> None:
    """After the third batch every worker process is killed outright, the data lost with them."""
    cluster = Cluster(address)

    class Kills:
        def run(self, job: Job, shards: Shards, batches: list[int], tell: Any) -> Iterator[tuple[int, bytes]]:
            for at, done in enumerate(cluster.run(job, shards, batches, tell)):
                if at == 3:
                    for process in cluster.client.run(os.getpid).values():
                        os.kill(process, signal.SIGKILL)
                yield done

    try:
        fill(ready.job, Shards.begin(tmp_path / "killed", ready.contents), Kills())
    finally:
        cluster.close()
    assert shard_files(tmp_path / "killed") == expected


def test_other_versions_are_refused(ready: Stage) -> None:
    """Bytes would differ: the worker says which version it has, and which was wanted."""
    with pytest.raises(RunError, match=r"a worker of the cluster has numpy \S+ and not 1\.0"):
        on_worker(ready.job, 0, 1, {**versions(), "numpy": "1.0"})


def test_nobody_there_is_one_sentence(monkeypatch: pytest.MonkeyPatch) -> None:
    """An address without a scheduler, and one that is none."""
    monkeypatch.setattr("hedgerow.study.cluster.CONNECT_SECONDS", 1)
    for place in ("tcp://127.0.0.1:1", "nonsense://here"):
        with pytest.raises(StudyError, match="no cluster answers there") as caught:
            Cluster(place)
        assert "\n" not in str(caught.value)


def test_faults_keep_their_kind_on_the_way_back(ready: Stage, monkeypatch: pytest.MonkeyPatch) -> None:
    """An error of a variant, pickled as between processes, says the same and has the same exit code."""
    import pickle

    def failing(_bench: Bench, _strategy: object) -> object:
        raise RulesError.one("legs", "test", "are not to be had")

    monkeypatch.setattr(Bench, "program", failing)
    with pytest.raises(RulesError) as caught:
        on_worker(ready.job, 0, 1, versions())
    back = pickle.loads(pickle.dumps(caught.value))
    assert (type(back), str(back), back.faults) == (RulesError, str(caught.value), caught.value.faults)
