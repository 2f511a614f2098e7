"""What a worker process does: receive units of work, answer each with rows, one after the other.

A unit that takes too long ends the process by an alarm signal
whose action is the system's own, so that code which never returns to Python is ended too; a unit that asks
for too much memory fails to get it. Whatever native code writes to standard error while a unit is worked on
goes to its rows.
"""

from __future__ import annotations

import os
import resource
import signal
import warnings
from collections.abc import Callable, Iterator
from importlib import import_module
from multiprocessing.connection import Connection
from time import perf_counter
from typing import TypeAlias

from sitesym.choices import ReadingChoices
from sitesym.crystals.spglib_finder import setting
from sitesym.errors import SitesymError
from sitesym.screening.columns import Row
from sitesym.screening.contents import Structures
from sitesym.screening.facts import facts_of
from sitesym.screening.failures import failed_row, joined, too_much_memory
from sitesym.screening.row import crystal_row
from sitesym.screening.task import MOST_WORDS, Answer, Task
from sitesym.screening.work import WorkItem, content_hash, storable

Reader: TypeAlias = Callable[[WorkItem, ReadingChoices], Structures]


def prepared(task: Task) -> Reader:
    """Load all that the first item would, so that its time is its own; the reader that the task names."""
    module, _, function = task.reader.partition(":")
    reader: Reader = getattr(import_module(module), function)
    if task.settings.finder != "spglib" or task.settings.ladder:
        import_module("moyopy")
    facts_of(setting(1), task.settings.properties)
    return reader


def work(connection: Connection, task: Task, reader: Reader) -> None:
    """Receive lists of items and send one `Answer` for each, in order, until the other end is gone."""
    signal.signal(signal.SIGALRM, signal.SIG_DFL)
    # Each warning is shown each time: what an item's rows say must not depend on the items before it.
    warnings.simplefilter("always")
    warnings.simplefilter("ignore", DeprecationWarning)
    warnings.simplefilter("ignore", FutureWarning)
    _limit_memory(task.limit_megabytes)
    try:
        while True:
            for item in connection.recv():
                answer = answered(item, task, reader)
                connection.send(answer)
                if answer.last:
                    return
    except (EOFError, BrokenPipeError, ConnectionResetError):
        return


def answered(item: WorkItem, task: Task, reader: Reader) -> Answer:
    """Rows of an item; whatever goes wrong is a row."""
    digest, rows = "", list[Row]()
    try:
        if task.hashed:
            _set_alarm(task.limit_seconds)
            digest = content_hash(item)
        rows.extend(_rows(item, task, reader))
        return Answer(tuple(rows), digest)
    except SitesymError as error:
        rows = [failed_row(item, "", error, task.settings)]
    except MemoryError:
        # What a refused allocation has left behind in libraries is unknown: the process is not used again.
        rows = [failed_row(item, "", too_much_memory(task.limit_megabytes), task.settings)]
        return Answer(tuple(rows), digest, last=True)
    except Exception as error:  # noqa: BLE001  the worker boundary: one item must not end a run
        rows = [failed_row(item, "", _unforeseen(error), task.settings)]
    return Answer(tuple(rows), digest)


def _rows(item: WorkItem, task: Task, reader: Reader) -> Iterator[Row]:
    """A row for each structure of an item; limits and times are those of one structure."""
    structures = iter(reader(item, task.settings.reading))
    try:
        while True:
            start = perf_counter()
            _set_alarm(task.limit_seconds)
            named = next(structures, None)
            if named is None:
                return
            name, crystal = named
            try:
                if isinstance(crystal, SitesymError):
                    raise crystal
                row = crystal_row(item, name, crystal, task.settings)
            except SitesymError as error:
                row = failed_row(item, name, error, task.settings)
            if words := _words():
                row["remarks"] = joined((str(row["remarks"] or ""), words))
            row["seconds"] = round(perf_counter() - start, 6)
            yield row
    finally:
        _set_alarm(0.0)


def _set_alarm(seconds: float) -> None:
    """End the process after so long, whether it is in Python or not; 0 for never."""
    signal.setitimer(signal.ITIMER_REAL, seconds)


def _words() -> str:
    """What was written to standard error since the last call; it is a file that only this process writes."""
    if os.fstat(2).st_size == 0:
        return ""
    words = os.pread(2, MOST_WORDS, 0)
    os.ftruncate(2, 0)
    text = " ".join(words.decode("utf-8", errors="replace").split())
    return f"standard error: {text}" if text else ""


def _limit_memory(megabytes: float) -> None:
    """Refuse memory beyond what the process has now plus so much; only where the system tells what it has."""
    try:
        with open("/proc/self/statm", encoding="ascii") as stream:
            pages = int(stream.read().split()[0])
    except OSError:
        return
    limit = pages * resource.getpagesize() + int(megabytes * 1e6)
    _, hard = resource.getrlimit(resource.RLIMIT_AS)
    if hard == resource.RLIM_INFINITY or limit < hard:
        resource.setrlimit(resource.RLIMIT_AS, (limit, hard))


def _unforeseen(error: Exception) -> SitesymError:
    """An error nobody foresaw, as a row can hold it."""
    return SitesymError(
        "unexpected failure of the program",
        storable(f"{type(error).__name__}: {error}"),
        "errors of a file are foreseen",
        "report it with the file",
    )
