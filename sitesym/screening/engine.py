"""A screening run: units of work through a crew of workers, to a stream of rows or into a store.

The stream of units is taken as it is needed and never held; rows of a stream come in its order. A store takes
rows as they are finished and tells which units are done already.
"""

from __future__ import annotations

import os
from collections.abc import Callable, Iterable, Iterator
from contextlib import AbstractContextManager
from types import TracebackType
from typing import Final, Protocol

from sitesym.errors import SitesymError
from sitesym.screening.columns import Row
from sitesym.screening.interruption import requests_to_stop
from sitesym.screening.pool import Pool
from sitesym.screening.settings import Settings
from sitesym.screening.store import Store
from sitesym.screening.tally import Tally
from sitesym.screening.task import Answer, Job, Task
from sitesym.screening.work import WorkItem

DEFAULT_LIMIT_SECONDS: Final = 300.0
DEFAULT_LIMIT_MEGABYTES: Final = 4000.0


class Crew(AbstractContextManager["Crew"], Protocol):
    """Whoever turns jobs into answers: `sitesym.screening.pool.Pool`, or workers on other machines."""

    def answers(self, jobs: Iterator[Job]) -> Iterator[tuple[Job, Answer]]:
        """Each job with its answer, in any order; jobs are taken as they are needed, and none is lost."""

    def stop(self) -> None:
        """Take no more jobs; finish those taken."""


class Screening:
    """One run of a task, as a context manager: workers start when it is entered and end with it.

    ``tally`` counts the rows, ``done`` the units finished, ``already_done`` those found done in the store;
    ``stopped_by`` is the name of the signal that ended the run early, or empty. ``crew`` makes the workers;
    by default one process for each core that may be used.
    """

    def __init__(self, task: Task, crew: Callable[[Task], Crew] | None = None) -> None:
        self.task = task
        self.tally = Tally()
        self.done = 0
        self.already_done = 0
        self.stopped_by = ""
        self._crew = (crew or _one_process_a_core)(task)

    def __enter__(self) -> Screening:
        """Start the workers. Raises UsageError for settings that name what does not exist."""
        self._crew.__enter__()
        try:
            self.task.settings.check()
        except SitesymError:
            self._crew.__exit__(None, None, None)
            raise
        return self

    def __exit__(
        self, kind: type[BaseException] | None, error: BaseException | None, trace: TracebackType | None
    ) -> None:
        self._crew.__exit__(kind, error, trace)

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
        with requests_to_stop(self._stop):
            for job, answer in self._crew.answers(jobs):
                self.done += 1
                for row in answer.rows:
                    self.tally.add(row)
                yield job, answer

    def _stop(self, signal_name: str) -> None:
        self.stopped_by = signal_name
        self._crew.stop()


def screen(
    names: Iterable[str | os.PathLike[str]], settings: Settings | None = None, workers: int | None = None
) -> Iterator[Row]:
    """Rows of all structures in folders, files, archives, lists and patterns, in their order.

    ``workers``: number of processes, by default one for each core; they do not import the calling program.
    Raises ReadingError where a name
    stands for nothing.
    """
    task = Task(settings or Settings(), DEFAULT_LIMIT_SECONDS, DEFAULT_LIMIT_MEGABYTES)
    with Screening(task, lambda task: Pool(task, workers or available_cores())) as run:
        # Knows every format, so that it takes long to load: the workers are on their way meanwhile.
        from sitesym.screening.sources import work_items

        yield from run.rows(work_items(names, split=task.settings.frame is None))


def available_cores() -> int:
    """Cores this process may use."""
    return len(os.sched_getaffinity(0)) if hasattr(os, "sched_getaffinity") else os.cpu_count() or 1


def _one_process_a_core(task: Task) -> Crew:
    return Pool(task, available_cores())
