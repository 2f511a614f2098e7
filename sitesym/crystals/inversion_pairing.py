"""Pairings under an inversion in which no two atoms end in one place.

An atom that is its own partner moves onto an inversion centre, of which a cell has eight. Two atoms that are
near the same centre would meet there, and what they leave is no crystal. Here such atoms go to different
centres, those that cost least together. So large displacements also need the shortest of all equivalent ways:
coordinates rounded into [-1/2, 1/2] give it only for ways shorter than half of the cell's height.
"""

from __future__ import annotations

from itertools import islice, product
from typing import Final

import numpy as np

from sitesym.arrays import FloatArray, IntArray
from sitesym.crystals.pairing import Arrangement, Pairing, least_costly, lower_bounds, refined
from sitesym.crystals.validation import closest_pair, plane_spacings
from sitesym.tolerances import SMALLEST_DISTANCE_ANGSTROM

INVERSION: Final[IntArray] = -np.eye(3, dtype=np.int64)
#: Starts looked at, and refined, where the pairing found leaves no crystal.
_MOST_STARTS: Final = 200
_MOST_REFINED: Final = 16

_NEIGHBOURS: Final[FloatArray] = np.array(list(product((0, -1, 1), repeat=3)), dtype=np.float64)
_CENTRES: Final[FloatArray] = np.array(list(product((0.0, 0.5), repeat=3)))


def without_meetings(arrangement: Arrangement, found: Pairing) -> Pairing:
    """The pairing found, or a better one in which all atoms stay apart; the one found where there is none.

    A pairing whose ways are all certain to be the shortest, and whose atoms stay apart, is kept.
    """
    reach = float(plane_spacings(arrangement.lattice).min()) / 4.0
    apart = stays_apart(arrangement, found)
    if apart and found.largest < reach:
        return found
    best = _better(arrangement, found if apart else None, found.translation)
    if best is None:
        starts = _starts(arrangement)
        bounds = lower_bounds(arrangement, INVERSION, starts)
        for place in np.argsort(bounds, kind="stable")[:_MOST_REFINED]:
            best = _better(arrangement, best, starts[place])
    return best or found


def stays_apart(arrangement: Arrangement, pairing: Pairing) -> bool:
    """Whether no two atoms of the arrangement that the pairing leads to overlap."""
    moved = arrangement.positions + pairing.displacements @ arrangement.inverse
    return closest_pair(arrangement.lattice, moved, SMALLEST_DISTANCE_ANGSTROM) is None


def shortest_ways(ways_frac: FloatArray, lattice: FloatArray) -> FloatArray:
    """(..., 3) angstrom: the shortest way for each fractional one, modulo the lattice (reduced, rows)."""
    rounded = ways_frac - np.rint(ways_frac)
    equivalent = (rounded[..., None, :] + _NEIGHBOURS) @ lattice
    # Rounded, so that of ways of equal length the same one is taken for both atoms of a pair.
    chosen = (equivalent**2).sum(axis=-1).round(9).argmin(axis=-1)
    return np.take_along_axis(equivalent, chosen[..., None, None], axis=-2)[..., 0, :]


def _better(arrangement: Arrangement, best: Pairing | None, translation: FloatArray) -> Pairing | None:
    pairing = refined(arrangement, INVERSION, translation, _paired_apart)
    shorter = best is None or pairing.rms < best.rms - 1e-9
    return pairing if shorter and stays_apart(arrangement, pairing) else best


def _paired_apart(
    arrangement: Arrangement, rotation: IntArray, translation: FloatArray
) -> tuple[IntArray, FloatArray]:
    """Partner of each atom and the shortest way (angstrom) from its image to the partner.

    Atoms that are their own partners go to different inversion centres.
    """
    partners, _ = least_costly(arrangement, rotation, translation)
    positions, numbers = arrangement.positions, np.arange(len(partners))
    ways = shortest_ways(positions[partners] + positions - translation, arrangement.lattice)
    later = np.flatnonzero(partners < numbers)
    ways[later] = ways[partners[later]]
    alone = np.flatnonzero(partners == numbers)
    if len(alone) <= len(_CENTRES):
        steps = translation / 2.0 + _CENTRES - positions[alone][:, None, :]
        ways[alone] = -2.0 * _to_different_places(shortest_ways(steps, arrangement.lattice))
    return partners, ways


def _to_different_places(steps: FloatArray) -> FloatArray:
    """(k, 3): of the steps (k, m, 3) of k atoms to m places one for each, no place taken twice."""
    costs = (steps**2).sum(axis=2)
    chosen = costs.argmin(axis=1)
    if len(set(chosen.tolist())) < len(chosen):
        from scipy.optimize import linear_sum_assignment

        chosen = linear_sum_assignment(costs)[1]
    result: FloatArray = steps[np.arange(len(steps)), chosen]
    return result


def _starts(arrangement: Arrangement) -> FloatArray:
    """(c, 3): translations that carry an atom onto one of its kind, those of the rarest kinds first."""
    sums = (
        arrangement.positions[first] + arrangement.positions[second]
        for members in sorted(arrangement.kinds, key=len)
        for place, first in enumerate(members)
        for second in members[: place + 1]
    )
    return np.array(list(islice(sums, _MOST_STARTS)))
