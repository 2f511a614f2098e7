"""The standard orientation of a point group: which symmetry direction lies along x, y, z.

Rules of IEEE Std 176-1978 as far as the operations decide them: unique axis along y in 2, m, 2/m; twofold
axis or mirror normals along x, y, z in the orthorhombic classes with the twofold axis of mm2 along z; the
main axis along z; then a twofold axis along x (422, 32, 622, -42m, -3m, 4/mmm, 6/mmm) or a mirror
perpendicular to x (4mm, 3m, 6mm, -6m2); cubic axes along x, y, z. What symmetry leaves open follows the
preferred directions of the caller, usually those of the conventional cell.
"""

from __future__ import annotations

from itertools import permutations, product

import numpy as np

from sitesym.arrays import FloatArray
from sitesym.groups.inputs import directions
from sitesym.groups.pointgroup import PointGroup


def standard_rotation(group: PointGroup, preferred: FloatArray | None = None) -> FloatArray:
    """Rows X, Y, Z of the standard orientation in the axes of ``group.rotations_cart``, shape (3, 3),
    right-handed.

    ``preferred`` has as rows the directions wished for X, Y, Z (default: the present axes); it decides what
    symmetry leaves open, including the senses. Returns R with v_standard = R v. Raises AxesError for wishes
    that are no directions.
    """
    wishes = np.eye(3) if preferred is None else directions(preferred)
    match group.system:
        case "triclinic" | "non-crystallographic":
            return _orthonormal(wishes[2], wishes[0])
        case "monoclinic":
            return _monoclinic(group, wishes)
        case "orthorhombic" if group.symbol != "mm2":
            return _nearest_assignment(_axes(group, 2), wishes)
        case "cubic":
            return _nearest_assignment(_axes(group, 4) if len(_axes(group, 4)) else _axes(group, 2), wishes)
        case _:
            main = _nearest(_main_axes(group), wishes[2])
            return _orthonormal(main, _x_direction(group, main, wishes))


def _monoclinic(group: PointGroup, wishes: FloatArray) -> FloatArray:
    """Unique axis along y; z as wished, or along the wished x where the unique axis lies along the wished
    z.
    """
    unique = _nearest(_axes(group, 2), wishes[1])
    towards_z = wishes[2] if abs(wishes[2] @ unique) < 0.9 else wishes[0]
    z = towards_z - unique * (towards_z @ unique)
    z = z / np.linalg.norm(z)
    return np.array([np.cross(unique, z), unique, z])


def _main_axes(group: PointGroup) -> FloatArray:
    """The axis of highest order; in mm2 the twofold axis, not a mirror normal."""
    rotations = [e for e in group.elements if e.axis is not None and not (e.improper and e.order == 2)]
    highest = max(e.order for e in rotations)
    return np.array([e.axis for e in rotations if e.order == highest])


def _x_direction(group: PointGroup, main: FloatArray, wishes: FloatArray) -> FloatArray:
    """A direction for x: along a twofold axis across the main one, else along a mirror normal, else as
    wished.
    """
    across = [e for e in group.elements if e.axis is not None and e.order == 2 and abs(e.axis @ main) < 0.1]
    twofold = np.array([e.axis for e in across if not e.improper])
    normals = np.array([e.axis for e in across if e.improper])
    candidates = normals if group.symbol == "-6m2" or not len(twofold) else twofold
    return _nearest(candidates, wishes[0]) if len(candidates) else wishes[0]


def _axes(group: PointGroup, order: int) -> FloatArray:
    """Distinct axes (mirror normals for order 2 included) of elements of one order, shape (k, 3)."""
    distinct: list[FloatArray] = []
    for element in group.elements:
        axis = element.axis
        if (
            axis is not None
            and element.order == order
            and not any(abs(axis @ known) > 0.999 for known in distinct)
        ):
            distinct.append(axis)
    return np.array(distinct)


def _nearest(axes: FloatArray, wish: FloatArray) -> FloatArray:
    """The axis, with its sense, that lies nearest to the wished direction; the first of equals."""
    overlaps = np.round(axes @ wish, 9)
    best = int(np.argmax(np.abs(overlaps)))
    nearest: FloatArray = axes[best] * (1.0 if overlaps[best] >= 0 else -1.0)
    return nearest


def _orthonormal(z: FloatArray, towards_x: FloatArray) -> FloatArray:
    """Right-handed rows x, y, z with x as near to the given direction as z allows."""
    x = towards_x - z * (towards_x @ z)
    if np.linalg.norm(x) < 1e-6:
        x = np.eye(3)[int(np.argmin(np.abs(z)))]
        x = x - z * (x @ z)
    x = x / np.linalg.norm(x)
    return np.array([x, np.cross(z, x), z])


def _nearest_assignment(axes: FloatArray, wishes: FloatArray) -> FloatArray:
    """The right-handed way of calling three orthogonal axes x, y, z that lies nearest to the wishes."""
    candidates = [
        axes[list(sequence)] * np.array(signs)[:, None]
        for sequence in permutations(range(3))
        for signs in product((1.0, -1.0), repeat=3)
    ]
    proper = [c for c in candidates if np.linalg.det(c) > 0]
    return max(proper, key=lambda c: round(float((c * wishes).sum()), 9))
