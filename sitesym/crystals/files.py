"""The bytes of a structure file: compression undone, and never more than a stated size."""

from __future__ import annotations

import gzip
import importlib
import lzma
import os
import sys
import zlib
from collections.abc import Callable, Iterator
from contextlib import contextmanager
from pathlib import Path
from tempfile import TemporaryDirectory
from typing import IO, Final, TypeAlias, cast

from sitesym.errors import FileTooLargeError, ReadingError, UnknownFormatError
from sitesym.formats import content_name

#: Default limit of a file, before and after decompression (megabytes of 10^6 bytes).
LARGEST_FILE_MEGABYTES: Final = 500.0

_Opener: TypeAlias = Callable[[Path], IO[bytes]]


_DAMAGE: Final[tuple[type[Exception], ...]] = (EOFError, zlib.error, lzma.LZMAError, gzip.BadGzipFile)


def content(path: Path, largest_megabytes: float) -> bytes:
    """All bytes of a file, decompressed where its name ends in .gz, .xz or .zst.

    Raises FileTooLargeError, ReadingError for damaged compression, UnknownFormatError where the library for
    .zst is missing, OSError where the file cannot be read.
    """
    limit = int(largest_megabytes * 1e6)
    if path.stat().st_size > limit:
        raise _too_large(path, largest_megabytes, "")
    opener = _OPENERS.get(path.suffix.lower())
    if opener is None:
        return path.read_bytes()
    try:
        with opener(path) as stream:
            raw = stream.read(limit + 1)
    except (*_DAMAGE, *_zstandard_errors()) as error:
        raise _damaged(path, error) from error
    if len(raw) > limit:
        raise _too_large(path, largest_megabytes, " once decompressed")
    return raw


@contextmanager
def plain_file(path: Path, largest_megabytes: float) -> Iterator[Path]:
    """A path with the content of the file, for readers that open files themselves: the file, or a
    decompressed copy that is removed afterwards. Raises as `content` does."""
    if content_name(path) == path.name:
        if path.stat().st_size > largest_megabytes * 1e6:
            raise _too_large(path, largest_megabytes, "")
        yield path
        return
    with TemporaryDirectory() as folder:
        copy = Path(folder) / content_name(path)
        copy.write_bytes(content(path, largest_megabytes))
        yield copy


def _open_gzip(path: Path) -> IO[bytes]:
    return cast(IO[bytes], gzip.open(path, "rb"))


def _open_xz(path: Path) -> IO[bytes]:
    return lzma.open(path, "rb")


def _zstandard_errors() -> tuple[type[Exception], ...]:
    """The error class of zstandard where the library has been loaded to open a file."""
    library = sys.modules.get("zstandard")
    return (library.ZstdError,) if library is not None else ()


def _open_zstandard(path: Path) -> IO[bytes]:
    try:
        library = importlib.import_module("zstandard")
    except ImportError as error:
        raise UnknownFormatError(
            "a file compressed with Zstandard cannot be opened here",
            path.name,
            "the Python library zstandard is installed",
            "install zstandard, or decompress the file",
        ) from error
    stream: IO[bytes] = library.open(path, "rb")
    return stream


_OPENERS: Final[dict[str, _Opener]] = {".gz": _open_gzip, ".xz": _open_xz, ".zst": _open_zstandard}


def _too_large(path: Path, largest_megabytes: float, when: str) -> FileTooLargeError:
    size = os.path.getsize(path) / 1e6
    return FileTooLargeError(
        f"the file is too large{when}",
        f"{path.name} has {size:.3g} megabytes",
        f"at most {largest_megabytes:g} megabytes, before and after decompression",
        "extract the structure, or raise the limit (largest_megabytes)",
    )


def _damaged(path: Path, error: Exception) -> ReadingError:
    return ReadingError(
        "the compressed file is damaged", f"{path.name}: {error}", "a complete file", "copy the file again"
    )
