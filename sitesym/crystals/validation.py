"""Checks of a structure before any symmetry finder sees it: a finder may crash on numbers that are none.

Every fault has its own error class and code: wrong counts, no atoms, not a number, infinite, a cell without
volume, atoms on top of each other. Occupancies are checked where a species is made.
"""

from __future__ import annotations

from collections.abc import Sequence
from functools import lru_cache
from math import hypot, prod
from operator import mul
from typing import Final

import numpy as np

from sitesym.arrays import FloatArray, IntArray, frozen
from sitesym.errors import (
    CountMismatchError,
    EmptyStructureError,
    InfiniteValueError,
    NotANumberError,
    OverlappingAtomsError,
    SingularCellError,
)
from sitesym.tolerances import LARGEST_CELL_EDGE_ANGSTROM, SMALLEST_DISTANCE_ANGSTROM

#: Up to so many atoms all pairs are looked at, which takes less time than loading what sorts them in space.
_FEW_ATOMS: Final = 200


def check_structure(lattice: FloatArray, positions_frac: FloatArray, labels: Sequence[str]) -> None:
    """Return when the structure can be given to a symmetry finder.

    ``lattice`` (3, 3) rows in angstrom, ``positions_frac`` (n, 3), ``labels`` n names used in messages.

    Raises CountMismatchError, EmptyStructureError, NotANumberError, InfiniteValueError, SingularCellError or
    OverlappingAtomsError.
    """
    _check_shapes(lattice, positions_frac, len(labels))
    _check_finite(lattice, "cell vector", "abc")
    _check_finite(positions_frac, "the position of", labels)
    check_cell(lattice)
    _check_distances(lattice, positions_frac, labels)


def plane_spacings(lattice: FloatArray) -> FloatArray:
    """(3,) distances in angstrom between neighbouring (100), (010) and (001) lattice planes."""
    volume, areas = _volume_and_areas(lattice)
    return np.array([volume / area for area in areas])


def fractional(lattice: FloatArray, positions_cart: FloatArray) -> FloatArray:
    """Fractional coordinates (n, 3) of Cartesian ones; a cell that cannot be inverted is left for
    `check_structure` to name."""
    if not np.isfinite(lattice).all() or abs(np.linalg.det(lattice)) == 0.0:
        return positions_cart
    return np.asarray(np.linalg.solve(lattice.T, positions_cart.T).T, dtype=np.float64)


def _volume_and_areas(lattice: FloatArray) -> tuple[float, list[float]]:
    """Volume of the cell and areas of its faces across a, b, c; for nine numbers plain Python is fastest."""
    a, b, c = lattice.tolist()
    normals = [_cross(b, c), _cross(c, a), _cross(a, b)]
    return abs(sum(map(mul, a, normals[0]))), [hypot(*normal) for normal in normals]


def _cross(first: list[float], second: list[float]) -> tuple[float, float, float]:
    (x, y, z), (u, v, w) = first, second
    return y * w - z * v, z * u - x * w, x * v - y * u


def close_pairs(
    lattice: FloatArray, positions_frac: FloatArray, within_angstrom: float
) -> tuple[IntArray, FloatArray]:
    """Pairs of atoms (m, 2) nearer than a limit and their distances (m,) in angstrom, over periodic images.

    The limit must be below half the spacings of the lattice planes: then two atoms have at most one such
    vector between their images, the one of smallest fractional components.
    """
    wrapped: FloatArray = positions_frac - np.floor(positions_frac)
    wrapped[wrapped >= 1.0] = 0.0
    if len(wrapped) <= _FEW_ATOMS:
        pairs = _all_pairs(len(wrapped))
    else:
        # A vector this long in angstrom is at most this long in fractional coordinates.
        radius = within_angstrom * hypot(*(1.0 / plane_spacings(lattice)).tolist())
        pairs = _near_in_fractions(wrapped, radius)
    if len(pairs) == 0:
        return pairs, np.zeros(0)
    difference = wrapped[pairs[:, 0]] - wrapped[pairs[:, 1]]
    distances = np.linalg.norm((difference - np.rint(difference)) @ lattice, axis=1)
    near = distances < within_angstrom
    return pairs[near], distances[near]


@lru_cache(maxsize=_FEW_ATOMS + 1)
def _all_pairs(count: int) -> IntArray:
    return frozen(np.stack(np.triu_indices(count, 1), axis=1).astype(np.int64))


