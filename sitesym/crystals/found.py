"""What a symmetry finder reports, whichever library it is, and the space-group setting it refers to."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from functools import cached_property
from itertools import combinations

import numpy as np

from sitesym.arrays import FloatArray, IntArray, frozen


@dataclass(frozen=True, eq=False)
class SpaceGroupSetting:
    """A space group in one choice of axes and origin.

    ``rotations`` (n, 3, 3) integers and ``translations`` (n, 3): all operations of the conventional cell,
    centring translations included. ``point_rotations`` (k, 3, 3): the rotation parts, each once, identity
    first.
    """

    number: int
    symbol: str
    hall_number: int
    hall_symbol: str
    choice: str
    rotations: IntArray
    translations: FloatArray
    point_rotations: IntArray

    @cached_property
    def point_indices(self) -> IntArray:
        """(n,): which of ``point_rotations`` each operation has."""
        place = {rotation.tobytes(): index for index, rotation in enumerate(self.point_rotations)}
        return frozen(np.array([place[rotation.tobytes()] for rotation in self.rotations], dtype=np.int64))

    @cached_property
    def by_element(self) -> IntArray:
        """(n,): indices of the operations in the order of their rotations in ``point_rotations``."""
        return frozen(np.argsort(self.point_indices, kind="stable"))

    @cached_property
    def has_inversion(self) -> bool:
        """Whether some operation turns every direction round."""
        return bool((self.point_rotations == -np.eye(3)).all(axis=(1, 2)).any())

    @cached_property
    def is_polar(self) -> bool:
        """Whether a direction is left unchanged by all operations: the mean rotation is then not zero."""
        return bool(self.point_rotations.sum(axis=0).any())

    @cached_property
    def primitive_basis(self) -> FloatArray:
        """(3, 3) rows: vectors of a primitive cell in the basis of the conventional cell, right-handed."""
        centring = self.translations[self.point_indices == 0]
        shortest = [*centring[centring.any(axis=1)], *np.eye(3)]
        bases = (np.array(rows) for rows in combinations(shortest, 3))
        volume = 1.0 / len(centring)
        basis = next(rows for rows in bases if abs(abs(np.linalg.det(rows)) - volume) < volume / 2)
        return frozen(basis if np.linalg.det(basis) > 0 else basis[[1, 0, 2]])


@dataclass(frozen=True, eq=False)
class FoundSymmetry:
    """Answer of a symmetry finder for n atoms.

    ``transformation`` P (3, 3) and ``origin_shift`` p (3,): x_conventional = P x_file + p (modulo 1).
    ``ideal_positions`` gives (n, 3) an idealised position of each file atom in the conventional cell, modulo
    translations of the lattice; ``positions_frac`` (n, 3) are the atoms as read.
    ``orbits`` (n,): equal for atoms related by the space group, translations of a supercell included.
    ``primitive_atoms`` (n,): equal for atoms related by a lattice translation, numbered from 0.
    ``wyckoffs`` and ``site_symbols``: one for each atom. ``finder``: name and version of the library.
    ``tolerance_used_angstrom``: what the finder says it ended with; some lower the tolerance by themselves.
    ``messages``: what it had to say.
    """

    setting: SpaceGroupSetting
    transformation: FloatArray
    origin_shift: FloatArray
    positions_frac: FloatArray
    ideal_positions: Callable[[], FloatArray]
    orbits: IntArray
    primitive_atoms: IntArray
    wyckoffs: tuple[str, ...]
    site_symbols: tuple[str, ...]
    finder: str
    tolerance_used_angstrom: float
    messages: tuple[str, ...] = ()

    def __post_init__(self) -> None:
        """Take what a library gives as read-only arrays and tuples."""
        for name in ("transformation", "origin_shift"):
            object.__setattr__(self, name, frozen(np.asarray(getattr(self, name), dtype=np.float64)))
        for name in ("orbits", "primitive_atoms"):
            object.__setattr__(self, name, frozen(np.asarray(getattr(self, name), dtype=np.int64)))
        for name in ("wyckoffs", "site_symbols"):
            object.__setattr__(self, name, tuple(getattr(self, name)))

    @cached_property
    def multiplicities(self) -> IntArray:
        """(n,): atoms of each file atom's orbit in the conventional cell.

        They are those of a primitive cell, times its centring.
        """
        orbit_of = np.zeros(int(self.primitive_atoms.max()) + 1, dtype=np.int64)
        orbit_of[self.primitive_atoms] = self.orbits
        centring = len(self.setting.rotations) // len(self.setting.point_rotations)
        return frozen(np.asarray(np.bincount(orbit_of)[self.orbits] * centring, dtype=np.int64))

    @cached_property
    def conventional_positions(self) -> FloatArray:
        """(n, 3): idealised position of each file atom in the conventional cell, of all its copies the one at
        the atom."""
        measured = self.positions_frac @ self.transformation.T + self.origin_shift
        basis = self.setting.primitive_basis
        steps = (self.ideal_positions() - measured) @ np.linalg.inv(basis)
        steps -= np.rint(steps)
        return frozen(measured + steps @ basis)
