"""Sites of a crystal: orbits of the full space group with their site-symmetry groups.

The site group is computed: the operations of the conventional cell that leave the idealised position where
it is. Wyckoff letter and oriented symbol come from the finder; letters depend on setting and origin.
"""

from __future__ import annotations

from dataclasses import dataclass
from functools import cached_property

import numpy as np

from sitesym.arrays import BoolArray, FloatArray, IntArray, frozen
from sitesym.crystals.crystal import Crystal
from sitesym.crystals.found import FoundSymmetry, SpaceGroupSetting
from sitesym.errors import SymmetryError
from sitesym.groups import PointGroup

# Idealised positions are exact to rounding; this is far above it and far below any tolerance in use.
_SAME_POSITION_ANGSTROM = 1e-6


@dataclass(frozen=True, eq=False)
class SiteAxis:
    """A direction that operations of a site single out.

    ``symbol``: 4, -3, m ... of the operation of highest order about it, proper and improper ones listed
    apart; ``order`` that of its proper part; ``direction_file`` a unit vector in the file's Cartesian axes
    (of a mirror: its normal); ``direction_lattice`` the same in the conventional cell, as text.
    """

    symbol: str
    order: int
    improper: bool
    direction_file: FloatArray
    direction_lattice: str


@dataclass(frozen=True, eq=False)
class Site:
    """One orbit of atoms.

    ``atoms``: indices in the file, from 0. ``multiplicity``: atoms in the conventional cell. ``symbol``:
    oriented site-symmetry symbol of International Tables A, such as 4/mm.m. ``position_frac``: idealised
    position of the first atom in the conventional cell. ``operations``: indices of the operations of
    ``setting`` that leave the position where it is, up to lattice vectors ``steps`` (k, 3), in the order of
    the elements of ``crystal_group``.
    """

    label: str
    species: str
    atoms: tuple[int, ...]
    multiplicity: int
    wyckoff: str
    symbol: str
    position_frac: FloatArray
    crystal_group: PointGroup
    setting: SpaceGroupSetting
    operations: IntArray
    steps: FloatArray

    @property
    def rotations(self) -> IntArray:
        """(k, 3, 3) of the operations of the site in the conventional cell."""
        return self.setting.rotations[self.operations]

    @property
    def translations(self) -> FloatArray:
        """(k, 3) of the operations of the site: each leaves the position exactly where it is."""
        translations: FloatArray = self.setting.translations[self.operations] - self.steps
        return translations

    @cached_property
    def point_group(self) -> PointGroup:
        """The site group, in the basis and axes of the crystal's."""
        return self.crystal_group.subgroup(self.setting.point_indices[self.operations].tolist())

    @property
    def order(self) -> int:
        """Number of operations of the site."""
        return len(self.operations)

    @property
    def has_inversion(self) -> bool:
        """Whether the site is an inversion centre."""
        return self.point_group.has_inversion

    @property
    def has_mirror(self) -> bool:
        """Whether a mirror plane passes through the site."""
        return self.point_group.has_mirror

    @property
    def is_polar(self) -> bool:
        """Whether a polar vector at the site is allowed."""
        return self.point_group.is_polar

    @property
    def axes(self) -> tuple[SiteAxis, ...]:
        """Symmetry directions of the site, highest order first."""
        return _site_axes(self.point_group)


def build_sites(
    crystal: Crystal, found: FoundSymmetry, lattice: FloatArray, point_group: PointGroup
) -> tuple[Site, ...]:
    """One site for each orbit, in the order of the first atom; ``lattice`` is the conventional cell (rows).

    Raises SymmetryError when the order of a site group times the multiplicity is not the order of the space
    group in the conventional cell: the finder's answer is then not consistent.
    """
    setting = found.setting
    if not np.array_equal(_integer_rotations(point_group), setting.point_rotations):
        raise SymmetryError("the point group is not that of the space group found")
    members: dict[int, list[int]] = {}
    for atom, orbit in enumerate(found.orbits.tolist()):
        members.setdefault(orbit, []).append(atom)
    leading = [atoms[0] for atoms in members.values()]
    positions = frozen(found.conventional_positions[leading])
    steps, fixing = _stabilisers(setting, positions, lattice)
    in_order = setting.by_element
    orders, multiplicities = fixing.sum(axis=1), found.multiplicities[leading]
    sites = []
    for orbit, (atom, atoms) in enumerate(zip(leading, members.values(), strict=True)):
        _check_orbit(crystal.labels[atom], int(orders[orbit]), int(multiplicities[orbit]), setting)
        operations = in_order[fixing[orbit, in_order]]
        sites.append(
            Site(
                crystal.labels[atom],
                str(crystal.species[atom]),
                tuple(atoms),
                int(multiplicities[orbit]),
                found.wyckoffs[atom],
                found.site_symbols[atom],
                positions[orbit],
                point_group,
                setting,
                frozen(operations),
                frozen(steps[orbit, operations]),
            )
        )
    return tuple(sites)


def _integer_rotations(point_group: PointGroup) -> IntArray:
    if point_group.rotations_frac is None:
        raise SymmetryError("the crystal's point group has no lattice basis")
    return point_group.rotations_frac


def _stabilisers(
    setting: SpaceGroupSetting, positions: FloatArray, lattice: FloatArray
) -> tuple[FloatArray, BoolArray]:
    """For m positions and n operations: the lattice vectors (m, n, 3) by which each image comes nearest its
    position, and whether it then falls on it (m, n)."""
    images = np.tensordot(positions, setting.rotations, axes=(1, 2)) + setting.translations
    difference = images - positions[:, None]
    steps = np.rint(difference)
    rest = (difference - steps) @ lattice
    return steps, (rest * rest).sum(axis=2) < _SAME_POSITION_ANGSTROM**2


def _check_orbit(label: str, order: int, multiplicity: int, setting: SpaceGroupSetting) -> None:
    if order * multiplicity == len(setting.rotations):
        return
    raise SymmetryError(
        f"the orbit of {label} does not fit its site group",
        f"{order} site operations x {multiplicity} atoms; {setting.symbol} has {len(setting.rotations)}",
        "site operations times multiplicity is the number of operations of the conventional cell",
        "try another tolerance; the atoms are near a more symmetric arrangement",
    )


def _site_axes(point_group: PointGroup) -> tuple[SiteAxis, ...]:
    highest: dict[tuple[str, bool], SiteAxis] = {}
    for element in point_group.elements:
        if element.axis is None:
            continue
        key = (element.direction, element.improper)
        if key not in highest or highest[key].order < element.order:
            highest[key] = SiteAxis(
                element.symbol, element.order, element.improper, element.axis, element.direction
            )
    return tuple(sorted(highest.values(), key=lambda axis: (-axis.order, axis.improper)))
