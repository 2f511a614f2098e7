"""Rows as Parquet: typed columns, their meanings in the file, a batch of rows in memory at a time."""

from __future__ import annotations

import importlib
from collections.abc import Iterable, Sequence
from itertools import islice
from typing import Any, Final

from sitesym.errors import UsageError
from sitesym.screening.columns import Column, Row

#: Rows in one group of the file.
ROWS_A_GROUP: Final = 20_000


def write_parquet(rows: Iterable[Row], columns: Sequence[Column], path: str) -> None:
    """Write rows to a Parquet file.

    Raises UsageError where pyarrow is not installed, OSError where the file cannot be written.
    """
    arrow, parquet = _library("pyarrow"), _library("pyarrow.parquet")
    types = {"text": arrow.string(), "int": arrow.int64(), "float": arrow.float64(), "bool": arrow.bool_()}
    fields = [
        arrow.field(column.name, types[column.type], metadata={"meaning": column.meaning})
        for column in columns
    ]
    schema = arrow.schema(fields)
    with parquet.ParquetWriter(path, schema) as writer:
        remaining = iter(rows)
        while group := list(islice(remaining, ROWS_A_GROUP)):
            writer.write_table(arrow.Table.from_pylist(group, schema=schema))


def _library(name: str) -> Any:
    try:
        return importlib.import_module(name)
    except ImportError as error:
        raise UsageError(
            "Parquet needs a library that is not installed",
            "pyarrow",
            "pyarrow is an extra",
            "pip install 'sitesym[parquet]', or choose another format",
        ) from error
