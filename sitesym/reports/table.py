"""Rows of a screening as JSON Lines, Markdown and text; CSV and Parquet have modules of their own.

All but text are written row by row. A table of text is aligned, so that all its rows are held.
"""

from __future__ import annotations

import json
import math
from collections.abc import Iterable, Iterator, Sequence
from typing import Final

from sitesym.reports.layout import cell_text, table
from sitesym.reports.markup import markdown_escape
from sitesym.reports.table_csv import csv_lines
from sitesym.screening.columns import Column, Row

TABLE_FORMATS: Final = ("text", "csv", "jsonl", "markdown", "parquet")

#: Columns a person sees where none are chosen; every column is in the other formats.
SHOWN: Final = (
    "id", "formula", "space_group", "point_group", "centrosymmetric", "polar", "piezoelectric",
    "second_harmonic", "stability", "status", "error_code",
)  # fmt: skip


def table_lines(
    rows: Iterable[Row], columns: Sequence[Column], format_name: str, *, spreadsheet_safe: bool = True
) -> Iterator[str]:
    """Pieces of text that together are the table, in one of `TABLE_FORMATS` but parquet.

    ``spreadsheet_safe`` concerns CSV alone, see `sitesym.reports.table_csv.csv_lines`.
    """
    if format_name == "csv":
        return csv_lines(rows, columns, spreadsheet_safe=spreadsheet_safe)
    writers = {"jsonl": jsonl_lines, "markdown": markdown_lines, "text": text_lines}
    return writers[format_name](rows, columns)


def default_columns(columns: Sequence[Column], format_name: str) -> list[str]:
    """Names of the columns a format shows where none are chosen."""
    names = [column.name for column in columns]
    return [name for name in names if name in SHOWN] if format_name in ("text", "markdown") else names


def jsonl_lines(rows: Iterable[Row], columns: Sequence[Column]) -> Iterator[str]:
    """One strict JSON object a line, all columns in each; null for a missing value."""
    for row in rows:
        values = {column.name: _finite(row[column.name]) for column in columns}
        yield json.dumps(values, allow_nan=False, ensure_ascii=False) + "\n"


def markdown_lines(rows: Iterable[Row], columns: Sequence[Column]) -> Iterator[str]:
    """A pipe table, its cells escaped."""
    yield f"| {' | '.join(markdown_escape(column.name) for column in columns)} |\n"
    yield f"| {' | '.join('---' for _ in columns)} |\n"
    for row in rows:
        cells = (markdown_escape(cell_text(row[column.name])) for column in columns)
        yield f"| {' | '.join(cells)} |\n"


def text_lines(rows: Iterable[Row], columns: Sequence[Column]) -> Iterator[str]:
    """Aligned columns, numbers flush right; a dot for no, so that the yes stands out."""
    right = [place for place, column in enumerate(columns) if column.type in ("int", "float")]
    cells = ([_dotted(row[column.name]) for column in columns] for row in rows)
    yield table([column.name for column in columns], cells, right=right) + "\n"


def _dotted(value: object) -> object:
    return "." if value is False else value


def _finite(value: str | int | float | bool | None) -> str | int | float | bool | None:
    """JSON has no infinity: a bound that is none is missing."""
    return None if isinstance(value, float) and not math.isfinite(value) else value
