"""What runs inside a Dask worker: a batch of items through a warm process beside the worker.

A structure that crashes, hangs or takes all memory ends that process, and the Dask worker lives on. The
processes of a run stay warm from batch to batch, one for each thread of the worker.
"""

from __future__ import annotations

import threading
from collections.abc import Mapping, Sequence
from typing import Final

from sitesym.errors import ScreeningError
from sitesym.screening.pool import Pool
from sitesym.screening.settings import versions
from sitesym.screening.task import Answer, Job, Task
from sitesym.screening.work import WorkItem

#: Warm processes by run and thread. They belong to the Dask worker, which no single batch outlives.
_POOLS: Final[dict[tuple[str, int], Pool]] = {}


def work_batch(
    run: str, task: Task, expected_versions: Mapping[str, str], items: Sequence[WorkItem]
) -> list[Answer]:
    """The answer to each item, in order.

    Raises ScreeningError when processes do not start, or when the versions here are not those expected, which
    are the versions that the rows will be said to be made with.
    """
    key = (run, threading.get_ident())
    if key not in _POOLS:
        _require_versions(expected_versions)
        _POOLS[key] = Pool(task, 1).__enter__()
    jobs = [Job(number, item) for number, item in enumerate(items)]
    try:
        answered = {job.number: answer for job, answer in _POOLS[key].answers(iter(jobs))}
    except ScreeningError:
        _end(key)
        raise
    return [answered[job.number] for job in jobs]


def end_run(run: str) -> None:
    """End the warm processes of a run."""
    for key in [key for key in _POOLS if key[0] == run]:
        _end(key)


def _end(key: tuple[str, int]) -> None:
    _POOLS.pop(key).__exit__(None, None, None)


def _require_versions(expected: Mapping[str, str]) -> None:
    here = versions()
    if here == expected:
        return
    names = sorted(name for name in {*here, *expected} if here.get(name) != expected.get(name))
    differing = (f"{name} {here.get(name, 'missing')}, not {expected.get(name, 'missing')}" for name in names)
    raise ScreeningError(
        "a worker of the cluster has other versions",
        "; ".join(differing),
        "all workers have the versions of the program that gives out the work",
        "start the workers in the same environment",
    )
