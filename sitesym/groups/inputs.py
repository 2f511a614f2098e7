"""What is accepted as operations, a lattice, flags or axes; everything else is a typed error."""

from __future__ import annotations

import numpy as np
from numpy.typing import ArrayLike

from sitesym.arrays import BoolArray, FloatArray, IntArray
from sitesym.errors import AxesError, SitesymError, SymmetryError
from sitesym.tolerances import ORTHOGONAL, SAME_MATRIX


def number_array(values: ArrayLike, error: type[SitesymError] = SymmetryError) -> FloatArray:
    """What numpy reads as numbers, with at least one axis. Raises ``error`` for texts and ragged lists."""
    try:
        given: FloatArray = np.asarray(values, dtype=np.float64)
    except (TypeError, ValueError) as reason:
        raise error(
            "what is given is not an array of numbers",
            value=repr(values)[:200],
            rule="numbers in rows of equal length",
            next_step="correct the array",
        ) from reason
    return np.atleast_1d(given)


def directions(rows: ArrayLike) -> FloatArray:
    """Three directions as unit vectors, shape (3, 3). Raises AxesError where one has no length."""
    given = number_array(rows, AxesError)
    lengths = np.linalg.norm(given, axis=-1, keepdims=True)
    if given.shape != (3, 3) or not np.isfinite(given).all() or not lengths.all():
        raise AxesError(
            "these are not three directions",
            value=repr(given.tolist()),
            rule="rows X, Y, Z, shape (3, 3), finite and none of them zero",
            next_step="give the direction wished for each axis",
        )
    units: FloatArray = given / lengths
    return units


def time_reversal_flags(flags: BoolArray | None, count: int) -> BoolArray:
    """One flag an operation, shape (count,), all false if none are given. Raises SymmetryError."""
    if flags is None:
        return np.zeros(count, dtype=np.bool_)
    given: BoolArray = np.asarray(flags, dtype=np.bool_)
    if given.shape != (count,):
        raise SymmetryError(
            "time-reversal flags and matrices do not belong together",
            value=f"{count} matrices, flags of shape {given.shape}",
            rule="one flag for each matrix",
        )
    return given


def require_orthogonal(cart: FloatArray) -> None:
    """Raises SymmetryError unless all matrices, shape (n, 3, 3), are orthogonal to 1e-8."""
    worst = float(np.abs(cart @ np.swapaxes(cart, -1, -2) - np.eye(3)).max())
    if not worst <= ORTHOGONAL:
        raise SymmetryError(
            "an operation is not orthogonal in the given axes",
            value=f"largest entry of R R^T - 1: {worst:.2e}",
            rule=f"at most {ORTHOGONAL:.0e}",
            next_step="idealise the cell to the symmetry first, or give the lattice of the matrices",
        )


def integer_matrices(rotations: IntArray) -> IntArray:
    """Matrices of any number type as integers. Raises SymmetryError where an entry is none."""
    given = number_array(rotations)
    nearest = np.rint(given)
    if not np.abs(given - nearest).max(initial=0.0) <= SAME_MATRIX:
        raise SymmetryError(
            "an operation in a lattice basis is not an integer matrix",
            value=f"an entry is {float(np.abs(given - nearest).max()):.3g} from the nearest integer",
            rule="lattice vectors go to lattice vectors",
            next_step="give Cartesian matrices with from_cartesian, or use the basis of the lattice",
        )
    integers: IntArray = nearest.astype(np.int64)
    return integers


def lattice_rows(lattice: FloatArray) -> FloatArray:
    """Rows a, b, c, shape (3, 3). Raises SymmetryError unless they are finite and independent."""
    rows = number_array(lattice)
    lengths = np.linalg.norm(rows, axis=-1) if rows.shape == (3, 3) else np.zeros(1)
    if not (np.isfinite(rows).all() and lengths.all() and abs(np.linalg.det(rows)) > 1e-9 * lengths.prod()):
        raise SymmetryError(
            "the lattice vectors do not span a volume",
            value=repr(rows.tolist()),
            rule="rows a, b, c, shape (3, 3), finite and independent",
        )
    return rows


def proper_rotation(rotation: FloatArray) -> FloatArray:
    """New axes as rows, shape (3, 3). Raises AxesError unless they are right-handed and orthonormal."""
    matrix = number_array(rotation, AxesError)
    if (
        matrix.shape != (3, 3)
        or not np.abs(matrix @ matrix.T - np.eye(3)).max() <= ORTHOGONAL
        or np.linalg.det(matrix) < 0
    ):
        raise AxesError(
            "the new axes are not right-handed and orthonormal",
            value=repr(matrix.tolist()),
            rule=f"R (3, 3) with R R^T = 1 to {ORTHOGONAL:.0e} and determinant +1",
            next_step="give the new axes as rows of unit length, in a right-handed order",
        )
    return matrix
