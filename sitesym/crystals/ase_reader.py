"""Adapter to ASE: every structure format but CIF and POSCAR."""

from __future__ import annotations

import sqlite3
import struct
import warnings
import zlib
from pathlib import Path
from typing import TYPE_CHECKING, Any

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


def read_frames(path: Path, ase_format: str, index: int | None) -> tuple[list[Atoms], tuple[str, ...]]:
    """All structures of a file, in its order, or the one with an index (-1 the last); ``ase_format`` is ASE's
    name of the format. The texts are warnings of ASE.

    Raises ReadingError, and EmptyStructureError where there is no such structure.
    """
    import ase.io
    from ase.io import ParseError
    from ase.io.formats import UnknownFileTypeError

    if ase_format == "extxyz":
        _check_counts(path)
    options = _OPTIONS.get(ase_format, {})
    with warnings.catch_warnings(record=True) as caught:
        warnings.simplefilter("always")
        try:
            chosen = ":" if index is None else index
            frames = list(ase.io.iread(str(path), index=chosen, format=ase_format, **options))
        except IndexError as error:
            if index is None:
                raise _unreadable(ase_format, error) from error
            frames = []
        except (ParseError, UnknownFileTypeError, *_CONTENT_ERRORS) as error:
            raise _unreadable(ase_format, error) from error
    if not frames:
        raise EmptyStructureError(
            "the file holds no structure" if index is None else "the file holds no such structure",
            f"format {ase_format}" + ("" if index is None else f", structure {index + 1 or 'last'}"),
            "a file holds at least one; they are counted from 1",
            "look for the missing structure",
        )
    # What ASE plans for its own interface says nothing about the file.
    warned = (
        entry for entry in caught if not issubclass(entry.category, (FutureWarning, DeprecationWarning))
    )
    return frames, tuple(dict.fromkeys(f"ASE warns: {entry.message}" for entry in warned))


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


def _check_counts(path: Path) -> None:
    """Each frame of an extxyz file has as many lines as it says: ASE would read on for ever."""
    lines = path.read_text(encoding="utf-8", errors="replace").splitlines()
    place = 0
    while place < len(lines) and lines[place].strip():
        word = lines[place].strip()
        # What is no number is left to ASE, which names the fault.
        if not word.isdecimal():
            return
        place += 2 + int(word)
        if place > len(lines):
            raise CountMismatchError(
                "a frame ends before its atoms",
                f"{word} atoms announced, {len(lines) - place + int(word)} lines follow",
                "one line for each atom",
                "complete the frame, or correct the number",
            )
        while place < len(lines) and lines[place].lstrip().startswith("VEC"):
            place += 1


def _unreadable(ase_format: str, error: Exception) -> ReadingError:
    return ReadingError(
        f"the file cannot be read as {ase_format}",
        f"{type(error).__name__}: {error}".strip().splitlines()[0],
        f"the content follows the format {ase_format}",
        "correct the file, or name its format",
    )
