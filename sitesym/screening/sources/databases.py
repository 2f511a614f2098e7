"""Adapter to ASE databases: rows as units of work, a page at a time, so that no lock stays on the file."""

from __future__ import annotations

import os
import sqlite3
from collections.abc import Iterator
from typing import Any, Final

from sitesym.errors import BrokenSourceError, ReadingError
from sitesym.screening.sources.texts import storable
from sitesym.screening.work import WorkItem

#: Rows fetched in one go.
PAGE: Final = 500

#: What makes a structure, with the moments of a calculation; the rest of a row says nothing about symmetry.
_FIELDS: Final = ("numbers", "positions", "cell", "pbc", "initial_magmoms", "magmoms")

# ASE decodes blobs and JSON without looking at what they hold.
_CONTENT_ERRORS: Final = (
    sqlite3.Error, OSError, ValueError, LookupError, TypeError, AttributeError, AssertionError,
)  # fmt: skip


def database_items(path: str, identity: str) -> Iterator[WorkItem]:
    """One unit for each row, in the order of the row numbers, its structure as ASE's JSON (exact numbers).

    A file that is no ASE database is one unit with its error; it is never written to.
    """
    # Loads numpy and the readers, which a run without databases leaves to its workers.
    from sitesym.crystals.ase_reader import require_ase_tables

    source = os.path.abspath(path)
    last = 0
    try:
        require_ase_tables(path)
        while page := _page(source, last):
            for row in page:
                last = int(row.id)
                yield WorkItem.of_text(source, f"row {last}", f"{identity}#{last}", _as_json(row), "json")
    except (ReadingError, *_CONTENT_ERRORS) as error:
        yield WorkItem.of_error(
            source, f"after row {last}" if last else "", identity, _unreadable(error, path)
        )


def _page(path: str, last: int) -> list[Any]:
    from ase.db import connect

    database: Any = connect(path, type="db")  # type: ignore[no-untyped-call]
    return list(database.select(f"id>{last}", limit=PAGE, include_data=False))


def _as_json(row: Any) -> str:
    from ase.io.jsonio import encode

    fields: dict[str, Any] = {name: row.get(name) for name in _FIELDS if row.get(name) is not None}
    if "magmoms" in fields:
        fields["calculator"] = "unknown"
    text: str = encode({"1": fields, "ids": [1], "nextid": 2})
    return text


def _unreadable(error: Exception, path: str) -> BrokenSourceError:
    if isinstance(error, ReadingError):
        return BrokenSourceError(error.what, error.value, error.rule, error.next_step, storable(path))
    return BrokenSourceError(
        "the database cannot be read to its end",
        f"{type(error).__name__}: {error}",
        "an ASE database in SQLite",
        "look at the file with ASE",
        storable(path),
    )
