"""Reading a structure file: the format by its name or content, CIF through gemmi, all else through ASE."""

from __future__ import annotations

import os
from fnmatch import fnmatch
from pathlib import Path
from typing import Final

from sitesym.crystals.ase_reader import detected_format, read_with_ase
from sitesym.crystals.cif import read_cif
from sitesym.crystals.crystal import Crystal
from sitesym.errors import ReadingError, SitesymError, UnknownFormatError

#: File names (lower case patterns) and the format they stand for; no other file of a folder is opened.
FILE_NAMES: Final = (
    ("*.cif", "cif"),
    ("poscar", "vasp"),
    ("poscar[_-]*", "vasp"),
    ("*[._-]poscar", "vasp"),
    ("contcar", "vasp"),
    ("contcar[_-]*", "vasp"),
    ("*[._-]contcar", "vasp"),
    ("*.vasp", "vasp"),
    ("vasprun*.xml", "vasp-xml"),
    ("outcar", "vasp-out"),
    ("outcar[_-]*", "vasp-out"),
    ("*[._-]outcar", "vasp-out"),
    ("*.extxyz", "extxyz"),
    ("*.xyz", "extxyz"),
    ("*.db", "db"),
    ("*.json", "json"),
    ("*.traj", "traj"),
    ("*.pwi", "espresso-in"),
    ("*.pwo", "espresso-out"),
    ("geometry.in*", "aims"),
    ("*.cell", "castep-cell"),
    ("*.castep", "castep-castep"),
    ("*.xsf", "xsf"),
    ("*.gen", "gen"),
    ("*.res", "res"),
    ("*.cube", "cube"),
)
FORMATS: Final = tuple(dict.fromkeys(name for _, name in FILE_NAMES))


def read_crystal(path: str | os.PathLike[str], file_format: str | None = None) -> Crystal:
    """The one structure of a file.

    ``file_format`` (one of `FORMATS`) overrides the file name. Raises ReadingError and its subclasses, also
    when the file holds several structures: then they are named, and `read_crystals` gives them all.
    """
    crystals = read_crystals(path, file_format)
    if len(crystals) > 1:
        raise ReadingError(
            "the file holds several structures",
            "; ".join(crystal.source.part for crystal in crystals[:6])
            + ("; ..." if len(crystals) > 6 else ""),
            "one structure a file, where one is asked for",
            "write the wanted structure to a file of its own",
            str(path),
        )
    return crystals[0]


def read_crystals(path: str | os.PathLike[str], file_format: str | None = None) -> tuple[Crystal, ...]:
    """All structures of a file: data blocks of a CIF, frames of a trajectory, rows of a database.

    Raises ReadingError and its subclasses; the error names the file.
    """
    location = Path(path)
    try:
        chosen = file_format or _format_of(location)
        if chosen not in FORMATS:
            raise UnknownFormatError(
                "the format is not known", chosen, f"one of {', '.join(FORMATS)}", "name one of these formats"
            )
        return read_cif(location) if chosen == "cif" else read_with_ase(location, chosen)
    except OSError as error:
        raise ReadingError(
            "the file cannot be opened",
            error.strerror or str(error),
            "a file that exists and may be read",
            "look at the path",
            str(path),
        ) from error
    except SitesymError as error:
        raise error.in_file(str(path)) from error.__cause__


def named_format(path: str | os.PathLike[str]) -> str | None:
    """The format a file name stands for, or None: such a file is left alone in a folder."""
    name = Path(path).name.lower()
    return next((file_format for pattern, file_format in FILE_NAMES if fnmatch(name, pattern)), None)


def _format_of(path: Path) -> str:
    if not path.is_file():
        raise ReadingError(
            "there is no such file", path.name, "a path to a structure file", "look at the path"
        )
    return named_format(path) or detected_format(path)
