"""A Dask cluster gives the rows that processes of this machine give, also when a worker dies on the way."""

from __future__ import annotations

import json
import os
import signal
import sys
from collections.abc import Iterator
from functools import partial
from pathlib import Path
from typing import Any

import numpy as np
import pytest

from sitesym.errors import ScreeningError, UsageError
from sitesym.screening import cluster
from sitesym.screening.cluster import ClusterPool
from sitesym.screening.cluster_worker import end_run, work_batch
from sitesym.screening.columns import Row
from sitesym.screening.engine import Screening
from sitesym.screening.settings import Settings, versions
from sitesym.screening.sources import work_items
from sitesym.screening.store import Store
from sitesym.screening.task import Job, Task

SETTINGS = Settings(ladder=False, properties=("permittivity",))
TASK = Task(SETTINGS, limit_seconds=60.0, limit_megabytes=4000.0, hashed=True)
COUNT = 160


@pytest.fixture(scope="module")
def lines(tmp_path_factory: pytest.TempPathFactory) -> Path:
    """Perovskites strained and shifted at random, some of them beyond reading."""
    rng = np.random.default_rng(0)
    path = tmp_path_factory.mktemp("lines") / "many.jsonl"
    with path.open("w") as stream:
        for number in range(COUNT):
            cell = np.diag(rng.uniform(3.9, 4.1, 3)) if number % 2 else 4.0 * np.eye(3)
            sites = [
                [0, 0, 0],
                [0.5, 0.5, 0.5 + 0.02 * (number % 3)],
                [0.5, 0.5, 0],
                [0.5, 0, 0.5],
                [0, 0.5, 0.5],
            ]
            rows = [" ".join(map(str, row)) for row in (*cell.tolist(), *sites)]
            text = "\n".join(["x", "1", *rows[:3], "Ba Ti O", "1 1 3", "Direct", *rows[3:]])
            entry = {"id": f"{number}'; drop", "poscar": text if number % 50 else "nothing"}
            stream.write(json.dumps(entry) + "\n")
    return path


@pytest.fixture(scope="module")
def dask_cluster() -> Iterator[Any]:
    """Two Dask workers on this machine, each a process that is started again when it dies."""
    distributed = pytest.importorskip("distributed", reason="Dask is an extra")
    with distributed.LocalCluster(
        n_workers=2, threads_per_worker=1, dashboard_address="localhost:0", memory_limit=None, silence_logs=50
    ) as made:
        yield made


def without_time(rows: list[Row]) -> list[Row]:
    return [{name: value for name, value in row.items() if name != "seconds"} for row in rows]


def test_a_worker_killed_on_the_way_changes_nothing_in_the_table(
    dask_cluster: Any, lines: Path, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    import distributed

    monkeypatch.setattr(cluster, "BATCH_ITEMS", 8)
    with Screening(TASK) as here:
        plain = without_time(list(here.rows(work_items([lines]))))
    crew = partial(ClusterPool, address=dask_cluster.scheduler_address)
    with (
        distributed.Client(dask_cluster, set_as_default=False) as client,
        Store.writing(tmp_path / "s.sqlite", SETTINGS) as store,
    ):
        before = client.run(os.getpid)
        with Screening(TASK, crew) as run:
            for number, _ in enumerate(run.into(store, work_items([lines]))):
                if number == 40:
                    os.kill(next(iter(before.values())), signal.SIGKILL)
        rows = without_time(list(store.rows()))
        client.wait_for_workers(2)
        assert set(client.run(os.getpid).values()) != set(before.values())
        assert len(rows) == run.tally.rows == COUNT
        assert rows == plain
        with Screening(TASK, crew) as again:
            assert list(again.into(store, work_items([lines]))) == []
        assert again.already_done == COUNT


def test_rows_of_a_stream_come_in_the_order_of_the_items(
    dask_cluster: Any, lines: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.setattr(cluster, "BATCH_ITEMS", 3)
    items = [item for item, _ in zip(work_items([lines]), range(60), strict=False)]
    with Screening(TASK, partial(ClusterPool, address=dask_cluster.scheduler_address)) as run:
        assert [row["id"] for row in run.rows(items)] == [item.identity for item in items]


def test_a_run_that_is_asked_to_stop_finishes_what_it_gave_out(
    dask_cluster: Any, lines: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.setattr(cluster, "BATCH_ITEMS", 4)
    jobs = (Job(number, item) for number, item in enumerate(work_items([lines])))
    with ClusterPool(TASK, dask_cluster.scheduler_address) as crew:
        answered = []
        for job, _ in crew.answers(jobs):
            answered.append(job.number)
            crew.stop()
    assert sorted(answered) == list(range(len(answered)))
    assert len(answered) <= 4 * cluster.BATCHES_A_THREAD * 2


def test_versions_that_differ_are_refused_by_name() -> None:
    with pytest.raises(ScreeningError, match=r"spglib \S+, not 0\.1"):
        work_batch("run", TASK, versions() | {"spglib": "0.1"}, [])


def test_a_batch_is_answered_in_its_order_by_a_process_that_stays_warm(lines: Path) -> None:
    items = [item for item, _ in zip(work_items([lines]), range(20), strict=False)]
    try:
        answers = work_batch("run", TASK, versions(), items)
        assert [answer.rows[0]["id"] for answer in answers] == [item.identity for item in items]
        assert [answer.rows[0]["status"] for answer in answers[:2]] == ["error", "ok"]
        assert all(answer.content_hash for answer in answers)
        assert work_batch("run", TASK, versions(), items[1:2])[0].rows[0]["id"] == items[1].identity
    finally:
        end_run("run")


@pytest.mark.parametrize("address", ["nonsense", "tcp://host", "", "host:port"])
def test_an_address_without_a_port_is_refused(address: str) -> None:
    pytest.importorskip("distributed", reason="Dask is an extra")
    with pytest.raises(UsageError, match="host:port"):
        ClusterPool(TASK, address)


@pytest.mark.parametrize("content", ["{}", "xx", '{"address": 1}'])
def test_a_file_that_no_scheduler_wrote_is_an_error(tmp_path: Path, content: str) -> None:
    pytest.importorskip("distributed", reason="Dask is an extra")
    path = tmp_path / "scheduler.json"
    path.write_text(content)
    with pytest.raises(ScreeningError, match="does not answer"), ClusterPool(TASK, str(path)):
        pass


@pytest.mark.parametrize("address", ["local:0", "local:many", "local:"])
def test_a_local_cluster_of_no_workers_is_refused(address: str) -> None:
    pytest.importorskip("distributed", reason="Dask is an extra")
    with pytest.raises(UsageError, match="at least one"):
        ClusterPool(TASK, address)


@pytest.mark.parametrize("address", ["127.0.0.1:9", "tcp://127.0.0.1:9", "missing.json"])
def test_a_scheduler_that_does_not_answer_is_an_error(address: str, monkeypatch: pytest.MonkeyPatch) -> None:
    pytest.importorskip("distributed", reason="Dask is an extra")
    monkeypatch.setattr(cluster, "_CONNECT_SECONDS", 1)
    with pytest.raises(ScreeningError, match="does not answer"), ClusterPool(TASK, address):
        pass


def test_without_dask_the_extra_is_named(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setitem(sys.modules, "distributed", None)
    with pytest.raises(UsageError, match=r"sitesym\[cluster\]"):
        ClusterPool(TASK, "local:1")
