"""One structure file: a single unit, or one for each row or frame where these can be told apart unread.

ASE databases and extended XYZ are streamed entry by entry. Other files with several structures (data blocks
of a CIF, trajectories, logs of a relaxation) are one unit, and the worker makes a row for each structure.
"""

from __future__ import annotations

import os
from collections.abc import Callable, Iterator
from typing import TypeAlias

from sitesym.formats import named_format
from sitesym.screening.sources.databases import database_items
from sitesym.screening.sources.frames import frame_items
from sitesym.screening.sources.texts import COMPRESSIONS
from sitesym.screening.work import WorkItem

#: Units of a structure file by its path and its name in the column ``id``.
FileItems: TypeAlias = Callable[[str, str], Iterator[WorkItem]]


def file_items(path: str, identity: str) -> Iterator[WorkItem]:
    """Units of a structure file; ``identity`` is its name in the column ``id``."""
    file_format = named_format(path)
    if os.path.isfile(path) and not path.lower().endswith((*COMPRESSIONS, ".zst")):
        if file_format == "db":
            return database_items(path, identity)
        if file_format == "extxyz":
            return frame_items(path, identity)
    return whole_file(path, identity)


def whole_file(path: str, identity: str) -> Iterator[WorkItem]:
    """A structure file as one unit, whatever it holds."""
    yield WorkItem.of_path(path, identity, named_format(path) or "", _size(path))


def _size(path: str) -> int:
    """Bytes of a file; 0 where there is none, which the worker will report."""
    try:
        return os.stat(path).st_size
    except OSError:
        return 0
