"""Adapter to ASE: every structure format but CIF and POSCAR."""

from __future__ import annotations

import os
import sqlite3
import struct
import warnings
import zlib
from collections.abc import Iterator
from contextlib import closing
from itertools import islice
from pathlib import Path
from typing import TYPE_CHECKING, Any, TypeAlias
from urllib.parse import quote

from sitesym.errors import CountMismatchError, EmptyStructureError, ReadingError, UnknownFormatError

if TYPE_CHECKING:
    from ase import Atoms

# ASE's readers let whatever a malformed text provokes escape: these are the classes that bad content, and
# not a fault of this program, gives rise to.
_CONTENT_ERRORS = (
    ArithmeticError,
    AssertionError,
    AttributeError,
    EOFError,
    LookupError,
    NotImplementedError,
    OSError,
    RuntimeError,
    StopIteration,
    SyntaxError,
    TypeError,
    ValueError,
    sqlite3.Error,
    struct.error,
    zlib.error,
)


# Without this ASE looks for a CASTEP program and runs it to learn its keywords.
_OPTIONS: dict[str, dict[str, Any]] = {"castep-cell": {"calculator_args": {"keyword_tolerance": 3}}}


#: A structure, and what ASE warned of while it read it.
Frame: TypeAlias = tuple["Atoms", tuple[str, ...]]


def read_frames(path: Path, ase_format: str, index: int | None) -> Iterator[Frame]:
    """All structures of a file, in its order, or the one with an index (-1 the last); ``ase_format`` is ASE's
    name of the format. They are read one by one where the format allows it.

    Raises ReadingError where the file or its next structure cannot be read, EmptyStructureError where there
    is none.
    """
    if ase_format == "extxyz":
        _check_counts(path)
    if ase_format == "db":
        _check_tables(path)
    frames, found = _iterated(path, ase_format, index), False
    while True:
        with warnings.catch_warnings(record=True) as caught:
            warnings.simplefilter("always")
            atoms = _next(frames, ase_format, index)
        if atoms is None:
            break
        found = True
        # What ASE plans for its own interface says nothing about the file.
        warned = (
            entry for entry in caught if not issubclass(entry.category, (FutureWarning, DeprecationWarning))
        )
        yield atoms, tuple(dict.fromkeys(f"ASE warns: {entry.message}" for entry in warned))
    if not found:
        raise _no_structure(ase_format, index)


def _iterated(path: Path, ase_format: str, index: int | None) -> Iterator[Atoms]:
    import ase.io
    from ase.io.formats import get_ioformat

    if index not in (None, 0, -1) and get_ioformat(ase_format).single:
        return iter(())
    chosen = ":" if index is None else index
    return ase.io.iread(str(path), index=chosen, format=ase_format, **_OPTIONS.get(ase_format, {}))


def _next(frames: Iterator[Atoms], ase_format: str, index: int | None) -> Atoms | None:
    """The next structure, None after the last one."""
    from ase.io import ParseError
    from ase.io.formats import UnknownFileTypeError

    try:
        return next(frames, None)
    except IndexError as error:
        if index is None:
            raise _unreadable(ase_format, error) from error
        return None
    except (ParseError, UnknownFileTypeError, *_CONTENT_ERRORS) as error:
        raise _unreadable(ase_format, error) from error


def detected_format(path: Path) -> str:
    """ASE's name for the format of a file, from its name and content. Raises UnknownFormatError."""
    from ase.io.formats import UnknownFileTypeError, filetype

    try:
        return str(filetype(str(path), guess=False))
    except (UnknownFileTypeError, *_CONTENT_ERRORS) as error:
        raise UnknownFormatError(
            "the format is not recognised",
            path.name,
            "the name or the content tells the format",
            "rename the file (.cif, .vasp, .extxyz, ...) or name its format",
        ) from error


def require_ase_tables(path: str | os.PathLike[str]) -> None:
    """Return for an ASE database in SQLite.

    ASE adds its tables to any SQLite file it opens: this looks first, without the right to write.

    Raises ReadingError for any other database, sqlite3.Error for what is none.
    """
    with closing(sqlite3.connect(f"file:{quote(os.fsencode(path))}?mode=ro", uri=True)) as connection:
        names = {
            name for (name,) in connection.execute("SELECT name FROM sqlite_master WHERE type = 'table'")
        }
    if "systems" not in names:
        raise ReadingError(
            "the file is no ASE database",
            f"tables: {', '.join(sorted(names)) or 'none'}",
            "a table 'systems', as ASE writes it",
            "leave the file out, or convert it",
        )


def _check_counts(path: Path) -> None:
    """Each frame of an extxyz file has as many lines as it says: ASE would read on for ever."""
    with path.open(encoding="utf-8", errors="replace") as lines:
        line = next(lines, "")
        while word := line.strip():
            # What is no number is left to ASE, which names the fault.
            if not word.isdecimal():
                return
            # So many digits are more lines than any file has.
            wanted = 1 + int(word[:18])
            present = sum(1 for _ in islice(lines, wanted))
            if present < wanted:
                raise CountMismatchError(
                    "a frame ends before its atoms",
                    f"{word} atoms announced, {max(present - 1, 0)} lines follow",
                    "one line for each atom",
                    "complete the frame, or correct the number",
                )
            line = next(lines, "")
            while line.lstrip().startswith("VEC"):
                line = next(lines, "")


def _check_tables(path: Path) -> None:
    try:
        require_ase_tables(path)
    except sqlite3.Error as error:
        raise _unreadable("db", error) from error


def _no_structure(ase_format: str, index: int | None) -> EmptyStructureError:
    return EmptyStructureError(
        "the file holds no structure" if index is None else "the file holds no such structure",
        f"format {ase_format}" + ("" if index is None else f", structure {index + 1 or 'last'}"),
        "a file holds at least one; they are counted from 1",
        "look for the missing structure",
    )


def _unreadable(ase_format: str, error: Exception) -> ReadingError:
    return ReadingError(
        f"the file cannot be read as {ase_format}",
        f"{type(error).__name__}: {error}".strip().splitlines()[0],
        f"the content follows the format {ase_format}",
        "correct the file, or name its format",
    )
