"""Members of .tar and .zip archives, read one after the other and never unpacked to disk."""

from __future__ import annotations

import os
import re
import stat
import struct
import tarfile
import zipfile
from collections.abc import Callable, Iterator
from functools import partial
from typing import IO, Final, Self

from sitesym.errors import ReadingError, SitesymError, UnsafePathError
from sitesym.formats import named_format
from sitesym.screening.sources.texts import (
    LARGEST_ENTRY_BYTES,
    STREAM_ERRORS,
    broken_stream,
    storable,
    too_large_entry,
)
from sitesym.screening.work import WorkItem

#: Ends of the names of archives.
TAR_NAMES: Final = (".tar", ".tar.gz", ".tgz", ".tar.bz2", ".tar.xz")
ZIP_NAMES: Final = (".zip",)

_ABSOLUTE = re.compile(r"[\\/]|[A-Za-z]:")
# The libraries let whatever damaged bytes provoke escape. An encrypted member is a RuntimeError, an unknown
# compression a NotImplementedError (which is one too).
_ARCHIVE_ERRORS: Final = (
    *STREAM_ERRORS, tarfile.TarError, zipfile.BadZipFile, struct.error, RuntimeError, ValueError, LookupError,
)  # fmt: skip


def archive_items(path: str) -> Iterator[WorkItem]:
    """One unit for each member whose name stands for a structure format, in the order of the archive.

    Members are not looked for inside members. A member with an absolute path, a path with '..', or that is a
    link is refused: it is a unit with its error. A tar file is read as a stream; of a zip file the list of
    members is held in memory (some 500 bytes each).
    """
    source, number = os.path.abspath(path), 0
    members = _zip_members(path) if path.lower().endswith(ZIP_NAMES) else _tar_members(path)
    try:
        for name, size, is_link, content in members:
            number += 1
            if item := _item(f"{source}!{storable(name)}", f"member {number}", name, size, is_link, content):
                yield item
    except _ARCHIVE_ERRORS as error:
        identity = storable(os.path.basename(path))
        yield WorkItem.of_error(source, f"after member {number}", identity, broken_stream(path, error))


#: Name, size in bytes, whether it is a link, and what opens it.
_Member = tuple[str, int, bool, Callable[[], IO[bytes] | None]]


class _StrictTarInfo(tarfile.TarInfo):
    """Headers of members; a damaged or missing one is an error and not taken for the end of the archive."""

    @classmethod
    def fromtarfile(cls, archive: tarfile.TarFile) -> Self:
        """The next header. Raises ReadError; EOFHeaderError at the mark of the end."""
        try:
            return super().fromtarfile(archive)
        except tarfile.EOFHeaderError:  # type: ignore[attr-defined]
            raise
        except tarfile.HeaderError as error:
            raise tarfile.ReadError(f"{error or 'no mark of the end'} at byte {archive.offset}") from error


def _tar_members(path: str) -> Iterator[_Member]:
    with tarfile.open(path, "r|*", tarinfo=_StrictTarInfo) as archive:
        while (member := archive.next()) is not None:
            if not member.isdir():
                is_link = member.issym() or member.islnk()
                yield member.name, member.size, is_link, partial(archive.extractfile, member)
            # A stream cannot go back: what it remembers of members only grows.
            archive.members.clear()  # type: ignore[attr-defined]


def _zip_members(path: str) -> Iterator[_Member]:
    with zipfile.ZipFile(path) as archive:
        for member in archive.infolist():
            if not member.is_dir():
                is_link = stat.S_ISLNK(member.external_attr >> 16)
                yield member.filename, member.file_size, is_link, partial(archive.open, member)


def _item(
    source: str, frame: str, name: str, size: int, is_link: bool, content: Callable[[], IO[bytes] | None]
) -> WorkItem | None:
    """The unit of a member, or None for a member that is no structure."""
    identity = storable(name)
    parts = re.split(r"[\\/]", name)
    try:
        if _ABSOLUTE.match(name) or ".." in parts:
            raise _unsafe("the path of the member leaves the archive", identity)
        if any(part.startswith(".") and part != "." for part in parts) or named_format(parts[-1]) is None:
            return None
        if is_link:
            raise _unsafe("the member is a link", identity)
        if named_format(parts[-1]) == "db":
            raise ReadingError(
                "a database inside an archive is not read",
                identity,
                "an ASE database is read row by row from a file of its own",
                "take it out and name it",
            )
        return WorkItem.of_bytes(
            source, frame, identity, storable(parts[-1]), _content(content, size, source)
        )
    except SitesymError as error:
        return WorkItem.of_error(source, frame, identity, error.in_file(source))


def _content(opener: Callable[[], IO[bytes] | None], size: int, source: str) -> bytes:
    """All bytes of a member. The size it states is not relied on: a small entry may expand without end."""
    if size > LARGEST_ENTRY_BYTES:
        raise too_large_entry("the member", size, source)
    try:
        stream = opener()
        if stream is None:
            raise ReadingError("the member is no file", source, "a regular file", "leave it out")
        with stream:
            content = stream.read(LARGEST_ENTRY_BYTES + 1)
    except _ARCHIVE_ERRORS as error:
        raise broken_stream(source, error) from error
    if len(content) > LARGEST_ENTRY_BYTES:
        raise too_large_entry("the member", len(content), source)
    return content


def _unsafe(what: str, name: str) -> UnsafePathError:
    return UnsafePathError(
        what,
        name,
        "members lie below the archive and are files",
        "make the archive again from inside the folder, links followed",
    )
