"""What a worker process does: receive units of work, answer each with rows, one after the other.

A structure that takes too long ends the process by an alarm signal whose action is the system's own, so that
code which never returns to Python is ended too; one that asks for too much memory fails to get it. Whatever
native code writes to standard error meanwhile goes to the row.
"""

from __future__ import annotations

import os
import resource
import signal
import warnings
from collections.abc import Callable
from importlib import import_module
from itertools import count
from multiprocessing.connection import Connection
from time import perf_counter
from typing import TypeAlias

from sitesym.choices import ReadingChoices
from sitesym.crystals.crystal import Crystal
from sitesym.crystals.spglib_finder import setting
from sitesym.errors import SitesymError
from sitesym.screening.columns import Row
from sitesym.screening.contents import Structures
from sitesym.screening.facts import facts_of
from sitesym.screening.failures import failed_row, joined, lost_row, too_much_memory
from sitesym.screening.row import crystal_row
from sitesym.screening.settings import Settings
from sitesym.screening.task import MOST_WORDS, Answer, Task
from sitesym.screening.work import WorkItem, content_hash, storable

Reader: TypeAlias = Callable[[WorkItem, ReadingChoices], Structures]


def prepared(task: Task) -> Reader:
    """Load all that the first item would, so that its time is its own; the reader that the task names."""
    module, _, function = task.reader.partition(":")
    reader: Reader = getattr(import_module(module), function)
    if task.settings.finder != "spglib" or task.settings.ladder:
        import_module("moyopy")
    if task.settings.ladder:
        # Pairs atoms when the distance from inversion is measured.
        import_module("scipy.optimize")
    facts_of(setting(1), task.settings.properties)
    return reader


def work(connection: Connection, task: Task, reader: Reader) -> None:
    """Receive lists of items, each with the number of its structures that are done, and send an `Answer` for
    each, in order, until the other end is gone."""
    signal.signal(signal.SIGALRM, signal.SIG_DFL)
    # Each warning is shown each time: what an item's rows say must not depend on the items before it.
    warnings.simplefilter("always")
    warnings.simplefilter("ignore", DeprecationWarning)
    warnings.simplefilter("ignore", FutureWarning)
    _limit_memory(task.limit_megabytes)
    try:
        while True:
            for item, done in connection.recv():
                answer = answered(item, done, task, reader, connection.send)
                connection.send(answer)
                if answer.last:
                    return
    except (EOFError, BrokenPipeError, ConnectionResetError):
        return


def answered(item: WorkItem, done: int, task: Task, reader: Reader, tell: Callable[[Answer], None]) -> Answer:
    """The last answer to an item; where it has several structures, one for each goes before through ``tell``.

    ``done`` structures have their rows already. Whatever goes wrong is a row.
    """
    digest, at, start = "", "", perf_counter()
    try:
        if task.hashed:
            _set_alarm(task.limit_seconds)
            digest = content_hash(item)
        for name, crystal in _structures(item, done, task, reader):
            if name:
                at = name
                tell(Answer((), more=True, at=at))
            row = _row(item, name, crystal, task.settings)
            row["seconds"] = round(perf_counter() - start, 6)
            if not name:
                return Answer((row,), digest)
            tell(Answer((row,), more=True))
            done, at, start = done + 1, "", perf_counter()
        return Answer((), digest)
    except MemoryError:
        reason: SitesymError = too_much_memory(task.limit_megabytes)
        # What a refused allocation has left behind in libraries is unknown: the process is not used again.
        last = True
    except Exception as error:  # noqa: BLE001  the worker boundary: one item must not end a run
        reason = error if isinstance(error, SitesymError) else _unforeseen(error)
        last = bool(at)
    finally:
        _set_alarm(0.0)
    # Another process goes on after a structure that was begun.
    return Answer((lost_row(item, at, done, reason, task.settings),), digest, last, more=bool(at))


def _structures(item: WorkItem, done: int, task: Task, reader: Reader) -> Structures:
    """The structures of an item after the first few; each has the whole limit of time."""
    structures = iter(reader(item, task.settings.reading))
    for number in count():
        _set_alarm(task.limit_seconds)
        named = next(structures, None)
        if named is None:
            return
        if number >= done:
            yield named


def _row(item: WorkItem, name: str, crystal: Crystal | SitesymError, settings: Settings) -> Row:
    """The row of a structure without ``seconds``, with what was written to standard error since the last."""
    try:
        if isinstance(crystal, SitesymError):
            raise crystal
        row = crystal_row(item, name, crystal, settings)
    except SitesymError as error:
        row = failed_row(item, name, error, settings)
    if words := _words():
        row["remarks"] = joined((str(row["remarks"] or ""), words))
    return row


def _set_alarm(seconds: float) -> None:
    """End the process after so long, whether it is in Python or not; 0 for never."""
    signal.setitimer(signal.ITIMER_REAL, seconds)


def _words() -> str:
    """What was written to standard error since the last call; it is a file that only this process writes."""
    if os.fstat(2).st_size == 0:
        return ""
    words = os.pread(2, MOST_WORDS, 0)
    os.ftruncate(2, 0)
    # What is written next begins where the file is at, which is after what has been cut.
    os.lseek(2, 0, os.SEEK_SET)
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
