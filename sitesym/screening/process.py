"""One worker process as the calling program sees it: fed, listened to, and asked for its last words."""

from __future__ import annotations

import os
import signal
import tempfile
from collections import deque
from contextlib import suppress
from multiprocessing import Pipe
from typing import Final

from sitesym.errors import CrashError, ScreeningError, TooSlowError
from sitesym.screening.failures import too_much_memory
from sitesym.screening.nursery import Nursery, last_words
from sitesym.screening.task import Answer, Job, Task

#: What allocators of C++ and Rust say before they end the process.
_MEMORY_WORDS: Final = ("memory allocation of", "bad_alloc", "Cannot allocate memory", "out of memory")


class WorkerProcess:
    """A process with the jobs it was given and has not answered yet, the first of them being worked on."""

    def __init__(self, task: Task, nursery: Nursery) -> None:
        """Start a process. Raises ScreeningError when it cannot be started."""
        self.jobs: deque[Job] = deque()
        self._task = task
        self._nursery = nursery
        self.connection, other = Pipe()
        self._words = tempfile.TemporaryFile()  # noqa: SIM115  closed in `end`
        self._number: int | None = None
        try:
            self._number = nursery.worker(other, self._words.fileno())
        except ScreeningError:
            self.end()
            raise
        finally:
            other.close()

    def give(self, jobs: list[Job]) -> None:
        """Add jobs to those of the process; one that has died will be noticed on listening."""
        self.jobs.extend(jobs)
        try:
            self.connection.send([(job.item, len(job.rows)) for job in jobs])
        except (BrokenPipeError, ConnectionResetError):
            return

    def listen(self) -> Answer:
        """The next answer. Raises EOFError when the process has ended."""
        try:
            answer: Answer = self.connection.recv()
        except ConnectionResetError as error:
            raise EOFError from error
        return answer

    def end(self) -> None:
        """End the process now, whatever it does, also where what has made it is gone."""
        if self._number is not None:
            with suppress(ProcessLookupError, ScreeningError):
                os.kill(self._number, signal.SIGKILL)
                self._exit_code()
        self.connection.close()
        self._words.close()

    def cause_of_death(self) -> ScreeningError:
        """Why the process ended, as the error of the job it was at."""
        code = self._exit_code()
        said = last_words(self._words.fileno())
        if code == -signal.SIGALRM:
            return TooSlowError(
                "the structure takes too much time",
                f"more than {self._task.limit_seconds:g} seconds",
                "the time for one structure is limited",
                "raise --limit-seconds",
            )
        if any(phrase in said for phrase in _MEMORY_WORDS):
            return too_much_memory(self._task.limit_megabytes, said)
        return CrashError(
            "the structure ends the process that works on it",
            f"{_ending(code)}{': ' if said else ''}{said}",
            "native code of a library fails on it",
            "look at the structure; report it with the file",
        )

    def _exit_code(self) -> int:
        number, self._number = self._number, None
        return 0 if number is None else self._nursery.exit_code(number)


def _ending(code: int) -> str:
    if code >= 0:
        return f"exit code {code}"
    name = signal.Signals(-code).name if -code in set(signal.Signals) else f"signal {-code}"
    return f"{name}, which the system sends when memory runs out" if code == -signal.SIGKILL else name
