"""How far a crystal is from having an inversion centre, and from having its polar axis reversed.

Searched explicitly: an operation of order two with every translation that carries one atom of the rarest
kind onto another of its kind, the best pairing of atoms for each (see `pairing`), and half of the mismatch as
the displacement. The translation is the one of least root mean square displacement, so the displacements add
up to zero. The cell stays as it is: its strain is not counted, and the parent is named in this cell.

The result is the nearest arrangement found. It is the nearest one there is as long as displacements are small
against the distances between atoms; beyond that it is an upper bound (`inversion_pairing` keeps atoms apart).
"""

from __future__ import annotations

from dataclasses import dataclass, replace
from typing import Final

import numpy as np

from sitesym.arrays import FloatArray, IntArray, frozen
from sitesym.crystals.crystal import Crystal
from sitesym.crystals.found import SpaceGroupSetting
from sitesym.crystals.inversion_pairing import INVERSION, without_meetings
from sitesym.crystals.moyo_finder import hall_number_with_moyo, lattice_rotations
from sitesym.crystals.pairing import Arrangement, Pairing, best_pairing
from sitesym.crystals.spglib_finder import niggli_lattice, setting
from sitesym.crystals.symmetry import CrystalSymmetry
from sitesym.errors import ReadingError, SymmetryNotFoundError
from sitesym.groups.elements import classify

#: Primitive cells with more atoms are not searched, so that a screen's time stays bounded.
LARGEST_CELL: Final = 400
#: At most so many translations are tried for an operation.
MOST_TRANSLATIONS: Final = 64
#: Largest component along which a polar direction may fail to be reversed: operations of a lattice that is
#: symmetric within the tolerance only.
_REVERSED: Final = 0.05


@dataclass(frozen=True, eq=False)
class NearestArrangement:
    """The nearest arrangement found in which an operation of order two is a symmetry.

    ``operation``: its symbol with direction in the conventional cell. ``centre_file``: fractional position
    of an inversion centre in the file's cell, None for other operations. ``atoms``: one file atom for each
    atom of the primitive cell, ``partners`` the file atom near its image, ``displacements_file`` (k, 3) what
    to add to it, Cartesian, angstrom, in the file's axes. ``parent``: space group of the arrangement, None
    when the finder gave none; ``checked``: whether it has what was looked for.
    """

    operation: str
    centre_file: FloatArray | None
    largest_displacement_angstrom: float
    rms_displacement_angstrom: float
    atoms: tuple[int, ...]
    partners: tuple[int, ...]
    displacements_file: FloatArray
    parent: SpaceGroupSetting | None
    checked: bool


@dataclass(frozen=True, eq=False)
class Pseudosymmetry:
    """Distances of an acentric crystal from higher symmetry.

    ``centrosymmetric``: the nearest arrangement with inversion, None when the crystal has inversion or was
    not searched. ``nonpolar``: the nearest one in which an operation reverses every polar direction, None
    when the crystal is not polar. ``note``: why nothing was searched, or empty.
    """

    centrosymmetric: NearestArrangement | None = None
    nonpolar: NearestArrangement | None = None
    note: str = ""


def pseudosymmetry(symmetry: CrystalSymmetry) -> Pseudosymmetry:
    """Search for a crystal without inversion; empty for one that has it."""
    if symmetry.setting.has_inversion:
        return Pseudosymmetry()
    count = int(symmetry.found.primitive_atoms.max()) + 1
    if count > LARGEST_CELL:
        return Pseudosymmetry(
            note=f"not searched: {count} atoms in the primitive cell, more than {LARGEST_CELL}"
        )
    search = _Search(symmetry)
    inversion = search.inversion()
    central = search.described(inversion) if inversion is not None else None
    if not symmetry.setting.is_polar:
        return Pseudosymmetry(central)
    reversing = search.best(search.reversing_rotations(), inversion)
    nonpolar = central if reversing is inversion or reversing is None else search.described(reversing)
    return Pseudosymmetry(central, nonpolar)


