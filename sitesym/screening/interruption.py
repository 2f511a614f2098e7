"""Ctrl-C and SIGTERM as a request to finish: the first asks, the second insists."""

from __future__ import annotations

import signal
import threading
from collections.abc import Callable, Iterator
from contextlib import contextmanager
from types import FrameType
from typing import Final

SIGNALS: Final = (signal.SIGINT, signal.SIGTERM)


@contextmanager
def requests_to_stop(ask: Callable[[str], None]) -> Iterator[None]:
    """Meanwhile the first of these signals calls ``ask`` with its name; the second raises KeyboardInterrupt.

    Outside the main thread, where no handler can be set, signals keep their meaning.
    """
    if threading.current_thread() is not threading.main_thread():
        yield
        return
    asked = False

    def handle(number: int, _frame: FrameType | None) -> None:
        nonlocal asked
        if asked:
            raise KeyboardInterrupt
        asked = True
        ask(signal.Signals(number).name)

    before = {number: signal.signal(number, handle) for number in SIGNALS}
    try:
        yield
    finally:
        for number, handler in before.items():
            signal.signal(number, handler)
