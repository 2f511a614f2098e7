"""Which symmetry a tensor has in axes of its own, wherever they lie.

The axes of a group lie along the principal axes of every symmetric matrix that the tensor makes by itself;
only that of a cubic group has none. So a few frames are tried, with the angle about each of the principal
axes found by turning, and the best is refined.
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass

import numpy as np

from sitesym.arrays import FloatArray
from sitesym.audit.arrayspace import array_space
from sitesym.audit.frames import standard_groups
from sitesym.audit.neumann import inversion_sign, subspaces
from sitesym.audit.own_symmetry import Kept, group_of, kept_operations
from sitesym.audit.rotation_search import best_rotation, refined_rotation
from sitesym.groups.symbols import rotation_about
from sitesym.tensors import TensorKind, to_full

#: A frame is found to within a degree: an operation may miss by this fraction of the tensor, or by so many
#: tolerances, until the frame is refined.
_ROUGH, _ROUGH_TOLERANCES = 0.03, 3.0
#: Eigenvalues that differ by less than this fraction of their mean, or so many tolerances, may be equal.
_ISOTROPIC, _ISOTROPIC_TOLERANCES = 0.02, 6.0
_STEP_DEGREES = 1.0
_HALF_TURN = np.diag([1.0, -1.0, -1.0])


@dataclass(frozen=True, eq=False)
class OwnAxes:
    """Operations a tensor keeps, and axes in which it keeps them: rows (3, 3) in the tensor's axes."""

    kept: Kept
    rotation: FloatArray


def symmetry_in_own_axes(kind: TensorKind, coordinates: FloatArray, tolerance: float) -> OwnAxes:
    """The largest group found that leaves a tensor with coordinates (n,) unchanged within a tolerance."""
    rough_tolerance = max(_ROUGH * float(np.linalg.norm(coordinates)), _ROUGH_TOLERANCES * tolerance)
    rough = [
        OwnAxes(kept_operations(kind, _turned(kind, frame, coordinates), rough_tolerance), frame)
        for frame in _frames(kind, coordinates, tolerance)
    ]
    promising = sorted(rough, key=lambda own: -len(own.kept.elements))[:3]
    refined = [_refined(kind, coordinates, tolerance, own) for own in promising]
    return max(refined, key=lambda own: len(own.kept.elements))


def _refined(kind: TensorKind, coordinates: FloatArray, tolerance: float, own: OwnAxes) -> OwnAxes:
    """The frame in which the operations fit best, with those kept there."""
    length = float(np.linalg.norm(coordinates))
    found = refined_rotation(subspaces(kind, group_of(own.kept)), coordinates, own.rotation, length)
    moved = _turned(kind, found.rotation, coordinates)
    return OwnAxes(kept_operations(kind, moved, tolerance), found.rotation)


def _frames(kind: TensorKind, coordinates: FloatArray, tolerance: float) -> Iterator[FloatArray]:
    values, vectors = np.linalg.eigh(_square(kind, coordinates))
    principal = vectors.T * np.sign(np.linalg.det(vectors))
    for first in range(3):
        frame = np.roll(principal, first, axis=0)
        yield frame
        yield from _turned_about_z(kind, coordinates, frame)
    mean, length = float(values.mean()), float(np.linalg.norm(coordinates))
    equal = max(_ISOTROPIC, _ISOTROPIC_TOLERANCES * tolerance / length) * mean
    if values[-1] - values[0] <= equal:
        yield best_rotation(subspaces(kind, standard_groups()["23"]), coordinates).rotation


def _square(kind: TensorKind, coordinates: FloatArray) -> FloatArray:
    """Sum over all index positions of T_i.. T_j.., shape (3, 3), with other weights for each: those of a
    piezoelectric tensor of class 422 add up to a sphere.
    """
    full = to_full(kind, array_space(kind).array(coordinates))
    rows = [np.moveaxis(full, place, 0).reshape(3, -1) for place in range(kind.rank)]
    total: FloatArray = np.sum([weight * row @ row.T for weight, row in enumerate(rows, start=1)], axis=0)
    return total


def _turned_about_z(kind: TensorKind, coordinates: FloatArray, frame: FloatArray) -> Iterator[FloatArray]:
    """The frame turned so that a twofold axis or the normal of a mirror lies along x as well as it can."""
    angles = np.radians(np.arange(0.0, 180.0, _STEP_DEGREES))
    turns = np.array([rotation_about(np.array([0.0, 0.0, 1.0]), float(angle)) for angle in angles]) @ frame
    space = array_space(kind)
    moved = space.rotated(turns, coordinates[:, None])[:, :, 0]
    images = space.rotated(_HALF_TURN[None], moved.T)[0].T
    for sign in {1, inversion_sign(kind)}:
        yield turns[int(np.argmin(np.linalg.norm(sign * images - moved, axis=1)))]


def _turned(kind: TensorKind, rotation: FloatArray, coordinates: FloatArray) -> FloatArray:
    moved: FloatArray = array_space(kind).rotated(rotation[None], coordinates[:, None])[0, :, 0]
    return moved
