"""From the atoms of an asymmetric unit to all atoms of the cell.

Images of a site closer together than the merge distance are one atom on a special position: the site is
moved to the mean of those images, and the move is reported. Sites of the list that meet are one mixed site.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from sitesym.arrays import FloatArray, IntArray
from sitesym.crystals.operations import StatedOperations
from sitesym.crystals.species import Species
from sitesym.errors import OverlappingAtomsError
from sitesym.tolerances import MERGE_DISTANCE_ANGSTROM

# Points of the grid along a cell edge on which images count as the same. A site that was moved onto its
# special position has images equal to rounding; the offset keeps simple fractions away from the limits
# between grid points.
_GRID = 24 * 41666
_GRID_OFFSET = 0.137
_REPORTED_MOVE_ANGSTROM = 1e-6


@dataclass(frozen=True, eq=False)
class ListedSite:
    """A line of the asymmetric unit: label, fractional position (3,), elements with occupancies."""

    label: str
    position_frac: FloatArray
    occupancies: tuple[tuple[str, float], ...]


@dataclass(frozen=True, eq=False)
class ExpandedSites:
    """All atoms of the cell: positions (n, 3) in [0, 1), species, labels; what was merged or moved."""

    positions_frac: FloatArray
    species: tuple[Species, ...]
    labels: tuple[str, ...]
    remarks: tuple[str, ...]


def expand(sites: Sequence[ListedSite], operations: StatedOperations, lattice: FloatArray) -> ExpandedSites:
    """All atoms of the cell; ``lattice`` has rows a, b, c in angstrom.

    Raises OverlappingAtomsError where atoms meet that cannot share a site, OccupancyError where a mixed site
    holds more than one atom.
    """
    orbits: list[tuple[list[ListedSite], FloatArray]] = []
    remarks: list[str] = []
    for site in sites:
        meeting = next((group for group, images in orbits if _meets(site, images, lattice)), None)
        if meeting is not None:
            meeting.append(site)
            continue
        images, move = _orbit(site, operations, lattice)
        if move > _REPORTED_MOVE_ANGSTROM:
            remarks.append(f"site {site.label} moved by {move:.4f} angstrom onto its special position")
        orbits.append(([site], images))
    species = [_shared_species(group) for group, _ in orbits]
    for (group, _), kind in zip(orbits, species, strict=True):
        if len(group) > 1:
            remarks.append(f"sites {', '.join(site.label for site in group)} are one mixed site {kind}")
    counts = [len(images) for _, images in orbits]
    return ExpandedSites(
        np.vstack([images for _, images in orbits]),
        tuple(kind for kind, count in zip(species, counts, strict=True) for _ in range(count)),
        tuple(group[0].label for (group, _), count in zip(orbits, counts, strict=True) for _ in range(count)),
        tuple(remarks),
    )


def _orbit(site: ListedSite, operations: StatedOperations, lattice: FloatArray) -> tuple[FloatArray, float]:
    """Distinct images (m, 3) of a site in [0, 1), and how far it was moved (angstrom)."""
    position = site.position_frac
    fixing = np.zeros(0)
    while True:
        difference = _images(position, operations) - position
        difference -= np.rint(difference)
        near = np.linalg.norm(difference @ lattice, axis=1) < MERGE_DISTANCE_ANGSTROM
        position = position + difference[near].mean(axis=0)
        # The mean over part of a stabiliser comes nearer to the position; repeat until its images are all
        # there.
        if np.array_equal(near, fixing):
            break
        fixing = near
    images = _images(position, operations)
    distinct = images[np.sort(np.unique(_grid_codes(images), return_index=True)[1])]
    if len(distinct) * int(fixing.sum()) != len(images):
        raise OverlappingAtomsError(
            f"images of site {site.label} come close without meeting on a special position",
            f"{int(fixing.sum())} of {len(images)} images within {MERGE_DISTANCE_ANGSTROM:g} angstrom",
            f"images farther apart than {MERGE_DISTANCE_ANGSTROM:g} angstrom, or a special position",
            f"give the exact coordinates of site {site.label}",
        )
    move = position - site.position_frac
    return _in_cell(distinct), float(np.linalg.norm(move @ lattice))


def _images(position: FloatArray, operations: StatedOperations) -> FloatArray:
    images: FloatArray = operations.rotations @ position + operations.translations
    return images


def _grid_codes(images: FloatArray) -> IntArray:
    """One whole number for each image (m, 3), equal for images that are the same modulo the lattice."""
    nodes = np.rint(images * _GRID + _GRID_OFFSET).astype(np.int64) % _GRID
    codes: IntArray = nodes @ np.array([_GRID * _GRID, _GRID, 1])
    return codes


def _in_cell(positions: FloatArray) -> FloatArray:
    """Positions in [0, 1), where rounding below zero counts as zero."""
    wrapped = positions - np.floor(positions + 1e-9)
    return np.where(np.abs(wrapped) < 1e-12, 0.0, wrapped)


def _meets(site: ListedSite, images: FloatArray, lattice: FloatArray) -> bool:
    difference = images - site.position_frac
    difference -= np.rint(difference)
    return bool((np.linalg.norm(difference @ lattice, axis=1) < MERGE_DISTANCE_ANGSTROM).any())


def _shared_species(group: Sequence[ListedSite]) -> Species:
    """The species of sites that share a position. Two full atoms there are an overlap, not a mixture."""
    full = [site.label for site in group if sum(value for _, value in site.occupancies) >= 1.0]
    if len(group) > 1 and len(full) > 1:
        raise OverlappingAtomsError(
            "two atoms overlap",
            f"{full[0]} and {full[1]} share a position with full occupancy",
            "a position holds one atom, or a mixture whose occupancies add up to at most one",
            "remove the doubled atom, or give the occupancies of the mixture",
        )
    totals: dict[str, float] = {}
    for site in group:
        for element, occupancy in site.occupancies:
            totals[element] = totals.get(element, 0.0) + occupancy
    return Species.mixed(totals)
