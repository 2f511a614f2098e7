"""Warm worker processes that are replaced when they die, fed with small batches, never far ahead.

A worker answers its items in order, so the first unanswered one is the one that ended it. Only that item
pays: after a crash it is tried once more, then it is a row with a status; the others are given out again. Of
an item with several structures only the one it came to pays.
"""

from __future__ import annotations

from collections import deque
from collections.abc import Iterator
from dataclasses import replace
from multiprocessing.connection import wait
from types import TracebackType
from typing import Final

from sitesym.errors import CrashError, ScreeningError
from sitesym.screening.failures import lost_row
from sitesym.screening.nursery import Nursery
from sitesym.screening.process import WorkerProcess
from sitesym.screening.task import Answer, Job, Task
from sitesym.screening.work import content_hash

#: A batch ends with the item that reaches one of these: atoms, items.
BATCH_ATOMS: Final = 200
BATCH_ITEMS: Final = 16
#: A batch in memory beyond this is given only to a worker that waits for it (bytes): pipes hold little.
_PREFETCHED_BYTES: Final = 30_000
#: How many items the newest one may be ahead of the oldest that is not answered.
WINDOW: Final = 2000


class Pool:
    """``workers`` processes for one task, as a context manager: at its end they are ended."""

    def __init__(self, task: Task, workers: int) -> None:
        self.task = task
        self.stopping = False
        self._workers = workers
        self._crew: list[WorkerProcess] = []
        self._again: deque[list[Job]] = deque()
        self._next: list[Job] = []
        self._jobs: Iterator[Job] = iter(())
        self._newest = 0

    def __enter__(self) -> Pool:
        self._nursery = Nursery(self.task)
        return self

    def __exit__(
        self, kind: type[BaseException] | None, error: BaseException | None, trace: TracebackType | None
    ) -> None:
        # Workers see the end of their connection; those that hang are ended here.
        for worker in self._crew:
            worker.end()
        self._nursery.end()

    def stop(self) -> None:
        """Give out no more jobs; those given out are finished."""
        self.stopping = True

    def answers(self, jobs: Iterator[Job]) -> Iterator[tuple[Job, Answer]]:
        """Each job with its answer, as they come; jobs are taken from the iterator when they are needed.

        Raises ScreeningError when worker processes do not start.
        """
        self._jobs = jobs
        # The first jobs are looked for while the libraries of the workers are being loaded.
        self._next = self._fresh()
        while len(self._crew) < self._workers:
            self._crew.append(WorkerProcess(self.task, self._nursery))
        self._feed()
        while any(worker.jobs for worker in self._crew):
            listening = {worker.connection.fileno(): worker for worker in self._crew}
            for descriptor in wait(list(listening)):
                answered = self._listen(listening[descriptor])  # type: ignore[index]
                if answered is not None:
                    yield answered
            self._feed()

    def _listen(self, worker: WorkerProcess) -> tuple[Job, Answer] | None:
        try:
            answer = worker.listen()
        except EOFError:
            return self._bury(worker)
        job = worker.jobs[0]
        job.rows.extend(answer.rows)
        job.at = answer.at
        if not answer.more:
            worker.jobs.popleft()
        if answer.last:
            self._replace(worker)
        return None if answer.more else (job, replace(answer, rows=tuple(job.rows)))

    def _bury(self, worker: WorkerProcess) -> tuple[Job, Answer] | None:
        """Replace a dead worker. The item that ended it is tried again, from that structure on; at the second
        time that structure has its row, and the item goes on after it or is done."""
        error = worker.cause_of_death()
        job = worker.jobs[0] if worker.jobs else None
        done = job is not None and self._lost(job, error)
        if done:
            worker.jobs.popleft()
        self._replace(worker)
        if job is None or not done:
            return None
        return job, Answer(tuple(job.rows), content_hash(job.item) if self.task.hashed else "")

    def _lost(self, job: Job, error: ScreeningError) -> bool:
        """Take note of the end of a worker at a job; whether the job is done with that."""
        job.tries += 1
        if isinstance(error, CrashError) and job.tries < 2:
            job.at = ""
            return False
        job.rows.append(lost_row(job.item, job.at, len(job.rows), error, self.task.settings))
        goes_on = bool(job.at)
        job.tries, job.at = 0, ""
        return not goes_on

    def _replace(self, worker: WorkerProcess) -> None:
        if worker.jobs:
            self._again.appendleft(list(worker.jobs))
        worker.end()
        self._crew[self._crew.index(worker)] = WorkerProcess(self.task, self._nursery)

    def _feed(self) -> None:
        """Give every worker what it lacks, the one with the fewest jobs first."""
        for worker in sorted(self._crew, key=lambda worker: len(worker.jobs)):
            while (batch := self._batch_for(worker)) is not None:
                worker.give(batch)

    def _batch_for(self, worker: WorkerProcess) -> list[Job] | None:
        """The next batch if the worker should have it now: less than one is before it."""
        if self.stopping or sum(job.item.atoms_hint for job in worker.jobs) >= BATCH_ATOMS:
            return None
        if not self._next:
            self._next = self._again.popleft() if self._again else self._fresh()
        heavy = sum(len(job.item.content) for job in self._next) > _PREFETCHED_BYTES
        if not self._next or (heavy and worker.jobs):
            return None
        batch, self._next = self._next, []
        return batch

    def _fresh(self) -> list[Job]:
        """The next jobs of the stream, none while the newest is far ahead of one that is not answered."""
        waiting = min((job.number for worker in self._crew for job in worker.jobs), default=None)
        batch: list[Job] = []
        atoms = 0
        while atoms < BATCH_ATOMS and len(batch) < BATCH_ITEMS:
            if waiting is not None and self._newest - waiting >= WINDOW:
                break
            job = next(self._jobs, None)
            if job is None:
                break
            self._newest = job.number
            batch.append(job)
            atoms += job.item.atoms_hint
        return batch