class _Search:
    """A primitive cell, reduced, with the positions as read, averaged over translations in a supercell."""

    def __init__(self, symmetry: CrystalSymmetry) -> None:
        self.symmetry = symmetry
        crystal, found = symmetry.crystal, symmetry.found
        self.lattice = niggli_lattice(found.setting.primitive_basis @ symmetry.measured_lattice)
        _, self.first = np.unique(found.primitive_atoms, return_index=True)
        positions = crystal.positions_frac @ crystal.lattice @ np.linalg.inv(self.lattice)
        steps = positions - positions[self.first][found.primitive_atoms]
        steps -= np.rint(steps)
        counts = np.bincount(found.primitive_atoms)
        sums = np.stack([np.bincount(found.primitive_atoms, column) for column in steps.T], axis=1)
        self.positions = positions[self.first] + sums / counts[:, None]
        kinds = crystal.species_indices[self.first]
        members = tuple(np.flatnonzero(kinds == kind) for kind in np.unique(kinds))
        self.arrangement = Arrangement(self.lattice, self.positions, members)

    def best(self, rotations: IntArray, best: Pairing | None = None) -> Pairing | None:
        """The best pairing over operations (k, 3, 3) of order two; ``best`` where none is better."""
        rarest = self.positions[min(self.arrangement.kinds, key=len)]
        for rotation in rotations:
            translations = _order_two(rotation, rarest - rotation @ rarest[0])
            best = best_pairing(self.arrangement, rotation, translations[:MOST_TRANSLATIONS], best)
        return best

    def inversion(self) -> Pairing | None:
        """The best pairing under an inversion that leaves a crystal, as far as one is found."""
        found = self.best(INVERSION[None])
        return None if found is None else without_meetings(self.arrangement, found)

    def reversing_rotations(self) -> IntArray:
        """(k, 3, 3) operations of order two of the lattice that reverse every polar direction, without -1.

        An operation times one of the crystal carries the crystal to the same place: one of them is enough.
        """
        group = self.symmetry.point_group
        to_cart = self.lattice.T
        to_frac = np.linalg.inv(to_cart)
        own = np.rint(to_frac @ group.rotations_cart @ to_cart).astype(np.int64)
        seen = {(-operation).tobytes() for operation in own}
        chosen = []
        for rotation in lattice_rotations(self.lattice, self.symmetry.tolerance_angstrom):
            turned = group.polar_directions @ (to_cart @ rotation @ to_frac).T
            if rotation.tobytes() in seen or not np.array_equal(rotation @ rotation, np.eye(3)):
                continue
            if np.abs(turned + group.polar_directions).max() < _REVERSED:
                seen |= {np.ascontiguousarray(rotation @ operation).tobytes() for operation in own}
                chosen.append(rotation)
        return np.array(chosen, dtype=np.int64).reshape(-1, 3, 3)

    def described(self, pairing: Pairing) -> NearestArrangement:
        """The pairing in terms of the file, and the group of the arrangement it leads to."""
        parent = self._parent(pairing)
        central = np.array_equal(pairing.rotation, -np.eye(3))
        crystal = self.symmetry.crystal
        centre = (pairing.translation / 2.0) @ self.lattice @ np.linalg.inv(crystal.lattice)
        return NearestArrangement(
            "-1" if central else self._name(pairing.rotation),
            frozen(centre - np.floor(centre)) if central else None,
            pairing.largest,
            pairing.rms,
            tuple(self.first.tolist()),
            tuple(self.first[pairing.partners].tolist()),
            frozen(pairing.displacements),
            parent,
            parent is not None and (parent.has_inversion if central else not parent.is_polar),
        )

    def _name(self, rotation: IntArray) -> str:
        """Symbol and direction; the lattice may have the operation only within the tolerance."""
        left, _, right = np.linalg.svd(self.lattice.T @ rotation @ np.linalg.inv(self.lattice.T))
        return classify(left @ right, self.symmetry.conventional_lattice).name

    def _parent(self, pairing: Pairing) -> SpaceGroupSetting | None:
        positions = self.positions + pairing.displacements @ np.linalg.inv(self.lattice)
        try:
            arrangement = _crystal_of(self.symmetry.crystal, self.first, self.lattice, positions)
            return setting(hall_number_with_moyo(arrangement, self.symmetry.tolerance_angstrom)[0])
        except (ReadingError, SymmetryNotFoundError):
            # Atoms that meet half-way leave no crystal: so far away there is no parent.
            return None


def _order_two(rotation: IntArray, translations: FloatArray) -> FloatArray:
    """Those translations, moved so that {W|t} squared is a lattice translation (of -1 it always is)."""
    squared = translations @ (rotation + np.eye(3)).T
    whole = np.rint(squared)
    valid = (whole @ rotation.T == whole).all(axis=1)
    moved: FloatArray = (translations + (whole - squared) / 2.0)[valid]
    return moved


def _crystal_of(crystal: Crystal, first: IntArray, lattice: FloatArray, positions: FloatArray) -> Crystal:
    return replace(
        crystal,
        lattice=lattice,
        positions_frac=positions,
        species=tuple(crystal.species[atom] for atom in first),
        labels=tuple(crystal.labels[atom] for atom in first),
        marks={name: tuple(texts[atom] for atom in first) for name, texts in crystal.marks.items()},
    )
