"""A reader that does what bad files make libraries do: the first word of the file says what."""

from __future__ import annotations

import os
import signal
import sys
import time
from collections.abc import Callable
from pathlib import Path
from typing import cast

from sitesym.choices import ReadingChoices
from sitesym.crystals import Crystal, read_crystal
from sitesym.screening.contents import Structures, read_item
from sitesym.screening.work import WorkItem


def read(item: WorkItem, choices: ReadingChoices) -> Structures:
    """Structures of the item, unless its file begins with the name of a poison. What only warns, or crashes
    the first time alone, is read from the file of the same name that ends in .good."""
    path = Path(item.source)
    word = path.read_text(encoding="utf-8", errors="replace").split()[0] if path.is_file() else ""
    if word.startswith("frames-"):
        yield from _frames(path, word.removeprefix("frames-"))
        return
    if word in POISONS:
        POISONS[word](path)
        item = WorkItem.of_path(path.with_suffix(".good"), item.identity, "vasp")
    yield from read_item(item, choices)


def _frames(path: Path, word: str) -> Structures:
    """Five structures called a to e; the third is poisonous to work on, or with `read-` before its name, to
    read."""
    good = read_crystal(path.with_suffix(".good"), "vasp")
    if word.startswith("read-"):
        yield from (("a", good), ("b", good))
        POISONS[word.removeprefix("read-")](path)
    for name in "abcde":
        yield name, good if name != "c" else cast(Crystal, _Poisonous(word))


class _Poisonous:
    """A crystal that does harm when it is looked at."""

    def __init__(self, word: str) -> None:
        self._word = word

    def __getattr__(self, name: str) -> object:
        return POISONS[self._word](Path())


def _crash(_: Path) -> None:
    os.write(2, b"native code: broken table\n")
    os.kill(os.getpid(), signal.SIGSEGV)


def _crash_once(path: Path) -> None:
    seen = path.with_suffix(".seen")
    if not seen.exists():
        seen.touch()
        os.kill(os.getpid(), signal.SIGSEGV)


def _hang(_: Path) -> None:
    """Block the signals Python could handle and never come back, as native code does."""
    signal.pthread_sigmask(signal.SIG_BLOCK, {signal.SIGINT, signal.SIGTERM})
    while True:
        time.sleep(60.0)


def _eat(_: Path) -> None:
    raise AssertionError(f"{len(bytearray(2**34))} bytes were given")


def _abort(_: Path) -> None:
    os.write(2, b"memory allocation of 9999999999 bytes failed\n")
    os.abort()


def _unforeseen(_: Path) -> None:
    raise ZeroDivisionError("nobody thought of this")


POISONS: dict[str, Callable[[Path], object]] = {
    "crash": _crash,
    "crash-once": _crash_once,
    "hang": _hang,
    "eat": _eat,
    "abort": _abort,
    "leave": lambda _: os._exit(0),
    "exit": lambda _: sys.exit("nobody thought of this"),
    "whisper": lambda _: os.write(2, b"native code: a warning\n"),
    "unforeseen": _unforeseen,
}
