"""What goes to a worker and what comes back. Nothing here loads more than the standard library."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Final

from sitesym.screening.columns import Row
from sitesym.screening.settings import Settings
from sitesym.screening.work import WorkItem

#: How much of what native code wrote is kept for a row (bytes).
MOST_WORDS: Final = 600


@dataclass(eq=False)
class Job:
    """An item with its place in the stream; ``tries``: how often it has ended a worker."""

    number: int
    item: WorkItem
    tries: int = 0


@dataclass(frozen=True)
class Task:
    """What a worker is told when it starts.

    ``limit_seconds`` for reading an item and for each structure in it; ``limit_megabytes`` of memory beyond
    what the warm process has. ``hashed``: whether answers carry the hash of the content. ``reader``: module
    and function, separated by a colon, that gives the structures of an item.
    """

    settings: Settings
    limit_seconds: float
    limit_megabytes: float
    hashed: bool = False
    reader: str = "sitesym.screening.contents:read_item"


@dataclass(frozen=True)
class Answer:
    """The rows of an item and the hash of its content; after a ``last`` answer the worker ends itself."""

    rows: tuple[Row, ...]
    content_hash: str = ""
    last: bool = False
