"""Adapter to ASE: every structure format but CIF."""

from __future__ import annotations

import sqlite3
import struct
import warnings
import zlib
from pathlib import Path
from typing import Any

from sitesym.crystals.crystal import Crystal, Source
from sitesym.errors import EmptyStructureError, ReadingError, UnknownFormatError

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


def read_with_ase(path: Path, ase_format: str) -> tuple[Crystal, ...]:
    """All structures of a file, in its order; ``ase_format`` is ASE's name of the format.

    Warnings of ASE become remarks. Raises ReadingError and its subclasses.
    """
    import ase.io
    from ase.io import ParseError
    from ase.io.formats import UnknownFileTypeError

    if ase_format == "vasp":
        _require_symbols(path)
    options = _OPTIONS.get(ase_format, {})
    with warnings.catch_warnings(record=True) as caught:
        warnings.simplefilter("always")
        try:
            frames = list(ase.io.iread(str(path), index=":", format=ase_format, **options))
        except (ParseError, UnknownFileTypeError, *_CONTENT_ERRORS) as error:
            raise ReadingError(
                f"the file cannot be read as {ase_format}",
                f"{type(error).__name__}: {error}".strip().splitlines()[0],
                f"the content follows the format {ase_format}",
                "correct the file, or name its format",
            ) from error
    if not frames:
        raise EmptyStructureError(
            "the file holds no structure",
            f"0 structures of format {ase_format}",
            "a file holds at least one",
            "look for the missing structure",
        )
    # What ASE plans for its own interface says nothing about the file.
    warned = (
        entry for entry in caught if not issubclass(entry.category, (FutureWarning, DeprecationWarning))
    )
    remarks = tuple(dict.fromkeys(f"ASE warns: {entry.message}" for entry in warned))
    parts = (
        [""]
        if len(frames) == 1
        else [f"structure {number} of {len(frames)}" for number in range(1, len(frames) + 1)]
    )
    return tuple(
        Crystal.from_ase(atoms, Source(path.name, ase_format, part), remarks)
        for atoms, part in zip(frames, parts, strict=True)
    )


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


def _require_symbols(path: Path) -> None:
    """Refuse a POSCAR that counts atoms in line 6, where the symbols belong: they would be guessed."""
    lines = path.read_text(encoding="utf-8", errors="replace").splitlines()
    counts = lines[5].split() if len(lines) > 5 else []
    if counts and all(token.isdigit() for token in counts):
        raise UnknownFormatError(
            "a POSCAR without element symbols",
            f"line 6 is '{lines[5].strip()}'",
            "the element symbols stand in the line before the counts (the format since VASP 5)",
            "insert the symbols as line 6; they are not guessed from the comment",
        )
