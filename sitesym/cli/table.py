"""`sitesym table`: rows of a store of screening results, chosen and sorted, in one of several formats."""

from __future__ import annotations

import json
from collections.abc import Iterable, Sequence

import click

from sitesym.cli.choices import split_names, spreadsheet_option
from sitesym.cli.output import output_errors, say, write_pieces
from sitesym.errors import UsageError
from sitesym.reports.table import TABLE_FORMATS, default_columns, table_lines
from sitesym.reports.table_parquet import write_parquet
from sitesym.screening.columns import Column, Row
from sitesym.screening.table import Table


@click.command("table")
@click.argument("store")
@click.option("--where", multiple=True, metavar="'COLUMN OP VALUE'", help="Condition; repeated: all hold.")
@click.option(
    "--sort", multiple=True, metavar="COLUMN[:desc]", help="Order; repeated: the first counts first."
)
@click.option(
    "--columns", multiple=True, metavar="NAMES", help="Columns wanted, separated by commas, or all."
)
@click.option(
    "--settings",
    "settings_wanted",
    is_flag=True,
    help="The settings and library versions that rows were made with, as JSON Lines, and no rows.",
)
@click.option("--limit", type=click.IntRange(min=0), metavar="N", help="At most so many rows.")
@click.option(
    "--format",
    "format_name",
    type=click.Choice(TABLE_FORMATS),
    default="text",
    show_default=True,
    help="Format.",
)
@click.option("--output", metavar="PATH", help="Write to this file and not to the terminal.")
@spreadsheet_option
def command(
    store: str,
    where: tuple[str, ...],
    sort: tuple[str, ...],
    columns: tuple[str, ...],
    settings_wanted: bool,
    limit: int | None,
    format_name: str,
    output: str | None,
    spreadsheet_safe: bool,
) -> None:
    """Rows of the STORE of a screening (screen --store). It may be read while a run writes to it.

    A condition is a column, an operator and a value: 'atoms <= 20', 'point_group = -1', 'polar = yes',
    'id ~ oxide' (contains), 'error_code = none' (missing). Operators: = != < <= > >= ~. A missing value meets
    no condition but '= none'. Text and Markdown show some columns unless --columns names them; --columns all
    shows all, as the other formats do.

    CSV: text that comes from outside (id, source, frame, declared_space_group, remarks, error_message) and
    begins with = + - @, a tab, a carriage return or an apostrophe gets an apostrophe in front; without its
    first apostrophe such a cell is what it was. Numbers and symbols such as the point group -1 are never
    changed. For pandas, use read_csv(PATH, **sitesym.reports.table_csv.pandas_options(columns)), or
    dtype=str, keep_default_na=False: a column of point groups may hold -1 only, and NaN is a formula.
    """
    table = Table.of(store)
    settings = table.settings()
    if settings_wanted:
        write_pieces((f"{json.dumps(entry)}\n" for entry in settings), output)
        return
    say_settings(settings)
    named = split_names(columns)
    names = [] if named == ["all"] else named or default_columns(table.columns, format_name)
    query = table.query(where, sort, names, limit)
    write_rows(table.rows(query), query.columns, format_name, output, spreadsheet_safe=spreadsheet_safe)


def say_settings(settings: Sequence[object]) -> None:
    """Say on standard error when not all rows of a store were made alike."""
    if len(settings) > 1:
        say(f"rows were made with {len(settings)} different settings; `sitesym table --settings` shows them")


def parquet_file(output: str | None) -> str:
    """The file that Parquet goes to. Raises UsageError where there is none."""
    if output is None:
        raise UsageError(
            "Parquet is not for a terminal", "no --output", "a Parquet file is binary", "add --output PATH"
        )
    return output


def write_rows(
    rows: Iterable[Row],
    columns: Sequence[Column],
    format_name: str,
    output: str | None,
    *,
    spreadsheet_safe: bool = True,
) -> None:
    """Write a table in one of `TABLE_FORMATS` to standard output or to a file, row by row where it can be.

    Raises UsageError when it cannot be written, and for Parquet without a file.
    """
    if format_name == "parquet":
        _write_parquet(rows, columns, output)
    else:
        write_pieces(table_lines(rows, columns, format_name, spreadsheet_safe=spreadsheet_safe), output)


def _write_parquet(rows: Iterable[Row], columns: Sequence[Column], output: str | None) -> None:
    path = parquet_file(output)
    with output_errors(path):
        write_parquet(rows, columns, path)
