"""From a unit of work to its crystals. Content that is in memory stays there: nothing is unpacked to disk."""

from __future__ import annotations

import os
from collections.abc import Iterator
from contextlib import contextmanager
from tempfile import TemporaryDirectory
from typing import TypeAlias

from sitesym.choices import ReadingChoices
from sitesym.crystals.crystal import Crystal
from sitesym.crystals.reading import read_each
from sitesym.errors import ReadingError, SitesymError
from sitesym.screening.work import WorkItem

#: Each structure of an item by its name in the item (empty where it is the only one), or its error.
Structures: TypeAlias = Iterator[tuple[str, Crystal | SitesymError]]


def read_item(item: WorkItem, choices: ReadingChoices) -> Structures:
    """The structures of an item, or the one of its structures that is chosen.

    Raises ReadingError and its subclasses where it cannot be read at all.
    """
    if item.error is not None:
        raise item.error
    if item.kind == "path":
        _require_regular(item.source)
        yield from _named(read_each(item.source, item.file_format or None, **choices))
        return
    with file_in_memory(item.content, item.name or "structure") as path:
        yield from _named(read_each(path, item.file_format or None, **choices))


def _named(structures: Structures) -> Structures:
    """The structures; the only one of a file needs no name."""
    first, second = next(structures, None), next(structures, None)
    if first is not None and second is None:
        yield "", first[1]
        return
    yield from (structure for structure in (first, second) if structure is not None)
    yield from structures


@contextmanager
def file_in_memory(content: bytes, name: str) -> Iterator[str]:
    """A path with this content and file name, for readers that open files: the content is in memory where
    the system can do that (Linux), and only a link with its name is in a folder."""
    with TemporaryDirectory() as folder:
        path = os.path.join(folder, os.path.basename(name))
        if not hasattr(os, "memfd_create"):
            with open(path, "wb") as stream:
                stream.write(content)
            yield path
            return
        with open(os.memfd_create("structure"), "w+b", closefd=True) as stream:
            stream.write(content)
            stream.flush()
            os.symlink(f"/proc/self/fd/{stream.fileno()}", path)
            yield path


def _require_regular(path: str) -> None:
    """Refuse what would never end or never begin: pipes and devices; say what is wrong with folders and
    links."""
    if os.path.isfile(path):
        return
    value = os.path.basename(path)
    rule, step = "a regular file", "look at the path"
    if os.path.islink(path):
        raise ReadingError("the link leads to no file", value, rule, step)
    if os.path.isdir(path):
        raise ReadingError("a folder has the name of a structure file", value, rule, step)
    if os.path.exists(path):
        raise ReadingError("the file is a pipe or a device", value, rule, step)
    raise ReadingError("there is no such file", value, rule, step)
