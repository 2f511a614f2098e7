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
    position of the first atom in the conventional cell. ``rotations``, ``translations``: the operations of
    the site in the conventional cell, each leaving the position where it is, in the order of its
    ``elements``, which are indices into ``crystal_group``.
    """

    label: str
    species: str
    atoms: tuple[int, ...]
    multiplicity: int
    wyckoff: str
    symbol: str
    position_frac: FloatArray
    crystal_group: PointGroup
    elements: tuple[int, ...]
    rotations: IntArray
    translations: FloatArray

    @cached_property
    def point_group(self) -> PointGroup:
        """The site group, in the basis and axes of the crystal's."""
        return self.crystal_group.subgroup(list(self.elements))

    @property
    def order(self) -> int:
        """Number of operations of the site."""
        return len(self.elements)

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
    if not np.array_equal(_integer_rotations(point_group), found.setting.point_rotations):
        raise SymmetryError("the point group is not that of the space group found")
    _, first, orbit_of = np.unique(found.orbits, return_index=True, return_inverse=True)
    members = [np.flatnonzero(orbit_of == orbit).tolist() for orbit in np.argsort(first)]
    leading = [atoms[0] for atoms in members]
    positions = found.conventional_positions[leading]
    steps, fixing = _stabilisers(found.setting, positions, lattice)
    sites = []
    for orbit, (atom, atoms) in enumerate(zip(leading, members, strict=True)):
        operations = np.flatnonzero(fixing[:, orbit])
        operations = operations[np.argsort(found.setting.point_indices[operations])]
        multiplicity = int(found.multiplicities[atom])
        _check_orbit(crystal.labels[atom], len(operations), multiplicity, found.setting)
        sites.append(
            Site(
                crystal.labels[atom],
                str(crystal.species[atom]),
                tuple(atoms),
                multiplicity,
                found.wyckoffs[atom],
                found.site_symbols[atom],
                frozen(positions[orbit]),
                point_group,
                tuple(found.setting.point_indices[operations].tolist()),
                frozen(found.setting.rotations[operations]),
                frozen(found.setting.translations[operations] - steps[operations, orbit]),
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
    """For n operations and m positions: the lattice vectors (n, m, 3) by which each image comes nearest its
    position, and whether it then falls on it (n, m)."""
    difference = positions @ np.swapaxes(setting.rotations, 1, 2) + setting.translations[:, None] - positions
    steps = np.rint(difference)
    distances = np.linalg.norm((difference - steps) @ lattice, axis=2)
    return steps, distances < _SAME_POSITION_ANGSTROM


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
