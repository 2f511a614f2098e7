"""File names of structures, and the formats they stand for. It loads nothing else of the package."""

from __future__ import annotations

import os
import re
from fnmatch import translate
from typing import Final

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

#: Suffixes of compressed files; what comes before names the format.
COMPRESSIONS: Final = (".gz", ".xz", ".zst")

_MATCHERS: Final = tuple((re.compile(translate(pattern)).match, name) for pattern, name in FILE_NAMES)


def content_name(path: str | os.PathLike[str]) -> str:
    """The name of a file's content: its own, without the suffix of its compression."""
    name = os.path.basename(path)
    stem, suffix = os.path.splitext(name)
    return stem if suffix.lower() in COMPRESSIONS else name


def named_format(path: str | os.PathLike[str]) -> str | None:
    """The format a file name stands for, or None: such a file is left alone in a folder.

    >>> named_format("runs/POSCAR.gz"), named_format("notes.txt")
    ('vasp', None)
    """
    name = content_name(path).lower()
    return next((file_format for matches, file_format in _MATCHERS if matches(name)), None)
