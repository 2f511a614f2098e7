"""A process that loads the libraries once and makes workers by forking: a new worker costs milliseconds.

It is a fresh interpreter, which does not import the calling program and has a single thread, so that forking
it is safe. It knows how its children have ended, and ends itself when the calling program is gone.
"""

from __future__ import annotations

import gc
import os
import signal
import subprocess
import sys
import tempfile
import traceback
from collections.abc import Callable
from functools import partial
from importlib import import_module
from multiprocessing import Pipe
from multiprocessing.connection import Connection
from multiprocessing.reduction import recv_handle, send_handle
from typing import Final, NoReturn

from sitesym.errors import ScreeningError
from sitesym.screening.task import MOST_WORDS, Task

_CODE: Final = "import sys; from sitesym.screening.nursery import main; main(int(sys.argv[1]))"
#: One thread a process: the processes share the cores.
_ONE_THREAD: Final = dict.fromkeys(
    ("OMP_NUM_THREADS", "OPENBLAS_NUM_THREADS", "MKL_NUM_THREADS", "RAYON_NUM_THREADS"), "1"
)

#: How long a process that has closed its connection may take to say why (seconds).
_LAST_SECONDS: Final = 10.0


class Nursery:
    """The process as the calling program sees it."""

    def __init__(self, task: Task) -> None:
        """Start it and go on; the first `worker` waits until the libraries are loaded."""
        self._ready = False
        self._connection, other = Pipe()
        self._words = tempfile.TemporaryFile()  # noqa: SIM115  closed in `end`
        path = os.pathsep.join(entry for entry in sys.path if entry)
        self._process = subprocess.Popen(
            [sys.executable, "-c", _CODE, str(other.fileno())],
            stdin=subprocess.DEVNULL,
            stdout=self._words,
            stderr=self._words,
            pass_fds=(other.fileno(),),
            env={**os.environ, **_ONE_THREAD, "PYTHONPATH": path},
            # A Ctrl-C of the terminal is for the calling program alone.
            start_new_session=True,
        )
        other.close()
        self._connection.send(task)

    def worker(self, connection: Connection, words: int) -> int:
        """Process number of a new worker at the other end of a connection; it writes its standard output and
        error to the file ``words``. Raises ScreeningError when it cannot be made."""
        try:
            if not self._ready:
                self._ready = bool(self._connection.recv())
            self._connection.send("worker")
            for descriptor in (connection.fileno(), words):
                send_handle(self._connection, descriptor, self._process.pid)
            return int(self._connection.recv())
        except (EOFError, OSError) as error:
            raise self._failure() from error

    def exit_code(self, number: int) -> int:
        """Wait for the end of a worker; its exit code, a signal that ended it as a negative number."""
        try:
            self._connection.send(number)
            return int(self._connection.recv())
        except (EOFError, OSError) as error:
            raise self._failure() from error

    def end(self) -> None:
        """End the process."""
        self._process.kill()
        self._process.wait()
        self._connection.close()
        self._words.close()

    def _failure(self) -> ScreeningError:
        try:
            code = self._process.wait(timeout=_LAST_SECONDS)
        except subprocess.TimeoutExpired:
            self._process.kill()
            code = self._process.wait()
        said = last_words(self._words.fileno()) or f"exit code {code}"
        if self._ready:
            return ScreeningError(
                "the process that makes the workers has ended",
                said,
                "it lives as long as the run",
                "look for what has ended it (memory?), then run again: a store goes on where it was",
            )
        return ScreeningError(
            "worker processes cannot be started",
            said,
            "workers run the same Python with the same packages",
            "look at the message; it is the end of what the process wrote",
        )


def last_words(descriptor: int) -> str:
    """The end of what was written to a file, in one line."""
    start = max(os.fstat(descriptor).st_size - MOST_WORDS, 0)
    words = os.pread(descriptor, MOST_WORDS, start)
    return " ".join(words.decode("utf-8", errors="replace").split())


def main(descriptor: int) -> None:
    """Load the libraries, then make workers until the other end of the connection is gone."""
    signal.signal(signal.SIGINT, signal.SIG_IGN)
    with Connection(descriptor) as connection:
        task: Task = connection.recv()
        # Imported here, in the process that forks, and not by the program that starts it.
        worker = import_module("sitesym.screening.worker")
        reader = worker.prepared(task)
        # What is loaded stays: workers need not look through it for garbage.
        gc.freeze()
        connection.send(True)
        while True:
            try:
                request = connection.recv()
            except (EOFError, ConnectionResetError):
                return
            if request != "worker":
                connection.send(os.waitstatus_to_exitcode(os.waitpid(request, 0)[1]))
                continue
            end, words = recv_handle(connection), recv_handle(connection)
            number = os.fork()
            if number == 0:
                connection.close()
                _live(partial(worker.work, Connection(end), task, reader), words)
            connection.send(number)
            os.close(end)
            os.close(words)


def _live(work: Callable[[], None], words: int) -> NoReturn:
    """Do the work of a forked worker and end the process, without going back to what was forked."""
    code = 1
    try:
        os.dup2(words, 1)
        os.dup2(words, 2)
        os.close(words)
        work()
        code = 0
    except BaseException:  # noqa: BLE001  the end of the process: whatever it was is said and not passed on
        traceback.print_exc()
    finally:
        sys.stderr.flush()
        os._exit(code)
