"""The store of a screening run: one SQLite file, safe to stop at any moment and to go on with.

A unit of work is identified by its source and frame. Its rows are written together with the hash of its
content and the settings they were made with, or not at all; writing a unit again replaces its rows. So rows
are neither doubled nor lost, and what is done with the same content and settings is not done again.
"""

from __future__ import annotations

import json
import os
import sqlite3
from collections.abc import Iterator, Sequence
from contextlib import contextmanager
from time import monotonic
from types import TracebackType
from typing import Any, Final
from urllib.parse import quote

from sitesym.errors import BrokenSourceError, StoreError
from sitesym.screening.columns import Column, Row
from sitesym.screening.lock import WriterLock
from sitesym.screening.schema import (
    DROP_UNSEEN,
    SEEN,
    add_columns,
    check_version,
    columns_in,
    migrate,
)
from sitesym.screening.settings import Settings
from sitesym.screening.work import WorkItem, content_hash, storable

#: Finished units are made permanent at the latest after so many, or so long (seconds).
COMMIT_UNITS: Final = 200
COMMIT_SECONDS: Final = 1.0

#: Statuses that a run may be asked to try again.
UNSETTLED: Final = frozenset({"crashed", "timed-out", "out-of-memory"})

#: Order of rows: by source, its units by number, the structures of a unit as they stand in it.
ORDER: Final = "source, length(item_frame), item_frame, part"

#: So many units of a run are noted in one go.
SEEN_UNITS: Final = 1000


