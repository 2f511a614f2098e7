"""What follows from operations alone, computed once for each set of operations.

A space-group setting has one list of integer operations, whatever crystal it is found in. Its verdicts,
counts and symbols, and its polar directions in the basis of the conventional cell, are kept by these exact
operations; a crystal adds its cell and its atoms.
"""

from __future__ import annotations

from dataclasses import dataclass
from functools import lru_cache

import numpy as np

from sitesym.arrays import FloatArray, frozen
from sitesym.crystals.found import SpaceGroupSetting
from sitesym.crystals.idealisation import nearest_symmetric_lattice
from sitesym.crystals.spglib_finder import number_of_operations
from sitesym.groups import PointGroup
from sitesym.screening.columns import VERDICTS, Row, count_column
from sitesym.tensors import independent_count, kind


@dataclass(frozen=True, eq=False)
class GroupFacts:
    """``cells``: columns that depend on the point group alone. ``polar_directions_frac`` (k, 3): vectors of
    the conventional cell, in its basis, that no operation changes, k = 0 to 3."""

    cells: Row
    polar_directions_frac: FloatArray


def facts_of(setting: SpaceGroupSetting, properties: tuple[str, ...]) -> GroupFacts:
    """Facts of the point group of a setting; equal operations share one object."""
    return _facts(setting.point_rotations.tobytes(), properties)


@lru_cache(maxsize=1024)
def _facts(rotation_bytes: bytes, properties: tuple[str, ...]) -> GroupFacts:
    rotations = np.frombuffer(rotation_bytes, dtype=np.int64).reshape(-1, 3, 3)
    # Counts and symbols do not depend on the lengths of the cell: any lattice with the symmetry does.
    lattice = nearest_symmetric_lattice(np.eye(3), rotations)
    group = PointGroup.from_fractional(rotations, lattice)
    counts = {name: independent_count(kind(name), group) for name in {*VERDICTS.values(), *properties}}
    cells: Row = {
        "crystal_system": group.system,
        "point_group": group.oriented,
        "centrosymmetric": group.has_inversion,
        "chiral_class": group.is_chiral,
        "polar": group.is_polar,
    }
    cells |= {column: counts[name] > 0 for column, name in VERDICTS.items()}
    cells |= {count_column(name): counts[name] for name in properties}
    return GroupFacts(cells, frozen(group.polar_directions @ np.linalg.inv(lattice)))


def polar_text(facts: GroupFacts, lattice: FloatArray) -> str:
    """The polar directions, of which there is one, in the Cartesian axes of the conventional cell (rows).

    The sense of an axis is open: its last component that is not zero is printed positive.
    """
    directions = facts.polar_directions_frac @ lattice
    if len(directions) == 3:
        return "any direction"
    if len(directions) == 2:
        return f"any direction normal to {_direction(np.cross(directions[0], directions[1]))}"
    return _direction(directions[0])


@lru_cache(maxsize=1024)
def chirality(setting: SpaceGroupSetting) -> tuple[bool, bool]:
    """Whether a space group has no improper operation, and whether its mirror image is of another type.

    The mirror image is made by inversion through the origin: W stays, w becomes -w. Its type is found from
    these operations; that of a group with an improper operation is its own.
    """
    sohncke = bool((np.linalg.det(setting.rotations) > 0.0).all())
    if not sohncke:
        return False, False
    lattice = nearest_symmetric_lattice(np.eye(3), setting.point_rotations)
    mirrored = number_of_operations(setting.rotations, -setting.translations, lattice)
    return True, mirrored != setting.number


def _direction(vector: FloatArray) -> str:
    unit = np.round(vector / np.linalg.norm(vector), 6) + 0.0
    leading = unit[np.abs(unit) > 1e-4][-1]
    return " ".join(f"{value:g}" for value in (unit if leading > 0.0 else -unit) + 0.0)
