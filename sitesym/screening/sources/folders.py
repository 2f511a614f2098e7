"""Folders and patterns: paths in an order that does not depend on the file system, walked as they are used.

Of the list of paths only the names of the folders being walked are held.
"""

from __future__ import annotations

import os
from collections.abc import Iterator
from fnmatch import fnmatchcase
from pathlib import PurePath
from typing import Final, Literal

from sitesym.errors import ReadingError, UsageError
from sitesym.formats import named_format
from sitesym.screening.sources.files import FileItems, file_items
from sitesym.screening.sources.texts import broken_stream, storable
from sitesym.screening.work import WorkItem

#: Folders inside each other that are walked; deeper ones are an error, and not the end of the run.
DEEPEST: Final = 200

_MAGIC: Final = frozenset("*?[")


def folder_items(folder: str | os.PathLike[str], items_of: FileItems = file_items) -> Iterator[WorkItem]:
    """Units of every structure file below a folder, ``id`` the path below it, in the order of these texts.

    Files are taken by their names (`sitesym.formats.FILE_NAMES`); hidden files and folders are left
    out, links to folders are not followed. A folder that cannot be opened, and one that has the name of a
    structure file and holds no structures, are units with their errors. ``items_of`` gives those of a file.
    """
    return _below(os.fspath(folder), "", items_of)


def pattern_paths(pattern: str) -> Iterator[str]:
    """Paths that match a shell pattern, ``**`` for any depth, in the order of their texts, folder by folder.

    Raises UsageError for more than one ``**``, whose matches would be doubled.
    """
    parts = PurePath(pattern).parts
    if parts.count("**") > 1:
        raise UsageError(
            "the pattern is ambiguous",
            pattern,
            "at most one '**', which stands for any depth",
            "leave one out",
        )
    anchor = PurePath(pattern).anchor
    return _matches(anchor, parts[1:] if anchor else parts)


def has_magic(text: str) -> bool:
    """Whether a text is a shell pattern."""
    return not _MAGIC.isdisjoint(text)


def _below(folder: str, prefix: str, items_of: FileItems) -> Iterator[WorkItem]:
    try:
        if prefix.count("/") > DEEPEST:
            raise OSError(f"more than {DEEPEST} folders inside each other")
        entries = _visible(folder)
    except OSError as error:
        identity = storable(prefix.rstrip("/") or folder)
        yield WorkItem.of_error(os.path.abspath(folder), "", identity, broken_stream(folder, error))
        return
    for name, is_folder in entries:
        path = os.path.join(folder, name)
        if not is_folder:
            yield from items_of(path, storable(prefix + name))
            continue
        found = False
        for item in _below(path, f"{prefix}{name}/", items_of):
            found = True
            yield item
        if not found and named_format(name):
            yield WorkItem.of_error(os.path.abspath(path), "", storable(prefix + name), _is_a_folder(name))


def _visible(folder: str) -> list[tuple[str, bool]]:
    """Names of the folders and structure files in a folder, and whether each is a folder.

    Sorted as the paths below them sort: a folder counts with the slash that follows it.
    """
    found = []
    with os.scandir(folder) as entries:
        for entry in entries:
            if entry.name.startswith("."):
                continue
            if entry.is_dir(follow_symlinks=False):
                found.append((entry.name, True))
            elif named_format(entry.name) and not _leads_to_folder(entry):
                found.append((entry.name, False))
    return sorted(found, key=lambda pair: pair[0] + "/" if pair[1] else pair[0])


def _leads_to_folder(link: os.DirEntry[str]) -> bool:
    """False also for a link that leads to itself."""
    try:
        return link.is_dir()
    except OSError:
        return False


def _matches(base: str, parts: tuple[str, ...]) -> Iterator[str]:
    if not parts:
        yield base or os.curdir
        return
    head, rest = parts[0], parts[1:]
    if head == "**":
        yield from _matches(base, rest)
        # A pattern that ends here means the folder itself, whose files are found from there.
        for name in _names(base, "*", "real folders") if rest else ():
            yield from _matches(os.path.join(base, name), parts)
    elif has_magic(head):
        for name in _names(base, head, "folders" if rest else "all"):
            yield from _matches(os.path.join(base, name), rest)
    elif os.path.lexists(os.path.join(base, head)):
        yield from _matches(os.path.join(base, head), rest)


def _names(folder: str, pattern: str, wanted: Literal["all", "folders", "real folders"]) -> list[str]:
    """Sorted names that match; hidden ones only where the pattern starts with a dot.

    Real folders are no links: a link to a folder above would have no end below ``**``.
    """
    try:
        with os.scandir(folder or ".") as entries:
            return sorted(
                entry.name
                for entry in entries
                if fnmatchcase(entry.name, pattern)
                and (pattern.startswith(".") or not entry.name.startswith("."))
                and (wanted == "all" or entry.is_dir(follow_symlinks=wanted == "folders"))
            )
    except OSError:
        return []


def _is_a_folder(name: str) -> ReadingError:
    return ReadingError(
        "a folder has the name of a structure file",
        storable(name),
        "a structure is a file; a folder holds files",
        "look for the file",
    )
