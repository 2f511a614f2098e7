"""Reading a structure file: the format by its name or content, and which of its structures are wanted.

CIF goes through gemmi, POSCAR is read here, all else goes through ASE.
"""

from __future__ import annotations

import os
import re
from collections.abc import Callable, Iterable, Iterator
from contextlib import contextmanager
from fnmatch import translate
from functools import partial
from pathlib import Path
from typing import Final, TypeAlias, TypedDict, Unpack

from sitesym.crystals.ase_reader import detected_format, read_frames
from sitesym.crystals.cif import blocks_with_atoms, cif_document, crystal_from_block
from sitesym.crystals.crystal import Crystal, Source
from sitesym.crystals.files import LARGEST_FILE_MEGABYTES, content, content_name, plain_file
from sitesym.crystals.poscar import read_poscar
from sitesym.crystals.vacuum import vacuum_remarks
from sitesym.errors import EmptyStructureError, ReadingError, SitesymError, UnknownFormatError, UsageError

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
_NAME_MATCHERS: Final = tuple((re.compile(translate(pattern)).match, name) for pattern, name in FILE_NAMES)


class ReadingChoices(TypedDict, total=False):
    """What may be chosen on reading; each may be left out.

    ``frame``: number of one structure of the file, from 1, or "last". ``block``: name of a data block of a
    CIF. ``symmetry_from``: the only statement of a CIF to believe, where its statements contradict each
    other: operations, hall, hm or number. ``distinguish``: what tells atoms apart beside element and
    occupancy: isotope, oxidation, label, moment. ``largest_megabytes``: limit of the file's size.
    """

    frame: int | str | None
    block: str | None
    symmetry_from: str | None
    distinguish: Iterable[str]
    largest_megabytes: float


#: One structure of a file: its name in the file, and what makes the crystal or raises why it cannot be made.
Part: TypeAlias = tuple[str, Callable[[], Crystal]]


def read_crystal(
    path: str | os.PathLike[str], file_format: str | None = None, **choices: Unpack[ReadingChoices]
) -> Crystal:
    """The one structure of a file; ``choices`` are those of `ReadingChoices`.

    ``file_format`` (one of `FORMATS`) overrides the file name. Raises ReadingError and its subclasses, also
    when the file holds several structures: then they are named, and `read_crystals` gives them all.
    """
    parts = _parts(path, file_format, choices)
    if len(parts) > 1:
        raise ReadingError(
            "the file holds several structures",
            "; ".join(name for name, _ in parts[:6]) + ("; ..." if len(parts) > 6 else ""),
            "one structure, where one is asked for",
            "choose one with --frame (last or its number) or --block (its name)",
            str(path),
        )
    return _made(path, parts[0][1], choices)


def read_crystals(
    path: str | os.PathLike[str], file_format: str | None = None, **choices: Unpack[ReadingChoices]
) -> tuple[Crystal, ...]:
    """All structures of a file: data blocks of a CIF, frames of a trajectory, rows of a database.

    Raises ReadingError and its subclasses for the first that is faulty; the error names the file.
    """
    return tuple(_made(path, make, choices) for _, make in _parts(path, file_format, choices))


def read_each(
    path: str | os.PathLike[str], file_format: str | None = None, **choices: Unpack[ReadingChoices]
) -> Iterator[tuple[str, Crystal | SitesymError]]:
    """Name and crystal of each structure of a file, or the error in its place, so that one faulty data block
    or frame does not hide the others. Raises ReadingError where the file as a whole cannot be read."""
    for name, make in _parts(path, file_format, choices):
        try:
            yield name, _made(path, make, choices)
        except SitesymError as error:
            yield name, error


