"""At most one writer of a store: a lock the system takes away with the process that holds it."""

from __future__ import annotations

import fcntl
import os
import socket
from pathlib import Path

from sitesym.errors import StoreError


class WriterLock:
    """Holds ``path`` with ``.lock`` added while a run writes to the store at ``path``."""

    def __init__(self, path: str) -> None:
        """Take the lock. Raises StoreError, with who holds it, when another run has it."""
        self._file = Path(f"{path}.lock")
        while True:
            self._descriptor = os.open(self._file, os.O_RDWR | os.O_CREAT | os.O_CLOEXEC, 0o644)
            try:
                fcntl.flock(self._descriptor, fcntl.LOCK_EX | fcntl.LOCK_NB)
            except BlockingIOError:
                holder = os.pread(self._descriptor, 200, 0).decode("utf-8", errors="replace").strip()
                os.close(self._descriptor)
                raise StoreError(
                    "another run is writing to the store",
                    holder or "a process that just started",
                    "one run at a time writes to a store",
                    "wait for it, stop it, or name another store",
                    path,
                ) from None
            if self._is_current():
                break
            # The holder before removed the file between opening and locking it.
            os.close(self._descriptor)
        os.ftruncate(self._descriptor, 0)
        os.pwrite(self._descriptor, f"process {os.getpid()} on {socket.gethostname()}\n".encode(), 0)

    def release(self) -> None:
        """Give the lock back and remove its file."""
        self._file.unlink(missing_ok=True)
        os.close(self._descriptor)

    def _is_current(self) -> bool:
        try:
            return os.path.samestat(os.fstat(self._descriptor), os.stat(self._file))
        except FileNotFoundError:
            return False
