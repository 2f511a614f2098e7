"""What goes to a worker and what comes back. Nothing here loads more than the standard library."""

from __future__ import annotations

from dataclasses import dataclass, field
from typing import Final

from sitesym.screening.columns import Row
from sitesym.screening.settings import Settings
from sitesym.screening.work import WorkItem

#: How much of what native code wrote is kept for a row (bytes).
MOST_WORDS: Final = 600


@dataclass(eq=False)
class Job:
    """An item with its place in the stream; ``tries``: how often it has ended a worker at one place.

    Of an item with several structures, ``rows`` are those there are so far, ``at`` is the name of the
    structure being worked on, empty while the next one is read.
    """

    number: int
    item: WorkItem
    tries: int = 0
    rows: list[Row] = field(default_factory=list)
    at: str = ""


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
    """Rows of an item and the hash of its content; after a ``last`` answer the worker ends itself.

    Of an item with several structures each row comes as soon as it is there, in an answer with ``more`` to
    come; before it comes the name of its structure, in ``at``.
    """

    rows: tuple[Row, ...]
    content_hash: str = ""
    last: bool = False
    more: bool = False
    at: str = ""