class Store:
    """An open store. `writing` and `reading` open one; use it as a context manager."""

    def __init__(self, path: str, connection: sqlite3.Connection, lock: WriterLock | None) -> None:
        self.path = path
        self._connection = connection
        self._lock = lock
        self._settings = 0
        self._pending = 0
        self._seen: list[tuple[int, bool]] = []
        self._since = monotonic()

    @classmethod
    def writing(cls, path: str | os.PathLike[str], settings: Settings) -> Store:
        """Open a store to add rows made with these settings, and make it where there is none.

        Raises StoreError when another run writes to it, when it is no store, or cannot be written.
        """
        name = os.fspath(path)
        with _store_errors(name):
            # One lock for a store, also where a link leads to it.
            lock = WriterLock(os.path.realpath(name))
        store = None
        try:
            with _store_errors(name):
                store = cls(name, sqlite3.connect(os.path.abspath(name), isolation_level=None), lock)
                store._prepare(settings)
        except BaseException:
            lock.release() if store is None else store.close()
            raise
        return store

    @classmethod
    def reading(cls, path: str | os.PathLike[str]) -> Store:
        """Open a store to read it, also while a run writes to it. Raises StoreError."""
        name = os.fspath(path)
        if not os.path.exists(name):
            raise StoreError(
                "there is no such store",
                name,
                "a file that `sitesym screen --store` has written",
                "look at the path, or screen with --store first",
            )
        with _store_errors(name):
            connection = sqlite3.connect(_read_only_uri(os.path.abspath(name)), uri=True)
            check_version(connection, name)
        return cls(name, connection, None)

    def __enter__(self) -> Store:
        return self

    def __exit__(
        self, kind: type[BaseException] | None, error: BaseException | None, trace: TracebackType | None
    ) -> None:
        self.close()

    @property
    def columns(self) -> tuple[Column, ...]:
        """The columns of the rows, in order."""
        return columns_in(self._connection)

    @property
    def connection(self) -> sqlite3.Connection:
        """For queries of the view ``screened``."""
        return self._connection

    def holds(self, item: WorkItem, retry: bool = False) -> bool:
        """Whether the unit is done with these settings and this content; with ``retry``, one that ended its
        process is not."""
        known = self._connection.execute(
            "SELECT content_hash, status, id FROM items WHERE source = ? AND frame = ? AND settings = ?",
            (storable(item.source), storable(item.frame), self._settings),
        ).fetchone()
        if known is None or (retry and known[1] in UNSETTLED) or known[0] != content_hash(item):
            return False
        self._see(known[2], item)
        return True

    def put(self, item: WorkItem, digest: str, rows: Sequence[Row]) -> None:
        """Write the rows of a unit, in place of those it had; permanent with the next `commit`.

        Raises StoreError when the disk is full or the store cannot be written; what was permanent stays.
        """
        statuses = [str(row["status"]) for row in rows if row["status"] != "ok"]
        key = (storable(item.source), storable(item.frame))
        with _store_errors(self.path):
            if not self._connection.in_transaction:
                self._connection.execute("BEGIN IMMEDIATE")
            (number,) = self._connection.execute(
                "INSERT INTO items (source, frame, content_hash, settings, status) VALUES (?, ?, ?, ?, ?)"
                " ON CONFLICT (source, frame) DO UPDATE SET content_hash = excluded.content_hash,"
                " settings = excluded.settings, status = excluded.status RETURNING id",
                (*key, digest, self._settings, statuses[0] if statuses else "ok"),
            ).fetchone()
            self._see(number, item)
            self._connection.execute("DELETE FROM structures WHERE item = ?", (number,))
            self._connection.executemany(
                self._insert, ([number, part, *_values(row)] for part, row in enumerate(rows))
            )
            self._pending += 1
            if self._pending >= COMMIT_UNITS or monotonic() - self._since > COMMIT_SECONDS:
                self.commit()

    def drop_unseen(self) -> None:
        """After all items: drop rows of what the sources of this run no longer hold, as lines cut off a file.

        A file that is gone, was not named, or could not be read to its end keeps its rows. Raises StoreError.
        """
        self._remember_seen()
        self.commit()
        with _store_errors(self.path):
            self._connection.executescript(f"BEGIN IMMEDIATE; {DROP_UNSEEN} COMMIT;")

    def commit(self) -> None:
        """Make permanent what was written. Raises StoreError."""
        with _store_errors(self.path):
            if self._connection.in_transaction:
                self._connection.execute("COMMIT")
            self._pending, self._since = 0, monotonic()

    def rows(self) -> Iterator[Row]:
        """All rows, in the order of sources and frames."""
        columns = self.columns
        names = ", ".join(column.name for column in columns)
        for values in self._connection.execute(f"SELECT {names} FROM screened ORDER BY {ORDER}"):
            yield typed_row(columns, values)

    def settings_documents(self) -> list[dict[str, Any]]:
        """Settings and versions that rows of the store were made with, oldest first."""
        found = self._connection.execute(
            "SELECT document FROM settings"
            " WHERE EXISTS (SELECT 1 FROM items WHERE items.settings = settings.id) ORDER BY id"
        )
        return [json.loads(text) for (text,) in found]

    def close(self) -> None:
        """Leave what is permanent and drop the rest; give back the lock."""
        try:
            self._connection.close()
        finally:
            if self._lock is not None:
                self._lock.release()
                self._lock = None

    def _see(self, number: int, item: WorkItem) -> None:
        """Note a unit of this run, written by it or found done."""
        self._seen.append((number, isinstance(item.error, BrokenSourceError)))
        if len(self._seen) >= SEEN_UNITS:
            self._remember_seen()

    def _remember_seen(self) -> None:
        with _store_errors(self.path):
            self._connection.execute("SAVEPOINT seen")
            self._connection.executemany("INSERT OR IGNORE INTO seen VALUES (?, ?)", self._seen)
            self._connection.execute("RELEASE seen")
        self._seen.clear()

    def _prepare(self, settings: Settings) -> None:
        connection = self._connection
        check_version(connection, self.path)
        connection.execute("PRAGMA journal_mode = WAL")
        connection.execute("PRAGMA synchronous = NORMAL")
        connection.execute(SEEN)
        migrate(connection)
        connection.execute("BEGIN IMMEDIATE")
        add_columns(connection, settings.columns)
        fingerprint = settings.fingerprint()
        connection.execute(
            "INSERT INTO settings (fingerprint, document) VALUES (?, ?) ON CONFLICT DO NOTHING",
            (fingerprint, json.dumps(settings.document())),
        )
        found = connection.execute("SELECT id FROM settings WHERE fingerprint = ?", (fingerprint,)).fetchone()
        connection.execute("COMMIT")
        self._settings = found[0]
        names = [column.name for column in settings.columns if column.name != "source"]
        marks = ", ".join("?" * (len(names) + 2))
        self._insert = f"INSERT INTO structures (item, part, {', '.join(names)}) VALUES ({marks})"


def _read_only_uri(path: str) -> str:
    """What opens a store to read it. SQLite coordinates readers and writers by files beside the store; where
    it may make none, and no run has left any, nobody writes."""
    alone = not os.access(os.path.dirname(path), os.W_OK) and not os.path.exists(f"{path}-wal")
    return f"file:{quote(os.fsencode(path))}?mode=ro{'&immutable=1' if alone else ''}"


def typed_row(columns: Sequence[Column], values: Sequence[Any]) -> Row:
    """A row of values as SQLite gives them."""
    return {
        column.name: bool(value) if column.type == "bool" and value is not None else value
        for column, value in zip(columns, values, strict=True)
    }


def _values(row: Row) -> list[str | int | float | bool | None]:
    return [value for name, value in row.items() if name != "source"]


@contextmanager
def _store_errors(path: str) -> Iterator[None]:
    """Errors of SQLite and of the file system as StoreError."""
    try:
        yield
    except (sqlite3.Error, OSError) as error:
        raise StoreError(
            "the store cannot be opened, read or written",
            f"{type(error).__name__}: {error}",
            "a file in a folder that may be written, with space on its disk",
            "make space or correct the path, then run again: what is in the store is kept",
            path,
        ) from error
