"""`sitesym screen`: one row of verdicts for every structure of folders, files, archives and lists."""

from __future__ import annotations

import sys
from collections.abc import Callable, Iterable, Iterator
from dataclasses import dataclass
from functools import partial
from signal import Signals

import click

from sitesym.cli.choices import batch_reading_options, reliability_options, split_names, spreadsheet_option
from sitesym.cli.output import output_errors, say, write
from sitesym.cli.progress import watched
from sitesym.cli.table import parquet_file, say_settings
from sitesym.errors import UsageError
from sitesym.screening import Row, Screening, Settings, Store, Task, WorkItem, available_cores
from sitesym.screening.columns import DEFAULT_PROPERTIES
from sitesym.screening.engine import DEFAULT_LIMIT_MEGABYTES, DEFAULT_LIMIT_SECONDS, Crew
from sitesym.screening.pool import Pool

FORMATS = ("text", "json", "jsonl", "csv", "markdown", "latex", "parquet")
#: Formats of which rows are written as they come.
_STREAMED = ("jsonl", "csv")
#: Formats of the bare table; the others are documents, with settings and counts.
_TABLES = (*_STREAMED, "parquet")


@dataclass(frozen=True)
class _Table:
    """What is read, and where rows go: the format (None for none), the file (None for the terminal)."""

    inputs: tuple[str, ...]
    settings: Settings
    format_name: str | None
    output: str | None
    spreadsheet_safe: bool

    def items(self) -> Iterator[WorkItem]:
        """The units of work of all inputs."""
        # Knows every format, so that it takes long to load: the workers are on their way meanwhile.
        from sitesym.screening.sources import work_items

        yield from work_items(self.inputs, split=self.settings.frame is None)

    def watched(self, rows: Iterable[Row], run: Screening, *, bar: bool) -> Iterator[Row]:
        """The same rows, with progress on standard error."""
        return watched(rows, run, lambda: sum(1 for _ in self.items()), bar=bar and sys.stderr.isatty())

    def write(self, rows: Iterable[Row]) -> None:
        """Write all rows, as they come where the format can."""
        if self.format_name in _TABLES:
            self._write_table(rows, self.format_name)
        elif self.format_name is not None:
            self._write_document(rows, self.format_name)

    # What writes is not needed to start a run, and long to load.

    def _write_table(self, rows: Iterable[Row], format_name: str) -> None:
        from sitesym.cli.table import write_rows

        columns = self.settings.columns
        write_rows(rows, columns, format_name, self.output, spreadsheet_safe=self.spreadsheet_safe)

    def _write_document(self, rows: Iterable[Row], format_name: str) -> None:
        from sitesym.cli.options import emit
        from sitesym.reports.screen_report import screen_document

        emit(screen_document(self.inputs, self.settings, rows), format_name, self.output)


