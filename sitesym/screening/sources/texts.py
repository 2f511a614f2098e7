"""Streams that may be compressed, and the errors of entries."""

from __future__ import annotations

import gzip
import lzma
import os
import zlib
from pathlib import Path
from typing import IO, Final

from sitesym.errors import BrokenSourceError, FileTooLargeError
from sitesym.screening.work import storable as storable

#: Limit of one entry that is held in memory: a member of an archive, a line, a frame (bytes).
LARGEST_ENTRY_BYTES: Final = 50_000_000

#: What a damaged or vanished stream raises while it is read.
STREAM_ERRORS: Final = (OSError, EOFError, zlib.error, lzma.LZMAError)

COMPRESSIONS: Final = (".gz", ".xz")


def open_bytes(path: str | os.PathLike[str]) -> IO[bytes] | gzip.GzipFile:
    """The bytes of a file, decompressed where its name ends in .gz or .xz. Raises OSError."""
    suffix = Path(path).suffix.lower()
    if suffix == ".gz":
        return gzip.open(path, "rb")
    return lzma.open(path, "rb") if suffix == ".xz" else open(path, "rb")


def broken_stream(path: str | os.PathLike[str], error: BaseException) -> BrokenSourceError:
    """A source that cannot be opened, or that ends before it should."""
    reason = error.strerror if isinstance(error, OSError) and error.strerror else str(error)
    return BrokenSourceError(
        "the source cannot be read to its end",
        f"{type(error).__name__}: {reason}",
        "a complete file that may be read",
        "look at the path, or copy the file again",
        storable(str(path)),
    )


def too_large_entry(what: str, size_bytes: int, file: str) -> FileTooLargeError:
    """An entry that is not taken into memory."""
    return FileTooLargeError(
        f"{what} is too large",
        f"{size_bytes / 1e6:.3g} megabytes or more",
        f"at most {LARGEST_ENTRY_BYTES / 1e6:g} megabytes for an entry held in memory",
        "give the structure as a file of its own",
        storable(file),
    )