def _parts(path: str | os.PathLike[str], file_format: str | None, choices: ReadingChoices) -> list[Part]:
    location = Path(path)
    with _errors_of(path):
        if location.is_dir():
            raise ReadingError(
                "this is a folder", location.name, "one structure file", "name a file, or screen the folder"
            )
        if not location.is_file():
            raise ReadingError(
                "there is no such file", location.name, "a path to a structure file", "look at the path"
            )
        chosen = file_format or named_format(location) or detected_format(location)
        if chosen not in FORMATS:
            raise UnknownFormatError(
                "the format is not known", chosen, f"one of {', '.join(FORMATS)}", "name one of these formats"
            )
        index = _frame_index(choices.get("frame"))
        if chosen == "cif":
            return _selected(_cif_parts(location, choices), index)
        if choices.get("block") is not None:
            raise UsageError(
                "only a CIF has data blocks",
                f"format {chosen}",
                "a block is chosen in a CIF",
                "choose a frame",
            )
        if chosen == "vasp":
            return _selected([_poscar_part(location, _limit(choices))], index)
        return _ase_parts(location, chosen, index, _limit(choices))


def _cif_parts(path: Path, choices: ReadingChoices) -> list[Part]:
    document = cif_document(content(path, _limit(choices)))
    blocks, remarks = blocks_with_atoms(document, choices.get("block"))
    return [
        (
            f"data block {block.name}",
            partial(crystal_from_block, block, path.name, choices.get("symmetry_from"), remarks),
        )
        for block in blocks
    ]


def _poscar_part(path: Path, limit: float) -> Part:
    text = content(path, limit).decode("utf-8", errors="replace")
    return "", partial(read_poscar, text, path.name)


def _ase_parts(path: Path, chosen: str, index: int | None, limit: float) -> list[Part]:
    with plain_file(path, limit) as plain:
        frames, remarks = read_frames(plain, chosen, index)
    if index is not None:
        names = ["last structure" if index == -1 else f"structure {index + 1}"]
    elif len(frames) == 1:
        names = [""]
    else:
        names = [f"structure {number} of {len(frames)}" for number in range(1, len(frames) + 1)]
    return [
        (name, partial(Crystal.from_ase, atoms, Source(path.name, chosen, name), remarks))
        for name, atoms in zip(names, frames, strict=True)
    ]


def _made(path: str | os.PathLike[str], make: Callable[[], Crystal], choices: ReadingChoices) -> Crystal:
    """The crystal with atoms told apart as asked for, and a warning of vacuum."""
    with _errors_of(path):
        crystal = make().distinguished_by(*choices.get("distinguish", ()))
        vacuum = vacuum_remarks(crystal.lattice, crystal.positions_frac)
        return crystal.with_remarks(*vacuum) if vacuum else crystal


def _frame_index(frame: int | str | None) -> int | None:
    """Index of a frame given as its number from 1 or as "last"; None for all. Raises UsageError."""
    if frame is None:
        return None
    if frame == "last":
        return -1
    if str(frame).isdecimal() and int(frame) > 0:
        return int(frame) - 1
    raise UsageError(
        "there is no such frame", str(frame), "last, or a number from 1", "name a frame of the file"
    )


def _selected(parts: list[Part], index: int | None) -> list[Part]:
    if index is None:
        return parts
    if index >= len(parts):
        raise EmptyStructureError(
            "the file holds no such structure",
            f"structure {index + 1}",
            f"{len(parts)} structures, counted from 1",
            "choose one of them",
        )
    return [parts[index]]


def _limit(choices: ReadingChoices) -> float:
    return choices.get("largest_megabytes", LARGEST_FILE_MEGABYTES)


@contextmanager
def _errors_of(path: str | os.PathLike[str]) -> Iterator[None]:
    """Errors raised inside name the file; those of the operating system become ReadingError."""
    try:
        yield
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
    """The format a file name stands for, or None: such a file is left alone in a folder.

    A suffix of compression (.gz, .xz, .zst) is left out of account.
    """
    name = content_name(Path(path)).lower()
    return next((file_format for matches, file_format in _NAME_MATCHERS if matches(name)), None)
