"""The symmetry of a crystal: space group, conventional cell, full point group, sites.

The point group is that of the crystal, whatever cell describes it. A finder's list of operations for a
supercell holds only those that map the supercell onto itself (of GaAs 1x1x2: -42m, not -43m); here the
operations of the conventional cell, from the database, are taken to the file's Cartesian axes.
"""

from __future__ import annotations

from dataclasses import dataclass
from functools import cached_property

import numpy as np

from sitesym.arrays import FloatArray, IntArray, frozen
from sitesym.crystals.crystal import Crystal
from sitesym.crystals.found import FoundSymmetry, SpaceGroupSetting
from sitesym.crystals.sites import Site, build_sites
from sitesym.crystals.spglib_finder import find_with_spglib
from sitesym.errors import UsageError
from sitesym.groups import PointGroup
from sitesym.tolerances import DEFAULT_TOLERANCE_ANGSTROM


@dataclass(frozen=True)
class Idealisation:
    """What was changed to make the symmetry exact.

    ``largest_strain``: of the cell, no unit. ``orthogonality_error``: largest entry of R R^T - 1 over the
    operations before the cell was idealised. ``largest_shift_angstrom``: of an atom.
    """

    largest_strain: float
    orthogonality_error: float
    largest_shift_angstrom: float


@dataclass(frozen=True, eq=False)
class CrystalSymmetry:
    """A crystal with its symmetry at one tolerance.

    ``conventional_lattice``: (3, 3) rows of the idealised conventional cell, angstrom, in the file's
    Cartesian axes. ``point_group``: of the crystal, in the basis of that cell and the file's Cartesian
    axes.
    """

    crystal: Crystal
    tolerance_angstrom: float
    found: FoundSymmetry
    conventional_lattice: FloatArray
    point_group: PointGroup
    idealisation: Idealisation

    @property
    def setting(self) -> SpaceGroupSetting:
        """Space group with its choice of axes and origin, and the operations of the conventional cell."""
        return self.found.setting

    @property
    def space_group_number(self) -> int:
        """Number in International Tables A."""
        return self.setting.number

    @property
    def space_group_symbol(self) -> str:
        """Short Hermann-Mauguin symbol, a screw axis with an underscore: P6_3mc."""
        return self.setting.symbol

    @property
    def hall_number(self) -> int:
        """Number of the setting in spglib's database; Wyckoff letters and origin refer to it."""
        return self.setting.hall_number

    @property
    def transformation(self) -> FloatArray:
        """P (3, 3) of x_conventional = P x_file + p."""
        return self.found.transformation

    @property
    def origin_shift(self) -> FloatArray:
        """p (3,) of x_conventional = P x_file + p."""
        return self.found.origin_shift

    @cached_property
    def sites(self) -> tuple[Site, ...]:
        """One for each orbit, in the order of its first atom. Raises SymmetryError, see `build_sites`."""
        return build_sites(self.crystal, self.found, self.conventional_lattice, self.point_group)

    def site(self, label: str) -> Site:
        """The site with this label, or the one that holds the atom with this label. Raises UsageError."""
        matching = [site for site in self.sites if site.label == label]
        if not matching:
            atoms = [index for index, name in enumerate(self.crystal.labels) if name == label]
            matching = [site for site in self.sites if set(atoms) & set(site.atoms)]
        if len(matching) == 1:
            return matching[0]
        known = ", ".join(site.label for site in self.sites)
        raise UsageError(
            f"{len(matching)} sites are called {label}" if matching else f"no site is called {label}",
            label,
            f"sites: {known}",
            "name one of these sites",
        )


def find_symmetry(
    crystal: Crystal, tolerance_angstrom: float = DEFAULT_TOLERANCE_ANGSTROM
) -> CrystalSymmetry:
    """The symmetry of a crystal; atoms within the tolerance of each other's images count as related.

    Raises UsageError for a tolerance that is none, SymmetryNotFoundError when the finder gives no answer.
    """
    if not (np.isfinite(tolerance_angstrom) and tolerance_angstrom > 0.0):
        raise UsageError(
            "the tolerance is not a length",
            f"{tolerance_angstrom}",
            "a number above zero, in angstrom",
            "correct it",
        )
    found = find_with_spglib(crystal, tolerance_angstrom)
    measured = np.asarray(np.linalg.solve(found.transformation.T, crystal.lattice), dtype=np.float64)
    rotations = found.setting.point_rotations
    lattice = _idealised(measured, rotations)
    return CrystalSymmetry(
        crystal,
        tolerance_angstrom,
        found,
        frozen(lattice),
        PointGroup.from_fractional(rotations, lattice),
        Idealisation(
            float(np.abs(np.linalg.svd(np.linalg.solve(measured, lattice), compute_uv=False) - 1.0).max()),
            _orthogonality_error(measured, rotations),
            _largest_shift(crystal, found, lattice),
        ),
    )


def _idealised(lattice: FloatArray, rotations: IntArray) -> FloatArray:
    """The nearest cell (rows) that the rotations leave unchanged: mean metric, turned as little as
    possible."""
    metric = np.mean(np.swapaxes(rotations, 1, 2) @ (lattice @ lattice.T) @ rotations, axis=0)
    upper = np.linalg.cholesky(metric).T
    # lattice.T = turn @ upper up to the strain; the orthogonal factor of the polar decomposition is the turn.
    left, _, right = np.linalg.svd(lattice.T @ np.linalg.inv(upper))
    ideal: FloatArray = (left @ right @ upper).T
    return ideal


def _orthogonality_error(lattice: FloatArray, rotations: IntArray) -> float:
    columns = lattice.T
    cart = columns @ rotations @ np.linalg.inv(columns)
    return float(np.abs(cart @ np.swapaxes(cart, 1, 2) - np.eye(3)).max())


def _largest_shift(crystal: Crystal, found: FoundSymmetry, lattice: FloatArray) -> float:
    measured = crystal.positions_frac @ found.transformation.T + found.origin_shift
    shift = (found.conventional_positions - measured) @ lattice
    return float(np.linalg.norm(shift, axis=1).max())
