"""The tables of a store and how they came to be: each schema version is a step from the one before.

A unit of work is one line of ``items``, its structures are lines of ``structures`` (the columns of
`sitesym.screening.columns` but ``source``, which is the item's). The view ``screened`` joins them, with the
columns in their order.
"""

from __future__ import annotations

import sqlite3
from typing import Final

from sitesym.errors import StoreError
from sitesym.screening.columns import Column, columns_for

#: Marks an SQLite file as a store of this program ("sits" in ASCII).
APPLICATION_ID: Final = 0x73697473

#: SQL type of each type of column.
SQL_TYPES: Final = {"text": "TEXT", "int": "INTEGER", "float": "REAL", "bool": "INTEGER"}

COUNT_PREFIX: Final = "count_"

#: Columns that every store has; counts are added as they are asked for.
FIXED: Final = columns_for(())


def _first_version() -> str:
    columns = ", ".join(
        f"{column.name} {SQL_TYPES[column.type]}" for column in FIXED if column.name != "source"
    )
    return f"""
        CREATE TABLE settings (
            id INTEGER PRIMARY KEY, fingerprint TEXT NOT NULL UNIQUE, document TEXT NOT NULL);
        CREATE TABLE items (
            id INTEGER PRIMARY KEY, source TEXT NOT NULL, frame TEXT NOT NULL, content_hash TEXT NOT NULL,
            settings INTEGER NOT NULL REFERENCES settings (id), status TEXT NOT NULL, UNIQUE (source, frame));
        CREATE TABLE structures (
            item INTEGER NOT NULL REFERENCES items (id), part INTEGER NOT NULL, {columns},
            PRIMARY KEY (item, part)) WITHOUT ROWID;
    """


#: The step to version n is entry n - 1. A store of an older version takes the steps it lacks.
STEPS: Final = (_first_version(),)
VERSION: Final = len(STEPS)


#: The units of one run, written by it or found done, and whether the source could not be read beyond one; it
#: goes with the connection.
SEEN: Final = "CREATE TEMP TABLE seen (item INTEGER PRIMARY KEY, breaks_off INTEGER NOT NULL)"

#: Sources some of whose units were seen lose the others, unless they broke off. That an archive breaks off is
#: a unit of the archive itself, whose members have sources of their own: after its path an exclamation mark,
#: before '"' in ASCII.
DROP_UNSEEN: Final = """
    CREATE TEMP TABLE stale AS
        WITH unseen AS (SELECT id, source, frame FROM items WHERE id NOT IN (SELECT item FROM seen)),
            read AS (
                SELECT items.source FROM items JOIN seen ON seen.item = items.id
                WHERE items.source IN (SELECT source FROM unseen)
                GROUP BY items.source HAVING max(seen.breaks_off) = 0)
        SELECT id FROM unseen WHERE source IN (SELECT source FROM read)
            OR frame LIKE 'after member %' AND EXISTS (
                SELECT 1 FROM items
                WHERE items.source > unseen.source || '!' AND items.source < unseen.source || '"'
                    AND id IN (SELECT item FROM seen));
    DELETE FROM structures WHERE item IN (SELECT id FROM stale);
    DELETE FROM items WHERE id IN (SELECT id FROM stale);
    DROP TABLE stale;
"""


def migrate(connection: sqlite3.Connection) -> None:
    """Bring a new or older store, as `check_version` allows, to `VERSION`: all steps or none."""
    version = connection.execute("PRAGMA user_version").fetchone()[0]
    if version == VERSION:
        return
    steps = "".join(STEPS[version:])
    marks = f"PRAGMA application_id = {APPLICATION_ID}; PRAGMA user_version = {VERSION};"
    connection.executescript(f"BEGIN IMMEDIATE; {steps} {marks} COMMIT;")


def check_version(connection: sqlite3.Connection, path: str) -> None:
    """Return for a store of this version or an older one, and for an empty file; else StoreError."""
    application = connection.execute("PRAGMA application_id").fetchone()[0]
    version = connection.execute("PRAGMA user_version").fetchone()[0]
    tables = connection.execute("SELECT count(*) FROM sqlite_master").fetchone()[0]
    if application != APPLICATION_ID and tables:
        raise StoreError(
            "the file is a database of something else",
            f"{tables} tables and indices",
            "a store is a file of its own",
            "name another file",
            path,
        )
    if version > VERSION:
        raise StoreError(
            "the store was written by a later version of sitesym",
            f"schema version {version}",
            f"schema versions up to {VERSION}",
            "use that version, or another store",
            path,
        )


def columns_in(connection: sqlite3.Connection) -> tuple[Column, ...]:
    """The columns of the store in order, those of counts included."""
    names = [row[1] for row in connection.execute("PRAGMA table_info (structures)")]
    counts = [
        name.removeprefix(COUNT_PREFIX).replace("_", "-") for name in names if name.startswith(COUNT_PREFIX)
    ]
    return columns_for(counts)


def add_columns(connection: sqlite3.Connection, columns: tuple[Column, ...]) -> None:
    """Add the columns the store lacks, and make the view anew."""
    present = {column.name for column in columns_in(connection)}
    for column in columns:
        if column.name not in present:
            connection.execute(f"ALTER TABLE structures ADD COLUMN {column.name} {SQL_TYPES[column.type]}")
    names = ", ".join(
        ("items." if column.name == "source" else "structures.") + column.name
        for column in columns_in(connection)
    )
    connection.execute("DROP VIEW IF EXISTS screened")
    connection.execute(
        f"CREATE VIEW screened AS SELECT {names}, items.frame AS item_frame, structures.part AS part"
        " FROM structures JOIN items ON items.id = structures.item"
    )
