"""One worker process as the parent sees it: started, fed, listened to, and asked for its last words.

The process is a fresh interpreter that runs `sitesym.screening.worker` on one end of a connection. It does
not import the program that started it, and it ends by itself when that program is gone.
"""

from __future__ import annotations

import os
import subprocess
import sys
import tempfile
from collections import deque
from multiprocessing import Pipe
from signal import SIGALRM, SIGKILL, Signals

from sitesym.errors import CrashError, ScreeningError, TooSlowError
from sitesym.screening.failures import too_much_memory
from sitesym.screening.task import MOST_WORDS, Answer, Job, Task

_CODE = "import sys; from sitesym.screening.worker import main; main(int(sys.argv[1]))"
#: One thread a process: the processes share the cores.
_ONE_THREAD = dict.fromkeys(
    ("OMP_NUM_THREADS", "OPENBLAS_NUM_THREADS", "MKL_NUM_THREADS", "RAYON_NUM_THREADS"), "1"
)
#: What allocators of C++ and Rust say before they end the process.
_MEMORY_WORDS = ("memory allocation of", "bad_alloc", "Cannot allocate memory", "out of memory")


class WorkerProcess:
    """A process with the jobs it was given and has not answered yet, the first of them being worked on."""

    def __init__(self, task: Task) -> None:
        """Start a process; it says "ready" when it is warm."""
        self.task = task
        self.jobs: deque[Job] = deque()
        self.ready = False
        self.connection, other = Pipe()
        self._words = tempfile.TemporaryFile()  # noqa: SIM115  closed in `end`
        path = os.pathsep.join(entry for entry in sys.path if entry)
        self._process = subprocess.Popen(
            [sys.executable, "-c", _CODE, str(other.fileno())],
            stdin=subprocess.DEVNULL,
            stdout=self._words,
            stderr=self._words,
            pass_fds=(other.fileno(),),
            env={**os.environ, **_ONE_THREAD, "PYTHONPATH": path},
            # A Ctrl-C of the terminal is for the parent alone.
            start_new_session=True,
        )
        other.close()
        self.connection.send(task)

    def give(self, jobs: list[Job]) -> None:
        """Add jobs to those of the process; one that has died will be noticed on listening."""
        self.jobs.extend(jobs)
        try:
            self.connection.send([job.item for job in jobs])
        except (BrokenPipeError, ConnectionResetError):
            return

    def listen(self) -> Answer | str:
        """The next message. Raises EOFError when the process has ended."""
        try:
            message: Answer | str = self.connection.recv()
        except ConnectionResetError as error:
            raise EOFError from error
        return message

    def dismiss(self) -> None:
        """Ask the process to end itself after the jobs it has."""
        try:
            self.connection.send(None)
        except (BrokenPipeError, ConnectionResetError):
            return

    def end(self) -> None:
        """End the process now, whatever it does."""
        self._process.kill()
        self._process.wait()
        self.connection.close()
        self._words.close()

    def cause_of_death(self) -> ScreeningError:
        """Why the process ended, as the error of the job it was at."""
        code = self._process.wait()
        said = self._last_words()
        if code == -SIGALRM:
            return TooSlowError(
                "the structure takes too much time",
                f"more than {self.task.limit_seconds:g} seconds",
                "the time for one structure is limited",
                "raise --limit-seconds",
            )
        if any(phrase in said for phrase in _MEMORY_WORDS):
            return too_much_memory(self.task.limit_megabytes, said)
        if not self.ready:
            return ScreeningError(
                "a worker process does not start",
                said or _ending(code),
                "workers run the same Python with the same packages",
                "look at the message; raise --limit-memory if it speaks of memory",
            )
        return CrashError(
            "the structure ends the process that works on it",
            f"{_ending(code)}{': ' if said else ''}{said}",
            "native code of a library fails on it",
            "look at the structure; report it with the file",
        )

    def _last_words(self) -> str:
        """The end of what the process wrote since its last answer, in one line."""
        start = max(os.fstat(self._words.fileno()).st_size - MOST_WORDS, 0)
        words = os.pread(self._words.fileno(), MOST_WORDS, start)
        return " ".join(words.decode("utf-8", errors="replace").split())


def _ending(code: int) -> str:
    if code >= 0:
        return f"exit code {code}"
    name = Signals(-code).name if -code in set(Signals) else f"signal {-code}"
    return f"{name}, which the system sends when memory runs out" if code == -SIGKILL else name
