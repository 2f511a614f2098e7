"""Workers on other machines, through a Dask scheduler: they answer as `sitesym.screening.pool.Pool` does.

A Dask task is a batch of items, see `sitesym.screening.cluster_worker`. Answers come back to the one program
that writes them down. A Dask worker that is lost takes its batches with it, and the scheduler gives them to
another; a batch that lost several workers one after the other is done item by item.
"""

from __future__ import annotations

import importlib
import os
import re
from collections import deque
from collections.abc import Iterator
from time import monotonic
from types import TracebackType
from typing import Any, Final
from uuid import uuid4

from sitesym.errors import CrashError, ScreeningError, SitesymError, UsageError
from sitesym.screening.cluster_worker import end_run, work_batch
from sitesym.screening.failures import failed_row
from sitesym.screening.settings import versions
from sitesym.screening.task import Answer, Job, Task
from sitesym.screening.work import content_hash

#: A batch ends with the item that reaches one of these: atoms, items, bytes sent along.
BATCH_ATOMS: Final = 2000
BATCH_ITEMS: Final = 128
BATCH_BYTES: Final = 1_000_000
#: Batches given out for each thread of the cluster; at least so many while it has none.
BATCHES_A_THREAD: Final = 3
BATCHES_AT_LEAST: Final = 4
#: How many items the newest one may be ahead of the oldest that is not answered.
WINDOW: Final = 50_000

_CONNECT_SECONDS: Final = 30
#: Protocol, host and port of a scheduler; without a protocol it is TCP.
_ADDRESS: Final = re.compile(r"([a-z]+://)?\S+:\d+")
#: For how long the number of threads is taken for true.
_FRESH_SECONDS: Final = 2.0