@click.command("screen")
@click.argument("inputs", nargs=-1, required=True, metavar="INPUT...")
@click.option("--store", "store_path", metavar="FILE", help="Keep the rows in this file, and go on from it.")
@click.option(
    "--workers",
    type=click.IntRange(min=1),
    default=available_cores,
    show_default="all cores",
    help="Processes.",
)
@click.option(
    "--cluster",
    metavar="ADDRESS",
    help="Workers of a Dask cluster: tcp://host:port, its scheduler file (.json), or local:N.",
)
@click.option(
    "--limit-seconds",
    type=click.FloatRange(min=0, min_open=True),
    default=DEFAULT_LIMIT_SECONDS,
    show_default=True,
    help="Time for one structure.",
)
@click.option(
    "--limit-memory",
    type=click.FloatRange(min=0, min_open=True),
    default=DEFAULT_LIMIT_MEGABYTES,
    show_default=True,
    metavar="MEGABYTES",
    help="Memory for one structure.",
)
@click.option(
    "--retry", is_flag=True, help="With --store: try again what crashed, took too long or too much."
)
@click.option("--properties", multiple=True, metavar="NAMES", help="Tensors whose components are counted.")
@reliability_options
@batch_reading_options
@click.option("--format", "format_name", type=click.Choice(FORMATS), help="Format; text without --store.")
@click.option("--output", metavar="PATH", help="Write to this file and not to the terminal.")
@spreadsheet_option
def command(
    inputs: tuple[str, ...],
    store_path: str | None,
    workers: int,
    cluster: str | None,
    limit_seconds: float,
    limit_memory: float,
    retry: bool,
    properties: tuple[str, ...],
    tolerance_angstrom: float,
    finder: str,
    ladder: str,
    frame: str | None,
    symmetry_from: str | None,
    distinguish: tuple[str, ...],
    format_name: str | None,
    output: str | None,
    spreadsheet_safe: bool,
) -> None:
    """Symmetry and verdicts of every structure of each INPUT, in the order of the paths.

    An INPUT is a folder (with those below it), a structure file, an ASE database, JSON Lines with inline
    structures, an archive (.tar, .zip), a list of paths (.txt), or a shell pattern of these. What cannot be
    read, crashes or takes too much is a row with its error, and the run goes on. A file with several
    structures has a row for each, unless --frame chooses one. The commands for one file also choose a data
    block by its name (--block), which would mean nothing in many files.

    With --store, rows are kept in FILE as they come. A run that was stopped goes on there; only what is new
    or has changed (content, settings, versions) is done again. At its end, rows of what a file no longer
    holds are dropped; those of files that are gone or not named stay. Rows are read with `sitesym table
    FILE`, or with --format. Formats csv and jsonl are written row by row, parquet in groups of rows; the
    others hold all rows in memory.
    """
    settings = Settings(
        tolerance_angstrom,
        finder,
        ladder == "on",
        tuple(split_names(properties)) or DEFAULT_PROPERTIES,
        frame,
        symmetry_from,
        tuple(split_names(distinguish)),
    )
    shown = format_name or ("text" if store_path is None else None)
    _check_output(shown, output)
    task = Task(settings, limit_seconds, limit_memory, hashed=store_path is not None)
    run = Screening(task, _crew(workers, cluster))
    table = _Table(inputs, settings, shown, output, spreadsheet_safe)
    if store_path is None:
        _screen_to_output(run, table)
    else:
        _screen_to_store(run, table, store_path, retry)
    if run.stopped_by:
        say(f"stopped by {run.stopped_by}; what is done is kept")
        sys.exit(128 + Signals[run.stopped_by])


def _check_output(format_name: str | None, output: str | None) -> None:
    """Return when rows can be written; a run may take days, and would end without them. Raises UsageError."""
    if format_name is None and output is not None:
        raise UsageError(
            "no format for the output", output, "with --store, rows are written only in a --format",
            "add --format, or ask `sitesym table` afterwards",
        )  # fmt: skip
    if format_name == "parquet":
        parquet_file(output)
    if output is not None:
        with output_errors(output), open(output, "a"):
            pass


def _crew(workers: int, cluster: str | None) -> Callable[[Task], Crew]:
    """What makes the workers: processes of this machine, or a cluster, whose library is loaded only then."""
    if cluster is None:
        return lambda task: Pool(task, workers)
    from sitesym.screening.cluster import ClusterPool

    return partial(ClusterPool, address=cluster)


def _screen_to_output(run: Screening, table: _Table) -> None:
    with run:
        to_terminal = table.format_name in _STREAMED and table.output is None and sys.stdout.isatty()
        table.write(table.watched(run.rows(table.items()), run, bar=not to_terminal))
    if table.format_name in _TABLES:
        _summarise(run, to_standard_error=True)


def _screen_to_store(run: Screening, table: _Table, path: str, retry: bool) -> None:
    with Store.writing(path, table.settings) as store, run:
        for _ in table.watched(run.into(store, table.items(), retry), run, bar=True):
            pass
        if not run.stopped_by:
            store.drop_unseen()
        if table.format_name is not None:
            say_settings(store.settings_documents())
        table.write(store.rows())
    _summarise(run, to_standard_error=table.format_name is not None)


def _summarise(run: Screening, *, to_standard_error: bool) -> None:
    from sitesym.reports.screen_summary import summary_lines

    lines = [f"{run.already_done} done before, {run.done} now"] if run.already_done else []
    # Nothing new is no news, and says nothing about the inputs.
    if run.tally.rows or not (run.already_done or run.stopped_by):
        lines.extend(summary_lines(run.tally))
    text = "\n".join(lines) or "nothing done"
    if to_standard_error:
        say(text)
    else:
        write(f"{text}\n", None)
