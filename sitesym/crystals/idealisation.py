"""What it takes to make a crystal's symmetry exact: strain of the cell, shifts of atoms, each operation.

A finder accepts an operation when it carries atoms near atoms and the cell nearly onto itself. How near is
measured here, with the positions and the cell as they were read.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from sitesym.arrays import FloatArray, IntArray, frozen
from sitesym.crystals.crystal import Crystal
from sitesym.crystals.found import FoundSymmetry


@dataclass(frozen=True, eq=False)
class Idealisation:
    """What was changed to make the symmetry exact, and how far each operation is from being so.

    ``largest_strain``: of the cell when it was idealised, no unit. ``orthogonality_error``: largest entry of
    R R^T - 1 over the operations before that. ``largest_shift_angstrom``: of an atom.

    One entry for each rotation part of the setting (``point_rotations``), shape (k,):
    ``operation_displacements_angstrom``, the largest distance between the image of an atom and the atom it
    stands for, both as read; ``operation_strains``, the largest change of length of the cell under the
    operation. In a supercell the displacement is that of the mean over its translations.
    """

    largest_strain: float
    orthogonality_error: float
    largest_shift_angstrom: float
    operation_displacements_angstrom: FloatArray
    operation_strains: FloatArray


def idealisation_of(
    crystal: Crystal, found: FoundSymmetry, measured: FloatArray, ideal: FloatArray
) -> Idealisation:
    """The report for a conventional cell as ``measured`` and made ``ideal``, both (3, 3) rows, angstrom."""
    columns = measured.T
    cart = columns @ found.setting.point_rotations @ np.linalg.inv(columns)
    shifts = found.conventional_positions - (
        crystal.positions_frac @ found.transformation.T + found.origin_shift
    )
    stretches = np.linalg.svd(np.linalg.solve(measured, ideal), compute_uv=False)
    return Idealisation(
        float(np.abs(stretches - 1.0).max()),
        float(np.abs(cart @ np.swapaxes(cart, 1, 2) - np.eye(3)).max()),
        float(np.linalg.norm(shifts @ ideal, axis=1).max()),
        frozen(_operation_displacements(found, shifts, measured)),
        frozen(np.abs(np.linalg.svd(cart, compute_uv=False) - 1.0).max(axis=1)),
    )


def nearest_symmetric_lattice(lattice: FloatArray, rotations: IntArray) -> FloatArray:
    """The nearest cell (rows) that the rotations leave unchanged: mean metric, turned as little as
    possible."""
    metric = np.mean(np.swapaxes(rotations, 1, 2) @ (lattice @ lattice.T) @ rotations, axis=0)
    upper = np.linalg.cholesky(metric).T
    # lattice.T = turn @ upper up to the strain; the orthogonal factor of the polar decomposition is the turn.
    left, _, right = np.linalg.svd(lattice.T @ np.linalg.inv(upper))
    ideal: FloatArray = (left @ right @ upper).T
    return ideal


def _operation_displacements(found: FoundSymmetry, shifts: FloatArray, lattice: FloatArray) -> FloatArray:
    """(k,) angstrom. With x = y - s, y ideal and W y_i + w = y_j: the distance is that of s_j from W s_i."""
    setting = found.setting
    count = int(found.primitive_atoms.max()) + 1
    _, first = np.unique(found.primitive_atoms, return_index=True)
    sums = np.stack([np.bincount(found.primitive_atoms, column, count) for column in shifts.T], axis=1)
    mean = sums / np.bincount(found.primitive_atoms, minlength=count)[:, None]
    positions = found.conventional_positions[first]
    to_primitive = np.linalg.inv(setting.primitive_basis)
    displacements = np.zeros(len(setting.point_rotations))
    for index, rotation in enumerate(setting.point_rotations):
        operation = np.argmax(setting.point_indices == index)
        images = positions @ rotation.T + setting.translations[operation]
        difference = (images[:, None] - positions[None]) @ to_primitive
        target = np.abs(difference - np.rint(difference)).sum(axis=2).argmin(axis=1)
        moved = (mean[target] - mean @ rotation.T) @ lattice
        displacements[index] = np.linalg.norm(moved, axis=1).max()
    return displacements
