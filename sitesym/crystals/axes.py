"""Named Cartesian axes of a crystal, each with the rotation from the axes of the file.

`file`: the file's own. `lattice`: conventional cell, a || x, b in the xy plane. `ieee`: the orientation of
IEEE Std 176-1978; the operations decide what they can, the lattice rules of the standard the rest. `given`:
the user's.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from itertools import pairwise

import numpy as np
from numpy.typing import ArrayLike

from sitesym.arrays import FloatArray, frozen
from sitesym.crystals.spglib_finder import niggli_lattice
from sitesym.crystals.symmetry import CrystalSymmetry
from sitesym.errors import AxesError, UsageError
from sitesym.groups.orientation import standard_rotation

AXES_NAMES = ("file", "lattice", "ieee", "given")
IEEE_EDITION = "IEEE Std 176-1978"

_SENSE_NOTE = (
    "the standard fixes the senses of the axes by the signs of measured constants; without data they are "
    "open, and those of the cell are taken"
)
# Rounded matrices of users are accepted up to this deviation from orthogonality, then made exact.
_GIVEN_ORTHOGONAL = 1e-3
# Relative difference of lengths below which the length rules of the standard cannot order them.
_EQUAL_LENGTHS = 1e-4


@dataclass(frozen=True, eq=False)
class Axes:
    """A right-handed Cartesian frame.

    ``rotation_from_file`` R (3, 3): the new axes as rows in the file's axes, v_new = R v_file. ``edition``:
    of the standard the name refers to, or empty. ``note``: what fixed the axes and what stays open.
    ``lattice`` (3, 3): the conventional cell vectors as rows in these axes, angstrom.
    """

    name: str
    edition: str
    rotation_from_file: FloatArray
    note: str
    lattice: FloatArray


def axes_for(symmetry: CrystalSymmetry, name: str, given: ArrayLike | None = None) -> Axes:
    """The axes of this name; ``given`` is the (3, 3) matrix for `given`, new axes as rows in the file's axes.

    Raises UsageError for an unknown name or a missing matrix, AxesError for a matrix that is no
    right-handed frame.
    """
    if (name == "given") != (given is not None):
        raise UsageError(
            "a matrix of axes goes with the name 'given' and only with it",
            name,
            "give both or neither",
            "name the axes 'given' and add the matrix",
        )
    edition = ""
    match name:
        case "file":
            rotation, note = np.eye(3), symmetry.crystal.frame_note
        case "lattice":
            rotation = _lattice_frame(symmetry.conventional_lattice)
            note = "conventional cell, a || x, b in the xy plane, right-handed"
        case "ieee":
            wishes, note = _lattice_wishes(symmetry)
            rotation, edition = standard_rotation(symmetry.point_group, wishes), IEEE_EDITION
        case "given" if given is not None:
            rotation, note = given_frame(given)
        case _:
            raise UsageError("unknown axes", name, f"one of {', '.join(AXES_NAMES)}", "name one of these")
    lattice = symmetry.conventional_lattice @ rotation.T
    return Axes(name, edition, frozen(rotation), note, frozen(lattice))


def _lattice_frame(lattice: FloatArray) -> FloatArray:
    x = lattice[0] / np.linalg.norm(lattice[0])
    normal = np.cross(lattice[0], lattice[1])
    z = normal / np.linalg.norm(normal)
    return np.array([x, np.cross(z, x), z])


def given_frame(given: ArrayLike) -> tuple[FloatArray, str]:
    """The rotation (3, 3) made of a user's rows x, y, z, and the note on what was done to them.

    Raises AxesError for anything that is no right-handed orthogonal frame; lengths are free.
    """
    try:
        matrix = np.asarray(given, dtype=np.float64)
    except (TypeError, ValueError) as error:
        raise _axes_error("the axes are not 3 x 3 numbers", str(given)) from error
    if matrix.shape != (3, 3) or not np.isfinite(matrix).all():
        raise _axes_error("the axes are not 3 x 3 finite numbers", np.array2string(matrix, separator=", "))
    text = " ".join(f"[{' '.join(f'{entry:g}' for entry in row)}]" for row in matrix)
    lengths = np.linalg.norm(matrix, axis=1)
    if lengths.min() == 0.0:
        raise _axes_error("an axis has no length", text)
    rows = matrix / lengths[:, None]
    deviation = float(np.abs(rows @ rows.T - np.eye(3)).max())
    if deviation > _GIVEN_ORTHOGONAL:
        raise _axes_error(f"the axes are not orthogonal (largest cosine {deviation:.3g})", text)
    if np.linalg.det(rows) < 0.0:
        raise _axes_error("the axes are left-handed", text)
    left, _, right = np.linalg.svd(rows)
    note = f"given by the user; rows scaled to unit length, orthogonality error {deviation:.1e} removed"
    return left @ right, note


def _axes_error(what: str, value: str) -> AxesError:
    return AxesError(
        what, value, "three orthogonal rows x, y, z in the file's axes, right-handed", "correct the matrix"
    )


def _lattice_wishes(symmetry: CrystalSymmetry) -> tuple[FloatArray, str]:
    """Directions (rows X, Y, Z) that the lattice rules of the standard ask for, and the note that says so."""
    group, lattice = symmetry.point_group, symmetry.conventional_lattice
    ordered = lattice[:0]
    match group.system:
        case "triclinic":
            cell = _triclinic_cell(lattice)
            wishes, ordered = _from_cell(cell), np.array(cell)
            rule = "reduced cell with c < a < b, alpha and beta obtuse, Z || c, Y normal to (010)"
        case "monoclinic":
            cell = _monoclinic_cell(lattice, _unique_axis(symmetry))
            wishes, ordered = _from_cell(cell), np.array(cell)[[0, 2]]
            rule = "unique axis || Y, shortest c < a across it, beta obtuse, Z || c"
        case "orthorhombic" if group.symbol == "mm2":
            wishes, rule = _mm2_wishes(lattice, group.polar_directions[0]), "twofold axis || Z, then a < b"
            ordered = wishes[:2]
        case "orthorhombic":
            order = np.argsort(np.linalg.norm(lattice, axis=1), kind="stable")
            wishes, rule = _right_handed(lattice[order[[1, 2, 0]]]), "c < a < b, X || a, Y || b, Z || c"
            ordered = lattice
        case "cubic":
            wishes, rule = lattice, "X, Y, Z || a, b, c"
        case _:
            wishes, rule = _lattice_frame(lattice), "main axis || Z; X as the operations fix it, else || a"
    return wishes, f"{rule}; {_SENSE_NOTE}{_equal_length_note(ordered)}"


def _equal_length_note(ordered: FloatArray) -> str:
    """A warning where cell vectors (rows) that the rules order by length are equally long."""
    lengths = sorted(np.linalg.norm(ordered, axis=1))
    if any(longer - shorter < _EQUAL_LENGTHS * longer for shorter, longer in pairwise(lengths)):
        return "; two cell edges are equal within 0.01 %, so their order is open"
    return ""


def _from_cell(cell: Sequence[FloatArray]) -> FloatArray:
    """Z || c, Y normal to the plane of c and a (towards b), X = Y x Z, for cell vectors a, b, c."""
    a, _, c = cell
    y = np.cross(c, a)
    y, z = y / np.linalg.norm(y), c / np.linalg.norm(c)
    return np.array([np.cross(y, z), y, z])


def _triclinic_cell(lattice: FloatArray) -> tuple[FloatArray, FloatArray, FloatArray]:
    """Reduced cell called c < a < b by length, alpha and beta not acute, right-handed."""
    reduced = niggli_lattice(lattice)
    shortest, middle, longest = reduced[np.argsort(np.linalg.norm(reduced, axis=1), kind="stable")]
    a = -middle if middle @ shortest > 0.0 else middle
    b = -longest if longest @ shortest > 0.0 else longest
    if np.linalg.det([a, b, shortest]) < 0.0:
        # Reversing all three keeps the angles and changes the hand.
        return -a, -b, -shortest
    return a, b, shortest


def _unique_axis(symmetry: CrystalSymmetry) -> int:
    """Index of the conventional cell vector along the twofold axis or mirror normal."""
    axis = next(element.axis for element in symmetry.point_group.elements if element.axis is not None)
    directions = (
        symmetry.conventional_lattice / np.linalg.norm(symmetry.conventional_lattice, axis=1)[:, None]
    )
    return int(np.argmax(np.abs(directions @ axis)))


def _monoclinic_cell(lattice: FloatArray, unique: int) -> tuple[FloatArray, FloatArray, FloatArray]:
    """Cell with b along the unique axis, c < a shortest across it, beta not acute, right-handed."""
    c, a = (lattice[index] for index in range(3) if index != unique)
    while True:
        if c @ c > a @ a:
            c, a = a, c
        steps = np.rint((a @ c) / (c @ c))
        if steps == 0.0:
            break
        a = a - steps * c
    if a @ c > 0.0:
        a = -a
    b = lattice[unique] * np.sign(np.linalg.det([a, lattice[unique], c]))
    return a, b, c


def _mm2_wishes(lattice: FloatArray, polar: FloatArray) -> FloatArray:
    """The cell vector along the twofold axis as Z, the shorter of the others as X."""
    overlap = np.abs(lattice @ polar) / np.linalg.norm(lattice, axis=1)
    main = int(np.argmax(overlap))
    shorter, longer = sorted(
        (i for i in range(3) if i != main), key=lambda i: float(np.linalg.norm(lattice[i]))
    )
    return _right_handed(lattice[[shorter, longer, main]])


def _right_handed(rows: FloatArray) -> FloatArray:
    """The rows, the second reversed where they are left-handed."""
    signs = np.array([1.0, np.sign(np.linalg.det(rows)), 1.0])
    handed: FloatArray = rows * signs[:, None]
    return handed
