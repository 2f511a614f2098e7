"""The symmetry of a crystal: space group, conventional cell, full point group, sites.

The point group is that of the crystal, whatever cell describes it. A finder's list of operations for a
supercell holds only those that map the supercell onto itself (of GaAs 1x1x2: -42m, not -43m); here the
operations of the conventional cell, from the database, are taken to the file's Cartesian axes.
"""

from __future__ import annotations

from dataclasses import dataclass
from functools import cached_property, lru_cache
from typing import TYPE_CHECKING

import numpy as np

from sitesym.arrays import FloatArray, frozen
from sitesym.choices import DEFAULT_FINDER
from sitesym.crystals.crystal import Crystal
from sitesym.crystals.finders import find_with
from sitesym.crystals.found import FoundSymmetry, SpaceGroupSetting
from sitesym.crystals.idealisation import Idealisation, idealisation_of, nearest_symmetric_lattice
from sitesym.crystals.sites import Site, build_sites
from sitesym.crystals.spglib_finder import setting
from sitesym.errors import UsageError
from sitesym.groups import PointGroup
from sitesym.tolerances import DEFAULT_TOLERANCE_ANGSTROM

if TYPE_CHECKING:
    from sitesym.crystals.reliability import Reliability


@dataclass(frozen=True, eq=False)
class CrystalSymmetry:
    """A crystal with its symmetry at one tolerance, as one finder sees it.

    ``reliability``: what was asked about other tolerances and of the other finder, see `examined_symmetry`.
    """

    crystal: Crystal
    tolerance_angstrom: float
    found: FoundSymmetry
    reliability: Reliability | None = None

    @cached_property
    def measured_lattice(self) -> FloatArray:
        """(3, 3) rows of the conventional cell as measured, angstrom, in the file's Cartesian axes."""
        rows = np.linalg.solve(self.found.transformation.T, self.crystal.lattice)
        return frozen(np.asarray(rows, dtype=np.float64))

    @cached_property
    def conventional_lattice(self) -> FloatArray:
        """(3, 3) rows of the idealised conventional cell, angstrom, in the file's Cartesian axes."""
        return frozen(nearest_symmetric_lattice(self.measured_lattice, self.setting.point_rotations))

    @cached_property
    def point_group(self) -> PointGroup:
        """Of the crystal, in the basis of the conventional cell and the file's Cartesian axes."""
        return group_of_setting(self.setting.hall_number).in_lattice(self.conventional_lattice)

    @cached_property
    def idealisation(self) -> Idealisation:
        """What was changed to make the symmetry exact."""
        return idealisation_of(self.crystal, self.found, self.measured_lattice, self.conventional_lattice)

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


@lru_cache(maxsize=530)
def group_of_setting(hall_number: int) -> PointGroup:
    """The point group of a space-group setting, in some lattice that has its symmetry."""
    rotations = setting(hall_number).point_rotations
    return PointGroup.from_fractional(rotations, nearest_symmetric_lattice(np.eye(3), rotations))


def find_symmetry(
    crystal: Crystal,
    tolerance_angstrom: float = DEFAULT_TOLERANCE_ANGSTROM,
    finder: str = DEFAULT_FINDER,
) -> CrystalSymmetry:
    """The symmetry of a crystal; atoms within the tolerance of each other's images count as related.

    ``finder`` is one of `FINDERS`. Raises UsageError for a tolerance that is none or an unknown finder,
    SymmetryNotFoundError when the finder gives no answer.
    """
    if not (np.isfinite(tolerance_angstrom) and tolerance_angstrom > 0.0):
        raise UsageError(
            "the tolerance is not a length",
            f"{tolerance_angstrom}",
            "a number above zero, in angstrom",
            "correct it",
        )
    return CrystalSymmetry(crystal, tolerance_angstrom, find_with(finder, crystal, tolerance_angstrom))
