"""What a command is about: a crystal from a file or a point group by its symbol, and the axes asked for."""

from __future__ import annotations

import re
from collections.abc import Callable
from dataclasses import dataclass, replace
from typing import Any, TypeVar

import click
import numpy as np

from sitesym.arrays import FloatArray
from sitesym.choices import DEFAULT_FINDER, ReadingChoices
from sitesym.crystals import (
    AXES_NAMES,
    CrystalSymmetry,
    axes_for,
    examined_symmetry,
    read_crystal,
)
from sitesym.crystals.axes import IEEE_EDITION, given_frame
from sitesym.crystals.native_output import native_output_kept
from sitesym.errors import UsageError
from sitesym.groups import PointGroup, standard_rotation
from sitesym.reports.sites import crystal_entry, crystal_remarks

_Command = TypeVar("_Command", bound=Callable[..., Any])


@dataclass(frozen=True, eq=False)
class Subject:
    """A point group in the Cartesian axes of its file, or in the lattice axes of its symbol."""

    group: PointGroup
    symmetry: CrystalSymmetry | None = None

    @property
    def crystal(self) -> dict[str, Any] | None:
        """The entry ``crystal`` of documents."""
        return None if self.symmetry is None else crystal_entry(self.symmetry)

    @property
    def remarks(self) -> list[str]:
        """The entry ``remarks`` of documents."""
        return [] if self.symmetry is None else crystal_remarks(self.symmetry)

    def axes(self, name: str, given: FloatArray | None = None) -> dict[str, Any]:
        """The entry ``axes`` of documents: name, edition, note, and rotation from the subject's own axes.

        Raises UsageError for axes the subject does not have, AxesError for a matrix that is no frame.
        """
        if self.symmetry is None:
            return _axes_of_symbol(self.group, name, given)
        axes = axes_for(self.symmetry, name, given)
        rotation = (axes.rotation_from_file + 0.0).tolist()
        return {
            "name": name,
            "edition": axes.edition or None,
            "note": axes.note,
            "rotation_from_file": rotation,
        }


def subject_arguments(command: _Command) -> _Command:
    """The argument FILE and the option ``--group``, of which `subject_of` takes one."""
    by_symbol = click.option(
        "--group", "symbol", metavar="SYMBOL", help="A point group instead of a file: 31m, -42m, 112, D3h ..."
    )
    return click.argument("file", required=False)(by_symbol(command))


def subject_of(
    file: str | None,
    symbol: str | None,
    tolerance_angstrom: float,
    finder: str = DEFAULT_FINDER,
    ladder: bool = False,
    reading: ReadingChoices | None = None,
) -> Subject:
    """The crystal of a file or the group of a symbol; ``finder`` and ``ladder`` as in `examined_symmetry`,
    ``reading`` as in `read_crystal`.

    Raises UsageError unless exactly one of them is given, and the errors of reading and of symmetry finding.
    """
    if (file is None) == (symbol is None):
        raise UsageError(
            "either a file or a point group is needed",
            "both" if file else "neither",
            "FILE or --group SYMBOL, not both",
            "give one of them",
        )
    if symbol is not None:
        _require_no_file_options(finder, reading)
        return Subject(PointGroup.from_symbol(symbol))
    symmetry = symmetry_of_file(str(file), tolerance_angstrom, finder, ladder, reading)
    return Subject(symmetry.point_group, symmetry)


def _require_no_file_options(finder: str, reading: ReadingChoices | None) -> None:
    """Raises UsageError for options that a point group would ignore."""
    given = [f"--{name.replace('_', '-')}" for name, value in (reading or {}).items() if value]
    if finder != DEFAULT_FINDER:
        given.append("--finder")
    if given:
        raise UsageError(
            "a point group is not read from a file",
            ", ".join(given),
            "these options go with FILE",
            "leave them out, or give FILE instead of --group",
        )


def symmetry_of_file(
    file: str, tolerance_angstrom: float, finder: str, ladder: bool, reading: ReadingChoices | None = None
) -> CrystalSymmetry:
    """The symmetry of the one crystal of a file; what the finder prints is kept as its messages.

    Raises the errors of reading and of symmetry finding.
    """
    crystal = read_crystal(file, **(reading or {}))
    with native_output_kept() as printed:
        symmetry = examined_symmetry(crystal, tolerance_angstrom, finder, ladder)
    found = replace(symmetry.found, messages=(*printed, *symmetry.found.messages))
    return replace(symmetry, found=found)


def read_matrix(text: str) -> FloatArray:
    """Nine numbers, separated by spaces, commas or semicolons, as rows x, y, z. Raises UsageError.

    >>> read_matrix("0 1 0; -1 0 0; 0 0 1").tolist()
    [[0.0, 1.0, 0.0], [-1.0, 0.0, 0.0], [0.0, 0.0, 1.0]]
    """
    try:
        numbers = [float(number) for number in re.split(r"[\s,;]+", text.strip(" ,;\n"))]
        return np.array(numbers).reshape(3, 3)
    except ValueError as error:
        raise UsageError(
            "the rotation is not nine numbers",
            text,
            "rows x, y, z of the new axes, such as '0 1 0; -1 0 0; 0 0 1'",
            "correct the matrix",
        ) from error


def _axes_of_symbol(group: PointGroup, name: str, given: FloatArray | None) -> dict[str, Any]:
    edition = ""
    if name == "given" and given is not None:
        rotation, note = given_frame(given)
    elif name == "lattice":
        rotation, note = np.eye(3), "a || x, b in the xy plane, right-handed"
    elif name == "ieee":
        rotation, edition = standard_rotation(group), IEEE_EDITION
        note = "found from the operations; senses of axes are open without data"
    else:
        raise UsageError(
            "a point group without a file does not have these axes",
            name,
            f"axes are {', '.join(AXES_NAMES)}; 'file' needs a file, 'given' needs --rotation",
            "use --axes ieee or lattice",
        )
    return _axes_entry(name, edition, note, rotation)


def _axes_entry(name: str, edition: str, note: str, rotation: FloatArray) -> dict[str, Any]:
    matrix = (rotation + 0.0).tolist()  # adding zero turns -0.0 into 0.0
    return {"name": name, "edition": edition or None, "note": note, "rotation_from_file": matrix}
