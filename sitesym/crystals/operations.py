"""Space-group operations in the basis of a cell: whether they are a group, fit the cell, and their text."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from sitesym.arrays import FloatArray, IntArray
from sitesym.errors import SpaceGroupStatementError


@dataclass(frozen=True, eq=False)
class StatedOperations:
    """``rotations`` (n, 3, 3), ``translations`` (n, 3) in the basis of the file's cell; what stated them.

    ``time_reversals`` (n,) of 1 and -1, where the file gives magnetic operations.
    """

    rotations: IntArray
    translations: FloatArray
    stated_by: str
    time_reversals: IntArray | None = None


def xyz_text(rotation: IntArray, translation: FloatArray) -> str:
    """An operation as in a CIF, such as -y,x-y,z+1/3: rotation (3, 3), translation (3,) in whole 24ths."""
    import gemmi

    operation = gemmi.Op()
    operation.rot = (rotation * operation.DEN).tolist()
    operation.tran = [round(float(step) * operation.DEN) for step in translation]
    return str(operation.triplet())


def check_closed(rotations: IntArray, translations: FloatArray) -> None:
    """Every product of two operations (n, 3, 3), (n, 3) is listed, lattice translations aside; else
    SpaceGroupStatementError."""
    count = len(rotations)
    shifts = np.rint(translations * 24).astype(np.int64) % 24
    # One product of floats (small whole numbers, so exact) is far faster than many of integers.
    rows = rotations.astype(np.float64).reshape(-1, 3)
    columns = np.concatenate([rotations.transpose(1, 0, 2).reshape(3, -1), shifts.T], axis=1)
    both = (rows @ columns).astype(np.int64).reshape(count, 3, -1)
    products = both[:, :, : 3 * count].reshape(count, 3, count, 3).transpose(0, 2, 1, 3).reshape(-1, 3, 3)
    moved = (both[:, :, 3 * count :].transpose(0, 2, 1) + shifts[:, None, :]).reshape(-1, 3) % 24
    missing = ~np.isin(operation_codes(products, moved), operation_codes(rotations, shifts))
    if missing.any():
        raise SpaceGroupStatementError(
            "the listed operations are not a group",
            f"{int(missing.sum())} of {count * count} products of the {count} operations are not listed",
            "the product of two operations is in the list",
            "complete the list of operations",
        )


def metric_misfit(rotations: IntArray, lattice: FloatArray) -> float:
    """Largest change of the metric tensor a.b under any rotation, relative to the longest edge squared."""
    metric = lattice @ lattice.T
    matrices = rotations.astype(np.float64)
    images = np.swapaxes(matrices, 1, 2) @ metric @ matrices
    edges = np.sqrt(metric.diagonal())
    scale = edges[:, None] * edges
    return float((np.abs(images - metric) / scale).max())


def cell_text(lattice: FloatArray) -> str:
    """Lengths in angstrom and angles in degrees of a cell (rows)."""
    edges = np.linalg.norm(lattice, axis=1)
    cosines = [lattice[i] @ lattice[j] / (edges[i] * edges[j]) for i, j in ((1, 2), (0, 2), (0, 1))]
    return " ".join(f"{value:.5g}" for value in (*edges, *np.degrees(np.arccos(cosines))))


def operation_codes(rotations: IntArray, shifts: IntArray) -> IntArray:
    """(n,) one whole number for each operation: digits of W (offset 20, base 41) and of 24 w in 0 ... 23."""
    digits = np.clip(rotations.reshape(-1, 9) + 20, 0, 40) @ (41 ** np.arange(9))
    codes: IntArray = digits * 24**3 + shifts @ np.array([1, 24, 24**2])
    return codes
