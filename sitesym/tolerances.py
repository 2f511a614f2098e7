"""Tolerances of the whole package, each named with its unit.

Lengths that decide about a crystal (``tolerance_angstrom``) are the user's choice and are printed with every
result; the numbers here are numerical noise, or default values of such choices.
"""

from __future__ import annotations

from typing import Final

#: Default distance within which atoms count as related by symmetry (angstrom).
DEFAULT_TOLERANCE_ANGSTROM: Final = 0.01

#: Largest entry of M M^T - 1 for a matrix that is accepted as orthogonal (no unit).
ORTHOGONAL: Final = 1e-8

#: Largest difference between entries of two matrices that count as the same operation (no unit).
SAME_MATRIX: Final = 1e-6

#: Largest difference between a float coefficient and the exact number it is recognised as (no unit).
RECOGNISED: Final = 1e-7

#: Pivots of an elimination below this count as zero; matrices are of order one (no unit).
PIVOT: Final = 1e-8

#: Largest deviation accepted in the orthogonality theorem and in D(g)D(h) = D(gh) (no unit).
REPRESENTATION: Final = 1e-10

#: Two atoms closer than this cannot both be there (angstrom).
SMALLEST_DISTANCE_ANGSTROM: Final = 0.1

#: Images of one site, or sites of a file, closer than this are one atom of a special or mixed position
#: (angstrom).
MERGE_DISTANCE_ANGSTROM: Final = 0.1

#: Cell edges beyond this are taken for a mistaken unit (angstrom).
LARGEST_CELL_EDGE_ANGSTROM: Final = 10000.0

#: By how much rounded occupancies of a site may add up to more than one (no unit).
OCCUPANCY_EXCESS: Final = 0.011

#: Largest relative difference between a cell's metric and its image under an operation said to be a symmetry.
CELL_METRIC: Final = 0.02

#: A layer of the cell this wide without the centre of an atom is taken for vacuum, and warned of (angstrom).
VACUUM_GAP_ANGSTROM: Final = 7.0
