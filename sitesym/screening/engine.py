"""A screening run: units of work through a crew of workers, to a stream of rows or into a store.

The stream of units is taken as it is needed and never held; rows of a stream come in its order. A store takes
rows as they are finished and tells which units are done already.
"""

from __future__ import annotations

import os
from collections.abc import Callable, Iterable, Iterator
from contextlib import AbstractContextManager
from typing import Final, Protocol

from sitesym.screening.columns import Row
from sitesym.screening.interruption import requests_to_stop
from sitesym.screening.pool import Pool
from sitesym.screening.process import Job
from sitesym.screening.store import Store
from sitesym.screening.tally import Tally
from sitesym.screening.work import WorkItem
from sitesym.screening.worker import Answer, Task

DEFAULT_LIMIT_SECONDS: Final = 300.0
DEFAULT_LIMIT_MEGABYTES: Final = 4000.0


class Crew(AbstractContextManager["Crew"], Protocol):
    """Whoever turns jobs into answers: `sitesym.screening.pool.Pool`, or workers on other machines."""

    def answers(self, jobs: Iterator[Job]) -> Iterator[tuple[Job, Answer]]:
        """Each job with its answer, in any order; jobs are taken as they are needed, and none is lost."""

    def stop(self) -> None:
        """Take no more jobs; finish those taken."""


class Screening:
    """One run of a task. ``tally`` counts its rows; ``already_done`` the units found done in the store;
    ``stopped_by`` is the name of the signal that ended it early, or empty.

    ``crew`` makes the workers for the task; by default one process for each core that may be used.
    """

    def __init__(self, task: Task, crew: Callable[[Task], Crew] | None = None) -> None:
        self.task = task
        self.tally = Tally()
        self.already_done = 0
        self.stopped_by = ""
        self._crew = crew or (lambda task: Pool(task, available_cores()))

    def rows(self, items: Iterable[WorkItem]) -> Iterator[Row]:
        """Rows of all items, in their order.

        Raises ScreeningError when workers do not start.
        """
        waiting: dict[int, tuple[Row, ...]] = {}
        following = 0
        for job, answer in self._answers(items):
            waiting[job.number] = answer.rows
            while following in waiting:
                yield from waiting.pop(following)
                following += 1
        # A run that was stopped leaves gaps.
        for number in sorted(waiting):
            yield from waiting[number]

    def into(self, store: Store, items: Iterable[WorkItem], retry: bool = False) -> Iterator[Row]:
        """Rows as they are finished and written to the store; items that the store holds are passed over.

        ``retry``: do those again that crashed, took too long or too much memory. Raises StoreError when the
        store cannot be written (what was permanent stays), ScreeningError when workers do not start.
        """
        for job, answer in self._answers(self._missing(store, items, retry)):
            store.put(job.item, answer.content_hash, answer.rows)
            yield from answer.rows
        store.commit()

    def _missing(self, store: Store, items: Iterable[WorkItem], retry: bool) -> Iterator[WorkItem]:
        for item in items:
            if store.holds(item, retry):
                self.already_done += 1
            else:
                yield item
            if self.stopped_by:
                return

    def _answers(self, items: Iterable[WorkItem]) -> Iterator[tuple[Job, Answer]]:
        jobs = (Job(number, item) for number, item in enumerate(items))
        with self._crew(self.task) as crew:

            def stop(signal_name: str) -> None:
                self.stopped_by = signal_name
                crew.stop()

            with requests_to_stop(stop):
                for job, answer in crew.answers(jobs):
                    for row in answer.rows:
                        self.tally.add(row)
                    yield job, answer


def available_cores() -> int:
    """Cores this process may use."""
    return len(os.sched_getaffinity(0)) if hasattr(os, "sched_getaffinity") else os.cpu_count() or 1
