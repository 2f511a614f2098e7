"""Reading a structure file: the format by its name or content, and which of its structures are wanted.

CIF goes through gemmi, POSCAR is read here, all else goes through ASE.
"""

from __future__ import annotations

import os
from collections.abc import Callable, Iterator
from contextlib import contextmanager
from functools import partial
from itertools import chain, islice
from pathlib import Path
from typing import Final, TypeAlias, Unpack

from sitesym.choices import ReadingChoices, frame_index, refuse_block, refuse_symmetry_from
from sitesym.crystals.ase_reader import Frame, detected_format, read_frames
from sitesym.crystals.cif import blocks_with_atoms, cif_document, crystal_from_block
from sitesym.crystals.crystal import Crystal, Source
from sitesym.crystals.files import LARGEST_FILE_MEGABYTES, content, plain_file
from sitesym.crystals.poscar import read_poscar
from sitesym.crystals.vacuum import vacuum_remarks
from sitesym.errors import EmptyStructureError, ReadingError, SitesymError, UnknownFormatError
from sitesym.formats import FORMATS, named_format

#: One structure of a file: its name in the file, and what makes the crystal or raises why it cannot be made.
Part: TypeAlias = tuple[str, Callable[[], Crystal]]

#: So many structures of a file are named where one was expected.
_NAMED: Final = 6


def read_crystal(
    path: str | os.PathLike[str], file_format: str | None = None, **choices: Unpack[ReadingChoices]
) -> Crystal:
    """The one structure of a file; ``choices`` are those of `ReadingChoices`.

    ``file_format`` (one of `FORMATS`) overrides the file name. Raises ReadingError and its subclasses, also
    when the file holds several structures: then they are named, and `read_crystals` gives them all; and
    UsageError for a choice that means nothing for the format.
    """
    parts = list(islice(_parts(path, file_format, choices, refuse_symmetry_from), _NAMED + 1))
    if len(parts) > 1:
        names = [name for name, _ in parts[:_NAMED]]
        raise ReadingError(
            "the file holds several structures",
            "; ".join((*names, "...") if len(parts) > _NAMED else names),
            "one structure, where one is asked for",
            "choose one with --frame (last or its number) or --block (its name)",
            str(path),
        )
    return _made(path, parts[0][1], choices)


def read_crystals(
    path: str | os.PathLike[str], file_format: str | None = None, **choices: Unpack[ReadingChoices]
) -> tuple[Crystal, ...]:
    """All structures of a file: data blocks of a CIF, frames of a trajectory, rows of a database.

    Raises ReadingError and its subclasses for the first that is faulty; the error names the file. UsageError
    for a choice that means nothing for the format.
    """
    parts = _parts(path, file_format, choices, refuse_symmetry_from)
    return tuple(_made(path, make, choices) for _, make in parts)


def read_each(
    path: str | os.PathLike[str], file_format: str | None = None, **choices: Unpack[ReadingChoices]
) -> Iterator[tuple[str, Crystal | SitesymError]]:
    """Name and crystal of each structure of a file, or the error in its place, so that one faulty data block
    or frame does not hide the others. Where the format tells frames one by one, only two are held.

    One set of choices serves files of many formats: ``symmetry_from`` counts in a CIF and nowhere else.
    Raises ReadingError where the file as a whole cannot be read. What cannot be read after some of its
    structures ends them with the error.
    """
    parts, number = _parts(path, file_format, choices), 0
    while True:
        try:
            name, make = next(parts)
        except StopIteration:
            return
        except SitesymError as error:
            if number == 0:
                raise
            yield f"structure {number + 1}", error
            return
        number += 1
        try:
            yield name, _made(path, make, choices)
        except SitesymError as error:
            yield name, error


def _parts(
    path: str | os.PathLike[str],
    file_format: str | None,
    choices: ReadingChoices,
    refuse: Callable[[ReadingChoices, str], None] | None = None,
) -> Iterator[Part]:
    """The structures, one or more; ``refuse`` objects to choices that mean nothing for a format."""
    location = Path(path)
    with _errors_of(path):
        chosen = _format(location, file_format)
        index = frame_index(choices.get("frame"))
        if chosen == "cif":
            yield from _selected(_cif_parts(location, choices), index)
            return
        refuse_block(choices, chosen)
        if refuse is not None:
            refuse(choices, chosen)
        if chosen == "vasp":
            yield from _selected([_poscar_part(location, _limit(choices))], index)
        else:
            yield from _ase_parts(location, chosen, index, _limit(choices))


def _format(path: Path, named: str | None) -> str:
    if path.is_dir():
        raise ReadingError(
            "this is a folder", path.name, "one structure file", "name a file, or screen the folder"
        )
    if not path.is_file():
        raise ReadingError(
            "there is no such file", path.name, "a path to a structure file", "look at the path"
        )
    chosen = named or named_format(path) or detected_format(path)
    if chosen not in FORMATS:
        raise UnknownFormatError(
            "the format is not known", chosen, f"one of {', '.join(FORMATS)}", "name one of these formats"
        )
    return chosen


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


def _ase_parts(path: Path, chosen: str, index: int | None, limit: float) -> Iterator[Part]:
    with plain_file(path, limit) as plain:
        frames = read_frames(plain, chosen, index)
        for name, (atoms, remarks) in _named_frames(frames, index):
            yield name, partial(Crystal.from_ase, atoms, Source(path.name, chosen, name), remarks)


def _named_frames(frames: Iterator[Frame], index: int | None) -> Iterator[tuple[str, Frame]]:
    """Frames with their names: the one chosen by its index, an only one without a name, else numbered."""
    first = next(frames)
    if index is not None:
        yield "last structure" if index == -1 else f"structure {index + 1}", first
        return
    try:
        second = next(frames, None)
    except ReadingError:
        yield "structure 1", first
        raise
    if second is None:
        yield "", first
        return
    for number, frame in enumerate(chain((first, second), frames), start=1):
        yield f"structure {number}", frame


def _made(path: str | os.PathLike[str], make: Callable[[], Crystal], choices: ReadingChoices) -> Crystal:
    """The crystal with atoms told apart as asked for, and a warning of vacuum."""
    with _errors_of(path):
        crystal = make().distinguished_by(*choices.get("distinguish", ()))
        vacuum = vacuum_remarks(crystal.lattice, crystal.positions_frac)
        return crystal.with_remarks(*vacuum) if vacuum else crystal


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
