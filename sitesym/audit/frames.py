"""The Cartesian axes a tensor of a crystal may have been given in, and the turns that are tried on them."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from functools import lru_cache
from types import MappingProxyType
from typing import TypeAlias

import numpy as np

from sitesym.arrays import FloatArray, frozen
from sitesym.audit.rotation_words import turn_text
from sitesym.crystals import Crystal, CrystalSymmetry, axes_for, find_symmetry
from sitesym.groups import PointGroup, standard_rotation
from sitesym.groups.symbols import SCHOENFLIES, rotation_about
from sitesym.tolerances import SAME_MATRIX

#: What an audit takes as the crystal.
Subject: TypeAlias = Crystal | CrystalSymmetry | PointGroup


@dataclass(frozen=True, eq=False)
class Frames:
    """Axes of one crystal.

    ``group``: in the file's axes. ``standard``: the same operations in the standard orientation, one shared
    object for each class. ``standard_from_file`` (3, 3): v_standard = R v_file. ``named``: rotations from the
    file's axes, new axes as rows, by name. ``lattice`` (3, 3): rows a, b, c of the conventional cell in the
    file's axes, or None.
    """

    group: PointGroup
    standard: PointGroup
    standard_from_file: FloatArray
    named: Mapping[str, FloatArray]
    lattice: FloatArray | None


def frames_of(subject: Subject) -> Frames:
    """The axes of a crystal, of its symmetry, or of a point group alone (its own axes then count as the
    file's).
    """
    if isinstance(subject, PointGroup):
        own = np.eye(3)
        ieee = standard_rotation(subject)
        return _frames(subject, ieee, {"file": own, "lattice": own, "ieee": ieee}, subject.lattice)
    symmetry = find_symmetry(subject) if isinstance(subject, Crystal) else subject
    lattice = axes_for(symmetry, "lattice").rotation_from_file
    ieee = axes_for(symmetry, "ieee").rotation_from_file
    conventional, cell = symmetry.conventional_lattice, symmetry.crystal.lattice
    named = {
        "file": np.eye(3),
        "lattice": lattice,
        "ieee": ieee,
        "lattice, but c || z, a in the xz plane": _c_along_z(conventional),
        "file's cell, a || x, b in the xy plane": _a_along_x(cell),
        "file's cell, c || z, a in the xz plane": _c_along_z(cell),
    }
    return _frames(symmetry.point_group, ieee, named, conventional)


def _frames(
    group: PointGroup, ieee: FloatArray, named: Mapping[str, FloatArray], lattice: FloatArray | None
) -> Frames:
    distinct: dict[str, FloatArray] = {}
    for name, rotation in named.items():
        shared = name in ("file", "lattice", "ieee")
        if shared or not any(np.abs(rotation - known).max() < SAME_MATRIX for known in distinct.values()):
            distinct[name] = frozen(rotation)
    return Frames(group, _shared(group, ieee), frozen(ieee), MappingProxyType(distinct), lattice)


def _shared(group: PointGroup, ieee: FloatArray) -> PointGroup:
    """A group in the standard orientation: the one object kept for this set of operations, so that everything
    derived from it is computed once.

    Its matrices replace the group's, which differ from them by rounding alone.
    """
    turned = group.rotated(ieee)
    known = standard_groups().get(group.symbol)
    return known if known is not None and _same_operations(turned, known) else turned


@lru_cache(maxsize=1)
def standard_groups() -> Mapping[str, PointGroup]:
    """The 32 classes by symbol, each in the standard orientation."""
    groups = {symbol: PointGroup.from_symbol(symbol) for symbol in SCHOENFLIES}
    return MappingProxyType({s: g.rotated(standard_rotation(g)) for s, g in groups.items()})


def _same_operations(group: PointGroup, other: PointGroup) -> bool:
    if group.order != other.order or group.time_reversal.any():
        return False
    distance = np.abs(group.rotations_cart[:, None] - other.rotations_cart[None]).max(axis=(2, 3))
    return bool((distance.min(axis=1) < SAME_MATRIX).all())


def _a_along_x(cell: FloatArray) -> FloatArray:
    x = cell[0] / np.linalg.norm(cell[0])
    return _completed(x, np.cross(cell[0], cell[1]) * np.sign(np.linalg.det(cell)))


def _completed(x: FloatArray, towards_z: FloatArray) -> FloatArray:
    z = towards_z / np.linalg.norm(towards_z)
    return np.array([x, np.cross(z, x), z])


def _c_along_z(cell: FloatArray) -> FloatArray:
    z = cell[2] / np.linalg.norm(cell[2])
    across = cell[0] - z * (cell[0] @ z)
    return _completed(across / np.linalg.norm(across), z)


@dataclass(frozen=True, eq=False)
class NamedTurn:
    """A turn of axes (3, 3), new axes as rows in the old ones, in words ('' for none)."""

    matrix: FloatArray
    words: str


@lru_cache(maxsize=1)
def tried_turns() -> tuple[NamedTurn, ...]:
    """No turn, then by angle: turns by 30 and 60 degrees about x, y, z, by 45 degrees about z, and
    the 23 of the cube.

    They contain the permutations of axes, unique axis a, b or c, obverse against reverse (180 degrees about
    z).
    """
    cube = list(PointGroup.from_symbol("432").rotations_cart)
    finer = [_about(axis, angle) for axis in (2, 1, 0) for angle in range(30, 360, 30) if angle % 90]
    eighths = [_about(2, angle) for angle in (45, 135, 225, 315)]
    by_angle = sorted([*cube, *finer, *eighths], key=lambda matrix: -round(float(np.trace(matrix)), 9))
    return tuple(NamedTurn(frozen(matrix), turn_words(matrix)) for matrix in by_angle)


def turn_words(matrix: FloatArray) -> str:
    """A turn of axes in words: ``turned by 60 degrees about [001]``; '' for none."""
    turn = turn_text(matrix)
    return f"turned by {turn}" if turn else ""


def _about(axis: int, degrees: float) -> FloatArray:
    """Turn of axes about x, y or z, new axes as rows."""
    return rotation_about(np.eye(3)[axis], -float(np.radians(degrees)))