def _near_in_fractions(wrapped: FloatArray, radius: float) -> IntArray:
    from scipy.spatial import cKDTree

    pairs: IntArray = cKDTree(wrapped, boxsize=1.0).query_pairs(radius, output_type="ndarray")
    return pairs


def closest_pair(
    lattice: FloatArray, positions_frac: FloatArray, within_angstrom: float
) -> tuple[int, int, float] | None:
    """Indices and distance (angstrom) of the closest two atoms nearer than a limit, periodic images included.

    None when there is no such pair. The limit must be below half the spacings of the lattice planes.
    """
    pairs, distances = close_pairs(lattice, positions_frac, within_angstrom)
    if len(pairs) == 0:
        return None
    nearest = int(np.argmin(distances))
    first, second = sorted(pairs[nearest].tolist())
    return first, second, float(distances[nearest])


def _check_shapes(lattice: FloatArray, positions_frac: FloatArray, count: int) -> None:
    if lattice.shape != (3, 3):
        raise CountMismatchError(
            "the cell is not three vectors of three numbers",
            f"shape {lattice.shape}",
            "3 x 3 numbers",
            "correct it",
        )
    if count == 0 and positions_frac.size == 0:
        raise EmptyStructureError(
            "the structure has no atoms",
            "0 atoms",
            "a crystal has at least one atom",
            "look for the missing atoms",
        )
    if positions_frac.shape != (count, 3):
        raise CountMismatchError(
            "positions and species differ in number",
            f"positions of shape {positions_frac.shape}, {count} species",
            "one row of three coordinates for each atom",
            "look for missing or doubled lines",
        )


def _check_finite(rows: FloatArray, what: str, names: Sequence[str]) -> None:
    if np.isfinite(rows).all():
        return
    faulty = next(number for number, row in enumerate(rows) if not np.isfinite(row).all())
    value = f"{what} {names[faulty]} is {' '.join(f'{entry:g}' for entry in rows[faulty])}"
    rule, step = "all coordinates and cell entries are finite numbers", "correct the value in the file"
    if np.isnan(rows).any():
        raise NotANumberError("a value is not a number", value, rule, step)
    raise InfiniteValueError("a value is infinite", value, rule, step)


def check_cell(lattice: FloatArray) -> None:
    """The cell (rows, angstrom) has a volume and sensible lengths; else SingularCellError."""
    edges = [hypot(*row) for row in lattice.tolist()]
    volume, areas = _volume_and_areas(lattice)
    text = f"edges {' '.join(f'{edge:.6g}' for edge in edges)} angstrom"
    if max(edges) > LARGEST_CELL_EDGE_ANGSTROM:
        raise SingularCellError(
            "the cell is absurdly large",
            text,
            f"edges are at most {LARGEST_CELL_EDGE_ANGSTROM:g} angstrom",
            "look at the unit of length",
        )
    # The product of the edges sets the scale on which a volume counts as zero.
    if min(edges) == 0.0 or volume < 1e-9 * prod(edges):
        raise SingularCellError(
            "the cell vectors span no volume", text, "a, b and c are not in one plane", "correct the cell"
        )
    spacings = [volume / area for area in areas]
    if min(spacings) <= 2.0 * SMALLEST_DISTANCE_ANGSTROM:
        raise SingularCellError(
            "the cell is too flat to hold atoms",
            f"{text}; lattice planes {' '.join(f'{spacing:.3g}' for spacing in spacings)} angstrom apart",
            f"lattice planes are more than {2.0 * SMALLEST_DISTANCE_ANGSTROM:g} angstrom apart",
            "look at the unit of length, or reduce the cell",
        )


def _check_distances(lattice: FloatArray, positions_frac: FloatArray, labels: Sequence[str]) -> None:
    pair = closest_pair(lattice, positions_frac, SMALLEST_DISTANCE_ANGSTROM)
    if pair is None:
        return
    first, second, distance = pair
    raise OverlappingAtomsError(
        "two atoms overlap",
        f"{labels[first]} and {labels[second]} (atoms {first + 1}, {second + 1}): {distance:.4g} angstrom",
        f"atoms are at least {SMALLEST_DISTANCE_ANGSTROM:g} angstrom apart",
        "remove the doubled atom, or give both as one mixed site with occupancies",
    )
