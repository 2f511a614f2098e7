"""What must stand beside every result about a crystal: what was noticed, disorder, declared against found."""

from __future__ import annotations

import numpy as np

from sitesym.crystals.crystal import Crystal
from sitesym.crystals.symmetry import CrystalSymmetry

LEFT_HANDED = (
    "the cell vectors a, b, c are left-handed (their triple product is below zero); the conventional cell is "
    "right-handed, and tensors and directions are in the file's right-handed x, y, z"
)
AVERAGE_STRUCTURE = "average structure: mixed or partly filled sites count as species of their own"

# Operations are counted in whole multiples; half way to the next lower or higher one.
_MORE = 1.5
#: A tolerance below this part of the one asked for was lowered by the finder; the rest is rounding.
_LOWERED = 0.999


def symmetry_remarks(symmetry: CrystalSymmetry) -> tuple[str, ...]:
    """Remarks on the crystal, then on its symmetry."""
    return (
        *remarks_on_crystal(symmetry.crystal),
        *finder_remarks(symmetry),
        *_declared_remarks(symmetry),
    )


def remarks_on_crystal(crystal: Crystal) -> tuple[str, ...]:
    """Remarks of reading, then what the crystal is by its cell and its atoms."""
    remarks = list(crystal.remarks)
    if np.linalg.det(crystal.lattice) < 0.0:
        remarks.append(LEFT_HANDED)
    if not crystal.is_ordered:
        remarks.append(AVERAGE_STRUCTURE)
    if crystal.distinguish:
        remarks.append(f"atoms are told apart by element, occupancy, {', '.join(crystal.distinguish)}")
    return tuple(remarks)


def finder_remarks(symmetry: CrystalSymmetry) -> tuple[str, ...]:
    """What the finder had to say, and that it lowered the tolerance where it did."""
    remarks = [f"the finder says: {message}" for message in dict.fromkeys(symmetry.found.messages)]
    used = symmetry.found.tolerance_used_angstrom
    if used < _LOWERED * symmetry.tolerance_angstrom:
        remarks.append(f"the finder lowered the tolerance by itself to {used:g} angstrom")
    return tuple(remarks)


def _declared_remarks(symmetry: CrystalSymmetry) -> tuple[str, ...]:
    """A remark where the file declares fewer or more operations for a volume than are found."""
    crystal = symmetry.crystal
    if not (crystal.declared_space_group and crystal.declared_operations):
        return ()
    declared = crystal.declared_operations / abs(np.linalg.det(crystal.lattice))
    volume = abs(np.linalg.det(symmetry.conventional_lattice))
    ratio = len(symmetry.setting.rotations) / volume / float(declared)
    found = f"{symmetry.space_group_symbol} is found at {symmetry.tolerance_angstrom:g} angstrom"
    if ratio > _MORE:
        return (
            f"the file declares {crystal.declared_space_group}, {found}, with {ratio:.0f} times as many "
            "operations for the same volume: possible missed symmetry",
        )
    if ratio < 1.0 / _MORE:
        return (
            f"the file declares {crystal.declared_space_group}, {found}, with only 1 in {1.0 / ratio:.0f} of "
            "its operations",
        )
    return ()
