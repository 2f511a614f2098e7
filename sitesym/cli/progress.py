"""How far a screening is, on standard error: a bar on a terminal, else a line every so often."""

from __future__ import annotations

import threading
from collections.abc import Callable, Iterable, Iterator
from contextlib import contextmanager
from time import monotonic
from typing import Final

from sitesym.cli.output import say
from sitesym.screening import Row, Screening

#: Seconds between lines where there is no terminal, and between changes of the bar.
LINE_SECONDS: Final = 30.0
BAR_SECONDS: Final = 0.2


def watched(rows: Iterable[Row], run: Screening, count: Callable[[], int], *, bar: bool) -> Iterator[Row]:
    """The same rows, their number shown meanwhile; ``count`` finds how many units there are, for the time
    left, and is called beside the run."""
    return _with_bar(rows, run, count) if bar else _with_lines(rows, run)


def _with_lines(rows: Iterable[Row], run: Screening) -> Iterator[Row]:
    start = monotonic()
    with _every(LINE_SECONDS, lambda: say(_state(run, monotonic() - start))):
        yield from rows


def _with_bar(rows: Iterable[Row], run: Screening, count: Callable[[], int]) -> Iterator[Row]:
    from rich.console import Console
    from rich.progress import BarColumn, Progress, TextColumn, TimeRemainingColumn

    columns = (TextColumn("{task.description}"), BarColumn(), TimeRemainingColumn(elapsed_when_finished=True))
    start = monotonic()
    with Progress(*columns, console=Console(stderr=True), transient=True) as progress:
        task = progress.add_task("starting", total=None)
        counting = threading.Thread(target=lambda: progress.update(task, total=count()), daemon=True)
        counting.start()

        def show() -> None:
            done = run.done + run.already_done
            progress.update(task, completed=done, description=_state(run, monotonic() - start))

        with _every(BAR_SECONDS, show):
            yield from rows


@contextmanager
def _every(seconds: float, show: Callable[[], None]) -> Iterator[None]:
    """Meanwhile show something every so often, also while no row comes: much may be done already, or hang."""
    ended = threading.Event()

    def go_on() -> None:
        while not ended.wait(seconds):
            show()

    beside = threading.Thread(target=go_on, daemon=True)
    beside.start()
    try:
        yield
    finally:
        ended.set()
        beside.join()


def _state(run: Screening, seconds: float) -> str:
    already = f", {run.already_done} done before" if run.already_done else ""
    rate = run.done / seconds if seconds > 0.0 else 0.0
    return f"{run.done} done{already}, {run.tally.failed} failed, {rate:.3g} a second"
