"""The table a store holds: its columns, and the rows that a query finds."""

from __future__ import annotations

import os
import sqlite3
from collections.abc import Iterator, Sequence
from contextlib import contextmanager
from dataclasses import dataclass
from typing import Any, Self

from sitesym.errors import StoreError
from sitesym.screening.columns import Column, Row
from sitesym.screening.query import Query, parse_query
from sitesym.screening.store import ORDER, Store, typed_row


@dataclass(frozen=True)
class Table:
    """The rows of a store, read while they are used; also while a run writes to it."""

    store: Store

    @classmethod
    def of(cls, path: str | os.PathLike[str]) -> Self:
        """The table of the store at a path. Raises StoreError."""
        return cls(Store.reading(path))

    @property
    def columns(self) -> tuple[Column, ...]:
        """The columns there are, in order."""
        return self.store.columns

    def query(
        self,
        where: Sequence[str] = (),
        sort: Sequence[str] = (),
        names: Sequence[str] = (),
        limit: int | None = None,
    ) -> Query:
        """The query of what a user wrote, see `sitesym.screening.query.parse_query`. Raises UsageError."""
        return parse_query(self.columns, where, sort, names, limit)

    def rows(self, query: Query) -> Iterator[Row]:
        """Rows that the query finds, with its columns. Raises StoreError for a store that is damaged."""
        statement, parameters = query.sql("screened", ORDER)
        with self._errors():
            for values in self.store.connection.execute(statement, parameters):
                yield typed_row(query.columns, values)

    def settings(self) -> list[dict[str, Any]]:
        """Settings and versions that its rows were made with, oldest first. Raises StoreError."""
        with self._errors():
            return self.store.settings_documents()

    @contextmanager
    def _errors(self) -> Iterator[None]:
        try:
            yield
        except sqlite3.Error as error:
            raise StoreError(
                "the store cannot be read",
                f"{type(error).__name__}: {error}",
                "a store as a run of screen writes it",
                "copy the store from where it was written, or run again into a new one",
                self.store.path,
            ) from error
