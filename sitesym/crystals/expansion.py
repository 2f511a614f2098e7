"""From the atoms of an asymmetric unit to all atoms of the cell.

Images of a site closer together than the merge distance are one atom on a special position: the site is
moved to the mean of those images, and the move is reported. Sites of the list that meet are one mixed site.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, field

import numpy as np

from sitesym.arrays import BoolArray, FloatArray, IntArray
from sitesym.crystals.cif_magnetic import moments_of_images
from sitesym.crystals.marks import Marks, moment_texts
from sitesym.crystals.operations import StatedOperations
from sitesym.crystals.species import Species
from sitesym.crystals.validation import close_pairs
from sitesym.errors import OverlappingAtomsError
from sitesym.tolerances import MERGE_DISTANCE_ANGSTROM

# Points of the grid along a cell edge on which images count as the same. A site that was moved onto its
# special position has images equal to rounding; the offset keeps simple fractions away from the limits
# between grid points.
_GRID = 24 * 41666
_GRID_OFFSET = 0.137
_REPORTED_MOVE_ANGSTROM = 1e-6
# Fractional coordinates closer than this are the same number.
_ROUNDING = 1e-12


@dataclass(frozen=True, eq=False)
class ListedSite:
    """A line of the asymmetric unit: label, fractional position (3,), elements with occupancies, marks by
    name, moment (3,) along the cell edges, and how many places of the cell the file says it has."""

    label: str
    position_frac: FloatArray
    occupancies: tuple[tuple[str, float], ...]
    marks: Mapping[str, str] = field(default_factory=dict)
    moment: FloatArray | None = None
    stated_places: int | None = None


@dataclass(frozen=True, eq=False)
class ExpandedSites:
    """All atoms of the cell: positions (n, 3) in [0, 1), species, labels, marks; what was merged or moved."""

    positions_frac: FloatArray
    species: tuple[Species, ...]
    labels: tuple[str, ...]
    marks: Marks
    remarks: tuple[str, ...]


def expand(sites: Sequence[ListedSite], operations: StatedOperations, lattice: FloatArray) -> ExpandedSites:
    """All atoms of the cell; ``lattice`` has rows a, b, c in angstrom.

    Raises OverlappingAtomsError where atoms meet that cannot share a site, OccupancyError where a mixed site
    holds more than one atom.
    """
    listed = np.array([site.position_frac for site in sites])
    positions, fixing = _onto_special_positions(listed, operations, lattice)
    remarks = _moves(sites, positions - listed, lattice)
    images, chosen = _orbits(sites, positions, fixing, operations)
    counts = [len(orbit) for orbit in images]
    remarks.extend(
        f"site {site.label} has {count} places in the cell, the file states {site.stated_places}"
        for site, count in zip(sites, counts, strict=True)
        if site.stated_places not in (None, count)
    )
    everything = np.vstack(images)
    group_of = _meeting_sites(everything, np.repeat(np.arange(len(sites)), counts), lattice, len(sites))
    members: dict[int, list[int]] = {}
    for number, first in enumerate(group_of):
        members.setdefault(first, []).append(number)
    kinds = {first: _shared_species([sites[number] for number in group]) for first, group in members.items()}
    remarks.extend(
        f"sites {', '.join(sites[number].label for number in group)} are one mixed site {kinds[first]}"
        for first, group in members.items()
        if len(group) > 1
    )
    kept = [(first, counts[first]) for first in members]
    return ExpandedSites(
        everything if len(kept) == len(sites) else np.vstack([images[first] for first in members]),
        tuple(kinds[first] for first, count in kept for _ in range(count)),
        tuple(sites[first].label for first, count in kept for _ in range(count)),
        _marks(sites, members, chosen, operations, lattice),
        tuple(remarks),
    )


def _onto_special_positions(
    listed: FloatArray, operations: StatedOperations, lattice: FloatArray
) -> tuple[FloatArray, BoolArray]:
    """Positions (s, 3) moved to the mean of their own near images, and which of the n operations (s, n) fix
    each of them."""
    positions = listed
    fixing = np.zeros((len(listed), len(operations.rotations)), dtype=bool)
    while True:
        difference = _images(positions, operations) - positions[:, None, :]
        difference -= np.rint(difference)
        cartesian = difference @ lattice
        near = np.einsum("snk,snk->sn", cartesian, cartesian) < MERGE_DISTANCE_ANGSTROM**2
        shift = (near[:, :, None] * difference).sum(axis=1) / near.sum(axis=1)[:, None]
        positions = positions + shift
        # The mean over part of a stabiliser comes nearer to the position; repeat until its images are all
        # there, which they are at once where nothing had to move.
        if np.abs(shift).max() < _ROUNDING or np.array_equal(near, fixing):
            return positions, near
        fixing = near


def _moves(sites: Sequence[ListedSite], moves: FloatArray, lattice: FloatArray) -> list[str]:
    """A remark for each site that was moved; a partly filled one may have been meant as it was."""
    lengths = np.linalg.norm(moves @ lattice, axis=1)
    remarks = []
    for number in np.flatnonzero(lengths > _REPORTED_MOVE_ANGSTROM).tolist():
        site, length = sites[number], lengths[number]
        remark = f"site {site.label} moved by {length:.4f} angstrom onto its special position"
        filled = sum(occupancy for _, occupancy in site.occupancies)
        kept = f"; its occupancy {filled:g} is taken for that of the special position"
        remarks.append(remark + (kept if filled < 1.0 else ""))
    return remarks


def _orbits(
    sites: Sequence[ListedSite], positions: FloatArray, fixing: BoolArray, operations: StatedOperations
) -> tuple[list[FloatArray], list[list[int]]]:
    """Distinct images of each site in [0, 1), and the operation that makes each of them."""
    everything = _images(positions, operations)
    codes = _grid_codes(everything).tolist()
    orbits, chosen = [], []
    for number, site in enumerate(sites):
        seen: dict[int, int] = {}
        for place, code in enumerate(codes[number]):
            seen.setdefault(code, place)
        first = list(seen.values())
        fixed = int(fixing[number].sum())
        if len(first) * fixed != len(codes[number]):
            raise OverlappingAtomsError(
                f"images of site {site.label} come close without meeting on a special position",
                f"{fixed} of {len(codes[number])} images within {MERGE_DISTANCE_ANGSTROM:g} angstrom",
                f"images farther apart than {MERGE_DISTANCE_ANGSTROM:g} angstrom, or a special position",
                f"give the exact coordinates of site {site.label}",
            )
        orbits.append(_in_cell(everything[number, first]))
        chosen.append(first)
    return orbits, chosen


def _images(positions: FloatArray, operations: StatedOperations) -> FloatArray:
    """(s, n, 3) images of s positions under n operations."""
    # One product of two-dimensional arrays is far faster than many of 3 x 3 matrices.
    turned = positions @ operations.rotations.astype(np.float64).reshape(-1, 3).T
    return turned.reshape(len(positions), -1, 3) + operations.translations


def _grid_codes(images: FloatArray) -> IntArray:
    """One whole number for each image (..., 3), equal for images that are the same modulo the lattice."""
    nodes = np.rint((images - np.floor(images)) * _GRID + _GRID_OFFSET).astype(np.int64) % _GRID
    codes: IntArray = nodes @ np.array([_GRID * _GRID, _GRID, 1])
    return codes


def _in_cell(positions: FloatArray) -> FloatArray:
    """Positions in [0, 1), where rounding below zero counts as zero."""
    wrapped = positions - np.floor(positions + 1e-9)
    return np.where(np.abs(wrapped) < 1e-12, 0.0, wrapped)


def _meeting_sites(images: FloatArray, owners: IntArray, lattice: FloatArray, count: int) -> list[int]:
    """For each of ``count`` sites the first site that it shares a position with, itself where there is
    none."""
    first = list(range(count))
    pairs, _ = close_pairs(lattice, images, MERGE_DISTANCE_ANGSTROM)
    for one, other in sorted({(min(pair), max(pair)) for pair in owners[pairs].tolist()}):
        first[other] = min(first[other], first[one])
    return first


def _shared_species(group: Sequence[ListedSite]) -> Species:
    """The species of sites that share a position. Two full atoms there are an overlap, not a mixture."""
    if len(group) == 1 and group[0].occupancies[0][1] == 1.0:
        return Species.pure(group[0].occupancies[0][0])
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


def _marks(
    sites: Sequence[ListedSite],
    members: Mapping[int, list[int]],
    chosen: Sequence[list[int]],
    operations: StatedOperations,
    lattice: FloatArray,
) -> Marks:
    """Marks of all atoms: those of the sites that share a position are joined in the order of the list."""
    found: dict[str, tuple[str, ...]] = {}
    for name in sites[0].marks:
        if any(site.marks[name] for site in sites):
            joined = {first: _joined(name, [sites[i] for i in group]) for first, group in members.items()}
            found[name] = tuple(joined[first] for first in members for _ in chosen[first])
    found["label"] = tuple(sites[first].label for first in members for _ in chosen[first])
    if any(site.moment is not None for site in sites):
        zero = np.zeros(3)
        turned = [
            moments_of_images(
                zero if (moment := sites[first].moment) is None else moment,
                operations,
                chosen[first],
                lattice,
            )
            for first in members
        ]
        known = [moments for moments in turned if moments is not None]
        if len(known) == len(turned):
            found["moment"] = moment_texts(np.vstack(known))
    return found


def _joined(name: str, group: Sequence[ListedSite]) -> str:
    if len(group) == 1:
        return group[0].marks[name]
    return " ".join(f"{site.marks[name]}:{site.occupancies[0][1]:g}" for site in group if site.marks[name])
