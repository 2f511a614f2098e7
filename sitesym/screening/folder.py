"""A folder of structures, in an order that does not depend on the file system."""

from __future__ import annotations

import os
from collections.abc import Iterator
from pathlib import Path

from sitesym.crystals.finders import DEFAULT_FINDER
from sitesym.crystals.reading import named_format
from sitesym.errors import ReadingError
from sitesym.screening.rows import Row, Screener
from sitesym.tolerances import DEFAULT_TOLERANCE_ANGSTROM


def screen_folder(
    folder: str | os.PathLike[str],
    tolerance_angstrom: float = DEFAULT_TOLERANCE_ANGSTROM,
    finder: str = DEFAULT_FINDER,
    ladder: bool = True,
) -> Iterator[Row]:
    """Rows of every structure file below a folder; a file that fails is a row with its error.

    Raises ReadingError when there is no such folder.
    """
    screener = Screener(tolerance_angstrom, finder, ladder)
    for path in structure_files(folder):
        yield from screener.rows(path, path.relative_to(folder).as_posix())


def structure_files(folder: str | os.PathLike[str]) -> list[Path]:
    """Files below a folder whose names stand for a structure format, sorted by path; no hidden ones.

    Raises ReadingError when there is no such folder.
    """
    root = Path(folder)
    if not root.is_dir():
        raise ReadingError(
            "there is no such folder",
            root.name,
            "a folder with structure files",
            "look at the path",
            str(folder),
        )
    visible = (path for path in root.rglob("*") if not _is_hidden(path.relative_to(root)))
    named = (path for path in visible if named_format(path) and not path.is_dir())
    return sorted(named, key=lambda path: path.relative_to(root).as_posix())


def _is_hidden(relative: Path) -> bool:
    return any(part.startswith(".") for part in relative.parts)
