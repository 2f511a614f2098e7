"""Rows as CSV that survives being opened: by pandas with types, by a spreadsheet without running a cell."""

from __future__ import annotations

import csv
from collections.abc import Iterable, Iterator, Sequence
from typing import Any, Final

from sitesym.screening.columns import Column, Row

#: Text the program makes itself, from symbols of the field: never changed. All other text is from outside.
COMPUTED_TEXT: Final = frozenset(
    ("formula", "space_group", "crystal_system", "point_group", "polar_axis", "highest_site_symmetry",
     "lowest_site_symmetry", "stability", "status", "error_code")
)  # fmt: skip

# How a cell begins that a spreadsheet runs (common practice, no source), the wide forms some of them take for
# the same, and the apostrophe itself, so that taking one off gives the text back.
_RUN_BY_SPREADSHEETS: Final = tuple("=+-@\t\r\n＝＋－＠'")

_PANDAS_TYPES: Final = {"text": "str", "int": "Int64", "float": "float64", "bool": "boolean"}


def csv_lines(
    rows: Iterable[Row], columns: Sequence[Column], *, spreadsheet_safe: bool = True
) -> Iterator[str]:
    """The head, then one record a row: text quoted, numbers bare, true and false, missing values empty.

    ``spreadsheet_safe``: text from outside the program (names, labels, messages) that a spreadsheet would run
    gets an apostrophe in front, as does one that starts with an apostrophe: without its first apostrophe
    each such cell is what it was. Numbers, and symbols such as the point group -1, are never changed.
    """
    writer: Any = csv.writer(_Echo(), quoting=csv.QUOTE_NONNUMERIC, lineterminator="\n")
    yield writer.writerow([column.name for column in columns])
    for row in rows:
        yield writer.writerow([_cell(row[column.name], column, spreadsheet_safe) for column in columns])


def pandas_options(columns: Sequence[Column]) -> dict[str, Any]:
    """Arguments of ``pandas.read_csv`` that keep every value and its type: "-1" a text, "NaN" a formula.

    >>> from sitesym.screening.columns import columns_for
    >>> pandas_options(columns_for())["dtype"]["point_group"]
    'str'
    """
    types = {column.name: _PANDAS_TYPES[column.type] for column in columns}
    return {"dtype": types, "keep_default_na": False, "na_values": [""]}


def harmless(text: str) -> str:
    """The text as a cell that no spreadsheet runs.

    >>> harmless("=cmd"), harmless("-1"), harmless("quartz")
    ("'=cmd", "'-1", 'quartz')
    """
    return f"'{text}" if text.startswith(_RUN_BY_SPREADSHEETS) else text


class _Echo:
    """A file for `csv.writer` whose ``write`` gives the text back, and so does ``writerow``."""

    def write(self, text: str) -> str:
        return text


def _cell(value: object, column: Column, spreadsheet_safe: bool) -> object:
    if isinstance(value, bool):
        return "true" if value else "false"
    if spreadsheet_safe and isinstance(value, str) and column.name not in COMPUTED_TEXT:
        return harmless(value)
    return value
