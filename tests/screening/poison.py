"""A reader that does what bad files make libraries do: the first word of the file says what."""

from __future__ import annotations

import os
import signal
import sys
import time
from pathlib import Path

from sitesym.screening.contents import Structures, read_item
from sitesym.screening.work import WorkItem


def read(item: WorkItem) -> Structures:
    """Structures of the item, unless its file begins with the name of a poison."""
    path = Path(item.source)
    word = path.read_bytes().split(maxsplit=1)[:1] if path.is_file() else []
    match word:
        case [b"crash"]:
            os.write(2, b"native code: broken table\n")
            os.kill(os.getpid(), signal.SIGSEGV)
        case [b"crash-once"]:
            path.with_suffix(".seen").touch(exist_ok=True)
            if path.with_suffix(".seen").read_text() == "":
                path.with_suffix(".seen").write_text("seen")
                os.kill(os.getpid(), signal.SIGSEGV)
            path = path.with_suffix(".good")
            item = WorkItem.of_path(path, item.identity, "vasp")
        case [b"hang"]:
            _hang_without_python()
        case [b"eat"]:
            _keep(bytearray(2**34))
        case [b"abort"]:
            os.write(2, b"memory allocation of 9999999999 bytes failed\n")
            os.abort()
        case [b"leave"]:
            os._exit(0)
        case [b"exit"]:
            sys.exit("nobody thought of this")
        case [b"whisper"]:
            os.write(2, b"native code: a warning\n")
            item = WorkItem.of_path(path.with_suffix(".good"), item.identity, "vasp")
        case [b"unforeseen"]:
            raise ZeroDivisionError("nobody thought of this")
    yield from read_item(item)


def _hang_without_python() -> None:
    """Block the signals Python could handle and never come back, as native code does."""
    signal.pthread_sigmask(signal.SIG_BLOCK, {signal.SIGINT, signal.SIGTERM})
    while True:
        time.sleep(60.0)


def _keep(block: bytearray) -> None:
    raise AssertionError(f"{len(block)} bytes were given")
