"""From what a user names - folders, files, patterns, lists, archives - to one stream of units of work."""

from __future__ import annotations

import os
from collections.abc import Iterable, Iterator
from functools import partial
from itertools import chain
from typing import Final

from sitesym.errors import ReadingError, UsageError
from sitesym.screening.sources.archives import TAR_NAMES, ZIP_NAMES, archive_items
from sitesym.screening.sources.files import FileItems, file_items, whole_file
from sitesym.screening.sources.folders import folder_items, has_magic, pattern_paths
from sitesym.screening.sources.lines import jsonl_items, listed_items
from sitesym.screening.sources.texts import COMPRESSIONS, storable
from sitesym.screening.work import WorkItem

#: Ends of the names of files that hold structures as JSON Lines, and of lists of paths.
JSONL_NAMES: Final = tuple(end + packed for end in (".jsonl", ".ndjson") for packed in ("", *COMPRESSIONS))
LIST_NAMES: Final = (".txt", ".list")


def work_items(names: Iterable[str | os.PathLike[str]], *, split: bool = True) -> Iterator[WorkItem]:
    """Units of everything named, in the order of the names: folders, structure files, ASE databases,
    archives, JSON Lines, lists of paths (.txt, .list), and shell patterns of these.

    ``split``: whether databases and extended XYZ are streamed as one unit a row or frame, or left whole.

    Lazy: an entry is looked at when its unit is asked for. Raises ReadingError, before any unit, where a name
    stands for nothing; UsageError for a pattern that is ambiguous.
    """
    items_of = partial(_items_but_lists, file_items if split else whole_file)
    return chain.from_iterable([_named(os.fspath(name), items_of) for name in names])


def _named(name: str, items_of: FileItems) -> Iterator[WorkItem]:
    if os.path.lexists(name):
        return _items(name, storable(name), items_of)
    paths = pattern_paths(name) if has_magic(name) else iter(())
    first = next(paths, None)
    if first is None:
        raise ReadingError(
            "there is no such file or folder",
            storable(name),
            "a path, or a pattern that something matches",
            "look at the path",
        )
    return chain.from_iterable(_items(path, storable(path), items_of) for path in chain((first,), paths))


def _items(path: str, identity: str, items_of: FileItems) -> Iterator[WorkItem]:
    if os.path.isfile(path) and path.lower().endswith(LIST_NAMES):
        return listed_items(path, items_of)
    return items_of(path, identity)


def _items_but_lists(files: FileItems, path: str, identity: str) -> Iterator[WorkItem]:
    if os.path.isdir(path):
        return folder_items(path, files)
    lowered = path.lower()
    if os.path.isfile(path):
        if lowered.endswith(LIST_NAMES):
            return iter((_nested_list(path, identity),))
        if lowered.endswith((*TAR_NAMES, *ZIP_NAMES)):
            return archive_items(path)
        if lowered.endswith(JSONL_NAMES):
            return jsonl_items(path)
    return files(path, identity)


def _nested_list(path: str, identity: str) -> WorkItem:
    error = UsageError(
        "a list names another list",
        identity,
        "a list names structures, folders and archives",
        "name both lists, or join them",
    )
    return WorkItem.of_error(os.path.abspath(path), "", identity, error)
