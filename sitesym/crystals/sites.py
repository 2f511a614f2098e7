"""Sites of a crystal: orbits of the full space group with their site-symmetry groups.

The site group is computed: the operations of the conventional cell that leave the idealised position where
it is. Wyckoff letter and oriented symbol come from the finder; letters depend on setting and origin.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from sitesym.arrays import FloatArray, IntArray, frozen
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
    position of the first atom in the conventional cell. ``point_group``: the site group, in the basis and
    axes of the crystal's. ``rotations``, ``translations``: its operations in the conventional cell, in the
    order of the group's elements, each leaving the position where it is.
    """

    label: str
    species: str
    atoms: tuple[int, ...]
    multiplicity: int
    wyckoff: str
    symbol: str
    position_frac: FloatArray
    point_group: PointGroup
    rotations: IntArray
    translations: FloatArray

    @property
    def order(self) -> int:
        """Number of operations of the site."""
        return self.point_group.order

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
    members: dict[int, list[int]] = {}
    for atom, orbit in enumerate(found.orbits.tolist()):
        members.setdefault(orbit, []).append(atom)
    element_of = {rotation.tobytes(): index for index, rotation in enumerate(_contiguous(point_group))}
    sites = []
    for atoms in members.values():
        first = atoms[0]
        position = found.conventional_positions[first]
        rotations, translations = _stabiliser(found.setting, position, lattice)
        _check_orbit(crystal.labels[first], len(rotations), int(found.multiplicities[first]), found.setting)
        elements = np.array([element_of[rotation.tobytes()] for rotation in rotations])
        sequence = np.argsort(elements)
        sites.append(
            Site(
                crystal.labels[first],
                str(crystal.species[first]),
                tuple(atoms),
                int(found.multiplicities[first]),
                found.wyckoffs[first],
                found.site_symbols[first],
                frozen(position),
                point_group.subgroup(elements[sequence].tolist()),
                frozen(rotations[sequence]),
                frozen(translations[sequence]),
            )
        )
    return tuple(sites)


def _contiguous(point_group: PointGroup) -> IntArray:
    if point_group.rotations_frac is None:
        raise SymmetryError("the crystal's point group has no lattice basis")
    return np.ascontiguousarray(point_group.rotations_frac)


def _stabiliser(
    setting: SpaceGroupSetting, position: FloatArray, lattice: FloatArray
) -> tuple[IntArray, FloatArray]:
    """Operations that leave a position in place, translations adjusted by lattice vectors so that they do."""
    difference = setting.rotations @ position + setting.translations - position
    steps = np.rint(difference)
    fixing = np.linalg.norm((difference - steps) @ lattice, axis=1) < _SAME_POSITION_ANGSTROM
    return setting.rotations[fixing], setting.translations[fixing] - steps[fixing]


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