class ClusterPool:
    """Workers of a Dask cluster for one task. Use it as a context manager: its end leaves the cluster."""

    def __init__(self, task: Task, address: str) -> None:
        """``address``: a scheduler (tcp://host:8786), the scheduler file it wrote (a path ending in .json),
        or local:N for N workers on this machine.

        Raises UsageError where Dask is not installed or the address is not understood.
        """
        self.task = task
        self.stopping = False
        self._address = address
        self._local_workers = _local_workers(address)
        self._run = uuid4().hex
        self._versions = versions()
        self._given: dict[Any, list[Job]] = {}
        self._again: deque[list[Job]] = deque()
        self._threads, self._counted = 0, -_FRESH_SECONDS
        self._newest = 0
        self._dask = _library()
        self._cluster: Any = None
        self._client: Any = None

    def __enter__(self) -> ClusterPool:
        """Start the local cluster or connect. Raises ScreeningError where the scheduler does not answer."""
        if self._local_workers:
            # No limit of memory: structures are worked on in processes that have limits of their own.
            self._cluster = self._dask.LocalCluster(
                n_workers=self._local_workers, threads_per_worker=1, memory_limit=None,
                dashboard_address="localhost:0",
            )  # fmt: skip
        self._client = self._connected()
        return self

    def __exit__(
        self, kind: type[BaseException] | None, error: BaseException | None, trace: TracebackType | None
    ) -> None:
        if self._given:
            self._client.cancel(list(self._given))
        if self._client.status == "running":
            self._client.run(end_run, self._run, on_error="ignore")
        self._client.close()
        if self._cluster is not None:
            self._cluster.close()

    def stop(self) -> None:
        """Give out no more jobs; those given out are finished."""
        self.stopping = True

    def answers(self, jobs: Iterator[Job]) -> Iterator[tuple[Job, Answer]]:
        """Each job with its answer, as they come; jobs are taken from the iterator when they are needed.

        Raises ScreeningError when the scheduler is gone, or the workers cannot do the work at all.
        """
        finished = self._dask.as_completed(loop=self._client.loop)
        self._feed(jobs, finished)
        while self._given:
            future = next(finished)
            yield from self._answered(future, self._given.pop(future))
            self._feed(jobs, finished)

    def _answered(self, future: Any, batch: list[Job]) -> Iterator[tuple[Job, Answer]]:
        if future.cancelled():
            raise ScreeningError(
                "the scheduler of the cluster is gone",
                f"{len(batch)} items were given out",
                "the scheduler lives as long as the run",
                "start it, then run again: a store goes on where it was",
            )
        error = future.exception()
        if error is None:
            yield from zip(batch, future.result(), strict=True)
        elif isinstance(error, self._dask.KilledWorker) and len(batch) > 1:
            self._again.extend([job] for job in batch)
        elif isinstance(error, self._dask.KilledWorker):
            yield batch[0], self._lost(batch[0])
        elif isinstance(error, SitesymError):
            raise error
        else:
            raise ScreeningError(
                "a worker of the cluster cannot do the work",
                f"{type(error).__name__}: {error}",
                "workers run the same Python with the same packages",
                "start the workers in the environment of this program",
            ) from error

    def _lost(self, job: Job) -> Answer:
        """What is left of an item whose workers were lost, each time it was tried."""
        error = CrashError(
            "the worker of the cluster was lost each time the structure was given to it",
            job.item.identity,
            "a worker lives until it has answered",
            "look at the log of the worker: memory and time of its job in the queue",
        )
        row = failed_row(job.item, "", error, self.task.settings)
        return Answer((row,), content_hash(job.item) if self.task.hashed else "")

    def _feed(self, jobs: Iterator[Job], finished: Any) -> None:
        while not self.stopping and len(self._given) < self._wanted():
            batch = self._again.popleft() if self._again else self._fresh(jobs)
            if not batch:
                return
            items = [job.item for job in batch]
            future = self._client.submit(
                work_batch,
                self._run,
                self.task,
                self._versions,
                items,
                pure=False,
                key=f"sitesym-{uuid4().hex}",
            )
            self._given[future] = batch
            finished.add(future)

    def _fresh(self, jobs: Iterator[Job]) -> list[Job]:
        """The next jobs of the stream, none while the newest is far ahead of one that is not answered."""
        oldest = min((batch[0].number for batch in self._given.values()), default=self._newest)
        batch: list[Job] = []
        atoms = size = 0
        while atoms < BATCH_ATOMS and size < BATCH_BYTES and len(batch) < BATCH_ITEMS:
            job = next(jobs, None) if self._newest - oldest < WINDOW else None
            if job is None:
                break
            self._newest = job.number
            batch.append(job)
            atoms += job.item.atoms_hint
            size += len(job.item.content)
        return batch

    def _wanted(self) -> int:
        """How many batches should be given out now; workers come and go as the queue has it."""
        if monotonic() - self._counted >= _FRESH_SECONDS:
            self._threads, self._counted = sum(self._client.nthreads().values()), monotonic()
        return max(BATCHES_AT_LEAST, BATCHES_A_THREAD * self._threads)

    def _connected(self) -> Any:
        where: dict[str, Any] = {"address": self._cluster or self._address}
        if self._address.endswith(".json"):
            where = {"scheduler_file": self._address}
        try:
            if "scheduler_file" in where:
                # The client would wait for the file for ever.
                os.stat(self._address)
            return self._dask.Client(**where, timeout=_CONNECT_SECONDS, set_as_default=False)
        except (OSError, ValueError, AssertionError, KeyError, TypeError) as error:
            # The last three come of a file that no scheduler has written.
            raise ScreeningError(
                "the scheduler of the cluster does not answer",
                f"{self._address}: {error}",
                "tcp://host:port, the scheduler file (.json) it wrote, or local:N",
                "start the scheduler, or correct --cluster",
            ) from error


def _local_workers(address: str) -> int:
    """N of local:N, 0 for the address of a scheduler. Raises UsageError for what is neither."""
    kind, _, number = address.partition(":")
    if kind != "local":
        if not (address.endswith(".json") or _ADDRESS.fullmatch(address)):
            raise UsageError(
                "the address of the cluster is not understood",
                address,
                "tcp://host:port, the scheduler file (.json) it wrote, or local:N",
                "write for example --cluster tcp://host:8786",
            )
        return 0
    if not number.isdecimal() or int(number) < 1:
        raise UsageError(
            "the local cluster is not understood",
            address,
            "local:N starts N workers, at least one",
            "write for example --cluster local:4",
        )
    return int(number)


def _library() -> Any:
    try:
        return importlib.import_module("distributed")
    except ImportError as error:
        raise UsageError(
            "a cluster needs a library that is not installed",
            "distributed (Dask)",
            "Dask is an extra",
            "pip install 'sitesym[cluster]', or leave out --cluster",
        ) from error
