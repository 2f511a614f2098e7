"""What the other finder says of a crystal, and where the two meet when they differ.

Agreement means the same space group, the same operations of the point group in the file's axes, and the same
atoms related by symmetry. A difference is not settled here: both answers stand.
"""

from __future__ import annotations

from dataclasses import dataclass
from math import log
from typing import Final

import numpy as np

from sitesym.arrays import FloatArray, IntArray
from sitesym.crystals.ladder import RUNGS_ANGSTROM, moyo_rung, spglib_rung
from sitesym.crystals.symmetry import CrystalSymmetry, find_symmetry
from sitesym.errors import SymmetryNotFoundError

#: Entries of matching Cartesian operations differ at most so much; the finders idealise the cell differently.
_SAME_OPERATION: Final = 0.1


@dataclass(frozen=True, eq=False)
class SecondOpinion:
    """The answer of the second finder beside a first one.

    ``symmetry``: its answer, None when it gave none (``reason`` then says why). ``differences``: in what the
    two differ, empty when they agree. ``meet_angstrom``: where they differ in space group, the tolerance of
    the ladder nearest to the one asked for at which both find the same one, ``meet_in``; None when there is
    none.
    """

    finder: str
    symmetry: CrystalSymmetry | None
    differences: tuple[str, ...]
    reason: str = ""
    meet_angstrom: float | None = None
    meet_in: str = ""

    @property
    def agrees(self) -> bool:
        """Whether both finders say the same."""
        return not self.differences


def second_opinion(symmetry: CrystalSymmetry) -> SecondOpinion:
    """Ask the finder that did not give the first answer, at the same tolerance."""
    finder = "spglib" if symmetry.found.finder.startswith("moyo") else "moyo"
    try:
        other = find_symmetry(symmetry.crystal, symmetry.tolerance_angstrom, finder)
    except SymmetryNotFoundError as error:
        return SecondOpinion(
            finder, None, ("an answer",), f"{error.what}: {error.value}", *_meeting(symmetry)
        )
    differences = _differences(symmetry, other)
    meeting = _meeting(symmetry) if "space group" in differences else (None, "")
    return SecondOpinion(finder, other, differences, "", *meeting)


def _differences(first: CrystalSymmetry, second: CrystalSymmetry) -> tuple[str, ...]:
    checks = {
        "space group": first.space_group_number == second.space_group_number,
        "point group": _same_operations(first.point_group.rotations_cart, second.point_group.rotations_cart),
        "related atoms": _same_partition(first.found.orbits, second.found.orbits),
    }
    return tuple(name for name, same in checks.items() if not same)


def _same_operations(first: FloatArray, second: FloatArray) -> bool:
    if len(first) != len(second):
        return False
    distance = np.abs(first[:, None] - second[None]).max(axis=(2, 3))
    return bool((distance.min(axis=1) < _SAME_OPERATION).all())


def _same_partition(first: IntArray, second: IntArray) -> bool:
    return bool(((first[:, None] == first) == (second[:, None] == second)).all())


def _meeting(symmetry: CrystalSymmetry) -> tuple[float | None, str]:
    """Tolerance (angstrom) and symbol of the nearest rung at which both finders find the same space group."""
    crystal, asked = symmetry.crystal, symmetry.tolerance_angstrom
    for tolerance in sorted(RUNGS_ANGSTROM, key=lambda rung: abs(log(rung / asked))):
        first, second = spglib_rung(crystal, tolerance), moyo_rung(crystal, tolerance)
        if first.space_group_number is not None and first.space_group_number == second.space_group_number:
            return tolerance, first.space_group_symbol
    return None, ""
